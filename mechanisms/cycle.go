package mechanisms

import (
	"fmt"
	"math"
	"slices"
)

const cycleDoc = `Steps of catalysis around a cycle, at steady state.

	dp/dt = Q(x) p = 0 ,  v = Σ k_s p_(from s) over the steps s that yield product
	p_r = T_r/Σ T ,  T_r the sum over all spanning trees that lead to state r of their rates

Each step has a rate constant, times the ligand (or the effector) where it takes one up.
The velocity is per enzyme, in 1/s: the V of a velocity then is the amount of enzyme. The
Hill coefficient is that of v between its limits. Product is absent: no step goes back
that yields it.

Constants, under the names that the study gives; steps may share one:

	rate, back   of a step                               1/s
	rate         of a step that takes up a ligand        1/(ligand's unit · s)

Without a step that yields product there is no velocity, and what is seen is what is bound.

Limits: E + S ⇌ ES → E + P is the equation of Michaelis and Menten with K = (k_2 + k_3)/k_1.
A cycle all of whose steps go both ways and whose constants balance around every loop is
equilibrium binding. With one site n_H is above or below 1 where the enzyme, after it has let
product go, is slow to become again what it was (mnemonic), or changes slowly between two
conformations that differ in rate (slow transition).

What data hold what: velocities hold ratios of rates. Multiplying all rates and dividing the
amount of enzyme changes nothing: fix V, or one rate. Most cycles have more rates than a curve
holds; fix what is known, or follow progress in time.

Keys: states (names), steps ([{from: E, to: ES, ligand: 1, rate: k1, back: k2}, {from: ES, to:
E, rate: k3, yields: product}]), effectors, constants.

King & Altman 1956, J. Phys. Chem. 60:1375. Ainslie, Shill & Neet 1972, J. Biol. Chem.
247:7088. Ricard, Meunier & Buc 1974, Eur. J. Biochem. 49:195.
`

// Steps of catalysis around a cycle, at steady state.
//
//	dp/dt = Q(x) p = 0 ,  v = Σ k_s p_(from s) over the steps s that yield product
//	p_r = T_r/Σ T ,  T_r the sum over all spanning trees that lead to state r of their rates
//
// Each step has a rate constant, times the ligand (or the effector) where it takes one up.
// The velocity is per enzyme, in 1/s: the V of a velocity then is the amount of enzyme. The
// Hill coefficient is that of v between its limits. Product is absent: no step goes back
// that yields it.
//
// Constants, under the names that the study gives; steps may share one:
//
//	rate, back   of a step                               1/s
//	rate         of a step that takes up a ligand        1/(ligand's unit · s)
//
// Without a step that yields product there is no velocity, and what is seen is what is bound.
//
// Limits: E + S ⇌ ES → E + P is the equation of Michaelis and Menten with K = (k_2 + k_3)/k_1.
// A cycle all of whose steps go both ways and whose constants balance around every loop is
// equilibrium binding. With one site n_H is above or below 1 where the enzyme, after it has let
// product go, is slow to become again what it was (mnemonic), or changes slowly between two
// conformations that differ in rate (slow transition).
//
// What data hold what: velocities hold ratios of rates. Multiplying all rates and dividing the
// amount of enzyme changes nothing: fix V, or one rate. Most cycles have more rates than a curve
// holds; fix what is known, or follow progress in time.
//
// Keys: states (names), steps ([{from: E, to: ES, ligand: 1, rate: k1, back: k2}, {from: ES, to:
// E, rate: k3, yields: product}]), effectors, constants.
//
// King & Altman 1956, J. Phys. Chem. 60:1375. Ainslie, Shill & Neet 1972, J. Biol. Chem.
// 247:7088. Ricard, Meunier & Buc 1974, Eur. J. Biochem. 49:195.
type cyclic struct {
	states    []string
	bound     []int // ligands on each state
	sites     int
	constants []Constant
	effectors []string
	routes    []route
	trees     []tree // merged: one of each root and rates
}

// route is one way of one step: a step that goes back has two.
type route struct {
	from, to int
	constant int
	ligands  int // taken up
	effector int // taken up; −1
	product  bool
	back     bool // the way back of the route listed before it
}

// tree is spanning trees that lead to one state by the same rates.
type tree struct {
	root    int
	lnCount float64
	ligands int   // power of x
	rates   []int // of each constant: how often it stands
	effects []int // of each effector
}

// mostTrees bounds the spanning trees of a cycle.
const mostTrees = 20_000

func buildCycle(d Definition) (Mechanism, error) {
	var p problems
	p.unread(d, "states", "steps", "effectors", "constants")
	p.effectors(d.Effectors)
	p.steps(d)
	if err := p.err(); err != nil {
		return nil, err
	}
	m := settleCycle(d)
	p.cycleWhole(m)
	if err := p.err(); err != nil {
		return nil, err
	}
	if err := m.plant(); err != nil {
		p.add("steps", err.Error(), "fewer states, or fewer steps between them")
		return nil, p.err()
	}
	if m.sites == 0 || !slices.ContainsFunc(m.trees, func(t tree) bool { return t.ligands > 0 }) {
		p.add("steps", "no step takes up the ligand", "ligand: 1 in a step")
	}
	p.given(d, m.constants)
	if err := p.err(); err != nil {
		return nil, err
	}
	return m, nil
}

// steps complains of states and steps that cannot be.
func (p *problems) steps(d Definition) {
	if len(d.States) < 2 {
		p.add("states", "a cycle has at least two states", "states: [E, ES]")
	}
	names := map[string]bool{}
	for i, s := range d.States {
		if s.Name == "" || names[s.Name] {
			p.add(fmt.Sprintf("states[%d]", i), fmt.Sprintf("the name %q is missing or used twice", s.Name), "a name of its own for each state")
		}
		names[s.Name] = true
	}
	if len(d.Steps) == 0 {
		p.add("steps", "no step is listed", "steps: [{from: E, to: ES, ligand: 1, rate: k1, back: k2}, {from: ES, to: E, rate: k3, yields: product}]")
	}
	for i, s := range d.Steps {
		key := fmt.Sprintf("steps[%d]", i)
		for _, end := range []struct{ key, name string }{{"from", s.From}, {"to", s.To}} {
			if !names[end.name] {
				p.add(key+"."+end.key, fmt.Sprintf("there is no state %q", end.name), "one of states")
			}
		}
		switch {
		case s.From == s.To:
			p.add(key+".to", fmt.Sprintf("the step leads from %q to itself", s.From), "another state")
		case s.Rate == "":
			p.add(key+".rate", "the step has no rate constant", "rate: k1")
		case s.Product && s.Back != "":
			p.add(key+".back", "a step that yields product does not go back: product is absent", "no back")
		case s.Ligands < 0 || s.Ligands > maxSites:
			p.add(key+".ligand", fmt.Sprintf("%d ligands cannot be taken up", s.Ligands), "ligand: 1")
		case s.Ligands > 0 && s.Effector != "":
			p.add(key+".effector", "the step takes up two kinds of ligand", "two steps")
		case s.Product && (s.Ligands > 0 || s.Effector != ""):
			p.add(key+".yields", "the step takes something up and yields product at once", "two steps, with a state between them")
		}
	}
}

// settleCycle lays out constants and routes of sound states and steps.
func settleCycle(d Definition) *cyclic {
	m := &cyclic{}
	for _, s := range d.States {
		m.states = append(m.states, s.Name)
	}
	for _, e := range d.Effectors {
		m.effectors = append(m.effectors, e.Name)
	}
	for _, s := range d.Steps {
		if s.Effector != "" && !slices.Contains(m.effectors, s.Effector) {
			m.effectors = append(m.effectors, s.Effector)
		}
	}
	for _, s := range d.Steps {
		from, to := slices.Index(m.states, s.From), slices.Index(m.states, s.To)
		r := route{from: from, to: to, ligands: s.Ligands, effector: slices.Index(m.effectors, s.Effector), product: s.Product}
		c := Constant{Name: s.Rate, Dimension: -s.Ligands, Meaning: "rate constant from " + s.From + " to " + s.To}
		if r.effector >= 0 {
			c.Ligand, c.Dimension = s.Effector, -1
		}
		r.constant = m.rate(c)
		m.routes = append(m.routes, r)
		if s.Back != "" {
			m.routes = append(m.routes, route{from: to, to: from, effector: -1, back: true,
				constant: m.rate(Constant{Name: s.Back, Meaning: "rate constant from " + s.To + " to " + s.From})})
		}
	}
	return m
}

// rate finds or makes the constant of a name. One that is used with two units is told
// apart by cycleWhole.
func (m *cyclic) rate(c Constant) int {
	for i, q := range m.constants {
		if q.Name == c.Name && q.Dimension == c.Dimension && q.Ligand == c.Ligand {
			return i
		}
	}
	c.Scale = Log
	c.Low, c.High, c.StartLow, c.StartHigh = 1e-12, 1e12, 1e-2, 1e3
	m.constants = append(m.constants, c)
	return len(m.constants) - 1
}

// cycleWhole complains of what only the whole shows: units, and ligands that do not
// add up around a loop.
func (p *problems) cycleWhole(m *cyclic) {
	for i, c := range m.constants {
		for _, q := range m.constants[:i] {
			if q.Name == c.Name {
				p.add("steps", fmt.Sprintf("%s stands for steps that take up different ligands: it would have two units", c.Name),
					"a name of its own for each")
			}
		}
	}
	for q := 1; q <= maxSites; q++ {
		if m.count(q) {
			m.sites = slices.Max(m.bound)
			return
		}
	}
	p.add("steps", "the ligands do not add up: around a loop, more are taken up than are given back or turned over",
		"ligand: 1 in each step that takes one up, yields: product where it leaves changed")
}

// count finds the ligands on every state, q of them leaving with each product; false
// where that cannot be, or where a state is not reached.
func (m *cyclic) count(q int) bool {
	const unknown = math.MinInt
	m.bound = make([]int, len(m.states))
	for s := range m.bound {
		m.bound[s] = unknown
	}
	m.bound[0] = 0
	gain := m.gains(q)
	for range m.states {
		for i, r := range m.routes {
			from, to := m.bound[r.from], m.bound[r.to]
			switch {
			case from != unknown && to == unknown:
				m.bound[r.to] = from + gain[i]
			case from == unknown && to != unknown:
				m.bound[r.from] = to - gain[i]
			}
		}
	}
	least := slices.Min(m.bound)
	if least == unknown {
		return true // plant names the state
	}
	for s := range m.bound {
		m.bound[s] -= least
	}
	for i, r := range m.routes {
		if m.bound[r.to]-m.bound[r.from] != gain[i] {
			return false
		}
	}
	return true
}

// gains is how many ligands the molecule has more after each route.
func (m *cyclic) gains(q int) []int {
	gain := make([]int, len(m.routes))
	for i, r := range m.routes {
		gain[i] = r.ligands
		if r.product {
			gain[i] -= q
		}
	}
	for i, r := range m.routes {
		if r.back {
			gain[i] = -m.routes[i-1].ligands
		}
	}
	return gain
}
