package mechanisms

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
)

func (m *cyclic) Family() string        { return "cycle" }
func (m *cyclic) Sites() int            { return m.sites }
func (m *cyclic) Constants() []Constant { return slices.Clone(m.constants) }
func (m *cyclic) Effectors() []string   { return slices.Clone(m.effectors) }

// Curve sees what is bound; its Watch sees the velocity, where there is one. Spanning
// trees are an ensemble: a tree's weight is the product of its rates, log-linear in the
// constants, and its "ligation" is how often the ligand stands in it.
func (m *cyclic) Curve() Curve {
	k := len(m.constants)
	least, most := m.trees[0].ligands, m.trees[len(m.trees)-1].ligands
	n := max(1, most-least)
	ligation := make([]int, len(m.trees))
	for i, t := range m.trees {
		ligation[i] = t.ligands - least
	}
	l := &logLinear{ensemble: newEnsemble(ligation, k, true), lnG: make([]float64, len(m.trees))}
	l.count = make([][]float64, len(m.effectors))
	for j := range l.count {
		l.count[j] = make([]float64, len(m.trees))
	}
	of := make([]int, len(m.trees))
	for i, t := range m.trees {
		of[i], l.lnG[i] = t.root, t.lnCount
		row := l.row(i)
		for c, power := range t.rates {
			row[c] = float64(power)
		}
		for j, power := range t.effects {
			l.count[j][i] = float64(power)
		}
	}
	poly := newPolynomialCurve(n, k, l)
	poly.sat.do = make([]float64, (n+1)*k)
	c := &cycleCurve{m: m, poly: poly, ensemble: &l.ensemble, of: of}
	rates := m.yields()
	if rates == nil {
		return c
	}
	v := &view{weight: make([]float64, len(m.states)), rates: rates}
	return &watchedCycle{c, v.watch(poly, &l.ensemble, of).(*watchedCurve).seen}
}

// yields is the rate constants that yield product from each state; nil where none does.
func (m *cyclic) yields() [][]int {
	rates, any := make([][]int, len(m.states)), false
	for _, r := range m.routes {
		if r.product {
			rates[r.from] = append(rates[r.from], r.constant)
			any = true
		}
	}
	if !any {
		return nil
	}
	return rates
}

// cycleCurve is a cycle at steady state: the mean number of ligands over its sites.
type cycleCurve struct {
	m        *cyclic
	poly     *polynomialCurve
	ensemble *ensemble
	of       []int // root of each tree
}

// watchedCycle is one with a velocity.
type watchedCycle struct {
	*cycleCurve
	seen *watch
}

// Bind settles trees and velocity.
func (c *watchedCycle) Bind(theta []float64, env Environment) {
	c.seen.Bind(theta, env)
	c.occupy()
}

// Watch returns the velocity per enzyme.
func (c *watchedCycle) Watch() Curve { return c.seen }

// Bind settles the trees.
func (c *cycleCurve) Bind(theta []float64, env Environment) {
	c.poly.Bind(theta, env)
	c.occupy()
}

// occupy writes the mean share of filled sites at each power of x.
func (c *cycleCurve) occupy() {
	e, sat := c.ensemble, c.poly.sat
	clear(e.do)
	for i, root := range c.of {
		e.o[i] = float64(c.m.bound[root]) / float64(c.m.sites)
	}
	e.observe(sat.o, sat.do)
	clear(sat.rest)
	for i, power := range e.ligation {
		sat.rest[power] += e.share[i] * float64(c.m.sites-c.m.bound[c.of[i]]) / float64(c.m.sites)
	}
	sat.rebind()
}

// Saturation writes the share of filled sites and its gradient.
func (c *cycleCurve) Saturation(dst, lnx []float64, grad *mat.Dense) {
	c.poly.Saturation(dst, lnx, grad)
}

// At writes the share of filled sites and its Hill coefficient.
func (c *cycleCurve) At(lnx float64, p *Point) {
	c.jet(lnx, &c.poly.sat.jets, whole)
	low, high := c.endSlopes()
	c.poly.sat.jets.point(p, low, high)
}

func (c *cycleCurve) jet(lnx float64, j *jet, to depth) { c.poly.sat.jet(lnx, j, to) }

func (c *cycleCurve) turns() (first, last float64) { return c.poly.turns() }

func (c *cycleCurve) ceiling() float64 { return c.poly.sat.o[c.poly.highest()] }

// endSlopes are the powers at which sites first fill and last are empty; 0 where some
// stay empty, or full.
func (c *cycleCurve) endSlopes() (low, high float64) {
	sat, top := c.poly.sat, c.poly.highest()
	there := func(i int) bool { return !math.IsInf(c.poly.lnB[i], -1) }
	for i := top; i >= 0; i-- {
		if there(i) && sat.o[i] != 0 {
			low = float64(i)
		}
	}
	for i := 0; i <= top; i++ {
		if there(i) && sat.rest[i] != 0 {
			high = float64(top - i)
		}
	}
	return low, high
}

func (c *cycleCurve) median() Measure {
	return nothing("a cycle out of equilibrium has no median ligand activity")
}

func (c *cycleCurve) interaction() Measure {
	return nothing("a cycle out of equilibrium has no interaction energy")
}

// StateNames names the states.
func (c *cycleCurve) StateNames() []string { return slices.Clone(c.m.states) }

// Populations writes the share of each state at steady state.
func (c *cycleCurve) Populations(dst []float64, lnx float64) []float64 {
	dst = sized(dst, len(c.m.states))
	clear(dst)
	sat := c.poly.sat
	sat.terms(lnx, false)
	for i, power := range c.ensemble.ligation {
		dst[c.of[i]] += c.ensemble.share[i] * sat.p[power]
	}
	return dst
}
