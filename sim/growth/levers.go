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
	{Name: "levy.rate", Label: "Levy", Unit: "of links above", High: 1, Slide: [2]float64{0, 1}, Step: 0.05,
		Help: "links a member holds above the share below count so much less when newcomers choose; 0 is none"},
	{Name: "levy.above", Label: "Levy above", Unit: "of links", High: 1, Slide: [2]float64{0, 0.5}, Step: 0.01,
		Help: "the share of all links from which on the levy is taken"},
	{Name: "expiry", Label: "Expiry", Unit: "arrivals", High: MaxMembers, Slide: [2]float64{0, 20000}, Step: 100,
		Help: "links older than this many arrivals count no more when newcomers choose; 0 is never"},
	{Name: "kernel", Label: "Kernel α", High: 3, Slide: [2]float64{0, 3}, Step: 0.05, Off: 1,
		Help: "the pull grows as tickets to this power; 1 in the plain rule"},
	{Name: "fading", Label: "Fading", High: 3, Slide: [2]float64{0, 3}, Step: 0.05,
		Help: "the pull falls as a member's age to this power; 0 is not at all"},
	{Name: "idling", Label: "Idling", High: 3, Slide: [2]float64{0, 3}, Step: 0.05,
		Help: "the pull falls as the arrivals since it was last active to this power; 0 is not at all"},
}
