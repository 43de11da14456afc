package ode

import "math"

// radau is collocation at the Radau points with s = 3, 5 or 7 stages: order
// 2s−1 at the ends of steps, a polynomial of degree s between them, L-stable.
//
//	Zᵢ = h Σⱼ a_ij f(t + cⱼh, y + Zⱼ),   y₁ = y + Z_s
//
// is solved by simplified Newton iterations in W = T⁻¹Z (see tableau), which need
// one factorisation of a real and (s−1)/2 of complex n×n matrices. Jacobian and
// factorisations are kept as long as the iteration converges fast. The order
// follows the speed of convergence.
//
// E. Hairer and G. Wanner, Solving Ordinary Differential Equations II (1996),
// IV.8, and J. Comput. Appl. Math. 111 (1999) 93-111.
type radau struct {
	flow     *flow
	n, all   int // components; those and their sensitivities
	low, top int // indices of the least and greatest tableau allowed
	b        *tableau
	at       int // b is radauTables[at]
	span     int // steps taken since the order changed

	jac     []float64
	jacNew  bool // jac belongs to the present state
	jacWant bool // a new one is wanted
	mat     matrices
	matH    float64 // the step of the factorisations; 0: none
	matB    *tableau

	z, w, f [maxStages][]float64
	prev    [maxStages][]float64 // Z of the last step accepted
	prevB   *tableau
	prevH   float64 // 0: none
	r       []float64
	c       [maxStages / 2][]complex128
	u, v    []float64
	arg     []float64
	slope   []float64
	e       []float64

	kappa    float64 // Newton's tolerance, in units of that of the step
	eta      float64 // Θ/(1−Θ) of the last iteration
	theta    float64 // its rate of convergence Θ; 0 where one correction was enough
	iters    int
	first    bool
	taken    bool // the last attempt was accepted
	refused  bool // the attempt before was refused
	variable variation
}

func (m *radau) resize(fl *flow, o *Options, rtol float64) {
	m.flow, m.n, m.all = fl, fl.n, fl.size()
	m.low, m.top = 0, len(radauTables)-1
	if o.MinOrder > 0 {
		m.low = (o.MinOrder - 5) / 4
	}
	if o.MaxOrder > 0 {
		m.top = (o.MaxOrder - 5) / 4
	}
	n, all := m.n, m.all
	m.jac = grown(m.jac, n*n)
	m.mat.begin(n)
	for i := range m.z {
		m.z[i], m.w[i] = grown(m.z[i], all), grown(m.w[i], all)
		m.f[i], m.prev[i] = grown(m.f[i], all), grown(m.prev[i], all)
	}
	for i := range m.c {
		m.c[i] = grown(m.c[i], all)
	}
	m.r, m.u, m.v = grown(m.r, all), grown(m.u, all), grown(m.v, all)
	m.arg, m.e = grown(m.arg, all), grown(m.e, all)
	m.slope = grown(m.slope, all)
	m.kappa = max(50*ulp/rtol, min(0.03, math.Sqrt(rtol)))
	m.variable.resize(fl, o)
}

func (m *radau) begin(p *point) error {
	m.order(m.low)
	m.jacNew, m.jacWant, m.matH, m.prevH = false, true, 0, 0
	m.eta, m.first, m.refused = 1, true, false
	if err := m.flow.derivs(p.f, p.t, p.y); err != nil {
		return err
	}
	if m.flow.p == 0 {
		return nil
	}
	return m.variable.begin(p)
}

func (m *radau) order(at int) {
	m.at, m.b, m.span = at, &radauTables[at], 0
}

// patience is the number of Newton iterations after which a step is given up.
func (m *radau) patience() int { return 7 + (m.b.s-3)*5/2 }

// rise is Z_s: before accept of the attempt, after it of the step accepted.
func (m *radau) rise() []float64 {
	if m.taken {
		return m.prev[m.prevB.s-1]
	}
	return m.z[m.b.s-1]
}

func (m *radau) power() float64 { return float64(m.b.s + 1) }

func (m *radau) try(p *point, h float64) trial {
	m.taken = false
	tr := m.factor(p, h)
	if tr.fate != stepped {
		return tr
	}
	m.guess(h, 0, m.n)
	if tr = m.newton(p, h); tr.fate != stepped {
		m.jacWant, m.refused = true, true
		return tr
	}
	tr = m.estimate(p, h)
	if tr.fate == stepped && tr.ratio < 1 && m.flow.p > 0 {
		tr = m.vary(p, h, tr)
	}
	if tr.fate != stepped || tr.ratio >= 1 {
		m.jacWant, m.refused = true, true
	}
	nit := 2 * float64(m.patience())
	tr.margin = 0.9 * (nit + 1) / (nit + float64(m.iters))
	return tr
}

// factor brings Jacobian and matrices up to date for a step h.
func (m *radau) factor(p *point, h float64) trial {
	if m.jacWant && !m.jacNew {
		if err := m.flow.jacobian(m.jac, place{p.t, p.y, p.f, p.iw, h}); err != nil {
			return m.flow.trouble(err)
		}
		m.mat.see(m.jac)
		m.jacNew, m.matH = true, 0
	}
	m.jacWant = false
	if m.matH == h && m.matB == m.b {
		return trial{}
	}
	m.flow.stats.Factorisations++
	m.matH, m.matB = 0, m.b
	if !m.mat.factor(m.b, h, m.jac) {
		if notFinite(m.jac) >= 0 {
			return trial{fate: unevaluable, shrink: 0.25}
		}
		return trial{fate: singular, shrink: 0.5}
	}
	m.matH = h
	return trial{}
}

// estimate compares the slope of the polynomial with f at two places: at the left
// end, where it errs most, and at the probe,
//
//	err = (γ/h − J)⁻¹ (f(x, u) − u′),
//
// an error of order s+1 in h. Where the solution is slow the first tells the error;
// in a stiff component that follows a slow course the first is damped to nothing
// and the second is what u errs by there. Both measure the polynomial: at the end
// of the step the error is smaller.
func (m *radau) estimate(p *point, h float64) trial {
	n, e := m.n, m.e[:m.n]
	slope := m.slope[:n]
	combine(slope, &m.b.slope, &m.z, m.b.s, 0)
	for k, s := range slope {
		e[k] = p.f[k] - s/h
	}
	m.mat.solveReal(e)
	err := rms(e, p.iw[:n])
	if err >= 1 && (m.first || m.refused) {
		for k, y := range p.y[:n] {
			m.arg[k] = y + e[k]
		}
		if fault := m.flow.derivs(e, p.t, m.arg); fault != nil {
			return m.flow.trouble(fault)
		}
		for k, s := range slope {
			e[k] -= s / h
		}
		m.mat.solveReal(e)
		err = rms(e, p.iw[:n])
	}
	if err < 1 {
		combine(m.arg[:n], &m.b.probeZ, &m.z, m.b.s, 0)
		plus(m.arg[:n], 1, p.y[:n])
		if fault := m.flow.derivs(e, p.t+m.b.probe*h, m.arg); fault != nil {
			return m.flow.trouble(fault)
		}
		combine(slope, &m.b.probeSlope, &m.z, m.b.s, 0)
		for k, s := range slope {
			e[k] -= s / h
		}
		m.mat.solveReal(e)
		err = max(err, rms(e, p.iw[:n]))
	}
	if !(err <= math.MaxFloat64) {
		return trial{fate: unevaluable, shrink: 0.25}
	}
	return trial{ratio: err}
}

func (m *radau) accept(_ *point, h float64) {
	m.prev, m.z, m.taken = m.z, m.prev, true
	m.prevB, m.prevH = m.b, h
	m.jacNew, m.first, m.refused = false, false, false
	m.flow.stats.Orders[m.at]++
}

func (m *radau) refresh(p *point) error {
	if err := m.flow.derivs(p.f, p.t, p.y); err != nil || m.flow.p == 0 {
		return err
	}
	m.variable.refresh(p, m.prevB.s-1)
	return nil
}

func (m *radau) complete(*point) error { return nil }

func (m *radau) polynomial(dst []float64, x float64) {
	extrapolate(dst, m.prevB, &m.prev, 0, x)
}

// extrapolate writes u(x) − u(1) of a collocation polynomial, from an offset of the
// whole state on.
func extrapolate(dst []float64, b *tableau, z *[maxStages][]float64, from int, x float64) {
	var l [maxStages]float64
	b.basis(&l, x)
	l[b.s-1]--
	combine(dst, &l, z, b.s, from)
}

func (m *radau) coefficients() (*tableau, [][]float64) {
	return m.prevB, m.prev[:m.prevB.s]
}

func (m *radau) culprit(p *point, f fate) int {
	n := m.n
	switch f {
	case stepped:
		return largest(m.e[:n], p.iw[:n])
	case unevaluable:
		for i := range m.b.s {
			if k := notFinite(m.f[i][:n]); k >= 0 {
				return k
			}
		}
		return -1
	}
	for k, square := range m.r[:n] { // of the last correction
		m.e[k] = math.Sqrt(square)
	}
	if k := largest(m.e[:n], p.iw[:n]); k >= 0 {
		return k
	}
	return largest(p.f[:n], p.iw[:n])
}

// largest is the index of the component that is largest in units of its weight,
// or the first that is not finite; −1 where all are zero.
func largest(x, iw []float64) int {
	at, most := -1, 0.0
	for k, v := range x {
		v = math.Abs(v * iw[k])
		if !(v <= math.MaxFloat64) {
			return k
		}
		if v > most {
			at, most = k, v
		}
	}
	return at
}
