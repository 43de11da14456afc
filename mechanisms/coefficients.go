package mechanisms

import "math"

// maxSites is the largest number of sites of a mechanism.
const maxSites = 16

// lnChoose[n][i] is ln C(n, i).
var lnChoose = func() (t [maxSites + 1][maxSites + 1]float64) {
	for n := range t {
		c := 1.0
		for i := 0; i <= n; i++ {
			t[n][i] = math.Log(c)
			c = c * float64(n-i) / float64(i+1)
		}
	}
	return t
}()

// coefficients are those of a binding polynomial P(x) = Σ B_i xⁱ, i = 0 … n,
// in logarithms and with their derivatives. A common factor of all B_i means
// nothing; B_0 is positive.
type coefficients struct {
	n, k int       // sites, constants
	lnB  []float64 // n+1 values ln B_i; −Inf where B_i = 0
	d    []float64 // (n+1)×k: ∂ln B_i/∂θ_k; where B_i = 0, ∂B_i/∂θ_k itself
}

func newCoefficients(n, k int) coefficients {
	return coefficients{n: n, k: k, lnB: make([]float64, n+1), d: make([]float64, (n+1)*k)}
}

// row is the derivatives of coefficient i.
func (c *coefficients) row(i int) []float64 { return c.d[i*c.k : (i+1)*c.k] }

// lowest is the smallest number of ligands above zero that binds at all, n
// where none does.
func (c *coefficients) lowest() int {
	for i := 1; i < c.n; i++ {
		if !math.IsInf(c.lnB[i], -1) {
			return i
		}
	}
	return c.n
}

// highest is the largest number of ligands bound.
func (c *coefficients) highest() int {
	for i := c.n; i > 0; i-- {
		if !math.IsInf(c.lnB[i], -1) {
			return i
		}
	}
	return 0
}

// endSlopes are the limits of n_H at x → 0 and x → ∞. Where the last site never
// fills, the upper one is 0: saturation ends below 1.
func (c *coefficients) endSlopes() (low, high float64) {
	if math.IsInf(c.lnB[c.n], -1) {
		return float64(c.lowest()), 0
	}
	for i := c.n - 1; i >= 0; i-- {
		if !math.IsInf(c.lnB[i], -1) {
			return float64(c.lowest()), float64(c.n - i)
		}
	}
	return float64(c.lowest()), float64(c.n)
}

// turns are the ln x at which the first and the last change of the most filled
// ligation lies: the ends of the upper hull of (i, ln B_i). All that a curve
// does, it does between them and a few units of ln x beyond.
func (c *coefficients) turns() (first, last float64) {
	first, last = math.Inf(1), math.Inf(-1)
	top := c.highest()
	for i := 1; i <= top; i++ {
		first = math.Min(first, (c.lnB[0]-c.lnB[i])/float64(i))
	}
	for i := 0; i < top; i++ {
		last = math.Max(last, (c.lnB[i]-c.lnB[top])/float64(top-i))
	}
	return first, last
}

// binder writes the coefficients at given constants.
type binder interface {
	bind(c *coefficients, theta []float64, env Environment)
}
