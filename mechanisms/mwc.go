package mechanisms

import (
	"fmt"
	"maps"
	"math"
	"slices"
)

const mwcDoc = `Concerted transition of all sites between two conformations, R and T.

	Z = (1 + α)ⁿ + L(1 + cα)ⁿ ,  α = x/K_R ,  c = K_R/K_T ,  L = [T]/[R] without ligand
	Ȳ = [α(1 + α)ⁿ⁻¹ + Lcα(1 + cα)ⁿ⁻¹]/Z ,  R̄ = (1 + α)ⁿ/Z
	n_H = 1 + (n − 1) R̄T̄ (Ȳ_R − Ȳ_T)²/[Ȳ(1 − Ȳ)]

An effector y with a site of its own on every protomer multiplies L by
[(1 + y/K_T)/(1 + y/K_R)]ⁿ with its own K_T and K_R; one that competes for the ligand's
site turns 1 + α into 1 + α + y/K_R, and likewise for T. Unlike classes of sites replace
(1 + α)ⁿ by a product over classes, each with its own c and K_R; competitors bind all
classes alike.

Constants:

	L     allosteric constant [T]/[R]                     no unit
	c     K_R/K_T, at most 1: R is the tighter one        no unit
	K_R   dissociation constant of conformation R         ligand's unit
	effector.K_R, effector.K_T                            effector's unit
	turnover_T, signal_T   where they are free            in units of the other conformation

Limits: c = 0 is exclusive binding, only R binds; c = 1 or L → 0 is n equal sites. Where
L·c^(n/2) = 1 the curve is symmetrical, half full at x = K_R/√c, and steepest there.
n_H is never below 1.

What data hold what: one curve holds at most n constants, so that with two sites one must
be fixed. L and K_R are tied: with small c the data fix K_R·L^(1/n), not each. An effector
series, or a signal that sees one conformation, unties them. From one curve unlike
classes of the same size cannot be told which is which.

Keys: sites (a number up to 16, or classes {alpha: 2, beta: 2}), effectors ({alanine:
{binds: T}}; R, T or both; at: ligand site), turnover ({R: 1, T: free}, of filled sites, 0
where not said), sees ({R: 1}), constants (c: {fixed: 0} for exclusive binding).

Monod, Wyman & Changeux 1965, J. Mol. Biol. 12:88. Rubin & Changeux 1966, J. Mol. Biol.
21:265. Middendorf & Aldrich 2017, J. Gen. Physiol. 149:105.
`

// Concerted transition of all sites between two conformations, R and T.
//
//	Z = (1 + α)ⁿ + L(1 + cα)ⁿ ,  α = x/K_R ,  c = K_R/K_T ,  L = [T]/[R] without ligand
//	Ȳ = [α(1 + α)ⁿ⁻¹ + Lcα(1 + cα)ⁿ⁻¹]/Z ,  R̄ = (1 + α)ⁿ/Z
//	n_H = 1 + (n − 1) R̄T̄ (Ȳ_R − Ȳ_T)²/[Ȳ(1 − Ȳ)]
//
// An effector y with a site of its own on every protomer multiplies L by
// [(1 + y/K_T)/(1 + y/K_R)]ⁿ with its own K_T and K_R; one that competes for the ligand's
// site turns 1 + α into 1 + α + y/K_R, and likewise for T. Unlike classes of sites replace
// (1 + α)ⁿ by a product over classes, each with its own c and K_R; competitors bind all
// classes alike.
//
// Constants:
//
//	L     allosteric constant [T]/[R]                     no unit
//	c     K_R/K_T, at most 1: R is the tighter one        no unit
//	K_R   dissociation constant of conformation R         ligand's unit
//	effector.K_R, effector.K_T                            effector's unit
//	turnover_T, signal_T   where they are free            in units of the other conformation
//
// Limits: c = 0 is exclusive binding, only R binds; c = 1 or L → 0 is n equal sites. Where
// L·c^(n/2) = 1 the curve is symmetrical, half full at x = K_R/√c, and steepest there.
// n_H is never below 1.
//
// What data hold what: one curve holds at most n constants, so that with two sites one must
// be fixed. L and K_R are tied: with small c the data fix K_R·L^(1/n), not each. An effector
// series, or a signal that sees one conformation, unties them. From one curve unlike
// classes of the same size cannot be told which is which.
//
// Keys: sites (a number up to 16, or classes {alpha: 2, beta: 2}), effectors ({alanine:
// {binds: T}}; R, T or both; at: ligand site), turnover ({R: 1, T: free}, of filled sites, 0
// where not said), sees ({R: 1}), constants (c: {fixed: 0} for exclusive binding).
//
// Monod, Wyman & Changeux 1965, J. Mol. Biol. 12:88. Rubin & Changeux 1966, J. Mol. Biol.
// 21:265. Middendorf & Aldrich 2017, J. Gen. Physiol. 149:105.
type mwc struct {
	sites     int
	constants []Constant
	effectors []string
	list      []conformer
	view      *view
	closed    bool     // one class of sites: the closed form holds
	exclusive bool     // c = 0
	zeros     []string // keys of those c
}

func buildMWC(d Definition) (Mechanism, error) {
	var p problems
	p.unread(d, "sites", "effectors", "turnover", "sees", "constants")
	if len(d.SiteClasses) > 0 {
		p.classes("sites", d.SiteClasses)
	} else {
		p.siteCount(d, 1)
	}
	p.concertedEffectors(d.Effectors)
	p.views(d, []string{"R", "T"})
	if err := p.err(); err != nil {
		return nil, err
	}
	m := settleMWC(d)
	p.given(m.without(d), m.constants)
	p.countConstants(d, m.constants, m.sites, len(m.effectors) > 0 || m.view != nil)
	if err := p.err(); err != nil {
		return nil, err
	}
	return m, nil
}

// concertedEffectors complains of effectors that say nothing clear.
func (p *problems) concertedEffectors(list []Effector) {
	p.effectors(list)
	for _, e := range list {
		if !slices.Contains([]string{"R", "T", "both"}, e.Binds) {
			p.add("effectors."+e.Name+".binds", fmt.Sprintf("%q is not a conformation that an effector can bind", e.Binds),
				"binds: R, binds: T or binds: both")
		}
	}
}

// zeroC says whether the study holds c of a class at exactly zero.
func zeroC(d Definition, class string) bool {
	key := Constant{Name: "c", Site: class}.Key()
	g, ok := d.Constants[key]
	return ok && g.settled() && g.number() == 0
}

// without is the definition less what it says of those c that are zero.
func (m *mwc) without(d Definition) Definition {
	d.Constants = maps.Clone(d.Constants)
	for _, key := range m.zeros {
		delete(d.Constants, key)
	}
	return d
}

func (m *mwc) heldAtZero() []string { return m.zeros }

// concertedClasses is the classes of sites; a single one has no name.
func concertedClasses(d Definition) []Count {
	if len(d.SiteClasses) > 0 {
		return d.SiteClasses
	}
	return []Count{{Sites: d.Sites}}
}

// settleMWC lays out constants and conformers of a sound definition.
func settleMWC(d Definition) *mwc {
	classes := concertedClasses(d)
	m := &mwc{sites: totalSites(classes), closed: len(classes) == 1}
	m.constants = []Constant{allostericConstant(m.sites)}
	r, t := conformer{name: "R"}, conformer{name: "T", weight: blend{{0, 1}}}
	for _, class := range classes {
		rSet, tSet := siteSet{sites: class.Sites, binds: true}, siteSet{sites: class.Sites}
		if zeroC(d, class.Name) {
			m.exclusive = true
			m.zeros = append(m.zeros, affinityRatio(class.Name).Key())
			rSet.lnK = blend{{m.constant(concertedK(class.Name)), 1}}
		} else {
			c := m.constant(affinityRatio(class.Name))
			k := m.constant(concertedK(class.Name))
			rSet.lnK, tSet.lnK, tSet.binds = blend{{k, 1}}, blend{{k, 1}, {c, -1}}, true
		}
		r.sets, t.sets = append(r.sets, rSet), append(t.sets, tSet)
	}
	for i, e := range d.Effectors {
		m.effectors = append(m.effectors, e.Name)
		if e.Binds != "T" {
			r.admit(e, i, m.constant(effectorConstant(e.Name, "R")), m.sites)
		}
		if e.Binds != "R" {
			t.admit(e, i, m.constant(effectorConstant(e.Name, "T")), m.sites)
		}
	}
	m.list = []conformer{r, t}
	m.view = newView(d, m.list, &m.constants)
	return m
}

// admit lets an effector bind: one site per protomer, its own or the ligand's.
func (c *conformer) admit(e Effector, index, constant, protomers int) {
	lnK := blend{{constant, 1}}
	if !e.AtLigandSite {
		c.effectors = append(c.effectors, effectorSites{index, protomers, lnK})
		return
	}
	for i := range c.sets {
		c.sets[i].rivals = append(c.sets[i].rivals, effectorSites{index, c.sets[i].sites, lnK})
	}
}

// constant appends a constant and returns its index.
func (m *mwc) constant(c Constant) int {
	m.constants = append(m.constants, c)
	return len(m.constants) - 1
}

func allostericConstant(sites int) Constant {
	n := float64(sites)
	return Constant{Name: "L", Scale: Log, Low: 1e-8, High: math.Pow(10, max(8, 4*n)),
		StartLow: 1, StartHigh: math.Pow(10, 2*n),
		EdgeLow: "R alone: sites alike and independent",
		Meaning: "[T]/[R] without ligands"}
}

func affinityRatio(class string) Constant {
	return Constant{Name: "c", Site: class, Scale: Log, Low: 1e-8, High: 1, StartLow: 1e-4, StartHigh: 0.9,
		EdgeLow: "exclusive binding: only R binds", EdgeHigh: "R and T bind alike: no cooperativity",
		Meaning: "K_R/K_T"}
}

func concertedK(class string) Constant {
	return Constant{Name: "K_R", Site: class, Scale: Log, Dimension: 1, Low: 1e-8, High: 1e8,
		StartLow: 1e-3, StartHigh: 3, Meaning: "dissociation constant of conformation R"}
}

func effectorConstant(effector, conformation string) Constant {
	return Constant{Name: "K_" + conformation, Ligand: effector, Scale: Log, Dimension: 1, Low: 1e-8, High: 1e8,
		StartLow: 1e-2, StartHigh: 1e2,
		EdgeHigh: effector + " does not bind " + conformation,
		Meaning:  "dissociation constant of " + effector + " from conformation " + conformation}
}

func (m *mwc) Family() string        { return "mwc" }
func (m *mwc) Sites() int            { return m.sites }
func (m *mwc) Constants() []Constant { return slices.Clone(m.constants) }
func (m *mwc) Effectors() []string   { return slices.Clone(m.effectors) }

func (m *mwc) Curve() Curve {
	k := len(m.constants)
	model := newConformers(m.list, m.sites, k, m.view != nil)
	poly := newPolynomialCurve(m.sites, k, model)
	poly.detail = model.detail()
	if !m.closed {
		return m.view.watch(poly, &model.ensemble, model.of)
	}
	c := &concertedCurve{polynomialCurve: poly, model: model, n: m.sites,
		exclusive: m.exclusive, theta: make([]float64, k)}
	c.env.Effectors = make([]float64, len(m.effectors))
	if k != 3 && !(m.exclusive && k == 2) || len(m.effectors) > 0 {
		c.jac = make([]float64, 3*k)
	}
	return m.view.watch(c, &model.ensemble, model.of)
}
