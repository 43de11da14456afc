package fit

import "math"

// load writes column j of the Jacobian of pt, in units of scaled residuals,
// into its next column.
func (s *solver) load(pt *point, j int) {
	a := pt.f.next()
	if !s.joint {
		for i, k := 0, j; i < len(a); i, k = i+1, k+s.p {
			a[i] = pt.jraw[k]
		}
		return
	}
	for b, f := range pt.scale {
		for i := s.rows[b]; i < s.rows[b+1]; i++ {
			a[i] = f * pt.jraw[i*s.p+j]
		}
	}
}

// begin empties f of pt and gives it the scaled residuals of pt.
func (s *solver) begin(pt *point) {
	pt.f.m, pt.free, pt.lin = 0, pt.free[:0], 0
	copy(pt.f.rhs, pt.res)
	if s.joint {
		for b, f := range pt.scale {
			for i := s.rows[b]; i < s.rows[b+1]; i++ {
				pt.f.rhs[i] *= f
			}
		}
	}
}

// pushes says whether the objective of pt falls when parameter j, on a bound,
// leaves the box.
func (s *solver) pushes(pt *point, j int) bool {
	v := pt.theta[j]
	if v > s.low[j] && v < s.high[j] {
		return false
	}
	var g float64
	for b, f := range pt.scale {
		var gb float64
		for i := s.rows[b]; i < s.rows[b+1]; i++ {
			gb += pt.jraw[i*s.p+j] * pt.res[i]
		}
		g += f * f * gb
	}
	if v <= s.low[j] {
		return g >= 0
	}
	return g <= 0
}

// take orthogonalises the free columns among which of pt.
func (s *solver) take(pt *point, which []int) {
	for _, j := range which {
		if !s.pushes(pt, j) {
			s.load(pt, j)
			pt.f.push()
			pt.free = append(pt.free, j)
		}
	}
}

// factor takes the current point apart: Q, R and z of its free columns, linear
// ones first; the lengths D; the relative offset.
func (s *solver) factor() {
	pt, f := s.cur, s.cur.f
	if !pt.solved {
		s.begin(pt)
		s.take(pt, s.linear)
		pt.lin = f.m
	}
	pt.solved = false
	s.take(pt, s.curved)
	for k := pt.lin; k < f.m; k++ {
		var d float64
		for i := pt.lin; i <= k; i++ {
			v := f.r[i*f.most+k]
			d += v * v
		}
		j := pt.free[k]
		s.span[j] = max(s.span[j], math.Sqrt(d))
	}
	s.left = norm(f.z[:f.m])
	s.offset = relative(s.left, math.Sqrt(s.total(pt)))
}

// relative is z/r, zero where both are.
func relative(z, r float64) float64 {
	if z == 0 {
		return 0
	}
	return z / r
}
