package fit

import "math"

// settle solves for the linear parameters of pt, which has been evaluated: a
// linear least-squares problem with bounds. Residuals, sums of squares and θ of
// pt follow; its Jacobian of the other parameters is that at the former values.
// It returns the squared length by which the residuals moved.
func (s *solver) settle(pt *point) (moved float64) {
	if len(s.linear) == 0 {
		return 0
	}
	s.begin(pt)
	for _, j := range s.linear {
		s.load(pt, j)
		pt.f.push()
		pt.free = append(pt.free, j)
	}
	f, m := pt.f, pt.f.m
	pt.lin, pt.solved = m, !s.joint
	f.solve(s.change, f.z, m)
	for k, j := range s.linear {
		v := pt.theta[j] + s.change[k]
		if v <= s.low[j] || v >= s.high[j] {
			s.settleInBox(pt)
			pt.solved = false
			break
		}
	}
	for k, j := range s.linear {
		d := s.change[k]
		if d == 0 {
			continue
		}
		pt.theta[j] = min(max(pt.theta[j]+d, s.low[j]), s.high[j])
		for i := range pt.res {
			pt.res[i] += d * pt.jraw[i*s.p+j]
		}
	}
	for i := 0; i < m; i++ {
		v := dot(f.r[i*f.most+i:i*f.most+m], s.change[i:m])
		moved += v * v
	}
	clear(f.z[:m])
	s.measure(pt)
	return moved
}

// settleInBox solves min ‖R·δ + z‖ within the bounds of the linear parameters by
// an active set: clamp the bound met first, solve for the rest, release the
// bound whose multiplier has the wrong sign.
func (s *solver) settleInBox(pt *point) {
	f, b := pt.f, s.step
	m := f.m
	for i := 0; i < m; i++ {
		copy(b.s[i*m+i:i*m+m], f.r[i*f.most+i:i*f.most+m])
		b.z[i] = f.z[i]
	}
	for k, j := range s.linear {
		b.low[k], b.high[k] = s.low[j]-pt.theta[j], s.high[j]-pt.theta[j]
	}
	b.leastSquares(s.change[:m], m)
}

// leastSquares writes the δ that minimises ‖S·δ + z‖ within the box, for an
// S of m columns.
func (b *boxedStep) leastSquares(delta []float64, m int) {
	const far = 1e300 // no radius
	clear(b.stop[:m])
	b.region.solve(b.t, b.s, b.z, m, m, far)
	for range 10 * m {
		if j := b.leaves(m); j >= 0 {
			b.clamp(j)
			b.again(m, m, far)
			continue
		}
		j := b.wrong(m)
		if j < 0 {
			break
		}
		b.stop[j] = 0
		b.again(m, m, far)
	}
	for j := range delta {
		delta[j] = min(max(b.t[j], b.low[j]), b.high[j])
	}
}

func (b *boxedStep) clamp(j int) {
	if b.t[j] < b.low[j] {
		b.t[j], b.stop[j] = b.low[j], -1
	} else {
		b.t[j], b.stop[j] = b.high[j], 1
	}
}

// wrong returns the settled column whose release gains most, −1 for none.
func (b *boxedStep) wrong(m int) int {
	worst, which := 1e-12*norm(b.z[:m]), -1
	for j := 0; j < m; j++ {
		if b.stop[j] == 0 {
			continue
		}
		var g, length float64
		for i := 0; i <= j; i++ {
			v := dot(b.s[i*m+i:i*m+m], b.t[i:m]) + b.z[i]
			a := b.s[i*m+j]
			g += a * v
			length += a * a
		}
		if length == 0 {
			continue
		}
		g /= math.Sqrt(length)
		if gain := float64(b.stop[j]) * g; gain > worst {
			worst, which = gain, j
		}
	}
	return which
}
