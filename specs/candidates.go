package specs

import (
	"errors"
	"fmt"
	"slices"
	"strings"

	"ligancy/fit/saturation"
	"ligancy/mechanisms"
	"ligancy/specs/diag"
	"ligancy/specs/units"
)

// candidates settles every mechanism.
func (b *builder) candidates() {
	if len(b.study.Mechanisms) > maxMechanisms {
		return // complained of already
	}
	names := map[string]int{}
	for i := range b.study.Mechanisms {
		p := indexed("mechanisms", i)
		m := &b.study.Mechanisms[i]
		if m.Family == "" {
			continue // complained of already
		}
		if !b.said(p + ".name") {
			m.Name = madeName(m)
			b.byDefault("mechanisms."+m.Name+".name", m.Name)
		}
		if j, ok := names[m.Name]; ok {
			b.fault(b.nameOf(p), "repeated-name",
				fmt.Sprintf("mechanisms %d and %d are both named %q", j+1, i+1, m.Name), nil,
				diag.Remedy{Say: "Give each a name of its own:",
					Write: "name: " + plainOrQuoted(m.Name+" 2")})
		}
		names[m.Name] = i
		c := saturation.Candidate{Name: m.Name, Family: m.Family,
			ShiftByPreparation: m.Preparation == "shift"}
		b.differs(p, m, &c)
		if c.ShiftByPreparation && !b.anyPreparation() {
			b.fault(p+".preparation", "unknown-factor",
				"a shift by preparation needs a column that says which preparation a row comes from", nil, diag.Remedy{Write: "preparation: COLUMN", Where: "under columns."})
		}
		c.Rates = b.rates(p+".rates", m.Rates)
		b.ownEnds(p+".response", m, &c)
		b.mechanism(p, m, &c)
		b.analysis.Candidates = append(b.analysis.Candidates, c)
	}
}

// nameOf is the path of the name of a mechanism, or else of its family.
func (b *builder) nameOf(p string) string {
	if b.said(p + ".name") {
		return p + ".name"
	}
	return p + ".family"
}

// madeName is the name of a mechanism that has none: "mwc, L differs".
func madeName(m *Mechanism) string {
	var what []string
	for _, e := range m.Differs {
		what = append(what, e.Name)
	}
	switch {
	case len(what) == 0:
		return m.Family
	case len(what) == 1 && what[0] != "all":
		return m.Family + ", " + what[0] + " differs"
	}
	return m.Family + ", " + strings.Join(what, " and ") + " differ"
}

func (b *builder) anyPreparation() bool {
	return slices.ContainsFunc(b.study.Data,
		func(d Data) bool { return d.Columns.Preparation.Name != "" })
}

// differs settles by what the constants of a mechanism differ; whether there
// are such constants is asked when the mechanism is known.
func (b *builder) differs(p string, m *Mechanism, c *saturation.Candidate) {
	c.Differs = map[string]string{}
	for _, e := range m.Differs {
		at := join(p+".differs", e.Name)
		ok := true
		for i := range b.study.Data {
			ok = ok && b.knowsLevel(&b.study.Data[i], e.Value, at)
		}
		if ok {
			c.Differs[e.Name] = e.Value
			b.oneLevel(at, e.Value)
		}
	}
}

// oneLevel warns of a difference by a factor that has one level.
func (b *builder) oneLevel(at, key string) {
	levels := b.levelsOf(key)
	if len(levels) == 1 && len(b.study.Data) > 0 {
		b.warn(at, "one-level", fmt.Sprintf("%s has only one level, %s, so nothing differs by it",
			key, levels[0]), nil, diag.Remedy{Say: "Take it out, or keep rows of two levels."})
	}
}

// levelsOf lists the levels of a factor over all kept points.
func (b *builder) levelsOf(key string) []string {
	var all []string
	for i := range b.analysis.Data {
		d := &b.analysis.Data[i]
		j, e := slices.Index(d.Factors, key), b.effector(key)
		for _, pt := range d.Points {
			level := ""
			switch {
			case pt.LeftOut != "":
				continue
			case key == byData:
				level = d.Name
			case key == byPreparation:
				level = pt.Preparation
			case j >= 0:
				level = pt.Levels[j]
			case e >= 0 && e < len(pt.Effectors):
				level = number(pt.Effectors[e])
			default:
				continue
			}
			if !slices.Contains(all, level) {
				all = append(all, level)
			}
		}
	}
	return all
}

// ownEnds settles numbers of the response that a candidate has for itself.
func (b *builder) ownEnds(p string, m *Mechanism, c *saturation.Candidate) {
	for _, e := range m.Response {
		if c.Ends == nil {
			c.Ends = map[string]saturation.Setting{}
		}
		c.Ends[e.Name] = saturation.Setting{Free: e.Value.Free, Value: e.Value.Value}
		used := len(b.study.Data) == 0
		for _, d := range b.study.Data {
			used = used || slices.Contains(ends[d.Response.Kind], e.Name) ||
				ends[d.Response.Kind] == nil
		}
		if !used {
			b.faultAtKey(join(p, e.Name), "unknown-key",
				fmt.Sprintf("no response of the study has a %s", e.Name),
				[]string{"A response has: " + strings.Join(ends[b.study.Data[0].Response.Kind],
					", ") + "."})
		}
	}
}

// mechanism builds the mechanism of a candidate.
func (b *builder) mechanism(p string, m *Mechanism, c *saturation.Candidate) {
	family, ok := mechanisms.Lookup(m.Family)
	if !ok {
		b.unknownFamily(p, m.Family)
		return
	}
	d := b.definition(p, m, family)
	c.Given = givenOfAll(d)
	if b.failed[p] {
		return // what is missing may be what could not be read
	}
	built, err := family.Build(d)
	if err != nil {
		b.definitionErrors(p, err)
		return
	}
	c.Mechanism = built
	b.constantUnits(p, m, built.Constants())
	b.constantsThatDiffer(p, m, built.Constants())
	for _, e := range built.Effectors() {
		if b.effector(e) < 0 {
			b.fault(p+".effectors."+e, "unknown-ligand", fmt.Sprintf("the study has no effector %q",
				e), []string{"Its effectors are: " + b.effectorNames() + "."},
				diag.Remedy{Write: fmt.Sprintf("effectors: [{name: %s, unit: mM}]",
					plainOrQuoted(e))})
		}
	}
	b.totalAxis(p, m)
}

func (b *builder) unknownFamily(p, name string) {
	var families []string
	for _, f := range mechanisms.Families() {
		families = append(families, f.Name)
	}
	var remedies []diag.Remedy
	if near := diag.Nearest(name, families); near != "" {
		remedies = []diag.Remedy{{Write: "family: " + near}}
	}
	b.fault(p+".family", "unknown-family", fmt.Sprintf("there is no family of mechanisms %q", name),
		[]string{"The families are: " + strings.Join(families, ", ") + "."}, remedies...)
}

// definitionErrors tells what a family found wrong, at the keys it names.
func (b *builder) definitionErrors(p string, err error) {
	var many interface{ Unwrap() []error }
	if errors.As(err, &many) {
		for _, e := range many.Unwrap() {
			b.definitionErrors(p, e)
		}
		return
	}
	var one *mechanisms.DefinitionError
	if !errors.As(err, &one) {
		b.fault(p, "bad-mechanism", err.Error(), nil)
		return
	}
	at := p
	for _, part := range strings.Split(one.Key, ".") {
		if !b.said(at + "." + part) {
			break
		}
		at += "." + part
	}
	problem := one.Problem
	if at == p {
		problem = one.Key + ": " + problem
	}
	b.fault(at, "bad-mechanism", problem, nil, remedyInWords(one.Write)...)
}

// remedyInWords sets off what is to be written; advice in words is a sentence.
func remedyInWords(write string) []diag.Remedy {
	switch {
	case write == "":
		return nil
	case strings.ContainsAny(write, ":{"):
		return []diag.Remedy{{Write: write}}
	}
	return []diag.Remedy{{Say: "Write " + write + "."}}
}

// constantsThatDiffer asks whether the mechanism has the constants that differ.
func (b *builder) constantsThatDiffer(p string, m *Mechanism, constants []mechanisms.Constant) {
	known := []string{"all"}
	for _, c := range constants {
		known = append(known, c.Key())
	}
	for _, e := range m.Differs {
		if e.Name == "all" || mechanisms.Find(constants, e.Name) >= 0 ||
			slices.ContainsFunc(constants,
				func(c mechanisms.Constant) bool { return c.Name == e.Name }) {
			continue
		}
		var remedies []diag.Remedy
		if near := diag.Nearest(e.Name, known); near != "" {
			remedies = []diag.Remedy{{Write: fmt.Sprintf("differs: {%s: %s}", near, e.Value)}}
		}
		b.faultAtKey(join(p+".differs", e.Name), "unknown-constant",
			fmt.Sprintf("%s has no constant %q", m.Family, e.Name),
			[]string{"Its constants are: " + strings.Join(known[1:], ", ") + "."}, remedies...)
	}
}

// constantUnits asks that a unit was written only where the constant has one.
func (b *builder) constantUnits(p string, m *Mechanism, constants []mechanisms.Constant) {
	for _, e := range m.Constants {
		i := mechanisms.Find(constants, e.Name)
		if i < 0 {
			continue
		}
		power := constants[i].Dimension
		for _, said := range []struct {
			word string
			q    *units.Quantity
		}{{"start", e.Value.Start}, {"fixed", e.Value.Fixed}, {"value", e.Value.Value},
			{"range[0]", e.Value.Low}, {"range[1]", e.Value.High}} {
			if said.q == nil || said.q.Bare || b.powerOf(said.q, b.unitOf(e.Name)) == power {
				continue
			}
			at := p + ".constants." + e.Name
			if b.said(at + "." + said.word) {
				at += "." + said.word
			}
			b.fault(at, "wrong-unit", fmt.Sprintf("%s has no unit like %s", e.Name, said.q.Unit),
				nil, diag.Remedy{Say: "Write a bare number:", Write: number(said.q.Value)})
		}
	}
}

// totalAxis asks of a Hill equation what it needs against total ligand.
func (b *builder) totalAxis(p string, m *Mechanism) {
	for _, d := range b.study.Data {
		if d.LigandAxis != "total" || m.Family != "hill" || b.said(p+".sites") {
			continue
		}
		b.fault(b.nameOf(p), "hill-on-total",
			"a Hill equation against total ligand needs the number of sites it stands for",
			[]string{fmt.Sprintf("The ligand axis of data set %q is total: what is bound is taken from what was added.", d.Name)}, diag.Remedy{Write: "sites: 1"})
		return
	}
}
