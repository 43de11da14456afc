package specs

import "ligancy/specs/units"

func curveShape() shape[Curve] {
	return recordShape[Curve]{name: "curve", keys: func() []key[Curve] {
		return []key[Curve]{
			optional("from", quantityShape{}, func(c *Curve) **units.Quantity { return &c.From },
				"the lowest ligand value", "from: 0.1 torr"),
			optional("to", quantityShape{}, func(c *Curve) **units.Quantity { return &c.To },
				"the highest ligand value", "to: 200 torr"),
			with("points", countShape{2, 100_000}, func(c *Curve) *int { return &c.Points },
				"how many ligand values, evenly in the logarithm", "points: 200"),
			with("at", namesShape[[]string]{of: listShape[string]{of: textShape{form: "a value"},
				form: "a list of values", least: 1, single: true},
				form: "a mapping from effectors and factors to values"},
				func(c *Curve) *[]Named[[]string] { return &c.At },
				"effectors and factors, one curve for each value", "at: {alanine: [0, 1, 5]}"),
		}
	}}
}

func courseShape() shape[Course] {
	return recordShape[Course]{name: "course", keys: func() []key[Course] {
		return []key[Course]{
			with("phases", phasesShape(), func(c *Course) *[]Phase { return &c.Phases },
				"what is done, in order, and for how long",
				"phases: [{add: 10 nM, for: 30 min}, {dilute: 100, for: 60 min}]").must(),
			with("points", countShape{2, 100_000}, func(c *Course) *int { return &c.Points },
				"how many times in each phase", "points: 100"),
			with("at", conditionsAt(), func(c *Course) *[]Named[string] { return &c.At },
				"effectors and factors", "at: {alanine: 5 mM}"),
		}
	}}
}

func conditionsAt() shape[[]Named[string]] {
	return namesShape[string]{of: textShape{form: "a value"},
		form: "a mapping from effectors, factors and conditions to values"}
}

func phasesShape() shape[[]Phase] {
	return listShape[Phase]{form: "a list of phases", least: 1, most: 1000,
		of: recordShape[Phase]{name: "a phase", keys: func() []key[Phase] {
			return []key[Phase]{
				optional("add", quantityShape{}, func(p *Phase) **units.Quantity { return &p.Add },
					"ligand added, as its total concentration afterwards", "add: 10 nM"),
				with("dilute", numberShape{low: 1, above: true},
					func(p *Phase) *float64 { return &p.Dilute },
					"everything diluted by this factor",
					"dilute: 100"),
				optional("block", quantityShape{},
					func(p *Phase) **units.Quantity { return &p.Block },
					"unlabelled ligand added in excess", "block: 1 uM"),
				with("wash", flagShape{}, func(p *Phase) *bool { return &p.Wash },
					"free ligand taken away", "wash: true"),
				optional("for", quantityShape{}, func(p *Phase) **units.Quantity { return &p.For },
					"how long the phase lasts", "for: 30 min").must(),
			}
		}}}
}

func planShape() shape[Plan] {
	return recordShape[Plan]{name: "plan", keys: func() []key[Plan] {
		return []key[Plan]{
			with("range", listShape[units.Quantity]{of: quantityShape{},
				form: "two ligand values, [lowest, highest]", least: 2, most: 2},
				func(p *Plan) *[]units.Quantity { return &p.Range },
				"the ligand values that can be reached", "range: [0.1 torr, 200 torr]"),
			with("points", countShape{1, 1000}, func(p *Plan) *int { return &p.Points },
				"how many ligand values to measure", "points: 12"),
			with("replicates", countShape{1, 1000}, func(p *Plan) *int { return &p.Replicates },
				"how many times each", "replicates: 3"),
			with("series", textShape{form: "a dilution series"},
				func(p *Plan) *string { return &p.Series }, "keep to a dilution series",
				"series: 2-fold"),
			with("aim", wordShape{"discriminate", "constants"},
				func(p *Plan) *string { return &p.Aim },
				"tell mechanisms apart, or hold the constants more firmly", "aim: discriminate"),
			with("at", conditionsAt(), func(p *Plan) *[]Named[string] { return &p.At },
				"effectors and factors", "at: {alanine: 5 mM}"),
		}
	}}
}
