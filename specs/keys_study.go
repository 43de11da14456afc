package specs

import (
	"ligancy/specs/units"
)

// studyShape is the whole file.
func studyShape() shape[Study] {
	return recordShape[Study]{name: "a study", keys: studyKeys}
}

func studyKeys() []key[Study] {
	return []key[Study]{
		with("format", wordShape{"ligancy/1"}, func(s *Study) *string { return &s.format },
			"the version of this file format", "format: ligancy/1").must(),
		with("title", textShape{}, func(s *Study) *string { return &s.Title },
			"one line that names the study, printed above every result",
			"title: Oxygen binding by ark-clam haemoglobin"),
		with("origin", textShape{}, func(s *Study) *string { return &s.Origin },
			"where the data come from, printed in every result", "origin: invented data"),
		with("conditions", namesShape[string]{of: textShape{},
			form: "a mapping from conditions to what they were"},
			func(s *Study) *[]Named[string] { return &s.Conditions },
			"what a methods section states: macromolecule, organism, temperature, pH, buffer",
			"conditions: {temperature: 15 degC}"),
		with("ligand", substanceShape("a ligand"), func(s *Study) *Substance { return &s.Ligand },
			"the ligand on the axis; constants and results are in its unit",
			"ligand: {name: oxygen, unit: torr}").must(),
		with("effectors", listShape[Substance]{of: substanceShape("an effector"),
			form: "a list of effectors"},
			func(s *Study) *[]Substance { return &s.Effectors },
			"other ligands whose concentrations vary or matter",
			"effectors: [{name: alanine, unit: mM}]"),
		with("data", listShape[Data]{of: dataShape(), form: "a list of data sets"},
			func(s *Study) *[]Data { return &s.Data },
			"the tables, and what their columns are",
			"data: [{name: curves, file: clam.csv, columns: {ligand: pO2_torr, response: sat}, response: {kind: saturation}}]"),
		with("mechanisms", listShape[Mechanism]{of: mechanismShape(), form: "a list of mechanisms",
			least: 1, most: maxMechanisms},
			func(s *Study) *[]Mechanism { return &s.Mechanisms },
			"the mechanisms to try", "mechanisms: [hill, {family: mwc, sites: 4}]").must(),
		with("contrasts", listShape[Contrast]{of: contrastShape(), form: "a list of contrasts"},
			func(s *Study) *[]Contrast { return &s.Contrasts },
			"ratios and differences between curves, with intervals",
			"contrasts: [{of: [x_half, n_H], between: pH}]"),
		with("fit", fitShape(), func(s *Study) *Fit { return &s.Fit },
			"how to fit, and how to judge", "fit: {starts: 50, seed: 1}"),
		optional("curve", curveShape(), func(s *Study) **Curve { return &s.Curve },
			"the curves that `ligancy curve` draws from given constants",
			"curve: {from: 0.1 torr, to: 200 torr, points: 200}"),
		optional("course", courseShape(), func(s *Study) **Course { return &s.Course },
			"what `ligancy course` follows against time",
			"course: {phases: [{add: 10 nM, for: 30 min}]}"),
		optional("plan", planShape(), func(s *Study) **Plan { return &s.Plan },
			"what `ligancy plan` may choose from",
			"plan: {range: [0.1 torr, 200 torr], points: 12}"),
	}
}

// optional is a key whose value is nil where it is not said.
func optional[T, V any](name string, s shape[V], at func(*T) **V, doc, example string) key[T] {
	return with(name, pointerShape[V]{s}, at, doc, example)
}

func substanceShape(name string) shape[Substance] {
	return recordShape[Substance]{name: name, keys: func() []key[Substance] {
		return []key[Substance]{
			with("name", textShape{form: "a name"}, func(s *Substance) *string { return &s.Name },
				"its name", "name: oxygen").must(),
			with("symbol", textShape{form: "a symbol"},
				func(s *Substance) *string { return &s.Symbol },
				"the symbol that axes and tables print", "symbol: pO2"),
			with("unit", unitShape{}, func(s *Substance) *units.Unit { return &s.Unit },
				"the unit of its constants and results", "unit: torr").must(),
		}
	}}
}

func contrastShape() shape[Contrast] {
	return recordShape[Contrast]{name: "a contrast", keys: func() []key[Contrast] {
		return []key[Contrast]{
			with("of", listShape[string]{of: textShape{form: "a constant or quantity"},
				form: "a list of constants and quantities", least: 1, single: true},
				func(c *Contrast) *[]string { return &c.Of },
				"constants of a mechanism, x_half, n_H and other quantities",
				"of: [x_half, n_H, L]").must(),
			with("between", textShape{form: "a factor"},
				func(c *Contrast) *string { return &c.Between },
				"the factor whose levels are compared", "between: pH").must(),
		}
	}}
}

func fitShape() shape[Fit] {
	return recordShape[Fit]{name: "fit", keys: func() []key[Fit] {
		return []key[Fit]{
			with("starts", countShape{1, 100_000}, func(f *Fit) *int { return &f.Starts },
				"starts of the search for each mechanism", "starts: 50"),
			with("seed", countShape{0, 1 << 53}, func(f *Fit) *int { return &f.Seed },
				"the number from which starts and draws follow", "seed: 1"),
			with("interval", recordShape[Interval]{name: "interval", keys: intervalKeys},
				func(f *Fit) *Interval { return &f.Interval },
				"the intervals to give", "interval: {level: 0.95, method: profile}"),
			with("bootstrap", recordShape[Bootstrap]{name: "bootstrap", keys: bootstrapKeys},
				func(f *Fit) *Bootstrap { return &f.Bootstrap },
				"intervals by refitting drawn data", "bootstrap: {draws: 1000, by: preparation}"),
			with("decide", recordShape[Decide]{name: "decide", keys: decideKeys},
				func(f *Fit) *Decide { return &f.Decide },
				"the studies that are simulated to rule a mechanism out", "decide: {draws: 199}"),
		}
	}}
}

func intervalKeys() []key[Interval] {
	return []key[Interval]{
		with("level", numberShape{low: 0.5, high: 0.9999},
			func(i *Interval) *float64 { return &i.Level }, "the level of the intervals",
			"level: 0.95"),
		with("method", wordShape{"profile", "covariance"},
			func(i *Interval) *string { return &i.Method }, "profile likelihood, or the quick look",
			"method: profile"),
	}
}

func bootstrapKeys() []key[Bootstrap] {
	return []key[Bootstrap]{
		with("draws", countShape{10, 1_000_000}, func(b *Bootstrap) *int { return &b.Draws },
			"how many data sets are drawn", "draws: 1000").must(),
		with("by", wordShape{"preparation", "residual", "parametric"},
			func(b *Bootstrap) *string { return &b.By },
			"what is drawn: whole preparations, residuals, or simulated scatter",
			"by: preparation"),
	}
}

func decideKeys() []key[Decide] {
	return []key[Decide]{
		with("draws", countShape{0, 100_000}, func(d *Decide) *int { return &d.Draws },
			"how many studies are simulated; 0 leaves every mechanism in", "draws: 199").must(),
	}
}
