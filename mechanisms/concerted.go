package mechanisms

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// concertedCurve is the closed form of two conformations R and T with n equal
// sites each:
//
//	Ȳ = R̄ Ȳ_R + T̄ Ȳ_T ,  Ȳ_R = α/(1+α) ,  Ȳ_T = cα/(1+cα) ,  T̄/R̄ = L[(1+cα)/(1+α)]ⁿ
//
// with α = x/K. Effectors only change L, c and K; their constants follow by the
// chain rule. Everything but whole curves of saturation comes from the
// polynomial, bound when it is first asked for.
type concertedCurve struct {
	*polynomialCurve
	model     *conformers
	n         int
	exclusive bool // c = 0

	lnL, lnC, lnK float64
	jac           []float64 // 3×k: ∂(ln L, ln c, ln K)/∂θ; nil where θ is just these
	theta         []float64
	env           Environment
	axis          axis
	multiplied    bool
}

// Bind settles L, c and K as the effectors leave them.
func (c *concertedCurve) Bind(theta []float64, env Environment) {
	copy(c.theta, theta)
	copy(c.env.Effectors, env.Effectors)
	c.multiplied = false
	switch {
	case c.jac != nil:
		c.reduce()
	case c.exclusive:
		c.lnL, c.lnC, c.lnK = theta[0], math.Inf(-1), theta[1]
	default:
		c.lnL, c.lnC, c.lnK = theta[0], theta[1], theta[2]
	}
}

// reduce finds L, c and K in the presence of effectors.
func (c *concertedCurve) reduce() {
	clear(c.jac)
	k := len(c.theta)
	dL, dC, dK := c.jac[:k], c.jac[k:2*k], c.jac[2*k:]
	c.lnL, c.lnC = 0, math.Inf(-1)
	for i, sign := range []float64{-1, 1} { // R, T
		f := &c.model.list[i]
		set := &f.sets[0]
		c.lnL += sign * f.weight.at(c.theta)
		f.weight.addTo(dL, sign)
		for _, e := range f.effectors {
			w := sign * float64(e.sites)
			c.lnL += w * e.open(c.theta, c.env, dL, w)
		}
		clear(c.model.set)
		lnA := crowd(set.rivals, c.theta, c.env, c.model.set)
		c.lnL += sign * float64(c.n) * lnA
		for m, d := range c.model.set {
			dL[m] += sign * float64(c.n) * d
		}
		set.lnK.addTo(c.model.set, 1)
		if i == 0 {
			c.lnK = set.lnK.at(c.theta) + lnA
			copy(dK, c.model.set)
			copy(dC, c.model.set)
		} else if set.binds {
			c.lnC = c.lnK - set.lnK.at(c.theta) - lnA
			for m, d := range c.model.set {
				dC[m] -= d
			}
		}
	}
}

// Saturation writes Ȳ and, with δ = Ȳ_R − Ȳ_T, v = Ȳ(1−Ȳ) of one conformation,
//
//	∂Ȳ/∂ln L = −R̄T̄δ
//	∂Ȳ/∂ln c = T̄v_T − nR̄T̄Ȳ_Tδ
//	∂Ȳ/∂ln K = −(R̄v_R + T̄v_T + nR̄T̄δ²) .
func (c *concertedCurve) Saturation(dst, lnx []float64, grad *mat.Dense) {
	x := c.axis.at(lnx)
	if !c.safe() {
		c.polynomial()
		c.polynomialCurve.Saturation(dst, lnx, grad)
		return
	}
	unit, ratio, weight := math.Exp(-c.lnK), math.Exp(c.lnC), math.Exp(c.lnL)
	if grad == nil {
		for r, x := range x {
			alpha := x * unit
			beta := ratio * alpha
			inv := 1 / ((1 + alpha) * (1 + beta))
			eR, eT := (1+beta)*inv, (1+alpha)*inv
			w := weight * power((1+beta)*eR, c.n)
			dst[r] = (alpha*eR + w*beta*eT) / (1 + w)
		}
		return
	}
	raw := grad.RawMatrix()
	n, k := float64(c.n), len(c.theta)
	direct := c.jac == nil && !c.exclusive
	for r, x := range x {
		alpha := x * unit
		beta := ratio * alpha
		inv := 1 / ((1 + alpha) * (1 + beta))
		eR, eT := (1+beta)*inv, (1+alpha)*inv // 1 − Ȳ_R, 1 − Ȳ_T
		yR, yT := alpha*eR, beta*eT
		w := weight * power((1+beta)*eR, c.n)
		fR := 1 / (1 + w)
		fT := w * fR
		delta := (alpha - beta) * inv
		both := fR * fT * delta
		vT := fT * yT * eT
		gL, gC, gK := -both, vT-n*both*yT, -(fR*yR*eR + vT + n*both*delta)
		dst[r] = fR*yR + fT*yT
		row := raw.Data[r*raw.Stride : r*raw.Stride+k]
		if direct {
			row[0], row[1], row[2] = gL, gC, gK
		} else {
			c.chain(row, gL, gC, gK)
		}
	}
}

// chain writes the gradient in θ where θ is not (ln L, ln c, ln K) itself.
func (c *concertedCurve) chain(row []float64, gL, gC, gK float64) {
	if c.jac == nil {
		row[0], row[1] = gL, gK
		return
	}
	k := len(row)
	for m := range row {
		row[m] = gL*c.jac[m] + gC*c.jac[k+m] + gK*c.jac[2*k+m]
	}
}

// safe says whether nothing in the closed form leaves the range of a float64.
func (c *concertedCurve) safe() bool {
	up := math.Max(c.lnC, 0)
	return c.axis.plain && math.Abs(c.lnK) <= reach && c.axis.top-c.lnK+up <= reach &&
		math.Abs(c.lnL)+float64(c.n)*up <= 2*reach
}

// power is qⁿ.
func power(q float64, n int) float64 {
	p := 1.0
	for ; n > 0; n >>= 1 {
		if n&1 == 1 {
			p *= q
		}
		q *= q
	}
	return p
}

// polynomial binds the polynomial where it is not bound yet.
func (c *concertedCurve) polynomial() *coefficients {
	if !c.multiplied {
		c.polynomialCurve.Bind(c.theta, c.env)
		c.multiplied = true
	}
	return &c.coefficients
}

// At writes saturation and Hill coefficient at one ln x.
func (c *concertedCurve) At(lnx float64, p *Point) {
	c.polynomial()
	c.polynomialCurve.At(lnx, p)
}

func (c *concertedCurve) jet(lnx float64, j *jet, to depth) {
	c.polynomial()
	c.polynomialCurve.jet(lnx, j, to)
}

func (c *concertedCurve) endSlopes() (low, high float64) { return c.polynomial().endSlopes() }
func (c *concertedCurve) turns() (first, last float64)   { return c.polynomial().turns() }

func (c *concertedCurve) ceiling() float64 {
	c.polynomial()
	return c.polynomialCurve.ceiling()
}
