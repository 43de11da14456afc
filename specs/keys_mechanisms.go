package specs

import (
	"fmt"

	"gopkg.in/yaml.v3"
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
		with("name", textShape{form: "a name"}, func(m *Mechanism) *string { return &m.Name },
			"its name in results; made from family and differs where it is missing",
			`name: "concerted, L differs"`),
		with("family", textShape{form: "a family"}, func(m *Mechanism) *string { return &m.Family },
			"the family of mechanisms it belongs to (`ligancy families`)", "family: mwc").must(),
		with("differs", differsShape{}, func(m *Mechanism) *[]Named[string] { return &m.Differs },
			"constants that differ by a factor, by preparation, or (as a list) by data set; everything else is shared", "differs: {L: pH}"),
		optional("sites", siteCountShape(), func(m *Mechanism) **SiteCount { return &m.Sites },
			"the number of sites, or of each class of sites", "sites: 4"),
		with("classes", counts("classes"), func(m *Mechanism) *[]Named[int] { return &m.Classes },
			"classes of independent sites, and how many sites each has",
			"classes: {tight: 2, loose: 2}"),
		optional("contacts", contactsShape{}, func(m *Mechanism) **Contacts { return &m.Contacts },
			"which sites touch: a named arrangement, or pairs of sites", "contacts: square"),
		with("effectors", namesShape[EffectorBinding]{of: bindingShape(),
			form: "a mapping from effectors to how they bind"},
			func(m *Mechanism) *[]Named[EffectorBinding] { return &m.Effectors },
			"how each effector binds", "effectors: {alanine: {binds: T}}"),
		with("turnover", weightsShape{},
			func(m *Mechanism) *[]Named[Setting] { return &m.Turnover },
			"how fast each conformation turns over, relative to V: numbers, or free",
			"turnover: {R: 1, T: free}"),
		with("sees", weightsShape{}, func(m *Mechanism) *[]Named[Setting] { return &m.Sees },
			"which conformations or states the signal sees", "sees: {R: 1}"),
		with("parts", namesShape[Part]{of: partShape(),
			form: "a mapping from populations to their sites or mechanisms"},
			func(m *Mechanism) *[]Named[Part] { return &m.Parts },
			"the populations of a mixture: a number of equal sites, or a mechanism",
			"parts: {tight: 1, loose: 1}"),
		optional("small", partShape(), func(m *Mechanism) **Part { return &m.Small },
			"the smaller species of an assembly",
			"small: {family: independent, classes: {dimer: 2}}"),
		optional("large", partShape(), func(m *Mechanism) **Part { return &m.Large },
			"the larger species of an assembly", "large: {family: adair, sites: 4}"),
		with("conformations", namesShape[Conformation]{of: conformationShape(),
			form: "a mapping from conformations to their sites and constants"},
			func(m *Mechanism) *[]Named[Conformation] { return &m.Conformations },
			"conformations with their sites, constants and weights",
			"conformations: {A: {sites: 2, K: K_A}, I: {sites: 2, K: K_I, weight: L_I}}"),
		with("states", listShape[State]{of: stateShape(), form: "a list of states", least: 1,
			most: 10_000}, func(m *Mechanism) *[]State { return &m.States },
			"listed states, of an equilibrium or of a cycle",
			"states: [{name: E, ligands: 0}, {name: ES, ligands: 1, constants: {K_S: -1}}]"),
		with("steps", listShape[Step]{of: stepShape(), form: "a list of steps", least: 1,
			most: 10_000}, func(m *Mechanism) *[]Step { return &m.Steps },
			"the steps of a cycle", "steps: [{from: E, to: ES, ligand: 1, rate: k1, back: k2}]"),
		with("constants", constantsShape{},
			func(m *Mechanism) *[]Named[ConstantSays] { return &m.Constants },
			"what is known of constants: start, range, fixed, value",
			"constants: {K_R: {start: 1, range: [0.01, 100]}}"),
		with("rates", namesShape[Rate]{of: rateShape{},
			form: "a mapping from rate constants to values"},
			func(m *Mechanism) *[]Named[Rate] { return &m.Rates },
			"rate constants, which give the mechanism kinetics",
			"rates: {k_on: 1e7 1/(M s), exchange: 1e3 1/s}"),
		with("response", endsShape(), func(m *Mechanism) *[]Named[Setting] { return &m.Response },
			"numbers of the response that this mechanism has for itself: one with the upper end free, say", "response: {high: free}"),
		with("preparation", wordShape{"shift"},
			func(m *Mechanism) *string { return &m.Preparation },
			"let ln K of each preparation shift at random", "preparation: shift"),
	}
}

// endsShape reads the numbers of a response that a mechanism has for itself.
func endsShape() shape[[]Named[Setting]] {
	return recordShape[[]Named[Setting]]{name: "a mechanism's response",
		keys: func() []key[[]Named[Setting]] {
			var keys []key[[]Named[Setting]]
			for _, name := range []string{"low", "high", "V", "Bmax", "nonspecific"} {
				keys = append(keys, key[[]Named[Setting]]{name: name, doc: "a number, or free",
					example: name + ": free", schema: settingShape{}.schema,
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
	return namesShape[int]{of: countShape{1, 64},
		form: "a mapping from " + form + " to numbers of sites"}
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
	return listShape[[]int]{of: listShape[int]{of: countShape{1, 64}, form: "a pair of sites",
		least: 2, most: 2}, form: "a list of pairs of sites", least: 1}
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
	return recordShape[EffectorBinding]{name: "an effector's binding",
		keys: func() []key[EffectorBinding] {
			return []key[EffectorBinding]{
				with("binds", wordShape{"R", "T", "both"},
					func(b *EffectorBinding) *string { return &b.Binds },
					"the conformation it binds to", "binds: T"),
				with("at", wordShape{"ligand site"},
					func(b *EffectorBinding) *string { return &b.At },
					"it competes with the ligand for the same site", "at: ligand site"),
			}
		}}
}

// weightsShape reads {R: 1, T: free} and [A, I].
type weightsShape struct{}

func weightNames() shape[[]Named[Setting]] {
	return namesShape[Setting]{of: settingShape{},
		form: "a mapping from conformations to numbers or free"}
}

func (weightsShape) read(r *reader, n *yaml.Node, path string, v *[]Named[Setting]) bool {
	if n.Kind == yaml.MappingNode {
		return weightNames().read(r, n, path, v)
	}
	var names []string
	ok := listShape[string]{of: textShape{form: "a conformation or state"},
		form:  "a mapping from conformations to numbers, or a list of conformations",
		least: 1}.read(r, n, path, &names)
	for i, s := range names {
		*v = append(*v, Named[Setting]{Name: s, Value: Setting{Value: 1, Said: true}})
		r.places[join(path, s)] = r.places[indexed(path, i)]
	}
	return ok
}

func (weightsShape) schema(s *schemata) object {
	return object{"anyOf": []object{weightNames().schema(s), {"type": "array",
		"items": textShape{}.schema(s), "minItems": 1}}}
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
