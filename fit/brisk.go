package fit

// brisk is a descent for easy refits: normal equations damped by Levenberg's
// and Marquardt's diagonal, of at most briskMost parameters of one sum of
// squares. It hands over whatever is not easy — a bound, a poor condition, a
// slow approach — and then counts for nothing but a better start.
//
//	(A + λ·diag A)·δ = −g ,   A = JᵀJ ,   g = Jᵀr
//
// Marquardt DW (1963) J SIAM 11, 431–441; the rule for λ: Nielsen HB (1999)
// Technical University of Denmark, IMM-REP-1999-05.
type brisk struct {
	m     int
	a     [8][8]float64 // upper triangle of A
	l     [8][8]float64 // its damped factors L·D·Lᵀ, L_ki at [i][k]
	g     [8]float64
	delta [8]float64
}

const (
	briskMost   = 6
	briskSteps  = 25
	briskDamp   = 1e-2 // first λ
	briskLeast  = 1e-5 // λ after a whole step has failed
	briskPivots = 1e-9 // least part of a diagonal element that has to remain
)

// easy says whether brisk takes the problem on: a single sum of squares, few
// parameters, none of them fixed.
func (s *solver) easy() bool {
	return !s.joint && s.weight == nil && s.p <= briskMost && len(s.linear)+len(s.curved) == s.p
}

// descendBriskly descends from the current point, which has been evaluated. It says
// whether that ended at a relative offset of tol inside the bounds.
func (s *solver) descendBriskly(tol float64) bool {
	b := &s.brisk
	b.m = s.p
	b.gather(s.cur)
	lambda, up := briskDamp, 2.0
	for range briskSteps {
		gain, ok := b.solve(lambda)
		if !ok {
			return false
		}
		if gain <= tol*tol*s.cur.obj {
			if lambda == 0 {
				return true
			}
			lambda = 0 // damping hides what is left along loose directions
			continue
		}
		for j := range b.m {
			v := s.cur.theta[j] + b.delta[j]
			if v <= s.low[j] || v >= s.high[j] {
				return false
			}
			s.try.theta[j] = v
		}
		if !s.glance(s.try) || s.try.obj >= s.cur.obj {
			lambda = max(lambda*up, briskLeast)
			up *= 2
			if lambda > 1e6 {
				return false
			}
			continue
		}
		ratio := (s.cur.obj - s.try.obj) / (gain + lambda*b.damped())
		s.cur, s.try = s.try, s.cur
		b.gather(s.cur)
		c := 2*ratio - 1
		lambda *= max(0.1, 1-c*c*c)
		up = 2
	}
	return false
}

// gather sums A and g over the rows.
func (b *brisk) gather(pt *point) {
	if b.m == 4 {
		b.gatherFour(pt)
		return
	}
	m := b.m & 7 // at most briskMost: no index leaves the arrays
	for i := range m {
		b.g[i], b.a[i] = 0, [8]float64{}
	}
	raw := pt.jraw
	for _, r := range pt.res {
		row := raw[:m]
		for i, v := range row {
			i &= 7
			b.g[i] += v * r
			a := &b.a[i]
			for k := i; k < m; k++ {
				a[k] += v * row[k]
			}
		}
		raw = raw[m:]
	}
}

// gatherFour is gather for four parameters, whose sums stay in registers.
func (b *brisk) gatherFour(pt *point) {
	var a00, a01, a02, a03, a11, a12, a13, a22, a23, a33, g0, g1, g2, g3 float64
	raw := pt.jraw
	for _, r := range pt.res {
		v := (*[4]float64)(raw)
		raw = raw[4:]
		v0, v1, v2, v3 := v[0], v[1], v[2], v[3]
		g0 += v0 * r
		g1 += v1 * r
		g2 += v2 * r
		g3 += v3 * r
		a00 += v0 * v0
		a01 += v0 * v1
		a02 += v0 * v2
		a03 += v0 * v3
		a11 += v1 * v1
		a12 += v1 * v2
		a13 += v1 * v3
		a22 += v2 * v2
		a23 += v2 * v3
		a33 += v3 * v3
	}
	b.g = [8]float64{g0, g1, g2, g3}
	b.a[0] = [8]float64{a00, a01, a02, a03}
	b.a[1] = [8]float64{0, a11, a12, a13}
	b.a[2] = [8]float64{0, 0, a22, a23}
	b.a[3] = [8]float64{0, 0, 0, a33}
}

// solve writes δ and returns −gᵀδ. ok says whether the damped A is well enough
// conditioned.
func (b *brisk) solve(lambda float64) (gain float64, ok bool) {
	if b.m == 4 {
		return b.solveFour(lambda)
	}
	m := b.m & 7
	x := b.g
	for i := range m {
		b.l[i] = b.a[i]
		b.l[i][i] *= 1 + lambda
	}
	for i := range m {
		row := &b.l[i]
		if !(row[i] > briskPivots*b.a[i][i]) {
			return 0, false
		}
		inv, v := 1/row[i], x[i]
		for k := i + 1; k < m; k++ {
			f, to := row[k]*inv, &b.l[k]
			for j := k; j < m; j++ {
				to[j] -= f * row[j]
			}
			x[k] -= f * v
			row[k] = f
		}
		gain += v * v * inv
		b.delta[i] = -v * inv
	}
	for i := m - 1; i >= 0; i-- {
		v, row := b.delta[i&7], &b.l[i&7]
		for k := i + 1; k < m; k++ {
			v -= row[k] * b.delta[k]
		}
		b.delta[i&7] = v
	}
	return gain, true
}

// solveFour is solve for four parameters, in registers.
func (b *brisk) solveFour(lambda float64) (gain float64, ok bool) {
	a, g, t := &b.a, &b.g, 1+lambda
	d0 := a[0][0] * t
	i0 := 1 / d0
	l1, l2, l3 := a[0][1]*i0, a[0][2]*i0, a[0][3]*i0
	d1 := a[1][1]*t - l1*a[0][1]
	e2, e3 := a[1][2]-l1*a[0][2], a[1][3]-l1*a[0][3]
	i1 := 1 / d1
	m2, m3 := e2*i1, e3*i1
	d2 := a[2][2]*t - l2*a[0][2] - m2*e2
	f3 := a[2][3] - l2*a[0][3] - m2*e3
	i2 := 1 / d2
	n3 := f3 * i2
	d3 := a[3][3]*t - l3*a[0][3] - m3*e3 - n3*f3
	if !(d0 > 0 && d1 > briskPivots*a[1][1] && d2 > briskPivots*a[2][2] && d3 > briskPivots*a[3][3]) {
		return 0, false
	}
	x0 := g[0]
	x1 := g[1] - l1*x0
	x2 := g[2] - l2*x0 - m2*x1
	x3 := g[3] - l3*x0 - m3*x1 - n3*x2
	s3 := x3 / d3
	s2 := x2*i2 - n3*s3
	s1 := x1*i1 - m2*s2 - m3*s3
	s0 := x0*i0 - l1*s1 - l2*s2 - l3*s3
	b.delta = [8]float64{-s0, -s1, -s2, -s3}
	return x0*x0*i0 + x1*x1*i1 + x2*x2*i2 + x3*s3, true
}

// damped is δᵀ·diag A·δ.
func (b *brisk) damped() (t float64) {
	for i := range b.m & 7 {
		t += b.a[i][i] * b.delta[i] * b.delta[i]
	}
	return t
}
