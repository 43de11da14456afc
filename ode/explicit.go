package ode

import "math"

// explicit is a Runge–Kutta pair of order 8 with error estimators of orders 5 and
// 3 and a polynomial of order 7 (see explicitA). Sensitivities are integrated as
// further components.
type explicit struct {
	flow   *flow
	n, all int
	k      [explicitAll][]float64
	arg    []float64
	gain   []float64 // y₁ − y
	e5, e3 []float64
	sums   []float64
	jac    []float64
	poly   [7][]float64
	polyH  float64 // of the step whose polynomial is in poly
	ready  bool    // poly is complete

	start        []float64 // y at the start of the step accepted
	startT       float64
	uncontrolled bool
	stiff, easy  int // steps in a row that look stiff, or not
	seemsStiff   bool
}

func (m *explicit) resize(fl *flow, o *Options) {
	m.flow, m.n, m.all = fl, fl.n, fl.size()
	for i := range m.k {
		m.k[i] = grown(m.k[i], m.all)
	}
	for i := range m.poly {
		m.poly[i] = grown(m.poly[i], m.all)
	}
	m.arg, m.gain = grown(m.arg, m.all), grown(m.gain, m.all)
	m.e5, m.e3 = grown(m.e5, m.all), grown(m.e3, m.all)
	m.start = grown(m.start, m.all)
	if fl.p > 0 {
		m.sums = grown(m.sums, fl.p)
		m.jac = grown(m.jac, fl.n*fl.n)
		m.uncontrolled = o.Sensitivity.Uncontrolled
	}
}

// stableReach is about where the region of stability ends on the real axis.
const stableReach = 6.1

func (m *explicit) begin(p *point) error {
	m.stiff, m.easy, m.seemsStiff, m.ready = 0, 0, false, false
	return m.derivs(place{p.t, p.y, p.f, p.iw, 0})
}

// derivs evaluates f and, where asked for, S′ into at.f.
func (m *explicit) derivs(at place) error {
	if err := m.flow.derivs(at.f, at.t, at.y); err != nil || m.flow.p == 0 {
		return err
	}
	if err := m.flow.exactJacobian(m.jac, at); err != nil {
		return err
	}
	if err := m.flow.paramJacobian(at.f[m.n:], at.t, at.y); err != nil {
		return err
	}
	m.flow.variational(at.f[m.n:], m.jac, at.y[m.n:])
	return nil
}

func (m *explicit) rise() []float64 { return m.gain }

func (m *explicit) power() float64 { return 8 }

func (m *explicit) settle(_, proposed float64) float64 { return proposed }

func (m *explicit) try(p *point, h float64) trial {
	copy(m.k[0], p.f)
	for i := 1; i < explicitStages; i++ {
		m.stage(h, i, m.arg)
		plus(m.arg, 1, p.y)
		if err := m.derivs(place{p.t + explicitC[i]*h, m.arg, m.k[i], p.iw, h}); err != nil {
			return m.flow.trouble(err)
		}
	}
	m.stage(h, explicitStages, m.gain)
	err := m.estimate(p, h)
	if !(err <= math.MaxFloat64) {
		return trial{fate: unevaluable, shrink: 0.25}
	}
	return trial{ratio: err, margin: 0.9}
}

// stage writes h Σ a_ij kⱼ.
func (m *explicit) stage(h float64, i int, dst []float64) {
	clear(dst)
	for j, a := range explicitA[i][:i] {
		if a != 0 {
			plus(dst, h*a, m.k[j])
		}
	}
}

// estimate is h‖e₅‖²/√(‖e₅‖² + 0.01‖e₃‖²) of the state or, where larger, of the
// sensitivities to one constant.
func (m *explicit) estimate(p *point, h float64) float64 {
	clear(m.e5)
	clear(m.e3)
	for j := range explicitStages {
		if a := explicitE5[j]; a != 0 {
			plus(m.e5, a, m.k[j])
		}
		if a := explicitA[explicitStages][j] - explicitE3[j]; a != 0 {
			plus(m.e3, a, m.k[j])
		}
	}
	n := m.n
	err := blend(rms(m.e5[:n], p.iw[:n]), rms(m.e3[:n], p.iw[:n]), h)
	if m.flow.p > 0 && !m.uncontrolled {
		iw := p.iw[n:]
		err = max(err, blend(columns(m.e5[n:], iw, m.sums), columns(m.e3[n:], iw, m.sums), h))
	}
	return err
}

func blend(e5, e3, h float64) float64 {
	if e5 == 0 {
		return 0
	}
	return math.Abs(h) * e5 * e5 / math.Sqrt(e5*e5+0.01*e3*e3)
}

func (m *explicit) accept(p *point, h float64) {
	copy(m.start, p.y)
	m.startT, m.polyH, m.ready = p.t, h, false
}

func (m *explicit) refresh(p *point) error {
	if err := m.derivs(place{p.t, p.y, p.f, p.iw, m.polyH}); err != nil {
		return err
	}
	copy(m.k[explicitStages], p.f)
	m.watch(p)
	return nil
}

// watch compares the last two slopes with the states they belong to: where their
// ratio times h stays beyond the region of stability the problem is stiff.
func (m *explicit) watch(p *point) {
	n := m.n
	var num, den float64
	for k := range n {
		df := m.k[explicitStages][k] - m.k[explicitStages-1][k]
		dy := p.y[k] - m.arg[k]
		num, den = num+df*df, den+dy*dy
	}
	if den > 0 && math.Abs(m.polyH)*math.Sqrt(num/den) > stableReach {
		m.easy = 0
		if m.stiff++; m.stiff == 15 {
			m.seemsStiff = true
		}
	} else if m.easy++; m.easy == 6 {
		m.stiff = 0
	}
}

// complete works out the coefficients of the polynomial, for which three more
// evaluations are needed:
//
//	u = y₀ + x(F₀ + (1−x)(F₁ + x(F₂ + (1−x)(F₃ + x(F₄ + (1−x)(F₅ + x F₆))))))
func (m *explicit) complete(p *point) error {
	if m.ready {
		return nil
	}
	h := m.polyH
	for i := explicitStages + 1; i < explicitAll; i++ {
		m.stage(h, i, m.arg)
		plus(m.arg, 1, m.start)
		if err := m.derivs(place{m.startT + explicitC[i]*h, m.arg, m.k[i], p.iw, h}); err != nil {
			return err
		}
	}
	for i := range explicitD {
		f := m.poly[3+i]
		clear(f)
		for j, a := range explicitD[i] {
			if a != 0 {
				plus(f, a*h, m.k[j])
			}
		}
	}
	for k, rise := range m.gain {
		left, right := h*m.k[0][k], h*m.k[explicitStages][k]
		m.poly[0][k], m.poly[1][k], m.poly[2][k] = rise, left-rise, 2*rise-left-right
	}
	m.ready = true
	return nil
}

func (m *explicit) polynomial(dst []float64, x float64) {
	c := nest(x)
	clear(dst)
	for i, f := range m.poly {
		plus(dst, c[i], f[:len(dst)])
	}
}

// nest has the factors of F₀ … F₆ in u(x) − u(1).
func nest(x float64) (c [7]float64) {
	c[0] = x - 1
	c[1] = x * (1 - x)
	for i := 2; i < len(c); i++ {
		if i%2 == 0 {
			c[i] = c[i-1] * x
		} else {
			c[i] = c[i-1] * (1 - x)
		}
	}
	return c
}

func (m *explicit) coefficients() (*tableau, [][]float64) { return nil, m.poly[:] }

func (m *explicit) culprit(p *point, f fate) int {
	if f == stepped {
		return largest(m.e5[:m.n], p.iw[:m.n])
	}
	for i := range explicitStages {
		if k := notFinite(m.k[i][:m.n]); k >= 0 {
			return k
		}
	}
	return -1
}
