package kinetics

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Wait returns how long a sample that held no ligand must stand at the free ligand x
// until what is bound differs from that at rest by no more than the share short of
// it (0.01 for 99 %) for good.
func (b *Bound) Wait(x, short float64) (float64, error) {
	if !(x > 0) || !(short > 0 && short < 1) {
		return 0, errors.New("a wait needs ligand, and a share between 0 and 1")
	}
	tau, err := b.Relaxations(x)
	if err != nil || len(tau) == 0 {
		return 0, err
	}
	rest := b.Saturation(b.AtRest(nil, nil, x))
	off := func(v []float64) bool { return math.Abs(b.Saturation(v)-rest) > short*rest }
	c := b.clamp(x, 0, nil)
	before := b.AtRest(nil, nil, 0)
	if !off(before) {
		return 0, nil
	}
	// Doubling times from h up to where nothing moves any more.
	last, v := -1, make([]float64, c.n)
	for j := 0; c.h*math.Ldexp(1, j) < 100*tau[0]; j++ {
		copy(v, before)
		c.apply(c.power(j), v, nil)
		if off(v) {
			last = j
		}
	}
	low, high := 0.0, c.h
	if last >= 0 {
		low = c.h * math.Ldexp(1, last)
		high = 2 * low
	}
	for high-low > 1e-10*high {
		t := (low + high) / 2
		copy(v, before)
		c.advance(v, nil, t, 0)
		if off(v) {
			low = t
		} else {
			high = t
		}
	}
	return high, nil
}

// Reading is what a curve says that was read before it came to rest.
type Reading struct {
	Seconds float64
	XHalf   float64 // free ligand at half saturation
	NH      float64 // Hill coefficient there
	// AtRestXHalf and AtRestNH are those of the curve at rest.
	AtRestXHalf, AtRestNH float64
}

// ReadAt is the curve that samples without ligand show t seconds after the ligand,
// of which the free concentration is clamped, was added: where it is half saturated
// and how steep it looks, n_H = d ln[Ȳ/(1 − Ȳ)]/d ln x. A t of +Inf is a curve at rest.
func (b *Bound) ReadAt(t float64) (Reading, error) {
	r := Reading{Seconds: t}
	var err error
	if r.AtRestXHalf, r.AtRestNH, err = b.half(math.Inf(1)); err != nil {
		return r, err
	}
	r.XHalf, r.NH, err = b.half(t)
	return r, err
}

// half finds half saturation after a time, and the slope there.
func (b *Bound) half(t float64) (x, nH float64, err error) {
	low, high := -50.0, 50.0
	y, dy := 0.0, 0.0
	if y, _ = b.early(high, t); !(y > 0.5) {
		return math.NaN(), math.NaN(), errors.New("half saturation is not reached at any ligand in this time")
	}
	lnx := 0.0
	for range 200 {
		y, dy = b.early(lnx, t)
		if y > 0.5 {
			high = lnx
		} else {
			low = lnx
		}
		next := lnx - (y-0.5)/dy
		if !(next > low && next < high) {
			next = (low + high) / 2
		}
		done := math.Abs(next-lnx) < 1e-15*math.Max(1, math.Abs(lnx)) || next == low || next == high
		lnx = next
		if done {
			break
		}
	}
	y, dy = b.early(lnx, t)
	return math.Exp(lnx), dy / (y * (1 - y)), nil
}

// early is Ȳ and dȲ/d ln x after a time.
func (b *Bound) early(lnx, t float64) (y, dy float64) {
	x, all := math.Exp(lnx), b.m.Size()
	n := len(b.m.net.States)
	v, d := make([]float64, n), make([]float64, n)
	if math.IsInf(t, 1) {
		grad := mat.NewDense(n, all+1, nil)
		b.AtRest(v, grad, x)
		mat.Col(d, all, grad)
	} else {
		b.AtRest(v, nil, 0)
		c := b.clamp(x, t, []int{all})
		c.advance(v, [][]float64{d}, t, rounding(t))
	}
	return b.Saturation(v), b.Saturation(d)
}
