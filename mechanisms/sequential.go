package mechanisms

import (
	"math"
	"slices"
)

const sequentialDoc = `x`

type sequential struct {
	sites     int
	constants []Constant
	groups    []arrangement
	lnWays    []float64
}

func buildSequential(d Definition) (Mechanism, error) {
	var p problems
	p.unread(d, "sites", "contacts", "constants")
	if len(d.SiteClasses) > 0 {
		p.add("sites", "this family takes one number of sites, not classes", "sites: 4")
	}
	g := p.contacts(d)
	if err := p.err(); err != nil {
		return nil, err
	}
	asked, freed := d.Constants["K_AB"]
	freed = freed && asked.said() && !asked.settled()
	switch {
	case freed && g.regular():
		p.add("constants.K_AB", "every site has the same number of contacts, so that K_AB cannot be told from K and K_BB",
			"no K_AB (it is 1, and K and K_BB are effective), or K_AB: {fixed: 1}")
	case freed && g.n < 3:
		p.add("constants.K_AB", "two sites hold two constants", "no K_AB")
	}
	m := settleSequential(g, asked.said())
	p.given(d, m.constants)
	if err := p.err(); err != nil {
		return nil, err
	}
	return m, nil
}

func settleSequential(g graph, withAB bool) *sequential {
	perSite := float64(len(g.edges)) / float64(g.n)
	m := &sequential{sites: g.n, constants: []Constant{
		{Name: "K", Scale: Log, Dimension: 1, Low: 1e-3 * math.Pow(1e-6, perSite), High: 1e3 * math.Pow(1e8, perSite),
			StartLow: 0.05, StartHigh: 5 * math.Pow(100, perSite),
			Meaning: "dissociation constant of a site all of whose contacts are empty, effective"},
		{Name: "K_BB", Scale: Log, Low: 1e-6, High: 1e8, StartLow: 0.03, StartHigh: 300,
			Meaning: "weight of a contact between two filled sites, effective"},
	}}
	if withAB {
		m.constants = append(m.constants, Constant{Name: "K_AB", Scale: Log, Low: 1e-6, High: 1e6, StartLow: 0.1, StartHigh: 10,
			Meaning: "weight of a contact between an empty and a filled site"})
		m.constants[0].Meaning = "dissociation constant of a site without its contacts"
		m.constants[1].Meaning = "weight of a contact between two filled sites"
	}
	groups, ways := g.arrangements()
	for i, a := range groups {
		if !withAB {
			a.ab = 0
		}
		if at := slices.Index(m.groups, a); at >= 0 {
			m.lnWays[at] += ways[i]
			continue
		}
		m.groups, m.lnWays = append(m.groups, a), append(m.lnWays, ways[i])
	}
	for i, w := range m.lnWays {
		m.lnWays[i] = math.Log(w)
	}
	return m
}

func (m *sequential) Family() string        { return "sequential" }
func (m *sequential) Sites() int            { return m.sites }
func (m *sequential) Constants() []Constant { return slices.Clone(m.constants) }
func (m *sequential) Effectors() []string   { return nil }

func (m *sequential) Curve() Curve {
	k := len(m.constants)
	ligation := make([]int, len(m.groups))
	for s, g := range m.groups {
		ligation[s] = g.filled
	}
	l := &logLinear{ensemble: newEnsemble(ligation, k, false), lnG: m.lnWays}
	for s, g := range m.groups {
		row := l.row(s)
		row[0], row[1] = -float64(g.filled), float64(g.bb)
		if k > 2 {
			row[2] = float64(g.ab)
		}
	}
	return newPolynomialCurve(m.sites, k, l)
}
