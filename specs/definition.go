package specs

import (
	"fmt"
	"maps"
	"slices"
	"strings"

	"ligancy/mechanisms"
	"ligancy/specs/diag"
	"ligancy/specs/units"
)

// ofSpecs are keys of a mechanism that no family reads.
var ofSpecs = []string{"name", "family", "differs", "rates", "response", "preparation"}

// definition turns what a study says of a mechanism into what its family reads.
func (b *builder) definition(p string, m *Mechanism,
	family mechanisms.Family) mechanisms.Definition {
	reads := func(key string) bool { return slices.Contains(family.Keys, key) }
	b.strayKeys(p, m, family)
	d := mechanisms.Definition{Differs: b.anythingDiffers(m), SiteScale: siteScale(m)}
	if reads("sites") && m.Sites != nil {
		d.Sites, d.SiteClasses = m.Sites.Number, asCounts(m.Sites.Classes)
	}
	if reads("classes") {
		d.Classes = asCounts(m.Classes)
	}
	if reads("contacts") && m.Contacts != nil {
		d.Contacts, d.Graph = m.Contacts.Name, m.Contacts.Pairs
	}
	if reads("effectors") {
		for _, e := range m.Effectors {
			d.Effectors = append(d.Effectors, mechanisms.Effector{Name: e.Name,
				Binds: e.Value.Binds, AtLigandSite: e.Value.At != ""})
		}
	}
	if reads("turnover") {
		d.Turnover = asWeights(m.Turnover)
	}
	if reads("sees") {
		d.Sees = asWeights(m.Sees)
	}
	if reads("parts") {
		for _, e := range m.Parts {
			d.Parts = append(d.Parts, *b.part(join(p+".parts", e.Name), e.Name, &e.Value))
		}
	}
	if reads("small") && m.Small != nil {
		d.Small = b.part(p+".small", "small", m.Small)
	}
	if reads("large") && m.Large != nil {
		d.Large = b.part(p+".large", "large", m.Large)
	}
	if reads("conformations") {
		for _, e := range m.Conformations {
			d.Conformations = append(d.Conformations, asConformation(e))
		}
	}
	if reads("states") {
		d.States = asStates(m.States)
	}
	if reads("steps") {
		d.Steps = asSteps(m.Steps)
	}
	d.Constants = b.given(p+".constants", m.Constants)
	return d
}

// strayKeys complains of keys that the family does not read.
func (b *builder) strayKeys(p string, m *Mechanism, family mechanisms.Family) {
	reads := slices.Concat(ofSpecs, family.Keys)
	for _, k := range keyNames(mechanismKeys()) {
		if b.said(p+"."+k) && !slices.Contains(reads, k) && !b.hillSites(m, k) {
			b.faultAtKey(p+"."+k, "unknown-key", fmt.Sprintf("%s has no key %q", m.Family, k),
				[]string{"Its keys are: " + strings.Join(reads, ", ") + "."})
		}
	}
}

// hillSites allows the Hill equation its number of sites against total ligand.
func (b *builder) hillSites(m *Mechanism, key string) bool {
	return m.Family == "hill" && key == "sites" && slices.ContainsFunc(b.study.Data,
		func(d Data) bool { return d.LigandAxis == "total" })
}

// anythingDiffers reports whether the data hold more than one curve of a mechanism's constants.
func (b *builder) anythingDiffers(m *Mechanism) bool {
	if slices.ContainsFunc(b.study.Data, func(d Data) bool { return d.faulty || d.table == nil }) {
		return len(m.Differs) > 0 // not all levels are known
	}
	return slices.ContainsFunc(m.Differs,
		func(e Named[string]) bool { return len(b.levelsOf(e.Value)) > 1 })
}

// siteScale reports whether single constants differ, so that they must be fitted themselves.
func siteScale(m *Mechanism) bool {
	return slices.ContainsFunc(m.Differs, func(e Named[string]) bool { return e.Name != "all" })
}

func asCounts(list []Named[int]) []mechanisms.Count {
	var out []mechanisms.Count
	for _, e := range list {
		out = append(out, mechanisms.Count{Name: e.Name, Sites: e.Value})
	}
	return out
}

func asWeights(list []Named[Setting]) []mechanisms.Weight {
	var out []mechanisms.Weight
	for _, e := range list {
		out = append(out, mechanisms.Weight{Name: e.Name, Value: e.Value.Value, Free: e.Value.Free})
	}
	return out
}

func asConformation(e Named[Conformation]) mechanisms.Conformation {
	c := mechanisms.Conformation{Name: e.Name, Sites: e.Value.Sites, K: e.Value.K,
		Weight: e.Value.Weight, Like: e.Value.Like}
	for _, l := range e.Value.Ligands {
		if c.Ligands == nil {
			c.Ligands, c.EffectorSites = map[string]string{}, map[string]int{}
		}
		c.Ligands[l.Name] = l.Value.K
		if l.Value.Sites > 0 {
			c.EffectorSites[l.Name] = l.Value.Sites
		}
	}
	return c
}

func asStates(list []State) []mechanisms.State {
	var out []mechanisms.State
	for _, s := range list {
		st := mechanisms.State{Name: s.Name, Ligands: s.Ligands, Ways: s.Ways}
		for _, e := range s.Effectors {
			if st.Effectors == nil {
				st.Effectors = map[string]int{}
			}
			st.Effectors[e.Name] = e.Value
		}
		for _, e := range s.Constants {
			if st.Constants == nil {
				st.Constants = map[string]float64{}
			}
			st.Constants[e.Name] = e.Value
		}
		out = append(out, st)
	}
	return out
}

func asSteps(list []Step) []mechanisms.Step {
	var out []mechanisms.Step
	for _, s := range list {
		out = append(out, mechanisms.Step{From: s.From, To: s.To, Ligands: s.Ligand, Effector: s.Effector,
			Rate: s.Rate, Back: s.Back, Product: s.Yields != ""})
	}
	return out
}

// part turns a population or a species into what its family reads.
func (b *builder) part(p, name string, part *Part) *mechanisms.Part {
	out := &mechanisms.Part{Name: name, Sites: part.Sites}
	m := part.Mechanism
	if m == nil {
		return out
	}
	out.Family = m.Family
	for _, k := range []string{"name", "differs", "rates", "response", "preparation"} {
		if b.said(p + "." + k) {
			b.faultAtKey(p+"."+k, "unknown-key", fmt.Sprintf("a part of a mechanism has no key %q",
				k), []string{"It is a key of the whole mechanism."})
		}
	}
	family, ok := mechanisms.Lookup(m.Family)
	if !ok {
		if m.Family != "" {
			b.unknownFamily(p, m.Family)
		}
		out.Definition = &mechanisms.Definition{}
		return out
	}
	d := b.definition(p, m, family)
	out.Definition = &d
	return out
}

// given turns what is said of constants into numbers in the ligand's unit, or
// the effector's, or their powers.
func (b *builder) given(p string, list []Named[ConstantSays]) map[string]mechanisms.Given {
	if len(list) == 0 {
		return nil
	}
	out := map[string]mechanisms.Given{}
	for _, e := range list {
		at := join(p, e.Name)
		u := b.unitOf(e.Name)
		g := mechanisms.Given{
			Start: b.constant(at, "start", e.Name, e.Value.Start, u), Fixed: b.constant(at, "fixed",
				e.Name, e.Value.Fixed, u),
			Value: b.constant(at, "value", e.Name, e.Value.Value, u), Low: b.constant(at,
				"range[0]", e.Name, e.Value.Low, u), High: b.constant(at, "range[1]", e.Name,
				e.Value.High, u),
		}
		if g.Fixed != nil && (g.Start != nil || g.Low != nil || g.Value != nil) {
			b.fault(at, "two-answers", fmt.Sprintf("%s is fixed, so it has no start, range or other value", e.Name), nil, diag.Remedy{Say: "Keep one of them."})
		}
		out[e.Name] = g
	}
	return out
}

// givenOfAll is what is said of the constants of a mechanism and of its parts,
// those of parts with the part's name before theirs: loose.K_R.
func givenOfAll(d mechanisms.Definition) map[string]mechanisms.Given {
	all := maps.Clone(d.Constants)
	parts := slices.Clone(d.Parts)
	for _, p := range []*mechanisms.Part{d.Small, d.Large} {
		if p != nil {
			parts = append(parts, *p)
		}
	}
	for _, p := range parts {
		if p.Definition == nil {
			continue
		}
		for name, g := range givenOfAll(*p.Definition) {
			if all == nil {
				all = map[string]mechanisms.Given{}
			}
			if _, said := all[p.Name+"."+name]; !said {
				all[p.Name+"."+name] = g
			}
		}
	}
	return all
}

// unitOf is the unit of a constant by its name: an effector's where it belongs to one.
func (b *builder) unitOf(name string) units.Unit {
	for _, part := range strings.Split(name, ".") {
		if i := b.effector(part); i >= 0 {
			return b.study.Effectors[i].Unit
		}
	}
	return b.study.Ligand.Unit
}

// powerOf is the power of a unit that a quantity is in: 1, −1, or 0 for neither.
func (b *builder) powerOf(q *units.Quantity, u units.Unit) int {
	switch {
	case q.Unit.Same(u):
		return 1
	case q.Unit.Same(units.Divide(units.Unit{}, u)):
		return -1
	}
	return 0
}

// constant converts one number said of a constant.
func (b *builder) constant(p, word, name string, q *units.Quantity, u units.Unit) *float64 {
	if q == nil {
		return nil
	}
	if q.Bare {
		return &q.Value
	}
	at := p
	if b.said(p + "." + word) {
		at = p + "." + word
	}
	var v float64
	var err error
	switch b.powerOf(q, u) {
	case 1:
		v, err = q.In(u)
	case -1:
		v, err = q.In(units.Divide(units.Unit{}, u))
	default:
		b.wrongUnit(at, q.Unit, u, name)
		return nil
	}
	if err != nil {
		b.wrongUnit(at, q.Unit, u, name)
		return nil
	}
	return &v
}
