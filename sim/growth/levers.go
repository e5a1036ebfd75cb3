package growth

// A Lever is a rule change a steward can make: a row the page draws its control from and the case file is checked
// against. Off is its value in the plain rule.
type Lever struct {
	Name  string     `json:"name"`
	Label string     `json:"label"`
	Unit  string     `json:"unit"`
	Low   float64    `json:"low"`
	High  float64    `json:"high"`
	Slide [2]float64 `json:"slide"`
	Step  float64    `json:"step"`
	Off   float64    `json:"off"`
	Yes   bool       `json:"yes"` // a yes-or-no lever: 0 or 1
	Help  string     `json:"help"`
}

// Levers lists the levers this program grows with.
var Levers = []Lever{
	{Name: "headStart", Label: "Head start", Unit: "tickets", High: 1e6, Slide: [2]float64{0, 20}, Step: 0.1,
		Help: "extra tickets every member starts with, as if it had received that many links"},
	{Name: "openShare", Label: "Open share", Unit: "of links", High: 1, Slide: [2]float64{0, 1}, Step: 0.01,
		Help: "share of links dealt to any member alike, whatever its fitness or links"},
	{Name: "ceiling", Label: "Ceiling", Unit: "of links", High: 1, Slide: [2]float64{0, 0.5}, Step: 0.01,
		Help: "a member that holds this share of all links takes no more until it is below again; 0 is none"},
	{Name: "distinct", Label: "Distinct partners", High: 1, Slide: [2]float64{0, 1}, Step: 1, Yes: true,
		Help: "the links of one newcomer go to different members"},
}
