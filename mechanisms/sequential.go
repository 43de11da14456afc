package mechanisms

import (
	"math"
	"slices"
)

const sequentialDoc = `Pairwise interaction of sites in contact, each changing as it fills.

	w = (x/K)^i · K_AB^(contacts of an empty and a filled site) · K_BB^(contacts of filled sites)
	P(x) = Σ w over all 2ⁿ ways of filling the sites of the contact graph

Constants:

	K      dissociation constant of a site with empty neighbours    ligand's unit
	K_BB   weight of a contact between two filled sites             no unit
	K_AB   weight of a contact between an empty and a filled site   no unit, 1 unless asked for

Where every site has the same number d of contacts, K_AB cannot be told from the others:
K/K_AB^d and K_BB/K_AB² are all that a curve shows. So K_AB is 1, and K and K_BB are
effective constants. On an irregular graph K_AB is free when constants speak of it, but it
is poorly held near K_AB = K_BB = 1.

Limits: K_BB = 1 (and K_AB = 1) is n equal sites; K_BB > 1 positive, K_BB < 1 negative
cooperativity. A square with K_BB = a is half full at x = K/a, with
n_H = (8 + 8/a)/(2 + 8/a + (4a + 2)/a²). Two sites: the same curves as adair.

What data hold what: two constants, held by position and steepness. Layouts with the same
number of sites differ little: square and tetrahedral contacts are rarely told apart, nor
either from mwc.

Keys: contacts (pair, triangle, square, tetrahedral, octahedral; linear, ring, prism with
sites; or a list [[1, 2], [2, 3]] of contacts), sites, constants. Up to 16 sites.

Pauling 1935, Proc. Natl. Acad. Sci. 21:186. Koshland, Némethy & Filmer 1966, Biochemistry
5:365.
`

// Pairwise interaction of sites in contact, each changing as it fills.
//
//	w = (x/K)^i · K_AB^(contacts of an empty and a filled site) · K_BB^(contacts of filled sites)
//	P(x) = Σ w over all 2ⁿ ways of filling the sites of the contact graph
//
// Constants:
//
//	K      dissociation constant of a site with empty neighbours    ligand's unit
//	K_BB   weight of a contact between two filled sites             no unit
//	K_AB   weight of a contact between an empty and a filled site   no unit, 1 unless asked for
//
// Where every site has the same number d of contacts, K_AB cannot be told from the others:
// K/K_AB^d and K_BB/K_AB² are all that a curve shows. So K_AB is 1, and K and K_BB are
// effective constants. On an irregular graph K_AB is free when constants speak of it, but it
// is poorly held near K_AB = K_BB = 1.
//
// Limits: K_BB = 1 (and K_AB = 1) is n equal sites; K_BB > 1 positive, K_BB < 1 negative
// cooperativity. A square with K_BB = a is half full at x = K/a, with
// n_H = (8 + 8/a)/(2 + 8/a + (4a + 2)/a²). Two sites: the same curves as adair.
//
// What data hold what: two constants, held by position and steepness. Layouts with the same
// number of sites differ little: square and tetrahedral contacts are rarely told apart, nor
// either from mwc.
//
// Keys: contacts (pair, triangle, square, tetrahedral, octahedral; linear, ring, prism with
// sites; or a list [[1, 2], [2, 3]] of contacts), sites, constants. Up to 16 sites.
//
// Pauling 1935, Proc. Natl. Acad. Sci. 21:186. Koshland, Némethy & Filmer 1966, Biochemistry
// 5:365.
type sequential struct {
	sites     int
	constants []Constant
	groups    []arrangement
	lnWays    []float64
	contacts  graph
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
	m := &sequential{sites: g.n, contacts: g, constants: []Constant{
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
