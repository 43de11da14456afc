package mechanisms

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// assemblyCurve is Ȳ = (1−t)Ȳ_S + tȲ_L with t the share of protomers in the large
// species. With protomers P, n_S[S] + n_L[L] = P and [L] = K [S]^m Ẑ_L/Ẑ_S^m,
//
//	t/(1−t)^m = G = m K (P/n_S)^{m−1} Ẑ_L/Ẑ_S^m ,
//
// solved for logit t, in which the left side is convex and has a slope between
// 1 and m. dt/d ln G = t(1−t)/(1+(m−1)t); d ln G/d ln x = n_L(Ȳ_L − Ȳ_S).
type assemblyCurve struct {
	a       *assembly
	species [2]*species
	n       float64 // sites of the large species
	lnK     float64
	lnP     float64 // ln of the protomers
	jets    jet
	g       []float64 // ∂ln G/∂θ
}

// Bind settles both species.
func (c *assemblyCurve) Bind(theta []float64, env Environment) {
	c.lnK, c.lnP = theta[0], math.Log(env.Protomers)
	for _, s := range c.species {
		s.settle(theta, env)
	}
}

// Saturation writes Ȳ and its gradient at each ln x.
func (c *assemblyCurve) Saturation(dst, lnx []float64, grad *mat.Dense) {
	for r, lx := range lnx {
		c.jet(lx, &c.jets, depthFor(grad))
		dst[r] = c.jets.y
		if grad != nil {
			copy(grad.RawRowView(r), c.jets.g)
		}
	}
}

// At writes saturation and Hill coefficient at one ln x.
func (c *assemblyCurve) At(lnx float64, p *Point) {
	c.jet(lnx, &c.jets, whole)
	low, high := c.endSlopes()
	c.jets.point(p, low, high)
}

// lnG is ln G where the species have ln Ẑ_S and ln Ẑ_L.
func (c *assemblyCurve) lnG(lnZS, lnZL float64) float64 {
	m := float64(c.a.m)
	lnS := c.lnP - math.Log(c.n/m) // ln(P/n_S)
	return math.Log(m) + c.lnK + (m-1)*lnS + lnZL - m*lnZS
}

// split solves t/(1−t)^m = G: t and 1−t. For m = 2 the stable root of the
// quadratic is 1−t = 2/(1+√(1+4G)); else Newton's method on
// v + (m−1) ln(1+eᵛ) = ln G, v = logit t, which is convex, from above.
func split(lnG, m float64) (t, rest float64) {
	if m == 2 && math.Abs(lnG) < 600 {
		g := math.Exp(lnG)
		rest = 2 / (1 + math.Sqrt(1+4*g))
		return g * rest * rest, rest
	}
	if math.IsInf(lnG, -1) {
		return 0, 1
	}
	v := lnG
	if v > 0 {
		v /= m
	}
	for range 60 {
		t, rest = logistic(v)
		step := (v + (m-1)*softplus(v) - lnG) / (rest + m*t)
		v -= step
		if math.Abs(step) <= 1e-16*math.Max(1, math.Abs(v)) {
			break
		}
	}
	return logistic(v)
}

func (c *assemblyCurve) jet(lnx float64, j *jet, to depth) {
	j.zero()
	m := float64(c.a.m)
	lnZS := c.species[0].jet(lnx, to)
	lnZL := c.species[1].jet(lnx, to)
	s, l := &c.species[0].jets, &c.species[1].jets
	t, rest := split(c.lnG(lnZS, lnZL), m)
	x := blendOf(s, l, t, rest, m, c.n)
	j.y, j.e = rest*s.y+t*l.y, rest*s.e+t*l.e
	j.y1 = rest*s.y1 + t*l.y1 + x.d*x.tx
	j.y2 = rest*s.y2 + t*l.y2 + 2*x.d1*x.tx + x.d*x.txx
	j.y3 = rest*s.y3 + t*l.y3 + 3*x.d2*x.tx + 3*x.d1*x.txx + x.d*x.txxx
	if to == values {
		return
	}
	c.logGradient(m)
	for k, g := range c.g {
		j.g[k] += x.d * x.t1 * g
	}
	c.species[0].spread(j.g, s.g, rest)
	c.species[1].spread(j.g, l.g, t)
	if to == whole {
		c.deepen(j, s, l, &x, t, rest)
	}
}

// logGradient writes ∂ln G/∂θ.
func (c *assemblyCurve) logGradient(m float64) {
	clear(c.g)
	c.g[0] = 1
	c.species[0].spread(c.g, c.species[0].dLnZ, -m)
	c.species[1].spread(c.g, c.species[1].dLnZ, 1)
}

// mixing is how t moves: with ln G (t1 … t3) and with ln x (tx …), and the
// differences Ȳ_L − Ȳ_S (d …).
type mixing struct {
	d, d1, d2     float64
	g1, g2        float64 // d ln G/d ln x and d²
	t1, t2, t3    float64
	tx, txx, txxx float64
	n             float64
}

// blendOf writes the derivatives of t. With τ = t(1−t)/(1+rt), r = m−1:
//
//	τ′ = (1 − 2t − rt²)/(1+rt)² ,  τ″ = −2m/(1+rt)³ .
func blendOf(s, l *jet, t, rest, m, n float64) (x mixing) {
	x.n = n
	x.d, x.d1, x.d2 = l.y-s.y, l.y1-s.y1, l.y2-s.y2
	if s.y > 0.5 {
		x.d = s.e - l.e
	}
	r := m - 1
	q := 1 + r*t
	slope := (rest - t - r*t*t) / (q * q)
	x.t1 = t * rest / q
	x.t2 = slope * x.t1
	x.t3 = -2*m/(q*q*q)*x.t1*x.t1 + slope*x.t2
	x.g1, x.g2 = n*x.d, n*x.d1
	g3 := n * x.d2
	x.tx = x.t1 * x.g1
	x.txx = x.t2*x.g1*x.g1 + x.t1*x.g2
	x.txxx = x.t3*x.g1*x.g1*x.g1 + 3*x.t2*x.g1*x.g2 + x.t1*g3
	return x
}

// deepen adds the gradients of y′ and y″.
func (c *assemblyCurve) deepen(j, s, l *jet, x *mixing, t, rest float64) {
	for k, g := range c.g {
		tx := x.t2 * g * x.g1
		txx := x.t3*g*x.g1*x.g1 + x.t2*g*x.g2
		j.g1[k] += x.d1*x.t1*g + x.d*tx
		j.g2[k] += x.d2*x.t1*g + 2*x.d1*tx + x.d*txx
	}
	for i, w := range [2]float64{rest, t} {
		sign := float64(2*i - 1)
		sp := c.species[i]
		p := []*jet{s, l}[i]
		// ∂tx = t1 n ∂d ; ∂txx = 2 t2 g1 n ∂d + t1 n ∂d′.
		sp.spread(j.g1, p.g1, w)
		sp.spread(j.g1, p.g, sign*(x.tx+x.d*x.t1*x.n))
		sp.spread(j.g2, p.g2, w)
		sp.spread(j.g2, p.g1, sign*(2*x.tx+x.d*x.t1*x.n))
		sp.spread(j.g2, p.g, sign*(2*x.d1*x.t1*x.n+x.txx+2*x.d*x.t2*x.g1*x.n))
	}
}
