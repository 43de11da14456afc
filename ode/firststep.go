package ode

import "math"

// first chooses the size of the first step: that asked for, or about that at which
// a step of order k has an error of the tolerance, from |f| and |f′| at the start.
// E. Hairer, S. P. Nørsett and G. Wanner, Solving Ordinary Differential Equations
// I (1993), II.4.
func (s *Solver) first() (float64, error) {
	room := s.end - s.p.t
	if h := s.Options.FirstStep; h > 0 {
		return math.Copysign(h, room), nil
	}
	iw := s.p.iw[:s.flow.n]
	d0, d1 := rms(s.p.y[:len(iw)], iw), rms(s.p.f[:len(iw)], iw)
	h := 1e-6
	if d0 > 1e-5 && d1 > 1e-5 {
		h = 0.01 * d0 / d1
	}
	h = math.Copysign(min(h, math.Abs(room)), room)
	if d1 == 0 {
		h = 1e-6 * room
	}
	d2, h, err := s.bend(h)
	if err != nil {
		return 0, err
	}
	next := max(1e-6*math.Abs(room), 1e-3*math.Abs(h))
	if most := max(d1, d2); most > 1e-15 {
		next = math.Pow(0.01/most, 1/s.m.power())
	}
	return math.Copysign(min(100*math.Abs(h), next, math.Abs(room)), room), nil
}

// bend is |f′| from a step of Euler's method. The step is made smaller until f has
// a value at its end.
func (s *Solver) bend(h float64) (float64, float64, error) {
	p, n := &s.p, s.flow.n
	y, d := s.out[:n], s.low[:n]
	defer clear(s.low)
	for range 20 {
		for i, v := range p.y[:n] {
			y[i] = v + h*p.f[i]
		}
		err := s.flow.derivs(d, p.t+h, y)
		if err != nil && s.flow.trouble(err).fate == broken {
			return 0, 0, s.systemFailed(err)
		}
		if err == nil && notFinite(d) < 0 {
			for i, v := range p.f[:n] {
				d[i] -= v
			}
			return rms(d, p.iw[:n]) / math.Abs(h), h, nil
		}
		h *= 0.1
	}
	return math.Inf(1), h, nil
}
