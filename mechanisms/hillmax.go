package mechanisms

import "math"

// even is a range of n_H that counts as none.
const even = 1e-9

// HillMax is the largest n_H of a curve, with the share of sites filled where
// it lies. Where n_H only nears its largest value at an end of the curve, n is
// that limit and at says so; where n_H is the same everywhere, at says that.
// Gradients: ∂n/∂θ = ∂n_H/∂θ at that place, which moves by −(∂n_H′/∂θ)/n_H″.
func HillMax(c Curve) (n, at Measure) {
	if why := flaw(c); why != "" {
		return nothing(why), nothing(why)
	}
	p := newProbe(c)
	peak, value, flat := p.peak()
	low, high := math.NaN(), math.NaN()
	if p.s != nil {
		low, high = p.s.endSlopes()
	}
	var pt Point
	switch {
	case flat:
		first, last := p.turns()
		c.At(first+(last-first)/2, &pt)
		return Measure{Value: pt.NH, Grad: pt.GradNH}, nothing("n_H is the same at every saturation")
	case math.IsInf(value, -1) || max(low, high) >= value-even:
		c.At(0, &pt)
		return Measure{Value: max(low, high), Grad: make([]float64, len(pt.GradY))}, nothing(endOf(low, high))
	}
	c.At(peak, &pt)
	n = Measure{Value: pt.NH, Grad: pt.GradNH}
	at = Measure{Value: pt.Y, Grad: make([]float64, len(pt.GradY))}
	for k := range at.Grad {
		at.Grad[k] = pt.GradY[k] - pt.DY*pt.GradDNH[k]/pt.D2NH
	}
	return n, at
}

func endOf(low, high float64) string {
	switch {
	case math.Abs(low-high) <= even:
		return "n_H is largest at both ends of the curve, towards no and full saturation"
	case low > high:
		return "n_H is largest at the lower end of the curve, towards no saturation"
	}
	return "n_H is largest at the upper end of the curve, towards full saturation"
}

// peak is the place and height of the highest maximum of n_H inside the curve,
// −Inf where there is none; flat says that n_H does not vary at all.
func (p *probe) peak() (place, height float64, flat bool) {
	const beyond, step = 14.0, 0.2
	first, last := p.turns()
	from, to := first-beyond, last+beyond
	steps := int(min(max((to-from)/step, 1), 4000))
	height = math.Inf(-1)
	least, most := math.Inf(1), math.Inf(-1)
	var before, slopeBefore float64
	for i := 0; i <= steps; i++ {
		x := from + (to-from)*float64(i)/float64(steps)
		_, l1, l2, _ := p.at(x)
		if math.IsNaN(l1) {
			continue
		}
		least, most = min(least, l1), max(most, l1)
		if i > 0 && slopeBefore > 0 && l2 <= 0 {
			if top, h := p.climb(before, x); h > height {
				place, height = top, h
			}
		}
		before, slopeBefore = x, l2
	}
	return place, height, most-least <= even
}

// climb finds the maximum of n_H between low and high, where its derivative
// changes sign, by Newton's method kept inside the bracket.
func (p *probe) climb(low, high float64) (place, height float64) {
	x := low + (high-low)/2
	for range 100 {
		_, l1, l2, l3 := p.at(x)
		height, place = l1, x
		if l2 == 0 {
			break
		}
		if l2 > 0 {
			low = x
		} else {
			high = x
		}
		next := x - l2/l3
		if !(next > low && next < high) {
			next = low + (high-low)/2
		}
		if math.Abs(next-x) <= 1e-14*max(1, math.Abs(x)) {
			break
		}
		x = next
	}
	return place, height
}
