package mechanisms

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// average is the mean of an observable o_i over a bound polynomial,
//
//	⟨o⟩ = Σ o_i B_i xⁱ / Σ B_i xⁱ ,
//
// for saturation with o_i = i/n. Whole curves come from Horner's scheme in a
// scaled x: with b_i = B_i e^{i s − μ} and z = x e^{−s},
//
//	∂⟨o⟩/∂θ_k = Q_k(z)/P(z)² ,  Q_k = Σ_{i<j} [(o_j − o_i)(E_jk b_i − E_ik b_j) + b_i b_j (o_i + o_j)′_k] z^{i+j}
//
// with E_ik = ∂b_i/∂θ_k: pair sums, so that nothing cancels at the ends of the
// curve. Where the b_i span too many decades, each point is summed by itself
// with its largest term taken out.
type average struct {
	c    *coefficients
	o    []float64 // n+1
	rest []float64 // n+1: 1 − o_i, with its own digits
	do   []float64 // (n+1)×k: ∂o_i/∂θ_k; nil where o does not depend on θ

	scaled bool // Horner's scheme is safe
	lifted bool // q is written for the bound θ
	s, mu  float64
	b, bo  []float64 // n+1: b_i and b_i o_i
	e      []float64 // (n+1)×k: E_ik
	q      []float64 // k×(2n+1)

	axis         axis
	term, p, eps []float64 // n+1, n+1, (n+1)×k: terms of one point
	lnP          float64   // ln Σ B_i xⁱ
	dMean, dCov  []float64 // k: ∂ln P/∂θ and Cov(i, ∂ln B_i/∂θ)
	jets         jet
}

func newAverage(c *coefficients, o, rest, do []float64) *average {
	n, k := c.n, c.k
	return &average{
		c: c, o: o, rest: rest, do: do,
		b: make([]float64, n+1), bo: make([]float64, n+1),
		e: make([]float64, (n+1)*k), q: make([]float64, k*(2*n+1)),
		term: make([]float64, n+1), p: make([]float64, n+1), eps: make([]float64, (n+1)*k),
		dMean: make([]float64, k), dCov: make([]float64, k), jets: newJet(k),
	}
}

// spread is how far below the largest a scaled coefficient may lie, in ln: the
// products of two must stay clear of underflow.
const spread = 230

// rebind scales the coefficients of the newly bound θ.
func (a *average) rebind() {
	c, n := a.c, a.c.n
	a.lifted = false
	a.scaled = !math.IsInf(c.lnB[n], -1)
	if !a.scaled {
		return
	}
	a.s = -(c.lnB[n] - c.lnB[0]) / float64(n)
	a.mu = math.Inf(-1)
	for i, l := range c.lnB {
		a.mu = math.Max(a.mu, l+float64(i)*a.s)
	}
	for i, l := range c.lnB {
		zero := math.IsInf(l, -1)
		if zero {
			l = 0
		}
		t := l + float64(i)*a.s - a.mu
		if !(t > -spread && t < spread) {
			a.scaled = false
			return
		}
		unit := math.Exp(t)
		a.b[i] = unit
		if zero {
			a.b[i] = 0
		}
		a.bo[i] = a.b[i] * a.o[i]
		e := a.e[i*c.k : (i+1)*c.k]
		for k, d := range c.row(i) {
			e[k] = unit * d
		}
	}
}

// rise is o_j − o_i, from the end that is nearer.
func (a *average) rise(i, j int) float64 {
	if a.o[i] > 0.5 && a.o[j] > 0.5 {
		return a.rest[i] - a.rest[j]
	}
	return a.o[j] - a.o[i]
}

// lift writes the numerators Q_k of the gradient.
func (a *average) lift() {
	a.lifted = true
	n, k := a.c.n, a.c.k
	clear(a.q)
	for i := 0; i <= n; i++ {
		for j := i + 1; j <= n; j++ {
			rise := a.rise(i, j)
			fi, fj := rise*a.b[j], rise*a.b[i]
			for m := 0; m < k; m++ {
				a.q[m*(2*n+1)+i+j] += fj*a.e[j*k+m] - fi*a.e[i*k+m]
			}
		}
	}
	if a.do == nil {
		return
	}
	for i := 0; i <= n; i++ {
		for j := 0; j <= n; j++ {
			w := a.b[i] * a.b[j]
			for m := 0; m < k; m++ {
				a.q[m*(2*n+1)+i+j] += w * a.do[i*k+m]
			}
		}
	}
}

// curve writes ⟨o⟩ and its gradient at each ln x.
func (a *average) curve(dst, lnx []float64, grad *mat.Dense) {
	x := a.axis.at(lnx)
	if !a.scaled || !a.axis.plain || math.Abs(a.s) > reach {
		a.pointwise(dst, lnx, grad)
		return
	}
	middle := math.Exp(a.s)
	unit := 1 / middle
	if grad == nil {
		for r, x := range x {
			if x <= middle {
				dst[r] = ascend(a.bo, a.b, x*unit)
			} else {
				dst[r] = descend(a.bo, a.b, middle/x)
			}
		}
		return
	}
	if !a.lifted {
		a.lift()
	}
	raw := grad.RawMatrix()
	k, w := a.c.k, 2*a.c.n+1
	for r, x := range x {
		row := raw.Data[r*raw.Stride : r*raw.Stride+k]
		if x <= middle {
			dst[r] = ascendGrad(row, a.bo, a.b, a.q, w, x*unit)
		} else {
			dst[r] = descendGrad(row, a.bo, a.b, a.q, w, middle/x)
		}
	}
}

// ascend is Σ u_i zⁱ / Σ v_i zⁱ.
func ascend(u, v []float64, z float64) float64 {
	var p, q float64
	u = u[:len(v)]
	for i := len(v) - 1; i >= 0; i-- {
		p, q = p*z+u[i], q*z+v[i]
	}
	return p / q
}

// descend is ascend at 1/z.
func descend(u, v []float64, z float64) float64 {
	var p, q float64
	u = u[:len(v)]
	for i := range v {
		p, q = p*z+u[i], q*z+v[i]
	}
	return p / q
}

func ascendGrad(row, u, v, q []float64, w int, z float64) float64 {
	var a, b float64
	u = u[:len(v)]
	for i := len(v) - 1; i >= 0; i-- {
		a, b = a*z+u[i], b*z+v[i]
	}
	b = 1 / b
	for k := range row {
		c, t := q[k*w:(k+1)*w], 0.0
		for i := len(c) - 1; i >= 0; i-- {
			t = t*z + c[i]
		}
		row[k] = t * b * b
	}
	return a * b
}

func descendGrad(row, u, v, q []float64, w int, z float64) float64 {
	var a, b float64
	u = u[:len(v)]
	for i := range v {
		a, b = a*z+u[i], b*z+v[i]
	}
	b = 1 / b
	for k := range row {
		t := 0.0
		for _, c := range q[k*w : (k+1)*w] {
			t = t*z + c
		}
		row[k] = t * b * b
	}
	return a * b
}

// pointwise is curve without a common scale.
func (a *average) pointwise(dst, lnx []float64, grad *mat.Dense) {
	for r, lx := range lnx {
		a.jet(lx, &a.jets, depthFor(grad))
		dst[r] = a.jets.y
		if grad != nil {
			copy(grad.RawRowView(r), a.jets.g)
		}
	}
}
