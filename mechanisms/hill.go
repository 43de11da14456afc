package mechanisms

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

const hillDoc = `Hill equation, an empirical curve.

	Ȳ = xʰ/(K_halfʰ + xʰ)

x is the free ligand, h the constant n_H. The Hill coefficient is h at every
saturation, and x_90/x_10 = 81^(1/h).

Constants:

	K_half   ligand at half saturation    ligand's unit
	n_H      the exponent h               no unit

Limits: h = 1 is one simple site. A whole number h = n is n sites that fill only
together, which no real molecule does. With h < 1 the curve is exactly that of simple
sites whose ln K is spread with the density of Sips, of standard deviation
(π/√3)·√(1/h² − 1).

What data hold what: points on both sides of half saturation hold both constants. The
exponent depends on the range that is fitted and on the ends of the response where these
are free: it is a comparison, not a mechanism, and no count of sites.

Keys: constants.

Hill 1910, J. Physiol. 40:iv. Sips 1948, J. Chem. Phys. 16:490.
`

// Hill equation, an empirical curve.
//
//	Ȳ = xʰ/(K_halfʰ + xʰ)
//
// x is the free ligand, h the constant n_H. The Hill coefficient is h at every
// saturation, and x_90/x_10 = 81^(1/h).
//
// Constants:
//
//	K_half   ligand at half saturation    ligand's unit
//	n_H      the exponent h               no unit
//
// Limits: h = 1 is one simple site. A whole number h = n is n sites that fill only
// together, which no real molecule does. With h < 1 the curve is exactly that of simple
// sites whose ln K is spread with the density of Sips, of standard deviation
// (π/√3)·√(1/h² − 1).
//
// What data hold what: points on both sides of half saturation hold both constants. The
// exponent depends on the range that is fitted and on the ends of the response where these
// are free: it is a comparison, not a mechanism, and no count of sites.
//
// Keys: constants.
//
// Hill 1910, J. Physiol. 40:iv. Sips 1948, J. Chem. Phys. 16:490.
type hill struct{}

func buildHill(d Definition) (Mechanism, error) {
	var p problems
	p.unread(d, "constants")
	m := hill{}
	p.given(d, m.Constants())
	if err := p.err(); err != nil {
		return nil, err
	}
	return m, nil
}

func (hill) Family() string      { return "hill" }
func (hill) Sites() int          { return 0 }
func (hill) Effectors() []string { return nil }
func (hill) Curve() Curve        { return &hillCurve{jets: newJet(2)} }

func (hill) Constants() []Constant {
	return []Constant{
		{Name: "K_half", Scale: Log, Dimension: 1, Low: 1e-8, High: 1e8, StartLow: 0.1, StartHigh: 10,
			Meaning: "ligand at half saturation"},
		{Name: "n_H", Scale: Log, Low: 0.05, High: 20, StartLow: 0.5, StartHigh: 4,
			Meaning: "Hill exponent of the Hill equation"},
	}
}

// hillCurve is Ȳ = x^h/(K^h + x^h).
type hillCurve struct {
	lnK, h float64
	jets   jet
}

// Bind settles K_half and n_H.
func (c *hillCurve) Bind(theta []float64, _ Environment) {
	c.lnK, c.h = theta[0], math.Exp(theta[1])
}

// Saturation writes Ȳ, ∂Ȳ/∂ln K_half = −hȲ(1−Ȳ) and ∂Ȳ/∂ln n_H = h ln(x/K_half) Ȳ(1−Ȳ).
func (c *hillCurve) Saturation(dst, lnx []float64, grad *mat.Dense) {
	for r, lx := range lnx {
		u := c.h * (lx - c.lnK)
		y, e := logistic(u)
		dst[r] = y
		if grad == nil {
			continue
		}
		v := y * e
		if v == 0 {
			u = 0
		}
		row := grad.RawRowView(r)
		row[0], row[1] = -c.h*v, u*v
	}
}

// logistic is 1/(1+e^{−u}) and its complement.
func logistic(u float64) (y, e float64) {
	if u > 0 {
		z := math.Exp(-u)
		return 1 / (1 + z), z / (1 + z)
	}
	z := math.Exp(u)
	return z / (1 + z), 1 / (1 + z)
}

func (c *hillCurve) At(lnx float64, p *Point) {
	c.jet(lnx, &c.jets, whole)
	c.jets.point(p, c.h, c.h)
	p.NH, p.DNH, p.D2NH = c.h, 0, 0
	p.GradNH[0], p.GradNH[1] = 0, c.h
	clear(p.GradDNH)
}

func (c *hillCurve) jet(lnx float64, j *jet, to depth) {
	j.zero()
	u := c.h * (lnx - c.lnK)
	j.y, j.e = logistic(u)
	v := j.y * j.e
	if v == 0 {
		return
	}
	// In u: y′ = v, y″ = v(1−2y), y‴ = v[(1−2y)² − 2v].
	s := j.e - j.y
	h, y2, y3 := c.h, v*s, v*(s*s-2*v)
	j.y1, j.y2, j.y3 = h*v, h*h*y2, h*h*h*y3
	if to > values {
		j.g[0], j.g[1] = -h*v, u*v
		j.g1[0], j.g1[1] = -h*h*y2, h*(v+u*y2)
		j.g2[0], j.g2[1] = -h*h*h*y3, h*h*(2*y2+u*y3)
	}
}

func (c *hillCurve) endSlopes() (low, high float64) { return c.h, c.h }
func (c *hillCurve) ceiling() float64               { return 1 }

func (c *hillCurve) turns() (first, last float64) { return c.lnK, c.lnK }

// median is K_half: the curve is symmetrical in ln x.
func (c *hillCurve) median() Measure {
	return Measure{Value: c.lnK, Grad: []float64{1, 0}}
}

func (c *hillCurve) interaction() Measure {
	return nothing("the Hill equation has no first and last site")
}
