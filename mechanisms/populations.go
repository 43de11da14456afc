package mechanisms

import "fmt"

// Populated is a bound Curve that knows how its molecules are distributed over
// states.
type Populated interface {
	Curve
	// StateNames names the states: "R, 2 bound".
	StateNames() []string
	// Populations writes the share of each state at ln x into dst, nil to have
	// it made. The shares are of molecules; of sites in a mixture, of protomers
	// in an assembly. They sum to 1.
	Populations(dst []float64, lnx float64) []float64
}

// detail is the states of a polynomial below its ligations.
type detail struct {
	ensemble *ensemble
	names    []string
}

func ligationNames(n int) []string {
	names := make([]string, n+1)
	for i := range names {
		names[i] = fmt.Sprintf("%d bound", i)
	}
	return names
}

// StateNames names the states.
func (p *polynomialCurve) StateNames() []string {
	if p.detail != nil {
		return append([]string(nil), p.detail.names...)
	}
	return ligationNames(p.n)
}

// Populations writes the share of each state.
func (p *polynomialCurve) Populations(dst []float64, lnx float64) []float64 {
	p.sat.terms(lnx, false)
	if p.detail == nil {
		dst = sized(dst, p.n+1)
		copy(dst, p.sat.p)
		return dst
	}
	e := p.detail.ensemble
	dst = sized(dst, len(e.ligation))
	for s, i := range e.ligation {
		dst[s] = e.share[s] * p.sat.p[i]
	}
	return dst
}

// Populations writes the share of each state.
func (c *concertedCurve) Populations(dst []float64, lnx float64) []float64 {
	c.polynomial()
	return c.polynomialCurve.Populations(dst, lnx)
}

// StateNames names the numbers of ligands bound.
func (c *independentCurve) StateNames() []string { return ligationNames(c.coefs.n) }

// Populations writes the share of molecules with each number of ligands.
func (c *independentCurve) Populations(dst []float64, lnx float64) []float64 {
	a := c.terms()
	a.terms(lnx, false)
	dst = sized(dst, len(a.p))
	copy(dst, a.p)
	return dst
}
