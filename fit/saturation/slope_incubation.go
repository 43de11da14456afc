package saturation

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/mechanisms"
)

// unrested is one site read before it came to rest: K its dissociation constant,
// m the half-lives of dissociation that it stood, τ = m ln 2. With z = x/K,
//
//	y = z/(1+z) · (1 − e^{−(1+z)τ}) .
//
// It is no equilibrium mechanism; it explains steep curves (theory: section 6).
type unrested struct{}

func (unrested) Family() string      { return "incubation" }
func (unrested) Sites() int          { return 1 }
func (unrested) Effectors() []string { return nil }

func (unrested) Constants() []mechanisms.Constant {
	return []mechanisms.Constant{
		{Name: "K", Scale: mechanisms.Log, Dimension: 1, Low: 1e-6, High: 1e3, StartLow: 0.1, StartHigh: 1,
			Meaning: "dissociation constant of the site"},
		{Name: "half_lives", Scale: mechanisms.Log, Low: 1e-3, High: 30, StartLow: 0.2, StartHigh: 3,
			EdgeHigh: "at rest", EdgeLow: "stopped at once",
			Meaning: "incubation in half-lives of dissociation"},
	}
}

func (unrested) Curve() mechanisms.Curve { return &unrestedCurve{} }

type unrestedCurve struct{ lnK, tau float64 }

func (c *unrestedCurve) Bind(theta []float64, _ mechanisms.Environment) {
	c.lnK, c.tau = theta[0], math.Exp(theta[1])*math.Ln2
}

// share is y, 1 − y, ∂y/∂ln x and ∂y/∂ln τ.
func (c *unrestedCurve) share(lnx float64) (y, rest, byX, byTau float64) {
	z := math.Exp(lnx - c.lnK)
	if math.IsInf(z, 1) {
		return 1, 0, 0, 0
	}
	q, p := z/(1+z), 1/(1+z)
	e := math.Exp(-(1 + z) * c.tau)
	gone := -math.Expm1(-(1 + z) * c.tau)
	return q * gone, p + q*e, q*p*gone + q*z*c.tau*e, z * c.tau * e
}

// Saturation writes y and its gradient at each ln x.
func (c *unrestedCurve) Saturation(dst, lnx []float64, grad *mat.Dense) {
	for i, l := range lnx {
		y, _, byX, byTau := c.share(l)
		dst[i] = y
		if grad != nil {
			grad.Set(i, 0, -byX)
			grad.Set(i, 1, byTau)
		}
	}
}

// At writes saturation, slope and gradient of the saturation: all that a fit
// asks for, and no derivative of the slope.
func (c *unrestedCurve) At(lnx float64, p *mechanisms.Point) {
	y, rest, byX, byTau := c.share(lnx)
	if len(p.GradY) != 2 {
		p.GradY = make([]float64, 2)
	}
	p.Y, p.Empty, p.DY = y, rest, byX
	p.NH = byX / (y * rest)
	p.GradY[0], p.GradY[1] = -byX, byTau
}
