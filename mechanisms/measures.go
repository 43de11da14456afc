package mechanisms

import (
	"fmt"
	"math"
)

// The measures below are of a bound curve. Where it is Watched, give them
// c.Watch() to measure the response instead of the saturation: a share then is
// of the response between its own limits.

// XAt is ln x at which the share y of all sites is filled, 0 < y < 1. Its
// gradient is −(∂Ȳ/∂θ)/(dȲ/d ln x).
func XAt(c Curve, y float64) Measure {
	lnx, why := solve(c, y)
	if why != "" {
		return nothing(why)
	}
	var p Point
	c.At(lnx, &p)
	return Measure{Value: lnx, Grad: moved(&p)}
}

// HillAtHalf is n_H where half of all sites are filled.
func HillAtHalf(c Curve) Measure {
	lnx, why := solve(c, 0.5)
	if why != "" {
		return nothing(why)
	}
	var p Point
	c.At(lnx, &p)
	grad := moved(&p)
	for k, x := range grad {
		grad[k] = p.GradNH[k] + p.DNH*x
	}
	return Measure{Value: p.NH, Grad: grad}
}

// Hill1090 is the slope from the 10–90 % ratio, ln 81/ln(x_90/x_10) (Goldbeter
// & Koshland 1981).
func Hill1090(c Curve) Measure { return slopeOf(logWidth(c, 0.1, 0.9), 2*math.Log(9)) }

// Hill0199 is the slope from the 1–99 % span, 2 ln 99/ln(x_99/x_01), and that
// span in decades, log₁₀(x_99/x_01).
func Hill0199(c Curve) (n, width Measure) {
	w := logWidth(c, 0.01, 0.99)
	n = slopeOf(w, 2*math.Log(99))
	if w.Why != "" {
		return n, w
	}
	for k := range w.Grad {
		w.Grad[k] /= math.Ln10
	}
	w.Value /= math.Ln10
	return n, w
}

// logWidth is ln(x_high/x_low).
func logWidth(c Curve, low, high float64) Measure {
	a, b := XAt(c, low), XAt(c, high)
	if a.Why != "" {
		return a
	}
	if b.Why != "" {
		return b
	}
	for k := range b.Grad {
		b.Grad[k] -= a.Grad[k]
	}
	b.Value -= a.Value
	return b
}

// slopeOf is span/width, with gradient.
func slopeOf(width Measure, span float64) Measure {
	if width.Why != "" {
		return width
	}
	m := Measure{Value: span / width.Value, Grad: make([]float64, len(width.Grad))}
	for k, g := range width.Grad {
		m.Grad[k] = -m.Value / width.Value * g
	}
	return m
}

// Median is the logarithm of the median ligand activity x_m (Wyman 1964): the
// area under Ȳ against ln x below it is that over Ȳ above it. With a binding
// polynomial, ln x_m = −(1/n) ln(B_n/B_0).
func Median(c Curve) Measure {
	switch c := c.(type) {
	case *watch:
		return nothing("the median ligand activity belongs to binding, not to this response")
	case factored:
		return c.polynomial().median()
	case interface{ median() Measure }:
		return c.median()
	}
	return nothing("this curve has no binding polynomial")
}

// InteractionEnergy is ΔG/RT = −ln(K′_n/K′_1), K′ the intrinsic association
// constants of the last and the first ligand (Wyman 1964): the distance of the
// asymptotes of the Hill plot, not an average per site (Saroff & Minton 1972).
func InteractionEnergy(c Curve) Measure {
	switch c := c.(type) {
	case *watch:
		return nothing("the interaction energy belongs to binding, not to this response")
	case factored:
		return c.polynomial().interaction()
	case interface{ interaction() Measure }:
		return c.interaction()
	}
	return nothing("this curve has no binding polynomial")
}

func nothing(why string) Measure { return Measure{Value: math.NaN(), Why: why} }

// moved is ∂ln x/∂θ at a fixed share.
func moved(p *Point) []float64 {
	grad := make([]float64, len(p.GradY))
	for k, g := range p.GradY {
		grad[k] = -g / p.DY
	}
	return grad
}

func (c *coefficients) median() Measure {
	if math.IsInf(c.lnB[c.n], -1) {
		return nothing("the last site never fills")
	}
	n := float64(c.n)
	m := Measure{Value: (c.lnB[0] - c.lnB[c.n]) / n, Grad: make([]float64, c.k)}
	for k := range m.Grad {
		m.Grad[k] = (c.row(0)[k] - c.row(c.n)[k]) / n
	}
	return m
}

func (c *coefficients) interaction() Measure {
	n := c.n
	switch {
	case n == 1:
		return nothing("one site has nothing to interact with")
	case math.IsInf(c.lnB[1], -1):
		return nothing("no molecule holds one ligand: the lower asymptote of the Hill plot does not have slope 1")
	case math.IsInf(c.lnB[n], -1):
		return nothing("the last site never fills")
	case math.IsInf(c.lnB[n-1], -1):
		return nothing(fmt.Sprintf("no molecule holds %d ligands: the upper asymptote of the Hill plot does not have slope 1", n-1))
	}
	m := Measure{Grad: make([]float64, c.k)}
	m.Value = -(c.lnB[n] - c.lnB[n-1] - c.lnB[1] + c.lnB[0] + 2*math.Log(float64(n)))
	for k := range m.Grad {
		m.Grad[k] = -(c.row(n)[k] - c.row(n - 1)[k] - c.row(1)[k] + c.row(0)[k])
	}
	return m
}

// probe is a curve to be searched: values alone where it has jets.
type probe struct {
	c  Curve
	s  smooth
	j  jet
	pt Point
}

func newProbe(c Curve) *probe {
	p := &probe{c: c}
	p.s, _ = c.(smooth)
	return p
}

// at is ln[y/(1−y)] and its three derivatives at ln x.
func (p *probe) at(lnx float64) (l, l1, l2, l3 float64) {
	if p.s == nil {
		p.c.At(lnx, &p.pt)
		return math.Log(p.pt.Y / p.pt.Empty), p.pt.NH, p.pt.DNH, p.pt.D2NH
	}
	p.s.jet(lnx, &p.j, values)
	p.j.point(&p.pt, math.NaN(), math.NaN())
	return math.Log(p.j.y / p.j.e), p.pt.NH, p.pt.DNH, p.pt.D2NH
}

// turns is where the curve does what it does.
func (p *probe) turns() (first, last float64) {
	if p.s != nil {
		if first, last = p.s.turns(); !math.IsInf(first, 0) && !math.IsInf(last, 0) {
			return min(first, last), max(first, last)
		}
	}
	return 0, 0
}

// flaw says why the curve has no Hill coefficient; "" where it has.
func flaw(c Curve) string {
	if w, ok := c.(*watch); ok {
		return w.flaw()
	}
	return ""
}

// solve finds ln x at the share y by Newton's method on ln[y/(1−y)], whose
// derivative is n_H, kept inside a bracket.
func solve(c Curve, y float64) (lnx float64, why string) {
	if !(y > 0 && y < 1) {
		return 0, fmt.Sprintf("a share of %g is not reached at any ligand", y)
	}
	if why := flaw(c); why != "" {
		return 0, why
	}
	p := newProbe(c)
	if p.s != nil {
		if top := p.s.ceiling(); y >= top {
			return 0, fmt.Sprintf("saturation ends at %.3g, below %g", top, y)
		}
	}
	target := math.Log(y / (1 - y))
	first, last := p.turns()
	x, step := first+(last-first)/2, 8.0
	low, high := math.Inf(-1), math.Inf(1)
	for range 400 {
		l, slope, _, _ := p.at(x)
		g := l - target
		switch {
		case math.IsNaN(g):
			return 0, "the curve cannot be evaluated at these constants"
		case g == 0:
			return x, ""
		case g > 0:
			high = x
		default:
			low = x
		}
		next := x - g/slope
		if open := math.IsInf(low, 0) || math.IsInf(high, 0); open {
			if !(math.Abs(next-x) <= step) {
				next = x - math.Copysign(step, g)
				step *= 2
			}
		} else if !(next > low && next < high) {
			next = low + (high-low)/2
		}
		if math.Abs(next-x) <= 2e-16*max(1, math.Abs(x)) || next == low || next == high {
			return next, ""
		}
		x = next
	}
	return 0, fmt.Sprintf("no ligand was found at which %g is reached", y)
}
