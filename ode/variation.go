package ode

import (
	"math"
	"slices"
)

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
	m.guess(h, n, m.all)
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
	e, slope := m.e[n:m.all], m.slope[n:m.all]
	combine(slope, &b.slope, &m.z, b.s, n)
	for k, s := range slope {
		e[k] = p.f[n+k] - s/h
	}
	m.mat.solveRealMany(e, m.flow.p)
	err := columns(e, p.iw[n:], v.sums)
	if err < 1 {
		combine(m.arg[:m.all], &b.probeZ, &m.z, b.s, 0)
		plus(m.arg[:m.all], 1, p.y)
		at := place{p.t + b.probe*h, m.arg, m.f[b.s-1], p.iw, h}
		if fault := v.linearise(maxStages, at); fault != nil {
			return m.flow.trouble(fault)
		}
		copy(e, v.par[maxStages])
		m.flow.variational(e, v.jac[maxStages], m.arg[n:m.all])
		combine(slope, &b.probeSlope, &m.z, b.s, n)
		for k, s := range slope {
			e[k] -= s / h
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
		m.residual(h, n, m.all)
		m.mat.solveRealMany(m.r[:np], m.flow.p)
		for i := range b.s / 2 {
			m.mat.solvePairMany(i, m.c[i][:np], m.flow.p)
		}
		before := norm
		m.update(n, m.all)
		norm = m.corrections(p.iw[n:])
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

// corrections is the norm of the last correction of the sensitivities to the
// constant for which it is largest.
func (m *radau) corrections(iw []float64) float64 {
	sums := m.variable.sums
	clear(sums)
	p := len(sums)
	for i := 0; i < len(iw); i += p {
		w := iw[i : i+p]
		for j, v := range m.r[i : i+p] {
			sums[j] += v * w[j] * w[j]
		}
	}
	return math.Sqrt(slices.Max(sums) / float64(m.b.s*m.n))
}
