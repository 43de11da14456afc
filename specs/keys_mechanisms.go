package specs

import (
	"fmt"
	"strings"

	"gopkg.in/yaml.v3"

	"ligancy/specs/diag"
	"ligancy/specs/units"
)

func indexed(path string, i int) string { return fmt.Sprintf("%s[%d]", path, i) }

// mechanismShape is a candidate: a mapping, or a bare family name.
func mechanismShape() shape[Mechanism] {
	return recordShape[Mechanism]{name: "a mechanism", keys: mechanismKeys,
		plain: func(r *reader, n *yaml.Node, path string, m *Mechanism) bool {
			r.places[join(path, "family")] = place{key: r.at(n), value: r.at(n)}
			return textShape{form: "a mechanism"}.read(r, n, path, &m.Family)
		},
		plainSchema: func(*schemata) object { return object{"type": "string"} }}
}

func mechanismKeys() []key[Mechanism] {
	return []key[Mechanism]{
		with("name", textShape{form: "a name"}, func(m *Mechanism) *string { return &m.Name }, "its name in results; made from family and differs where it is missing", `name: "concerted, L differs"`),
		with("family", textShape{form: "a family"}, func(m *Mechanism) *string { return &m.Family }, "the family of mechanisms it belongs to (`ligancy families`)", "family: mwc").must(),
		with("differs", differsShape{}, func(m *Mechanism) *[]Named[string] { return &m.Differs }, "constants that differ by a factor, by preparation, or (as a list) by data set; everything else is shared", "differs: {L: pH}"),
		optional("sites", siteCountShape(), func(m *Mechanism) **SiteCount { return &m.Sites }, "the number of sites, or of each class of sites", "sites: 4"),
		with("classes", counts("classes"), func(m *Mechanism) *[]Named[int] { return &m.Classes }, "classes of independent sites, and how many sites each has", "classes: {tight: 2, loose: 2}"),
		optional("contacts", contactsShape{}, func(m *Mechanism) **Contacts { return &m.Contacts }, "which sites touch: a named arrangement, or pairs of sites", "contacts: square"),
		with("effectors", namesShape[EffectorBinding]{of: bindingShape(), form: "a mapping from effectors to how they bind"}, func(m *Mechanism) *[]Named[EffectorBinding] { return &m.Effectors },
			"how each effector binds", "effectors: {alanine: {binds: T}}"),
		with("turnover", weightsShape{}, func(m *Mechanism) *[]Named[Setting] { return &m.Turnover }, "how fast each conformation turns over, relative to V: numbers, or free", "turnover: {R: 1, T: free}"),
		with("sees", weightsShape{}, func(m *Mechanism) *[]Named[Setting] { return &m.Sees }, "which conformations or states the signal sees", "sees: {R: 1}"),
		with("parts", namesShape[Part]{of: partShape(), form: "a mapping from populations to their sites or mechanisms"}, func(m *Mechanism) *[]Named[Part] { return &m.Parts },
			"the populations of a mixture: a number of equal sites, or a mechanism", "parts: {tight: 1, loose: 1}"),
		optional("small", partShape(), func(m *Mechanism) **Part { return &m.Small }, "the smaller species of an assembly", "small: {family: independent, classes: {dimer: 2}}"),
		optional("large", partShape(), func(m *Mechanism) **Part { return &m.Large }, "the larger species of an assembly", "large: {family: adair, sites: 4}"),
		with("conformations", namesShape[Conformation]{of: conformationShape(), form: "a mapping from conformations to their sites and constants"}, func(m *Mechanism) *[]Named[Conformation] { return &m.Conformations },
			"conformations with their sites, constants and weights", "conformations: {A: {sites: 2, K: K_A}, I: {sites: 2, K: K_I, weight: L_I}}"),
		with("states", listShape[State]{of: stateShape(), form: "a list of states", least: 1, most: 10_000}, func(m *Mechanism) *[]State { return &m.States },
			"listed states, of an equilibrium or of a cycle", "states: [{name: E, ligands: 0}, {name: ES, ligands: 1, constants: {K_S: -1}}]"),
		with("steps", listShape[Step]{of: stepShape(), form: "a list of steps", least: 1, most: 10_000}, func(m *Mechanism) *[]Step { return &m.Steps },
			"the steps of a cycle", "steps: [{from: E, to: ES, ligand: 1, rate: k1, back: k2}]"),
		with("constants", constantsShape{}, func(m *Mechanism) *[]Named[ConstantSays] { return &m.Constants },
			"what is known of constants: start, range, fixed, value", "constants: {K_R: {start: 1, range: [0.01, 100]}}"),
		with("rates", namesShape[Rate]{of: rateShape{}, form: "a mapping from rate constants to values"}, func(m *Mechanism) *[]Named[Rate] { return &m.Rates },
			"rate constants, which give the mechanism kinetics", "rates: {k_on: 1e7 1/(M s), exchange: 1e3 1/s}"),
		with("response", endsShape(), func(m *Mechanism) *[]Named[Setting] { return &m.Response }, "numbers of the response that this mechanism has for itself: one with the upper end free, say", "response: {high: free}"),
		with("preparation", wordShape{"shift"}, func(m *Mechanism) *string { return &m.Preparation }, "let ln K of each preparation shift at random", "preparation: shift"),
	}
}

// endsShape reads the numbers of a response that a mechanism has for itself.
func endsShape() shape[[]Named[Setting]] {
	return recordShape[[]Named[Setting]]{name: "a mechanism's response", keys: func() []key[[]Named[Setting]] {
		var keys []key[[]Named[Setting]]
		for _, name := range []string{"low", "high", "V", "Bmax", "nonspecific"} {
			keys = append(keys, key[[]Named[Setting]]{name: name, doc: "a number, or free", example: name + ": free", schema: settingShape{}.schema,
				read: func(r *reader, n *yaml.Node, path string, v *[]Named[Setting]) bool {
					e := Named[Setting]{Name: name}
					ok := settingShape{}.read(r, n, path, &e.Value)
					*v = append(*v, e)
					return ok
				}})
		}
		return keys
	}}
}

func counts(form string) shape[[]Named[int]] {
	return namesShape[int]{of: countShape{1, 64}, form: "a mapping from " + form + " to numbers of sites"}
}

func siteCountShape() shape[SiteCount] { return siteCounts{} }

// siteCounts reads 4 and {alpha: 2, beta: 2}.
type siteCounts struct{}

func (siteCounts) read(r *reader, n *yaml.Node, path string, v *SiteCount) bool {
	if n.Kind == yaml.MappingNode {
		return counts("classes").read(r, n, path, &v.Classes)
	}
	return countShape{1, 64}.read(r, n, path, &v.Number)
}

func (siteCounts) schema(s *schemata) object {
	return object{"anyOf": []object{countShape{1, 64}.schema(s), counts("classes").schema(s)}}
}

// contactsShape reads square and [[1, 2], [2, 3]].
type contactsShape struct{}

func pairsOfSites() shape[[][]int] {
	return listShape[[]int]{of: listShape[int]{of: countShape{1, 64}, form: "a pair of sites", least: 2, most: 2}, form: "a list of pairs of sites", least: 1}
}

func (contactsShape) read(r *reader, n *yaml.Node, path string, v *Contacts) bool {
	if n.Kind != yaml.SequenceNode {
		return textShape{form: "a named arrangement, or pairs of sites"}.read(r, n, path, &v.Name)
	}
	var pairs [][]int
	if !pairsOfSites().read(r, n, path, &pairs) {
		return false
	}
	for _, p := range pairs {
		v.Pairs = append(v.Pairs, [2]int{p[0], p[1]})
	}
	return true
}

func (contactsShape) schema(s *schemata) object {
	return object{"anyOf": []object{{"type": "string"}, pairsOfSites().schema(s)}}
}

func bindingShape() shape[EffectorBinding] {
	return recordShape[EffectorBinding]{name: "an effector's binding", keys: func() []key[EffectorBinding] {
		return []key[EffectorBinding]{
			with("binds", wordShape{"R", "T", "both"}, func(b *EffectorBinding) *string { return &b.Binds }, "the conformation it binds to", "binds: T"),
			with("at", wordShape{"ligand site"}, func(b *EffectorBinding) *string { return &b.At }, "it competes with the ligand for the same site", "at: ligand site"),
		}
	}}
}

// weightsShape reads {R: 1, T: free} and [A, I].
type weightsShape struct{}

func weightNames() shape[[]Named[Setting]] {
	return namesShape[Setting]{of: settingShape{}, form: "a mapping from conformations to numbers or free"}
}

func (weightsShape) read(r *reader, n *yaml.Node, path string, v *[]Named[Setting]) bool {
	if n.Kind == yaml.MappingNode {
		return weightNames().read(r, n, path, v)
	}
	var names []string
	ok := listShape[string]{of: textShape{form: "a conformation or state"}, form: "a mapping from conformations to numbers, or a list of conformations", least: 1}.read(r, n, path, &names)
	for i, s := range names {
		*v = append(*v, Named[Setting]{Name: s, Value: Setting{Value: 1, Said: true}})
		r.places[join(path, s)] = r.places[indexed(path, i)]
	}
	return ok
}

func (weightsShape) schema(s *schemata) object {
	return object{"anyOf": []object{weightNames().schema(s), {"type": "array", "items": textShape{}.schema(s), "minItems": 1}}}
}

// partShape reads a number of equal sites, or a mechanism.
func partShape() shape[Part] { return parts{} }

type parts struct{}

func (parts) read(r *reader, n *yaml.Node, path string, v *Part) bool {
	if n.Kind == yaml.ScalarNode && isNumber(n.Value) {
		return countShape{1, 64}.read(r, n, path, &v.Sites)
	}
	v.Mechanism = &Mechanism{}
	return mechanismShape().read(r, n, path, v.Mechanism)
}

func (parts) schema(s *schemata) object {
	return object{"anyOf": []object{countShape{1, 64}.schema(s), mechanismShape().schema(s)}}
}

func conformationShape() shape[Conformation] {
	return recordShape[Conformation]{name: "a conformation", keys: func() []key[Conformation] {
		return []key[Conformation]{
			with("sites", countShape{0, 64}, func(c *Conformation) *int { return &c.Sites }, "its sites for the ligand", "sites: 2"),
			with("K", textShape{form: "the name of a constant"}, func(c *Conformation) *string { return &c.K }, "the name of its dissociation constant", "K: K_A"),
			with("weight", textShape{form: "the name of a constant"}, func(c *Conformation) *string { return &c.Weight }, "the name of its weight; the first conformation has weight 1", "weight: L_I"),
			with("like", textShape{form: "a conformation"}, func(c *Conformation) *string { return &c.Like }, "the conformation whose sites and constants it shares", "like: A"),
			with("ligands", namesShape[ConformationLigand]{of: conformationLigandShape(), form: "a mapping from effectors to the names of their constants"}, func(c *Conformation) *[]Named[ConformationLigand] { return &c.Ligands },
				"effectors that bind to it, and the names of their constants", "ligands: {alanine: K_ala}"),
		}
	}}
}

func conformationLigandShape() shape[ConformationLigand] {
	return recordShape[ConformationLigand]{name: "a conformation's ligand", keys: func() []key[ConformationLigand] {
		return []key[ConformationLigand]{
			with("K", textShape{form: "the name of a constant"}, func(l *ConformationLigand) *string { return &l.K }, "the name of its dissociation constant", "K: K_ala").must(),
			with("sites", countShape{1, 64}, func(l *ConformationLigand) *int { return &l.Sites }, "its sites on this conformation", "sites: 1"),
		}
	},
		plain: func(r *reader, n *yaml.Node, path string, l *ConformationLigand) bool {
			return textShape{form: "the name of a constant"}.read(r, n, path, &l.K)
		},
		plainSchema: textShape{}.schema}
}

func stateShape() shape[State] {
	return recordShape[State]{name: "a state", keys: func() []key[State] {
		return []key[State]{
			with("name", textShape{form: "a name"}, func(s *State) *string { return &s.Name }, "its name", "name: ES").must(),
			with("ligands", countShape{0, 64}, func(s *State) *int { return &s.Ligands }, "how many ligands are bound", "ligands: 1"),
			with("ways", countShape{1, 1 << 30}, func(s *State) *int { return &s.Ways }, "how many arrangements it stands for", "ways: 2"),
			with("effectors", namesShape[int]{of: countShape{0, 64}, form: "a mapping from effectors to how many are bound"}, func(s *State) *[]Named[int] { return &s.Effectors },
				"how many of each effector are bound", "effectors: {alanine: 1}"),
			with("constants", namesShape[float64]{of: anyNumber(), form: "a mapping from constants to their exponents"}, func(s *State) *[]Named[float64] { return &s.Constants },
				"exponents of the constants that multiply its weight", "constants: {K_S: -1}"),
		}
	},
		plain: func(r *reader, n *yaml.Node, path string, s *State) bool {
			return textShape{form: "a state"}.read(r, n, path, &s.Name)
		},
		plainSchema: textShape{}.schema}
}

func stepShape() shape[Step] {
	return recordShape[Step]{name: "a step", keys: func() []key[Step] {
		return []key[Step]{
			with("from", textShape{form: "a state"}, func(s *Step) *string { return &s.From }, "the state it leaves", "from: E").must(),
			with("to", textShape{form: "a state"}, func(s *Step) *string { return &s.To }, "the state it reaches", "to: ES").must(),
			with("ligand", countShape{0, 8}, func(s *Step) *int { return &s.Ligand }, "ligands taken up", "ligand: 1"),
			with("effector", textShape{form: "an effector"}, func(s *Step) *string { return &s.Effector }, "an effector taken up", "effector: alanine"),
			with("rate", textShape{form: "the name of a rate constant"}, func(s *Step) *string { return &s.Rate }, "the name of its rate constant", "rate: k1").must(),
			with("back", textShape{form: "the name of a rate constant"}, func(s *Step) *string { return &s.Back }, "the name of the rate constant of the way back; without it there is none", "back: k2"),
			with("yields", wordShape{"product"}, func(s *Step) *string { return &s.Yields }, "what the step sets free", "yields: product"),
		}
	}}
}

func saysKeys() []key[ConstantSays] {
	return []key[ConstantSays]{
		optional("start", quantityShape{}, func(c *ConstantSays) **units.Quantity { return &c.Start }, "where one search starts", "start: 1"),
		{name: "range", doc: "the range that the constant may take", example: "range: [0.01, 100]", read: readRange, schema: rangeList().schema},
		optional("fixed", quantityShape{}, func(c *ConstantSays) **units.Quantity { return &c.Fixed }, "the value at which it is held", "fixed: 0.01"),
		optional("value", quantityShape{}, func(c *ConstantSays) **units.Quantity { return &c.Value }, "the value that curve and course take, and where one search starts", "value: 0.9 torr"),
	}
}

func rangeList() shape[[]units.Quantity] {
	return listShape[units.Quantity]{of: quantityShape{}, form: "two values, [lowest, highest]", least: 2, most: 2}
}

func readRange(r *reader, n *yaml.Node, path string, c *ConstantSays) bool {
	var ends []units.Quantity
	if !rangeList().read(r, n, path, &ends) {
		return false
	}
	c.Low, c.High = &ends[0], &ends[1]
	return true
}

// saysShape reads {start, range, fixed, value}; a bare number is fixed.
func saysShape() shape[ConstantSays] {
	return recordShape[ConstantSays]{name: "a constant", keys: saysKeys,
		plain: func(r *reader, n *yaml.Node, path string, c *ConstantSays) bool {
			return pointerShape[units.Quantity]{quantityShape{}}.read(r, n, path, &c.Fixed)
		},
		plainSchema: quantityShape{}.schema}
}

// constantsShape reads constants, those of effectors, classes and parts one
// level further in: {K_R: {start: 1}, alanine: {K_T: {start: 0.5}}}. They come
// out with their full names, alanine.K_T.
type constantsShape struct{}

func (c constantsShape) read(r *reader, n *yaml.Node, path string, v *[]Named[ConstantSays]) bool {
	if n.Kind != yaml.MappingNode {
		r.wrong(n, path, "a mapping from constants to what is known of them")
		return false
	}
	return c.group(r, n, path, "", v)
}

func (c constantsShape) group(r *reader, n *yaml.Node, path, prefix string, v *[]Named[ConstantSays]) bool {
	ok := true
	whole := r.entries(n, path, func(name string, kn, value *yaml.Node) {
		p := join(path, name)
		if isGroup(value) && strings.Count(prefix, ".") < 3 {
			ok = c.group(r, value, p, prefix+name+".", v) && ok
			return
		}
		e := Named[ConstantSays]{Name: prefix + name}
		if !saysShape().read(r, value, p, &e.Value) {
			ok = false
			return
		}
		if e.Value == (ConstantSays{}) {
			r.complain(diag.Diagnostic{Code: "empty-mapping", Position: r.at(kn), Problem: fmt.Sprintf("nothing is said of %s", name), Remedies: []diag.Remedy{{Write: name + ": {start: 1}"}}})
			ok = false
			return
		}
		*v = append(*v, e)
	})
	return ok && whole
}

// isGroup tells the constants of an effector from what is said of a constant.
func isGroup(n *yaml.Node) bool {
	if n.Kind != yaml.MappingNode || len(n.Content) == 0 {
		return false
	}
	words := []string{"start", "range", "fixed", "value"}
	for i := 0; i+1 < len(n.Content); i += 2 {
		name, value := n.Content[i].Value, n.Content[i+1]
		if value.Kind == yaml.MappingNode {
			return true
		}
		if head, _, _ := strings.Cut(name, ":"); diag.Nearest(head, words) != "" {
			return false
		}
	}
	return true
}

func (constantsShape) schema(s *schemata) object {
	one := saysShape().schema(s)
	return object{"type": "object", "additionalProperties": object{"anyOf": []object{one, {"type": "object", "additionalProperties": object{"anyOf": []object{one, {"type": "object", "additionalProperties": one}}}}}}}
}

// rateShape reads one rate constant, a list of them (one per ligation), or what
// is known of one.
type rateShape struct{}

func (rateShape) read(r *reader, n *yaml.Node, path string, v *Rate) bool {
	if n.Kind == yaml.MappingNode {
		return saysShape().read(r, n, path, &v.Says)
	}
	return listShape[units.Quantity]{of: quantityShape{}, form: "a rate constant with its unit", least: 1, most: 64, single: true}.read(r, n, path, &v.Each)
}

func (rateShape) schema(s *schemata) object {
	return object{"anyOf": []object{saysShape().schema(s), {"type": "array", "items": quantityShape{}.schema(s), "minItems": 1, "maxItems": 64}}}
}
