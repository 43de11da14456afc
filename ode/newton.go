package ode

import "math"

// guess starts Newton's iteration from the polynomial of the last step.
func (m *radau) guess(h float64) {
	m.guessRange(h, 0, m.n)
}

// guessRange sets Z and W of part of the whole state.
func (m *radau) guessRange(h float64, from, to int) {
	b := m.b
	if m.prevH == 0 {
		for i := range b.s {
			clear(m.z[i][from:to])
			clear(m.w[i][from:to])
		}
		return
	}
	var prev [maxStages][]float64
	for j := range m.prevB.s {
		prev[j] = m.prev[j][from:to]
	}
	r := h / m.prevH
	for i := range b.s {
		extrapolate(m.z[i][from:to], m.prevB, &prev, 1+r*b.c[i])
	}
	var x, y [maxStages]float64
	for k := from; k < to; k++ {
		for i := range b.s {
			x[i] = m.z[i][k]
		}
		b.apply(&b.inv, &x, &y)
		for i := range b.s {
			m.w[i][k] = y[i]
		}
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
		m.residual(h)
		m.mat.solveReal(m.r[:m.n])
		for i := range b.s / 2 {
			m.mat.solvePair(i, m.c[i][:m.n])
		}
		m.flow.stats.Iterations++
		before, norm = norm, m.update(p.iw[:m.n])
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

// residual writes T⁻¹F − h⁻¹ΛW to r and c.
func (m *radau) residual(h float64) {
	m.residualRange(h, 0, m.n)
}

func (m *radau) residualRange(h float64, from, to int) {
	b := m.b
	g := b.gamma / h
	if b.s == 3 {
		m.residual3(h, from, to)
		return
	}
	var x, y [maxStages]float64
	var al, be [maxStages / 2]float64
	for i := range al {
		al[i], be[i] = b.alpha[i]/h, b.beta[i]/h
	}
	for k := from; k < to; k++ {
		for i := range b.s {
			x[i] = m.f[i][k]
		}
		b.apply(&b.inv, &x, &y)
		m.r[k-from] = y[0] - g*m.w[0][k]
		for i := range b.s / 2 {
			u, v := m.w[1+2*i][k], m.w[2+2*i][k]
			m.c[i][k-from] = complex(y[1+2*i]-al[i]*u-be[i]*v, y[2+2*i]+be[i]*u-al[i]*v)
		}
	}
}

func (m *radau) residual3(h float64, from, to int) {
	b := m.b
	g, al, be := b.gamma/h, b.alpha[0]/h, b.beta[0]/h
	f0, f1, f2 := m.f[0][from:to], m.f[1][from:to], m.f[2][from:to]
	w0, w1, w2 := m.w[0][from:to], m.w[1][from:to], m.w[2][from:to]
	n := len(f0)
	f1, f2, w0, w1, w2 = f1[:n], f2[:n], w0[:n], w1[:n], w2[:n]
	r, c := m.r[:n], m.c[0][:n]
	for k, x := range f0 {
		y, z := f1[k], f2[k]
		u, v := w1[k], w2[k]
		r[k] = b.inv[0][0]*x + b.inv[0][1]*y + b.inv[0][2]*z - g*w0[k]
		c[k] = complex(
			b.inv[1][0]*x+b.inv[1][1]*y+b.inv[1][2]*z-al*u-be*v,
			b.inv[2][0]*x+b.inv[2][1]*y+b.inv[2][2]*z+be*u-al*v)
	}
}

// update adds the correction in r and c to W, sets Z = TW, and returns the norm of
// the correction in units of the weights.
func (m *radau) update(iw []float64) float64 {
	b := m.b
	if b.s == 3 {
		return m.update3(iw)
	}
	var sum float64
	var x, y [maxStages]float64
	for k, s := range iw {
		d := m.r[k]
		square := d * d
		x[0] = m.w[0][k] + d
		for i := range b.s / 2 {
			re, im := real(m.c[i][k]), imag(m.c[i][k])
			square += re*re + im*im
			x[1+2*i] = m.w[1+2*i][k] + re
			x[2+2*i] = m.w[2+2*i][k] + im
		}
		sum += square * s * s
		b.apply(&b.t, &x, &y)
		for i := range b.s {
			m.w[i][k], m.z[i][k] = x[i], y[i]
		}
	}
	return math.Sqrt(sum / float64(b.s*len(iw)))
}

func (m *radau) update3(iw []float64) float64 {
	b, n := m.b, len(iw)
	z0, z1, z2 := m.z[0][:n], m.z[1][:n], m.z[2][:n]
	w0, w1, w2 := m.w[0][:n], m.w[1][:n], m.w[2][:n]
	r, c := m.r[:n], m.c[0][:n]
	var sum float64
	for k, s := range iw {
		x, y, z := r[k], real(c[k]), imag(c[k])
		sum += (x*x + y*y + z*z) * s * s
		x += w0[k]
		y += w1[k]
		z += w2[k]
		w0[k], w1[k], w2[k] = x, y, z
		z0[k] = b.t[0][0]*x + b.t[0][1]*y + b.t[0][2]*z
		z1[k] = b.t[1][0]*x + b.t[1][1]*y + b.t[1][2]*z
		z2[k] = x + y
	}
	return math.Sqrt(sum / float64(3*n))
}
