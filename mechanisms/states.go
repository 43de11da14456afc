package mechanisms

import (
	"fmt"
	"math"
	"slices"
)

const statesDoc = `States listed one by one.

	w_s = g_s · Π_k (constant k)^(A_sk) · x^(i_s) · Π_e y_e^(m_se) ,  Z = Σ w_s ,  Ȳ = ⟨i⟩/n

State s holds i_s ligands and m_se of effector e in g_s ways; n is the largest i_s. One
state is the reference, with no ligand, effector or constant and the weight 1.

Constants, under the names that the study gives: each takes its unit from the rule that a
weight has none. A dissociation constant has the exponent −1 for one ligand.

Limits: whatever the list allows. Ȳ rises always; a response may not: states that are full
and silent give substrate inhibition, and a response that turns back has no Hill
coefficient.

What data hold what: one curve holds at most n constants. Constants that only ever appear
together are refused.

Keys: states ([{name: E, ligands: 0}, {name: ES, ligands: 1, ways: 2, constants: {K_S:
-1}}]), effectors, turnover and sees (a number per state, free for some), constants.

Wyman & Gill 1990, Binding and Linkage. Hill 1985, Cooperativity Theory in Biochemistry.
`

// States listed one by one.
//
//	w_s = g_s · Π_k (constant k)^(A_sk) · x^(i_s) · Π_e y_e^(m_se) ,  Z = Σ w_s ,  Ȳ = ⟨i⟩/n
//
// State s holds i_s ligands and m_se of effector e in g_s ways; n is the largest i_s. One
// state is the reference, with no ligand, effector or constant and the weight 1.
//
// Constants, under the names that the study gives: each takes its unit from the rule that a
// weight has none. A dissociation constant has the exponent −1 for one ligand.
//
// Limits: whatever the list allows. Ȳ rises always; a response may not: states that are full
// and silent give substrate inhibition, and a response that turns back has no Hill
// coefficient.
//
// What data hold what: one curve holds at most n constants. Constants that only ever appear
// together are refused.
//
// Keys: states ([{name: E, ligands: 0}, {name: ES, ligands: 1, ways: 2, constants: {K_S:
// -1}}]), effectors, turnover and sees (a number per state, free for some), constants.
//
// Wyman & Gill 1990, Binding and Linkage. Hill 1985, Cooperativity Theory in Biochemistry.
type stated struct {
	sites     int
	constants []Constant
	effectors []string
	states    []State // in order of ligation
	view      *view
}

func buildStates(d Definition) (Mechanism, error) {
	var p problems
	p.unread(d, "states", "effectors", "turnover", "sees", "constants")
	p.effectors(d.Effectors)
	p.states(d.States)
	names := make([]string, len(d.States))
	for i, s := range d.States {
		names[i] = s.Name
	}
	p.views(d, names)
	if err := p.err(); err != nil {
		return nil, err
	}
	m := &stated{states: slices.Clone(d.States)}
	slices.SortStableFunc(m.states, func(a, b State) int { return a.Ligands - b.Ligands })
	m.sites = m.states[len(m.states)-1].Ligands
	m.settle(&p, d)
	if err := p.err(); err != nil {
		return nil, err
	}
	p.given(d, m.constants)
	p.countConstants(d, m.constants, m.sites, len(m.effectors) > 0 || m.view != nil)
	if err := p.err(); err != nil {
		return nil, err
	}
	return m, nil
}

// states complains of a list of states that is none.
func (p *problems) states(list []State) {
	if len(list) == 0 {
		p.add("states", "no state is listed", "states: [{name: E, ligands: 0}, {name: ES, ligands: 1, constants: {K_S: -1}}]")
		return
	}
	seen := map[string]bool{}
	reference, empty, full := false, false, 0
	for i, s := range list {
		key := fmt.Sprintf("states[%d]", i)
		if s.Name == "" || seen[s.Name] {
			p.add(key+".name", fmt.Sprintf("the name %q is missing or used twice", s.Name), "a name of its own for each state")
		}
		seen[s.Name] = true
		if s.Ligands < 0 || s.Ligands > maxSites {
			p.add(key+".ligands", fmt.Sprintf("%d ligands cannot be", s.Ligands), fmt.Sprintf("a whole number from 0 to %d", maxSites))
		}
		if s.Ways < 0 {
			p.add(key+".ways", fmt.Sprintf("%d ways cannot be", s.Ways), "a whole number above 0")
		}
		p.stateParts(key, s)
		bare := len(s.Constants) == 0
		reference = reference || bare && s.Ligands == 0 && countEffectors(s) == 0
		empty, full = empty || s.Ligands == 0, max(full, s.Ligands)
	}
	switch {
	case !empty:
		p.add("states", "no state is without ligand", "a state with ligands: 0")
	case !reference:
		p.add("states", "there is no reference state: one without ligand, effector and constants, whose weight is 1",
			"{name: E, ligands: 0}")
	}
	if full == 0 {
		p.add("states", "no state holds the ligand", "a state with ligands: 1")
	}
}

func (p *problems) stateParts(key string, s State) {
	for _, name := range sortedKeys(s.Effectors) {
		if n := s.Effectors[name]; n < 0 || n > 10*maxSites {
			p.add(key+".effectors."+name, fmt.Sprintf("%d of them cannot be", n), "a whole number not below 0")
		}
	}
	for _, name := range sortedKeys(s.Constants) {
		if e := s.Constants[name]; math.IsNaN(e) || math.Abs(e) > 100 {
			p.add(key+".constants."+name, fmt.Sprintf("%g is no exponent", e), "a number such as -1")
		}
	}
	if s.Ligands > 0 && len(s.Constants) == 0 {
		p.add(key+".constants", fmt.Sprintf("the state %q binds ligand without a constant: its weight has no unit to go with", s.Name),
			"constants: {K_S: -1}")
	}
}

func countEffectors(s State) (n int) {
	for _, c := range s.Effectors {
		n += c
	}
	return n
}

// settle lays out effectors and constants with their units.
func (m *stated) settle(p *problems, d Definition) {
	effectors, names := map[string]bool{}, map[string]bool{}
	for _, e := range d.Effectors {
		m.effectors = append(m.effectors, e.Name)
		effectors[e.Name] = false
	}
	for _, s := range m.states {
		for e := range s.Effectors {
			if _, ok := effectors[e]; !ok {
				effectors[e] = true
			}
		}
	}
	for _, e := range sortedKeys(effectors) {
		if effectors[e] {
			m.effectors = append(m.effectors, e)
		}
	}
	for _, s := range d.States {
		for _, c := range sortedKeys(s.Constants) {
			if !names[c] {
				names[c] = true
				m.constants = append(m.constants, Constant{Name: c, Scale: Log})
			}
		}
	}
	m.units(p)
	list := make([]conformer, len(m.states))
	for i, s := range m.states {
		list[i].name = s.Name
	}
	m.view = newView(d, list, &m.constants)
	if m.view != nil {
		m.view.turnover = false // the number given is the whole state's
	}
}

// units finds the power of each unit in each constant, from the rule that a
// weight has no unit: Σ exponent·power = −(number of that ligand in the state).
func (m *stated) units(p *problems) {
	k := len(m.constants)
	a := make([][]float64, len(m.states))
	for s, state := range m.states {
		a[s] = m.exponents(state, k)
	}
	powers := make([][]float64, 0, 1+len(m.effectors))
	for j := -1; j < len(m.effectors); j++ {
		b := make([]float64, len(m.states))
		for s, state := range m.states {
			b[s] = -float64(state.Ligands)
			if j >= 0 {
				b[s] = -float64(state.Effectors[m.effectors[j]])
			}
		}
		x, rank, fits := eliminate(a, b)
		if !fits {
			p.add("states", "the constants cannot be given units: one of them has different units in different states",
				"the same power of a dissociation constant for the same number of ligands")
			return
		}
		if rank < k && j < 0 {
			p.add("states", "some constants only ever appear together, so that they cannot be told apart", "one constant in their place")
			return
		}
		powers = append(powers, x)
	}
	for i := range m.constants {
		m.unit(p, i, powers)
	}
}

// unit settles one constant's unit and bounds.
func (m *stated) unit(p *problems, i int, powers [][]float64) {
	c := &m.constants[i]
	for j, x := range powers {
		d := math.Round(x[i])
		if d == 0 && math.Abs(x[i]) < 1e-9 {
			continue
		}
		if math.Abs(x[i]-d) > 1e-9 || c.Dimension != 0 {
			p.add("states", fmt.Sprintf("%s has a unit of more than one ligand, or a broken power of one", c.Name),
				"a constant of its own for each ligand")
			return
		}
		c.Dimension = int(d)
		if j > 0 {
			c.Ligand = m.effectors[j-1]
		}
	}
	power := math.Max(1, math.Abs(float64(c.Dimension)))
	c.Low, c.High = math.Pow(1e-8, power), math.Pow(1e8, power)
	c.StartLow, c.StartHigh = math.Pow(1e-2, power), math.Pow(1e2, power)
	c.Meaning = "constant of the listed states"
	if c.Dimension == 1 {
		c.Meaning = "dissociation constant in the listed states"
	}
}

// exponents is the row of one state.
func (m *stated) exponents(s State, k int) []float64 {
	row := make([]float64, k)
	for i := range row {
		if i < len(m.constants) {
			row[i] = s.Constants[m.constants[i].Name]
		}
	}
	return row
}

// eliminate solves A x = b for a tall A by Gaussian elimination with pivots,
// free unknowns being 0. It returns the rank and whether b fits.
func eliminate(a [][]float64, b []float64) (x []float64, rank int, fits bool) {
	rows := make([][]float64, len(a))
	for i := range a {
		rows[i] = append(slices.Clone(a[i]), b[i])
	}
	k := len(a[0])
	var pivots []int
	for col := 0; col < k && rank < len(rows); col++ {
		best := rank
		for r := rank; r < len(rows); r++ {
			if math.Abs(rows[r][col]) > math.Abs(rows[best][col]) {
				best = r
			}
		}
		if math.Abs(rows[best][col]) < 1e-9 {
			continue
		}
		rows[rank], rows[best] = rows[best], rows[rank]
		clearColumn(rows, rank, col)
		pivots = append(pivots, col)
		rank++
	}
	x = make([]float64, k)
	for r, col := range pivots {
		x[col] = rows[r][k] / rows[r][col]
	}
	for _, row := range rows[rank:] {
		if math.Abs(row[k]) > 1e-9 {
			return x, rank, false
		}
	}
	return x, rank, true
}

// clearColumn takes row pivot out of all others.
func clearColumn(rows [][]float64, pivot, col int) {
	for r := range rows {
		if r == pivot {
			continue
		}
		f := rows[r][col] / rows[pivot][col]
		for c := range rows[r] {
			rows[r][c] -= f * rows[pivot][c]
		}
	}
}

func (m *stated) Family() string        { return "states" }
func (m *stated) Sites() int            { return m.sites }
func (m *stated) Constants() []Constant { return slices.Clone(m.constants) }
func (m *stated) Effectors() []string   { return slices.Clone(m.effectors) }

// lnWays is ln of a degeneracy; none given means one.
func lnWays(ways int) float64 { return math.Log(float64(max(1, ways))) }

func (m *stated) Curve() Curve {
	k := len(m.constants)
	ligation, of := make([]int, len(m.states)), make([]int, len(m.states))
	names := make([]string, len(m.states))
	for s, state := range m.states {
		ligation[s], of[s], names[s] = state.Ligands, s, state.Name
	}
	l := &logLinear{ensemble: newEnsemble(ligation, k, m.view != nil), lnG: make([]float64, len(m.states))}
	l.count = make([][]float64, len(m.effectors))
	for j := range l.count {
		l.count[j] = make([]float64, len(m.states))
	}
	for s, state := range m.states {
		l.lnG[s] = lnWays(state.Ways)
		copy(l.row(s), m.exponents(state, k))
		for j, e := range m.effectors {
			l.count[j][s] = float64(state.Effectors[e])
		}
	}
	poly := newPolynomialCurve(m.sites, k, l)
	poly.detail = &detail{&l.ensemble, names}
	return m.view.watch(poly, &l.ensemble, of)
}
