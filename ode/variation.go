package ode

import "math"

// variation is what Radau steps need for sensitivities S = ∂y/∂θ. The stages of
//
//	S′ = (∂f/∂y) S + ∂f/∂θ
//
// are those of the state differentiated: with ∂f/∂y taken at each stage they are
// the exact derivative of the step with respect to θ. They are solved after the
// state, by iterations with the same matrices.
type variation struct {
	fl           *flow
	jac, par     [maxStages + 1][]float64 // ∂f/∂y (n×n) and ∂f/∂θ (n×p) at each stage and the probe
	sums         []float64
	eta          float64
	uncontrolled bool
}

func (v *variation) resize(fl *flow, o *Options) {
	v.fl = fl
	if fl.p == 0 {
		return
	}
	v.uncontrolled = o.Sensitivity.Uncontrolled
	v.sums = grown(v.sums, fl.p)
	for i := range v.jac {
		v.jac[i] = grown(v.jac[i], fl.n*fl.n)
		v.par[i] = grown(v.par[i], fl.n*fl.p)
	}
}

func (v *variation) begin(p *point) error {
	v.eta = 1
	if err := v.linearise(0, place{p.t, p.y, p.f, p.iw, 0}); err != nil {
		return err
	}
	v.refresh(p, 0)
	return nil
}

// linearise takes the derivatives of f at a stage.
func (v *variation) linearise(stage int, at place) error {
	if err := v.fl.exactJacobian(v.jac[stage], at); err != nil {
		return err
	}
	return v.fl.paramJacobian(v.par[stage], at.t, at.y)
}

// refresh sets S′ in p.f from the derivatives at one stage.
func (v *variation) refresh(p *point, stage int) {
	n := v.fl.n
	d := p.f[n:]
	copy(d, v.par[stage])
	v.fl.variational(d, v.jac[stage], p.y[n:])
}

// vary takes the sensitivities through the step that the state has just made.
func (m *radau) vary(p *point, h float64, tr trial) trial {
	n, b, v := m.n, m.b, &m.variable
	for i := range b.s {
		for k, y := range p.y[:n] {
			m.arg[k] = y + m.z[i][k]
		}
		if err := v.linearise(i, place{p.t + b.c[i]*h, m.arg, m.f[i], p.iw, h}); err != nil {
			return m.flow.trouble(err)
		}
	}
	m.guessRange(h, n, m.all)
	if out := m.iterate(p, h); out.fate != stepped {
		return out
	}
	if v.uncontrolled {
		return tr
	}
	err := m.varyError(p, h)
	if err.fate == stepped {
		tr.ratio = max(tr.ratio, err.ratio)
		return tr
	}
	return err
}

// varyError is estimate for the sensitivities.
func (m *radau) varyError(p *point, h float64) trial {
	n, b, v := m.n, m.b, &m.variable
	e, slope := m.e[n:m.all], m.slope[:m.all]
	m.mix(slope, &b.slope, 1/h)
	for k := range e {
		e[k] = p.f[n+k] - slope[n+k]
	}
	m.mat.solveRealMany(e, m.flow.p)
	err := columns(e, p.iw[n:], v.sums)
	if err < 1 {
		m.mix(m.arg[:m.all], &b.probeZ, 1)
		plus(m.arg[:m.all], 1, p.y)
		at := place{p.t + b.probe*h, m.arg, m.f[b.s-1], p.iw, h}
		if fault := v.linearise(maxStages, at); fault != nil {
			return m.flow.trouble(fault)
		}
		copy(e, v.par[maxStages])
		m.flow.variational(e, v.jac[maxStages], m.arg[n:m.all])
		m.mix(slope, &b.probeSlope, 1/h)
		for k := range e {
			e[k] -= slope[n+k]
		}
		m.mat.solveRealMany(e, m.flow.p)
		err = max(err, columns(e, p.iw[n:], v.sums))
	}
	if !(err <= math.MaxFloat64) {
		return trial{fate: unevaluable, shrink: 0.25}
	}
	return trial{ratio: err}
}

// iterate solves for the stages of the sensitivities.
func (m *radau) iterate(p *point, h float64) trial {
	n, np, b, v := m.n, m.all-m.n, m.b, &m.variable
	eta := math.Sqrt(v.eta * math.Sqrt(v.eta))
	var norm float64
	for it := 1; it <= m.patience(); it++ {
		for i := range b.s {
			s := m.arg[n:m.all]
			for k, y := range p.y[n:m.all] {
				s[k] = y + m.z[i][n+k]
			}
			d := m.f[i][n:m.all]
			copy(d, v.par[i])
			m.flow.variational(d, v.jac[i], s)
		}
		m.residualRange(h, n, m.all)
		m.mat.solveRealMany(m.r[:np], m.flow.p)
		for i := range b.s / 2 {
			m.mat.solvePairMany(i, m.c[i][:np], m.flow.p)
		}
		before := norm
		norm = m.updateColumns(p.iw)
		if !(norm <= math.MaxFloat64) {
			return trial{fate: unevaluable, shrink: 0.25}
		}
		if it > 1 && norm > 0 {
			theta := norm / before
			if theta >= 0.99 {
				break
			}
			eta = theta / (1 - theta)
		}
		if eta*norm <= m.kappa {
			v.eta = max(eta, 1e-12)
			return trial{}
		}
	}
	return trial{fate: diverged, shrink: 0.5}
}

// updateColumns is update for the sensitivities; its norm is that of the column
// where it is largest.
func (m *radau) updateColumns(iw []float64) float64 {
	b, n, p, sums := m.b, m.n, m.flow.p, m.variable.sums
	clear(sums)
	var x, y [maxStages]float64
	for k, at := 0, n; at < m.all; k, at = k+1, at+1 {
		d := m.r[k]
		square := d * d
		x[0] = m.w[0][at] + d
		for i := range b.s / 2 {
			re, im := real(m.c[i][k]), imag(m.c[i][k])
			square += re*re + im*im
			x[1+2*i] = m.w[1+2*i][at] + re
			x[2+2*i] = m.w[2+2*i][at] + im
		}
		sums[k%p] += square * iw[at] * iw[at]
		b.apply(&b.t, &x, &y)
		for i := range b.s {
			m.w[i][at], m.z[i][at] = x[i], y[i]
		}
	}
	var most float64
	for _, s := range sums {
		most = max(most, s)
	}
	return math.Sqrt(most / float64(b.s*n))
}
