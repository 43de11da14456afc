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
	l     [8][8]float64 // its damped factors L·D·Lᵀ: L_ki at [i][k], 1/D_i at [i][i]
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
		if !b.factor(lambda) {
			return false
		}
		gain := b.solve() // gᵀ(A + λ diag A)⁻¹g
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

// factor takes A + λ·diag A apart, and says whether it is well enough
// conditioned.
func (b *brisk) factor(lambda float64) bool {
	m := b.m & 7
	for i := range m {
		b.l[i] = b.a[i]
		b.l[i][i] *= 1 + lambda
	}
	for i := range m {
		row := &b.l[i]
		d := row[i]
		if !(d > briskPivots*b.a[i][i]) {
			return false
		}
		inv := 1 / d
		for k := i + 1; k < m; k++ {
			f := row[k] * inv
			to := &b.l[k]
			for j := k; j < m; j++ {
				to[j] -= f * row[j]
			}
			row[k] = f
		}
		row[i] = inv
	}
	return true
}

// solve writes δ and returns −gᵀδ.
func (b *brisk) solve() (gain float64) {
	m := b.m & 7
	x := b.g
	for i := range m {
		v, row := x[i], &b.l[i]
		for k := i + 1; k < m; k++ {
			x[k] -= row[k] * v
		}
		gain += v * v * row[i]
		b.delta[i] = -v * row[i]
	}
	for i := m - 1; i >= 0; i-- {
		v, row := b.delta[i&7], &b.l[i&7]
		for k := i + 1; k < m; k++ {
			v -= row[k] * b.delta[k]
		}
		b.delta[i&7] = v
	}
	return gain
}

// damped is δᵀ·diag A·δ.
func (b *brisk) damped() (t float64) {
	for i := range b.m & 7 {
		t += b.a[i][i] * b.delta[i] * b.delta[i]
	}
	return t
}
