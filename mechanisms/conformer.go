package mechanisms

import (
	"fmt"
	"math"
)

// blend is a linear combination of constants on their logarithmic scale:
// ln K_T = ln K_R − ln c.
type blend []term

type term struct {
	index  int
	factor float64
}

func (b blend) at(theta []float64) (v float64) {
	for _, t := range b {
		v += t.factor * theta[t.index]
	}
	return v
}

func (b blend) addTo(row []float64, w float64) {
	for _, t := range b {
		row[t.index] += w * t.factor
	}
}

// conformer is one conformation of a molecule: a weight, sites for the varied
// ligand in sets of equal ones, and sites for effectors.
//
// With all its sites empty or filled by effectors it has the weight
//
//	W · Π_e (1 + y_e/K_e)^{m_e} · Π_sets a^n ,  a = 1 + Σ_r y_r/K_r ,
//
// where the r compete for the sites of the set; there the ligand binds with
// K·a instead of K.
type conformer struct {
	name      string
	weight    blend
	sets      []siteSet
	effectors []effectorSites
}

// siteSet is n equal sites of the varied ligand.
type siteSet struct {
	sites  int
	binds  bool // false: the ligand does not bind here, competitors may
	lnK    blend
	rivals []effectorSites
}

// effectorSites is a number of sites for one effector.
type effectorSites struct {
	effector int // index in Environment.Effectors
	sites    int
	lnK      blend
}

// boundSites is the number of sites that the ligand binds.
func (c *conformer) boundSites() (n int) {
	for _, s := range c.sets {
		if s.binds {
			n += s.sites
		}
	}
	return n
}

// conformers is the ensemble of a few conformations: state (c, i) has
// conformation c and i ligands. States stand in order of ligation, conformations
// inside it.
type conformers struct {
	list []conformer
	n, k int
	ensemble
	states [][]int // [c][i] → state, for i up to the sites of c
	of     []int   // state → conformation

	base []float64 // k: derivatives of the empty conformation's weight
	set  []float64 // k: ∂ln K'/∂θ of one set
	fold []folding // per conformation with several sets
}

func newConformers(list []conformer, n, k int, watched bool) *conformers {
	m := &conformers{list: list, n: n, k: k, base: make([]float64, k), set: make([]float64, k)}
	var ligation []int
	m.states = make([][]int, len(list))
	for i := 0; i <= n; i++ {
		for c := range list {
			if i <= list[c].boundSites() {
				m.states[c] = append(m.states[c], len(ligation))
				ligation = append(ligation, i)
				m.of = append(m.of, c)
			}
		}
	}
	m.ensemble = newEnsemble(ligation, k, watched)
	m.fold = make([]folding, len(list))
	for c := range list {
		m.fold[c] = newFolding(list[c].boundSites(), k)
	}
	return m
}

// detail names the states of a curve.
func (m *conformers) detail() *detail {
	names := make([]string, len(m.of))
	for s, c := range m.of {
		names[s] = fmt.Sprintf("%s, %d bound", m.list[c].name, m.ligation[s])
	}
	return &detail{&m.ensemble, names}
}

func (m *conformers) bind(c *coefficients, theta []float64, env Environment) {
	for i := range m.list {
		m.conformation(i, theta, env)
	}
	m.merge(c)
}

// conformation writes ln w and A of the states of conformation i.
func (m *conformers) conformation(i int, theta []float64, env Environment) {
	c := &m.list[i]
	clear(m.base)
	lnW := c.weight.at(theta)
	c.weight.addTo(m.base, 1)
	for _, e := range c.effectors {
		lnW += float64(e.sites) * e.open(theta, env, m.base, float64(e.sites))
	}
	f := &m.fold[i]
	f.start()
	for _, s := range c.sets {
		clear(m.set)
		lnA := crowd(s.rivals, theta, env, m.set)
		lnW += float64(s.sites) * lnA
		for k, d := range m.set {
			m.base[k] += float64(s.sites) * d
		}
		if s.binds {
			s.lnK.addTo(m.set, 1)
			f.times(s.sites, s.lnK.at(theta)+lnA, m.set)
		}
	}
	for j, state := range m.states[i] {
		m.lnW[state] = lnW + f.lnB[j]
		row := m.row(state)
		d := f.d[j*m.k : (j+1)*m.k]
		for k, b := range m.base {
			row[k] = b + d[k]
		}
	}
}

// open is ln(1 + y/K); its derivatives, times w, are added to row.
func (e *effectorSites) open(theta []float64, env Environment, row []float64, w float64) float64 {
	y := env.Effectors[e.effector]
	if y == 0 {
		return 0
	}
	u := math.Log(y) - e.lnK.at(theta)
	filled, _ := logistic(u)
	e.lnK.addTo(row, -w*filled)
	return softplus(u)
}

// softplus is ln(1 + eᵘ).
func softplus(u float64) float64 {
	if u > 0 {
		return u + math.Log1p(math.Exp(-u))
	}
	return math.Log1p(math.Exp(u))
}

// crowd is ln a = ln(1 + Σ y/K) of competitors; its derivatives are added to row.
func crowd(rivals []effectorSites, theta []float64, env Environment, row []float64) float64 {
	switch len(rivals) {
	case 0:
		return 0
	case 1:
		return rivals[0].open(theta, env, row, 1)
	}
	lnA := 0.0
	for _, r := range rivals {
		if y := env.Effectors[r.effector]; y > 0 {
			u := math.Log(y) - r.lnK.at(theta)
			lnA = math.Max(lnA, u) + math.Log1p(math.Exp(-math.Abs(lnA-u)))
		}
	}
	for _, r := range rivals {
		if y := env.Effectors[r.effector]; y > 0 {
			r.lnK.addTo(row, -math.Exp(math.Log(y)-r.lnK.at(theta)-lnA))
		}
	}
	return lnA
}

// folding multiplies out Π_sets (1 + x/K')^n: ln coefficients and derivatives.
type folding struct {
	k, filled   int
	lnB, d      []float64
	lnB2, d2, t []float64
}

func newFolding(n, k int) folding {
	return folding{k: k, lnB: make([]float64, n+1), d: make([]float64, (n+1)*k),
		lnB2: make([]float64, n+1), d2: make([]float64, (n+1)*k), t: make([]float64, n+1)}
}

func (f *folding) start() {
	f.filled = 0
	f.lnB[0] = 0
	clear(f.d[:f.k])
}

// times multiplies by (1 + x/K)^n, with dK = ∂ln K/∂θ.
func (f *folding) times(n int, lnK float64, dK []float64) {
	if f.filled == 0 {
		for i := 0; i <= n; i++ {
			f.lnB[i] = lnChoose[n][i] - float64(i)*lnK
			for k, d := range dK {
				f.d[i*f.k+k] = -float64(i) * d
			}
		}
		f.filled = n
		return
	}
	for i := 0; i <= f.filled+n; i++ {
		f.product(i, n, lnK, dK)
	}
	f.filled += n
	f.lnB, f.lnB2 = f.lnB2, f.lnB
	f.d, f.d2 = f.d2, f.d
}

// product writes coefficient i of the product.
func (f *folding) product(i, n int, lnK float64, dK []float64) {
	low, high := max(0, i-f.filled), min(n, i)
	top := math.Inf(-1)
	for j := low; j <= high; j++ {
		f.t[j] = f.lnB[i-j] + lnChoose[n][j] - float64(j)*lnK
		top = math.Max(top, f.t[j])
	}
	var z float64
	row := f.d2[i*f.k : (i+1)*f.k]
	clear(row)
	for j := low; j <= high; j++ {
		w := math.Exp(f.t[j] - top)
		z += w
		d := f.d[(i-j)*f.k : (i-j+1)*f.k]
		for k := range row {
			row[k] += w * (d[k] - float64(j)*dK[k])
		}
	}
	for k := range row {
		row[k] /= z
	}
	f.lnB2[i] = top + math.Log(z)
}
