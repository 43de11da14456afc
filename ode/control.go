package ode

import "math"

// controller sizes steps from error estimates.
//
// With errors errₙ in units of the tolerance, behaving as h^k, the next step is
// the smaller of the elementary choice and Gustafsson's prediction,
//
//	h·m·err^(−1/k)   and   h·m·(h/h₋)·(err₋/err²)^(1/k),
//
// K. Gustafsson, ACM Trans. Math. Software 20 (1994) 496-517.
type controller struct {
	h, err float64 // of the last step taken; h == 0: none
	cut    bool    // the last attempt was refused
}

const (
	mostGrowth  = 8.0
	leastGrowth = 0.125
	// errorFloor keeps one lucky estimate from ruling the next step.
	errorFloor = 0.01
)

func (c *controller) reset() { *c = controller{} }

// refused is the size to try after a step whose error was too large.
func (c *controller) refused(h float64, tr *trial, k float64) float64 {
	if c.h == 0 && !c.cut {
		c.cut = true
		return 0.1 * h
	}
	c.cut = true
	return h * clamp(tr.margin*math.Pow(tr.ratio, -1/k), leastGrowth, 0.9)
}

// failed is the size to try after an attempt that came to nothing.
func (c *controller) failed(h float64, tr *trial) float64 {
	c.cut = true
	return h * tr.shrink
}

// taken is the size to try after a step that was taken.
func (c *controller) taken(h float64, tr *trial, k float64) float64 {
	grow := mostGrowth
	if tr.ratio > 0 {
		grow = tr.margin * math.Pow(tr.ratio, -1/k)
		if c.h != 0 && !c.cut {
			grow = min(grow, 0.9*h/c.h*math.Pow(c.err/(tr.ratio*tr.ratio), 1/k))
		}
	}
	grow = clamp(grow, leastGrowth, mostGrowth)
	if c.cut {
		grow = min(grow, 1)
	}
	c.h, c.err, c.cut = h, max(tr.ratio, errorFloor), false
	return h * grow
}

func clamp(x, low, high float64) float64 { return min(max(x, low), high) }

// firstStep is about the size at which a step of order k has an error of the
// tolerance, from |f| and |f′| at the start. E. Hairer, S. P. Nørsett and
// G. Wanner, Solving Ordinary Differential Equations I (1993), II.4.
//
// room is the distance to the end, with sign; y and d are workspace.
func firstStep(fl *flow, p *point, room, k float64, y, d []float64) (float64, error) {
	n := fl.n
	iw := p.iw[:n]
	d0, d1 := rms(p.y[:n], iw), rms(p.f[:n], iw)
	h := 1e-6
	if d0 > 1e-5 && d1 > 1e-5 {
		h = 0.01 * d0 / d1
	}
	h = math.Copysign(min(h, math.Abs(room)), room)
	if d1 == 0 {
		h = 1e-6 * room
	}
	d2 := math.Inf(1)
	for range 20 {
		for i, v := range p.y[:n] {
			y[i] = v + h*p.f[i]
		}
		err := fl.derivs(d, p.t+h, y)
		if err != nil && fl.trouble(err).fate == broken {
			return 0, err
		}
		if err == nil && notFinite(d[:n]) < 0 {
			for i, v := range p.f[:n] {
				d[i] -= v
			}
			d2 = rms(d, iw) / math.Abs(h)
			break
		}
		h *= 0.1
	}
	next := max(1e-6*math.Abs(room), 1e-3*math.Abs(h))
	if most := max(d1, d2); most > 1e-15 {
		next = math.Pow(0.01/most, 1/k)
	}
	return math.Copysign(min(100*math.Abs(h), next, math.Abs(room)), room), nil
}
