package mechanisms

import (
	"slices"

	"gonum.org/v1/gonum/mat"
)

// polynomialCurve is the curve of a mechanism with a binding polynomial.
type polynomialCurve struct {
	coefficients
	binder binder
	sat    *average
	detail *detail // nil where the ligations are all there is to tell
}

func newPolynomialCurve(n, k int, b binder) *polynomialCurve {
	p := &polynomialCurve{coefficients: newCoefficients(n, k), binder: b}
	p.sat = newAverage(&p.coefficients, filled(n), empty(n), nil)
	return p
}

// filled is the share of sites filled at each ligation, i/n.
func filled(n int) []float64 {
	o := make([]float64, n+1)
	for i := range o {
		o[i] = float64(i) / float64(n)
	}
	return o
}

// empty is the share of sites empty at each ligation.
func empty(n int) []float64 {
	o := filled(n)
	slices.Reverse(o)
	return o
}

// Bind settles the polynomial at θ.
func (p *polynomialCurve) Bind(theta []float64, env Environment) {
	p.binder.bind(&p.coefficients, theta, env)
	p.sat.rebind()
}

// Saturation writes Ȳ and its gradient at each ln x.
func (p *polynomialCurve) Saturation(dst, lnx []float64, grad *mat.Dense) {
	p.sat.curve(dst, lnx, grad)
}

// At writes saturation and Hill coefficient at one ln x.
func (p *polynomialCurve) At(lnx float64, pt *Point) {
	p.sat.jet(lnx, &p.sat.jets, whole)
	low, high := p.endSlopes()
	p.sat.jets.point(pt, low, high)
}

func (p *polynomialCurve) jet(lnx float64, j *jet, to depth) { p.sat.jet(lnx, j, to) }

func (p *polynomialCurve) ceiling() float64 { return float64(p.highest()) / float64(p.n) }

func (p *polynomialCurve) polynomial() *coefficients { return &p.coefficients }

// factored is a curve with a binding polynomial.
type factored interface {
	smooth
	Populated
	polynomial() *coefficients
}
