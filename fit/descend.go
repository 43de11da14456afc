package fit

import "math"

const (
	enough  = 1e-6  // relative offset at which a fit has converged
	rough   = 1e-4  // the same, for a start among many: 1e-8 of the sum of squares
	loose   = 1e-5  // the same, for refits of replicate data
	hardly  = 1e-4  // least share of the predicted gain that is a gain
	tiniest = 1e-15 // least radius relative to ‖D θ‖
	epsilon = 0x1p-52

	// Settling the linear parameters makes the Jacobian of the others stale: it
	// is evaluated again where residuals moved by that part of their square. To
	// settle from so far that they shrink by this factor loses digits: then once
	// more.
	stale = 0.3
	lost  = 1e12

	// A step that would end on a bound goes but a part of the way there until as
	// many steps in a row have wanted to: a bound is often a saddle (equal
	// constants of two conformations) from which no step leads away.
	meetings = 3
	approach = 0.5
)

// ending says how a descent ended.
type ending uint8

const (
	failed      ending = iota // the start cannot be evaluated
	stationary                // relative offset small enough
	rounding                  // residuals at the level of rounding
	stalled                   // no step lowers the objective any more
	exhausted                 // out of iterations
	interrupted               // told to stop
)

// begun evaluates the current point at theta, clamped into the box, and settles
// its linear parameters.
func (s *solver) begun(theta []float64) bool {
	s.place(theta)
	clear(s.span)
	clear(s.hits)
	if !s.evaluate(s.cur) {
		return false
	}
	for range 3 {
		if len(s.linear) == 0 {
			return true
		}
		moved := s.settle(s.cur)
		if !s.evaluate(s.cur) {
			return false
		}
		if moved < lost*s.total(s.cur) {
			return true
		}
	}
	return true
}

// place puts the current point at theta, clamped into the box.
func (s *solver) place(theta []float64) {
	for j, v := range theta {
		s.cur.theta[j] = min(max(v, s.low[j]), s.high[j])
	}
}

// descend goes from the current point to a minimum by Gauss–Newton steps in a
// trust region whose axes are scaled by the longest that each column of the
// Jacobian has been. It ends at a relative offset of tol.
//
// Moré JJ (1978), in Numerical Analysis, Dundee 1977 (Springer), 105–116.
func (s *solver) descend(done <-chan struct{}, tol float64, most int) ending {
	radius := -1.0
	for iter := 0; ; iter++ {
		s.factor()
		if s.offset <= tol {
			return stationary
		}
		if s.atRounding() {
			return rounding
		}
		if iter >= most {
			return exhausted
		}
		select {
		case <-done:
			return interrupted
		default:
		}
		if radius < 0 {
			radius = s.firstRadius()
		}
		for first := true; ; first = false {
			length, ratio := s.attempt(radius)
			radius = s.resize(radius, length, ratio, iter == 0 && first)
			if ratio >= hardly {
				break
			}
			if !(radius > tiniest*s.size()) || length == 0 {
				return stalled
			}
		}
		s.countHits()
		s.cur, s.try = s.try, s.cur
	}
}

// countHits notes which parameters the step has taken towards a bound.
func (s *solver) countHits() {
	for k, j := range s.cur.free[s.cur.lin:] {
		s.hits[j]++
		if s.step.stop[k] == 0 {
			s.hits[j] = 0
		}
	}
}

// firstRadius is ‖D θ‖, or ‖D‖ where θ is zero.
func (s *solver) firstRadius() float64 {
	if r := s.size(); r > 0 {
		return r
	}
	var d float64
	for _, j := range s.cur.free[s.cur.lin:] {
		d = math.Hypot(d, s.span[j])
	}
	return d
}

// size is ‖D θ‖ of the free curved parameters.
func (s *solver) size() float64 {
	var d float64
	for _, j := range s.cur.free[s.cur.lin:] {
		v := s.span[j] * s.cur.theta[j]
		d += v * v
	}
	return math.Sqrt(d)
}

// atRounding says whether what is left of the gradient is rounding of what the
// residuals are the differences of: ‖z‖ against ‖D θ‖, each |θ| at least a
// quarter of its start box.
func (s *solver) atRounding() bool {
	pt := s.cur
	var scale float64
	for k, j := range pt.free {
		d := s.span[j]
		if k < pt.lin {
			d = pt.f.r[k*pt.f.most+k]
		}
		v := d * max(math.Abs(pt.theta[j]), s.width[j])
		scale += v * v
	}
	return s.left <= 4*epsilon*math.Sqrt(scale)
}

// attempt takes a step within the radius, evaluates the trial point there and
// returns the length of the step and the share of the predicted gain that came
// true; −Inf where the trial is not finite.
func (s *solver) attempt(radius float64) (length, ratio float64) {
	s.propose(radius)
	length = norm(s.step.t[:s.cur.f.m-s.cur.lin])
	if !(s.gain > 0) {
		return 0, math.Inf(-1)
	}
	if !s.evaluate(s.try) {
		return length, math.Inf(-1)
	}
	if moved := s.settle(s.try); moved > stale*s.total(s.try) {
		if s.try.obj < s.cur.obj && !s.evaluate(s.try) {
			return length, math.Inf(-1)
		}
	}
	if ratio = (s.cur.obj - s.try.obj) / s.gain; math.IsNaN(ratio) {
		ratio = math.Inf(-1)
	}
	return length, ratio
}

// propose writes the θ of the trial point.
func (s *solver) propose(radius float64) {
	q := s.cur.lin
	s.frame()
	b, m := s.step, s.cur.f.m-q
	b.solve(m, m, radius)
	z := s.cur.f.z[:q]
	s.gain = b.gain + dot(z, z)
	for k := 0; k < m; k++ {
		s.change[q+k] = 0
		if d := s.span[s.cur.free[q+k]]; d > 0 {
			s.change[q+k] = b.t[k] / d
		}
	}
	s.follow()
	copy(s.try.theta, s.cur.theta)
	for k, j := range s.cur.free {
		v := min(max(s.cur.theta[j]+s.change[k], s.low[j]), s.high[j])
		switch {
		case k < q || s.hits[j] < meetings:
		case b.stop[k-q] < 0:
			v = s.low[j]
		case b.stop[k-q] > 0:
			v = s.high[j]
		}
		s.try.theta[j] = v
	}
}

// frame sets up the problem of a step of the curved parameters, in units in
// which each column has been at most of length one.
func (s *solver) frame() {
	f, b, q := s.cur.f, s.step, s.cur.lin
	m := f.m - q
	for k := 0; k < m; k++ {
		j := s.cur.free[q+k]
		d := s.span[j]
		b.z[k] = f.z[q+k]
		b.low[k], b.high[k] = (s.low[j]-s.cur.theta[j])*d, (s.high[j]-s.cur.theta[j])*d
		if s.hits[j] < meetings {
			b.low[k] *= approach
			b.high[k] *= approach
		}
		var inv float64
		if d > 0 {
			inv = 1 / d
		}
		for i := 0; i <= k; i++ {
			b.s[i*m+k] = f.r[(q+i)*f.most+q+k] * inv
		}
	}
}

// follow completes the change of the curved parameters by that of the linear
// ones that keeps the linearised residuals least.
func (s *solver) follow() {
	f, q := s.cur.f, s.cur.lin
	for i := q - 1; i >= 0; i-- {
		row := f.r[i*f.most : i*f.most+f.m]
		s.change[i] = 0
		if row[i] != 0 {
			s.change[i] = -(f.z[i] + dot(row[i+1:], s.change[i+1:f.m])) / row[i]
		}
	}
}

// resize is the radius after a step of that length and ratio.
func (s *solver) resize(radius, length, ratio float64, first bool) float64 {
	if first {
		radius = min(radius, length)
	}
	switch {
	case math.IsInf(ratio, -1):
		return 0.25 * min(radius, length)
	case ratio <= 0.25:
		shrink := 0.5
		if actual := ratio * s.gain; actual < 0 {
			shrink = s.step.slope / (2*s.step.slope + actual)
		}
		return min(max(shrink, 0.1), 0.5) * min(radius, 10*length)
	case ratio >= 0.75 || s.step.lambda == 0:
		return 2 * length
	}
	return radius
}
