package specs

import (
	"gopkg.in/yaml.v3"

	"ligancy/specs/table"
	"ligancy/specs/units"
)

var noises = wordShape{"constant", "proportional", "mixed", "given", "replicates", "student"}

func dataShape() shape[Data] {
	return recordShape[Data]{name: "a data set", keys: dataKeys}
}

func dataKeys() []key[Data] {
	return []key[Data]{
		with("name", textShape{form: "a name"}, func(d *Data) *string { return &d.Name },
			"the name of the data set in results", "name: curves"),
		with("file", textShape{form: "the name of a file"},
			func(d *Data) *string { return &d.File }, "the table, beside the study: CSV, TSV or XLSX",
			"file: clam.csv").must(),
		with("sheet", textShape{form: "the name of a sheet"},
			func(d *Data) *string { return &d.Sheet },
			"the sheet of a workbook, where more than one holds anything", "sheet: day 1"),
		with("decimal", wordShape{"comma", "point"}, func(d *Data) *string { return &d.Decimal },
			"how the table writes decimals, where that cannot be recognised", "decimal: comma"),
		with("columns", columnsShape(), func(d *Data) *Columns { return &d.Columns },
			"which column holds what", "columns: {ligand: pO2_torr, response: sat}").must(),
		with("factors", factorsShape{}, func(d *Data) *[]Named[string] { return &d.Factors },
			"columns that tell curves apart: a mapping from factor to column, or a list of columns",
			"factors: {pH: pH}"),
		with("at", conditionsAt(), func(d *Data) *[]Named[string] { return &d.At },
			"effectors, factors and conditions that hold for the whole table",
			"at: {alanine: 5 mM, pH: 7.0}"),
		with("rows", namesShape[table.Match]{of: matchShape{},
			form: "a mapping from columns to the values that are kept"},
			func(d *Data) *[]Named[table.Match] { return &d.Rows },
			"keep only rows that match: a value, a list of values, or {from: …, to: …}",
			"rows: {state: treated}"),
		with("blocked_when", textShape{form: "a word"},
			func(d *Data) *string { return &d.BlockedWhen },
			"the word in the blocked column that marks tubes without specific binding",
			"blocked_when: blocked"),
		with("response", responseShape(), func(d *Data) *Response { return &d.Response },
			"what was measured", "response: {kind: saturation, unit: fraction}").must(),
		with("ligand_axis", wordShape{"free", "total"},
			func(d *Data) *string { return &d.LigandAxis },
			"whether the ligand column is free or total ligand", "ligand_axis: free"),
		with("sites_present", sitesPresentShape(),
			func(d *Data) *SitesPresent { return &d.SitesPresent },
			"the concentration of sites (not molecules), said or made from Bmax",
			"sites_present: 80 uM"),
		with("noise", noises, func(d *Data) *string { return &d.Noise },
			"how the scatter depends on the response", "noise: constant"),
		optional("incubation", quantityShape{},
			func(d *Data) **units.Quantity { return &d.Incubation },
			"how long the samples stood before they were read", "incubation: 90 min"),
		with("phases", phasesShape(), func(d *Data) *[]Phase { return &d.Phases },
			"what was done to samples followed in time", "phases: [{add: 10 nM, for: 30 min}]"),
	}
}

// factorsShape reads {pH: column} and [pH].
type factorsShape struct{}

func factorNames() shape[[]Named[string]] {
	return namesShape[string]{of: textShape{form: "a column"},
		form: "a mapping from factors to columns"}
}

func (factorsShape) read(r *reader, n *yaml.Node, path string, v *[]Named[string]) bool {
	if n.Kind == yaml.MappingNode {
		return factorNames().read(r, n, path, v)
	}
	var names []string
	ok := listShape[string]{of: textShape{form: "a column"},
		form: "a mapping from factors to columns", single: true}.read(r, n, path, &names)
	for _, s := range names {
		*v = append(*v, Named[string]{Name: s, Value: s})
	}
	return ok
}

func (factorsShape) schema(s *schemata) object {
	return object{"anyOf": []object{factorNames().schema(s), textShape{}.schema(s),
		{"type": "array", "items": textShape{}.schema(s)}}}
}

// columnShape reads a header, or {name: header, unit: unit}.
func columnShape() shape[Column] {
	return recordShape[Column]{name: "a column", keys: func() []key[Column] {
		return []key[Column]{
			with("name", textShape{form: "the header of a column"},
				func(c *Column) *string { return &c.Name }, "the header of the column",
				"name: pO2").must(),
			optional("unit", unitShape{}, func(c *Column) **units.Unit { return &c.Unit },
				"the unit of the column, where it is another than the substance's: kPa, log10 M",
				"unit: kPa"),
		}
	},
		plain: func(r *reader, n *yaml.Node, path string, c *Column) bool {
			return textShape{form: "the header of a column"}.read(r, n, path, &c.Name)
		},
		plainSchema: textShape{}.schema}
}

func columnsShape() shape[Columns] {
	return recordShape[Columns]{name: "columns", keys: columnKeys,
		others: func(r *reader, name string, n *yaml.Node, path string, c *Columns) bool {
			e := Named[Column]{Name: name}
			if columnShape().read(r, n, path, &e.Value) {
				c.Others = append(c.Others, e) // whether there is such an effector or factor is asked later
			}
			return true
		},
		otherSchema: columnShape().schema}
}

func columnKeys() []key[Columns] {
	return []key[Columns]{
		with("ligand", columnShape(), func(c *Columns) *Column { return &c.Ligand },
			"the ligand's concentration or pressure", "ligand: pO2_torr"),
		with("response", listShape[Column]{of: columnShape(),
			form: "a column, or a list of replicate columns", least: 1, single: true},
			func(c *Columns) *[]Column { return &c.Response },
			"what was measured; a list of columns is replicates", "response: sat").must(),
		with("sigma", columnShape(), func(c *Columns) *Column { return &c.Sigma },
			"the standard deviation of the value in its row", "sigma: sd"),
		with("sem", columnShape(), func(c *Columns) *Column { return &c.SEM },
			"the standard error of a mean; needs n", "sem: sem"),
		with("n", columnShape(), func(c *Columns) *Column { return &c.N },
			"how many values a mean is of: a column, or a number", "n: n"),
		with("weight", columnShape(), func(c *Columns) *Column { return &c.Weight },
			"relative weight on the squared residual; not with sigma", "weight: w"),
		with("preparation", columnShape(), func(c *Columns) *Column { return &c.Preparation },
			"which preparation a row comes from", "preparation: prep"),
		with("blocked", columnShape(), func(c *Columns) *Column { return &c.Blocked },
			"which tubes see only nonspecific binding", "blocked: tube"),
		with("left_out", columnShape(), func(c *Columns) *Column { return &c.LeftOut },
			"the reason for leaving a row out; empty means kept", "left_out: why"),
		with("time", columnShape(), func(c *Columns) *Column { return &c.Time },
			"the time of a trace", "time: {name: t_s, unit: s}"),
	}
}

// matchShape reads one value, a list of values, or {from, to}.
type matchShape struct{}

type span struct{ from, to *float64 }

func spanShape() shape[span] {
	return recordShape[span]{name: "a range of values", keys: func() []key[span] {
		return []key[span]{
			optional("from", anyNumber(), func(s *span) **float64 { return &s.from },
				"the lowest value that is kept", "from: 20"),
			optional("to", anyNumber(), func(s *span) **float64 { return &s.to },
				"the highest value that is kept", "to: 80"),
		}
	}}
}

func (matchShape) read(r *reader, n *yaml.Node, path string, v *table.Match) bool {
	if n.Kind != yaml.MappingNode {
		return listShape[string]{of: textShape{form: "a value"},
			form: "a value, a list of values, or {from: …, to: …}", least: 1, single: true}.read(r,
			n, path, &v.Any)
	}
	var s span
	ok := spanShape().read(r, n, path, &s)
	v.Low, v.High = s.from, s.to
	return ok
}

func (matchShape) schema(s *schemata) object {
	return object{"anyOf": []object{textShape{}.schema(s), {"type": "array",
		"items": textShape{}.schema(s), "minItems": 1}, spanShape().schema(s)}}
}

func responseShape() shape[Response] {
	return recordShape[Response]{name: "a response", keys: responseKeys}
}

func responseKeys() []key[Response] {
	return []key[Response]{
		with("kind", wordShape{"saturation", "bound", "velocity", "signal"},
			func(p *Response) *string { return &p.Kind },
			"what was measured: saturation, ligand bound, a velocity, or a signal",
			"kind: saturation").must(),
		optional("unit", unitShape{}, func(p *Response) **units.Unit { return &p.Unit },
			"the unit of the response", "unit: fraction"),
		with("low", settingShape{}, func(p *Response) *Setting { return &p.Low },
			"the response without ligand: a number, or free", "low: 0"),
		with("high", settingShape{}, func(p *Response) *Setting { return &p.High },
			"the response at saturation: a number, or free", "high: 1"),
		with("V", settingShape{}, func(p *Response) *Setting { return &p.V },
			"the limiting rate of a velocity: a number, or free", "V: free"),
		with("Bmax", settingShape{more: []string{"sites"}},
			func(p *Response) *Setting { return &p.Bmax },
			"the ligand bound at saturation: a number, free, or sites (moles per mole: the mechanism's own number of sites)", "Bmax: free"),
		with("nonspecific", settingShape{}, func(p *Response) *Setting { return &p.Nonspecific },
			"nonspecific binding per unit of free ligand: a number, or free", "nonspecific: free"),
		with("sites", settingShape{}, func(p *Response) *Setting { return &p.Sites },
			"for moles bound per mole: the number of sites, or free", "sites: 4"),
		with("differs", differsShape{}, func(p *Response) *[]Named[string] { return &p.Differs },
			"numbers of the response that differ by a factor, by preparation, or (as a list) by data set", "differs: {Bmax: preparation}"),
		with("of", textShape{form: "a ligand"}, func(p *Response) *string { return &p.Of },
			"another ligand whose binding is counted (displacement)", `of: "[3H]octopamine"`),
	}
}

// differsShape reads {L: pH}, {all: preparation} and [L], which is by data set.
type differsShape struct{}

func differsNames() shape[[]Named[string]] {
	return namesShape[string]{of: textShape{form: "a factor, preparation or data"},
		form: "a mapping from constants to factors"}
}

func (differsShape) read(r *reader, n *yaml.Node, path string, v *[]Named[string]) bool {
	if n.Kind == yaml.MappingNode {
		return differsNames().read(r, n, path, v)
	}
	var names []string
	ok := listShape[string]{of: textShape{form: "a constant"},
		form: "a mapping from constants to factors, or a list of constants that differ by data set"}.read(r, n, path, &names)
	for i, s := range names {
		*v = append(*v, Named[string]{Name: s, Value: byData})
		r.places[join(path, s)] = r.places[indexed(path, i)]
	}
	return ok
}

func (differsShape) schema(s *schemata) object {
	return object{"anyOf": []object{differsNames().schema(s), {"type": "array",
		"items": textShape{}.schema(s)}}}
}

// Words of `differs` that are not factors.
const (
	byData        = "data"
	byPreparation = "preparation"
)

func sitesPresentShape() shape[SitesPresent] {
	return recordShape[SitesPresent]{name: "sites_present", keys: func() []key[SitesPresent] {
		return []key[SitesPresent]{
			with("from", wordShape{"Bmax"}, func(s *SitesPresent) *string { return &s.From },
				"what the concentration is made from", "from: Bmax").must(),
			optional("at", quantityShape{}, func(s *SitesPresent) **units.Quantity { return &s.At },
				"what Bmax is multiplied by: protein per volume", "at: 0.30 mg/mL"),
		}
	},
		plain: func(r *reader, n *yaml.Node, path string, s *SitesPresent) bool {
			return pointerShape[units.Quantity]{quantityShape{}}.read(r, n, path, &s.Amount)
		},
		plainSchema: quantityShape{}.schema}
}
