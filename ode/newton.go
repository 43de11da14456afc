package ode

import "math"

// guess starts the iteration for part of the whole state from the polynomial of
// the last step.
func (m *radau) guess(h float64, from, to int) {
	b := m.b
	if m.prevH == 0 {
		for i := range b.s {
			clear(m.z[i][from:to])
			clear(m.w[i][from:to])
		}
		return
	}
	r := h / m.prevH
	for i := range b.s {
		extrapolate(m.z[i][from:to], m.prevB, &m.prev, from, 1+r*b.c[i])
	}
	for i := range b.s {
		combine(m.w[i][from:to], &b.inv[i], &m.z, b.s, from)
	}
}

// newton solves for the stages of a step h from p.
//
// The rate Θ is the ratio of corrections (the geometric mean of the last two);
// what is left after a correction Δ is about Θ/(1−Θ)·‖Δ‖.
func (m *radau) newton(p *point, h float64) trial {
	b := m.b
	eta := math.Sqrt(m.eta * math.Sqrt(m.eta))
	m.theta = 0
	var norm, before, ratio float64
	for it := 1; ; it++ {
		m.iters = it
		if tr := m.stages(p, h); tr.fate != stepped {
			return tr
		}
		m.residual(h, 0, m.n)
		m.mat.solveReal(m.r[:m.n])
		for i := range b.s / 2 {
			m.mat.solvePair(i, m.c[i][:m.n])
		}
		m.flow.stats.Iterations++
		m.update(0, m.n)
		before, norm = norm, m.correction(p.iw[:m.n])
		if !(norm <= math.MaxFloat64) {
			return trial{fate: unevaluable, shrink: 0.25}
		}
		if it > 1 && norm > 0 {
			older := ratio
			ratio = norm / before
			m.theta = ratio
			if it > 2 {
				m.theta = math.Sqrt(ratio * older)
			}
			if m.theta >= 0.99 {
				return trial{fate: diverged, shrink: 0.5}
			}
			eta = m.theta / (1 - m.theta)
			left := m.patience() - it
			off := eta * norm * math.Pow(m.theta, float64(left)) / m.kappa
			if off > 1 {
				q := min(20, off)
				return trial{fate: diverged, shrink: 0.8 * math.Pow(q, -1/float64(4+left))}
			}
		}
		if eta*norm <= m.kappa {
			m.eta = max(eta, 1e-12)
			return trial{}
		}
	}
}

// stages evaluates f at the stages.
func (m *radau) stages(p *point, h float64) trial {
	n, b := m.n, m.b
	y, arg := p.y[:n], m.arg[:n]
	for i := range b.s {
		z := m.z[i][:n]
		for k, v := range y {
			arg[k] = v + z[k]
		}
		if err := m.flow.derivs(m.f[i], p.t+b.c[i]*h, arg); err != nil {
			return m.flow.trouble(err)
		}
	}
	return trial{}
}

// residual writes T⁻¹F − h⁻¹ΛW of part of the whole state to r and c.
func (m *radau) residual(h float64, from, to int) {
	b := m.b
	r, u, v := m.r[:to-from], m.u[:to-from], m.v[:to-from]
	combine(r, &b.inv[0], &m.f, b.s, from)
	plus(r, -b.gamma/h, m.w[0][from:to])
	for i := range b.s / 2 {
		re, im := 1+2*i, 2+2*i
		combine(u, &b.inv[re], &m.f, b.s, from)
		combine(v, &b.inv[im], &m.f, b.s, from)
		al, be := b.alpha[i]/h, b.beta[i]/h
		x, y, c := m.w[re][from:to], m.w[im][from:to], m.c[i][:to-from]
		for k, p := range x {
			q := y[k]
			c[k] = complex(u[k]-al*p-be*q, v[k]+be*p-al*q)
		}
	}
}

// update adds the correction in r and c to W of part of the whole state and sets
// Z = TW there. It leaves in r the sum of the squares of the correction over the
// stages.
func (m *radau) update(from, to int) {
	b := m.b
	r := m.r[:to-from]
	for k, w := range m.w[0][from:to] {
		d := r[k]
		m.w[0][from+k] = w + d
		r[k] = d * d
	}
	for i := range b.s / 2 {
		x, y, c := m.w[1+2*i][from:to], m.w[2+2*i][from:to], m.c[i][:to-from]
		for k, d := range c {
			re, im := real(d), imag(d)
			x[k] += re
			y[k] += im
			r[k] += re*re + im*im
		}
	}
	for i := range b.s {
		combine(m.z[i][from:to], &b.t[i], &m.w, b.s, from)
	}
}

// correction is the norm of the last correction of the state.
func (m *radau) correction(iw []float64) float64 {
	var sum float64
	for k, w := range iw {
		sum += m.r[k] * w * w
	}
	return math.Sqrt(sum / float64(m.b.s*len(iw)))
}
