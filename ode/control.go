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
