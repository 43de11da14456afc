package fit

import "math"

// leap finds an end of an interval by solving the linearised problem of the end
// over and over, each time at the θ that the last one gave: no profile is
// computed on the way. It gives up where that does not settle.
//
// straight says whether the end lies about where the curvature at the estimate
// would have it.
func (f *Profiler) leap(t target, v, d float64) (value float64, straight, ok bool) {
	f.s.restart(f.result)
	full := f.limit - f.result.Objective
	half, ok := f.settleAt(t, d, f.result.Objective+full/4, 0.1, 6)
	if !ok {
		return 0, false, false
	}
	value, ok = f.settleAt(t, d, f.limit, 1e-5, 40)
	if !ok || d*(value-v) < 0 {
		return 0, false, false
	}
	ratio := (value - v) / (half - v)
	return value, ratio > 1.6 && ratio < 2.5, true
}

// restart puts the current point back to a result.
func (s *solver) restart(r *Result) {
	copy(s.cur.theta, r.Theta)
	s.evaluate(s.cur)
}

// settleAt iterates until the current point is an extreme of the quantity at
// that objective, and returns the quantity there. tol is the length of the last
// step, relative to the radius of the region: the value is good to its square.
func (f *Profiler) settleAt(t target, d, limit, tol float64, most int) (value float64, ok bool) {
	s, e := f.s, f.e
	for range most {
		v := t.value(s.cur.theta, f.grad)
		if math.IsInf(v, 0) || math.IsNaN(v) {
			return 0, false
		}
		rho2 := f.linearise(limit)
		e.solve(len(f.free), rho2, d)
		if e.loose || e.pinned || e.force == 0 {
			return 0, false
		}
		var moved, change float64
		m := len(f.free)
		for i := 0; i < m; i++ {
			w := dot(e.r[i*m+i:i*m+m], e.s[i:m])
			moved += w * w
			change += f.grad[f.free[i]] * e.s[i]
		}
		if moved <= tol*tol*rho2 {
			return v + change, true
		}
		if !f.walk(limit) {
			return 0, false
		}
	}
	return 0, false
}

// linearise takes the current point apart for an end at that objective, and
// returns ρ².
func (f *Profiler) linearise(limit float64) (rho2 float64) {
	s, e := f.s, f.e
	pt := s.cur
	s.begin(pt)
	for _, j := range f.free {
		s.load(pt, j)
		pt.f.push()
	}
	m, c := len(f.free), pt.f
	rho2 = limit - pt.obj
	for i, j := range f.free {
		copy(e.r[i*m+i:i*m+m], c.r[i*c.most+i:i*c.most+m])
		e.z[i], e.c[i] = c.z[i], f.grad[j]
		e.low[i], e.high[i] = s.low[j]-pt.theta[j], s.high[j]-pt.theta[j]
		rho2 += c.z[i] * c.z[i]
	}
	return rho2
}

// walk takes the step of e, shortened where the objective would rise far beyond
// the limit.
func (f *Profiler) walk(limit float64) bool {
	s, e := f.s, f.e
	from := f.result.Objective
	share := 1.0
	for range 6 {
		for i, j := range f.free {
			v := s.cur.theta[j] + share*e.s[i]
			if share == 1 && e.stop[i] < 0 {
				v = s.low[j]
			} else if share == 1 && e.stop[i] > 0 {
				v = s.high[j]
			}
			s.try.theta[j] = min(max(v, s.low[j]), s.high[j])
		}
		if s.evaluate(s.try) && s.try.obj-from < 4*(max(limit, s.cur.obj)-from) {
			s.cur, s.try = s.try, s.cur
			f.meet(s.cur.obj, s.cur.theta)
			return true
		}
		share /= 2
	}
	return false
}
