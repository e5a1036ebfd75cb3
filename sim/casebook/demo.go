package casebook

// Demo returns the Larkmoor parts exchange: an invented network on which everything can be tried.
func Demo() Casebook {
	entry := func(title, note string, sharpness float64, set func(g *Growth)) Entry {
		e := NewEntry()
		e.Title, e.Note, e.Sharpness = title, note, sharpness
		set(&e.Growth)
		return e
	}
	c := Casebook{Casebook: Version, Title: "Larkmoor parts exchange", Entries: []Entry{
		entry("As it is", "5,000 workshops, two supply agreements each; 20,000 planned. The charter allows no member more than 20 % of agreements.", 1, func(*Growth) {}),
		entry("If workshops compare harder", "A public rating would triple the weight of price and delivery.", 3, func(*Growth) {}),
		entry("The same, with a head start of 6", "From today every member counts as if it held six agreements more.", 3, func(g *Growth) { g.HeadStart, g.LeversFrom = 6, 5000 }),
		entry("The same, with a ceiling of 15 %", "From today nobody takes agreements while it holds 15 % of all.", 3, func(g *Growth) { g.Ceiling, g.LeversFrom = 0.15, 5000 }),
	}}
	if err := c.Check(); err != nil {
		panic("casebook: demo: " + err.Error())
	}
	return c
}

// DemoOpen is the entry of the demo the page opens.
const DemoOpen = 1
