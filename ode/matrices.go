package ode

import "slices"

// matrices holds the factorisations a Radau step of s stages solves with:
// γ/h − J and (αᵢ − iβᵢ)/h − J for (s−1)/2 pairs. Sparse ones are used where the
// pattern saves work, dense ones with exchange of rows elsewhere.
type matrices struct {
	n       int
	pat     pattern
	planned *plan // nil: dense
	dense   bool  // the last factorisation had to be dense
	real    denseLU[float64]
	pair    [maxStages / 2]denseLU[complex128]
	sreal   sparseLU[float64]
	spair   [maxStages / 2]sparseLU[complex128]
	known   []knownPlan
}

// knownPlan remembers what a pattern led to, for the next integration. The plan
// depends on the pattern alone, so that remembering changes no digit.
type knownPlan struct {
	bits []uint64
	q    *plan // nil: dense
}

// begin forgets the pattern of the integration before.
func (m *matrices) begin(n int) {
	if m.n != n {
		m.n, m.known = n, nil
	}
	m.pat.resize(n)
	m.planned = nil
}

const (
	// leastSparse is the dimension from which a pattern is looked at.
	leastSparse = 4
	// mostKnown bounds the patterns remembered.
	mostKnown = 64
)

// see takes note of the entries of J (row-major) that are not zero.
func (m *matrices) see(jac []float64) {
	if m.n < leastSparse || !m.pat.include(jac) {
		return
	}
	m.planned = m.plan()
	if m.planned == nil {
		return
	}
	m.sreal.use(m.planned)
	for i := range m.spair {
		m.spair[i].use(m.planned)
	}
}

// plan decides between sparse and dense for the pattern seen.
func (m *matrices) plan() *plan {
	for _, k := range m.known {
		if slices.Equal(k.bits, m.pat.bits) {
			return k.q
		}
	}
	q := newPlan(&m.pat)
	if 2*q.work() > m.n*m.n*m.n/3 {
		q = nil
	}
	if len(m.known) == mostKnown {
		m.known = m.known[:0]
	}
	m.known = append(m.known, knownPlan{slices.Clone(m.pat.bits), q})
	return q
}

// factor prepares the matrices; false where one is singular.
func (m *matrices) factor(b *tableau, h float64, jac []float64) bool {
	m.dense = m.planned == nil || !m.factorSparse(b, h, jac)
	return !m.dense || m.factorDense(b, h, jac)
}

func (m *matrices) factorSparse(b *tableau, h float64, jac []float64) bool {
	f, q := &m.sreal, m.planned
	clear(f.a)
	for k, at := range q.to {
		f.a[at] = -jac[q.from[k]]
	}
	for i := range b.s / 2 {
		g := &m.spair[i]
		for k, v := range f.a {
			g.a[k] = complex(v, 0)
		}
		d := complex(b.alpha[i]/h, -b.beta[i]/h)
		for _, at := range q.diag {
			g.a[at] += d
		}
	}
	for _, at := range q.diag {
		f.a[at] += b.gamma / h
	}
	ok := f.factor()
	for i := range b.s / 2 {
		ok = ok && m.spair[i].factor()
	}
	return ok
}

func (m *matrices) factorDense(b *tableau, h float64, jac []float64) bool {
	n := m.n
	m.real.resize(n)
	for j := range n {
		col := m.real.a[j*n : j*n+n]
		for i, k := 0, j; i < n; i, k = i+1, k+n {
			col[i] = -jac[k]
		}
	}
	for i := range b.s / 2 {
		g := &m.pair[i]
		g.resize(n)
		for k, v := range m.real.a {
			g.a[k] = complex(v, 0)
		}
		d := complex(b.alpha[i]/h, -b.beta[i]/h)
		for k := 0; k < n*n; k += n + 1 {
			g.a[k] += d
		}
	}
	for k := 0; k < n*n; k += n + 1 {
		m.real.a[k] += b.gamma / h
	}
	ok := m.real.factor()
	for i := range b.s / 2 {
		ok = ok && m.pair[i].factor()
	}
	return ok
}

func (m *matrices) solveReal(b []float64) {
	if m.dense {
		m.real.solve(b)
	} else {
		m.sreal.solve(b)
	}
}

func (m *matrices) solvePair(i int, b []complex128) {
	if m.dense {
		m.pair[i].solve(b)
	} else {
		m.spair[i].solve(b)
	}
}

func (m *matrices) solveRealMany(b []float64, p int) {
	if m.dense {
		m.real.solveMany(b, p)
	} else {
		m.sreal.solveMany(b, p)
	}
}

func (m *matrices) solvePairMany(i int, b []complex128, p int) {
	if m.dense {
		m.pair[i].solveMany(b, p)
	} else {
		m.spair[i].solveMany(b, p)
	}
}
