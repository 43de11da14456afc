package odetest

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// Exact is an initial-value problem solved in closed form, with ∂y/∂θ.
type Exact struct {
	Name   string
	Theta  []float64
	Start  []float64
	Times  []float64
	States func(t float64) []float64
	// Slopes is ∂y/∂θ, row by row; Start does not depend on θ.
	Slopes func(t float64) []float64

	n int
	f func(d []float64, t float64, y []float64)
	j func(J []float64, t float64, y []float64)
	p func(P []float64, t float64, y []float64)
}

// Dim, Derivs, Jacobian, NumParams and ParamJacobian make Exact a System.
func (e *Exact) Dim() int { return e.n }

// Derivs writes f.
func (e *Exact) Derivs(dst []float64, t float64, y []float64) error {
	e.f(dst, t, y)
	return nil
}

// Jacobian writes ∂f/∂y.
func (e *Exact) Jacobian(dst *mat.Dense, t float64, y []float64) error {
	e.j(dst.RawMatrix().Data, t, y)
	return nil
}

// NumParams is the number of constants.
func (e *Exact) NumParams() int { return len(e.Theta) }

// ParamJacobian writes ∂f/∂θ.
func (e *Exact) ParamJacobian(dst *mat.Dense, t float64, y []float64) error {
	e.p(dst.RawMatrix().Data, t, y)
	return nil
}

// Exacts lists the problems with closed forms.
func Exacts() []*Exact {
	return []*Exact{chain(), oscillator(), logistic(), secondOrder(), swing(), tracking()}
}

// chain is A → B → C at k₁ and k₂; A+B+C is kept.
func chain() *Exact {
	const a, b = 2.0, 0.3
	return &Exact{
		Name: "chain of two decays", n: 3, Theta: []float64{a, b},
		Start: []float64{1, 0, 0}, Times: []float64{0, 0.1, 0.5, 1, 2, 5, 10, 20},
		f: func(d []float64, _ float64, y []float64) {
			d[0], d[1], d[2] = -a*y[0], a*y[0]-b*y[1], b*y[1]
		},
		j: func(J []float64, _ float64, _ []float64) {
			J[0], J[3], J[4], J[7] = -a, a, -b, b
		},
		p: func(P []float64, _ float64, y []float64) {
			P[0], P[2], P[3], P[5] = -y[0], y[0], -y[1], y[1]
		},
		States: func(t float64) []float64 {
			x, y := math.Exp(-a*t), math.Exp(-b*t)
			m := a / (a - b) * (y - x)
			return []float64{x, m, 1 - x - m}
		},
		Slopes: func(t float64) []float64 {
			x, y := math.Exp(-a*t), math.Exp(-b*t)
			c := (a - b) * (a - b)
			xa := -t * x
			ma := -b/c*(y-x) + a/(a-b)*t*x
			mb := a/c*(y-x) - a/(a-b)*t*y
			return []float64{xa, 0, ma, mb, -xa - ma, -mb}
		},
	}
}

// oscillator is y″ = −ω²y.
func oscillator() *Exact {
	const w = 3.0
	return &Exact{
		Name: "oscillator", n: 2, Theta: []float64{w},
		Start: []float64{1, 0}, Times: []float64{0, 0.3, 1, 2.5, 5},
		f: func(d []float64, _ float64, y []float64) { d[0], d[1] = y[1], -w*w*y[0] },
		j: func(J []float64, _ float64, _ []float64) { J[1], J[2] = 1, -w*w },
		p: func(P []float64, _ float64, y []float64) { P[1] = -2 * w * y[0] },
		States: func(t float64) []float64 {
			return []float64{math.Cos(w * t), -w * math.Sin(w*t)}
		},
		Slopes: func(t float64) []float64 {
			s, c := math.Sincos(w * t)
			return []float64{-t * s, -s - w*t*c}
		},
	}
}

// logistic is y′ = r y (1 − y/K).
func logistic() *Exact {
	const r, K, y0 = 1.5, 4.0, 0.1
	return &Exact{
		Name: "logistic growth", n: 1, Theta: []float64{r, K},
		Start: []float64{y0}, Times: []float64{0, 0.5, 1, 2, 3, 5, 8},
		f: func(d []float64, _ float64, y []float64) { d[0] = r * y[0] * (1 - y[0]/K) },
		j: func(J []float64, _ float64, y []float64) { J[0] = r * (1 - 2*y[0]/K) },
		p: func(P []float64, _ float64, y []float64) {
			P[0], P[1] = y[0]*(1-y[0]/K), r*y[0]*y[0]/(K*K)
		},
		States: func(t float64) []float64 {
			e := math.Exp(-r * t)
			return []float64{K * y0 / (y0 + (K-y0)*e)}
		},
		Slopes: func(t float64) []float64 {
			e := math.Exp(-r * t)
			d := y0 + (K-y0)*e
			return []float64{K * y0 * (K - y0) * t * e / (d * d), y0 * y0 * (1 - e) / (d * d)}
		},
	}
}

// secondOrder is y′ = k (a − y)(b − y).
func secondOrder() *Exact {
	const k, a, b = 0.7, 1.0, 2.5
	return &Exact{
		Name: "second order", n: 1, Theta: []float64{k},
		Start: []float64{0}, Times: []float64{0, 0.1, 0.4, 1, 2, 4},
		f: func(d []float64, _ float64, y []float64) { d[0] = k * (a - y[0]) * (b - y[0]) },
		j: func(J []float64, _ float64, y []float64) { J[0] = k * (2*y[0] - a - b) },
		p: func(P []float64, _ float64, y []float64) { P[0] = (a - y[0]) * (b - y[0]) },
		States: func(t float64) []float64 {
			e := math.Exp(-k * (b - a) * t)
			return []float64{a * b * (1 - e) / (b - a*e)}
		},
		Slopes: func(t float64) []float64 {
			e := math.Exp(-k * (b - a) * t)
			d := b - a*e
			return []float64{a * b * (b - a) * (b - a) * t * e / (d * d)}
		},
	}
}

// swing is y′ = c y cos t, whose right-hand side depends on time.
func swing() *Exact {
	const c = 0.8
	return &Exact{
		Name: "swing", n: 1, Theta: []float64{c},
		Start: []float64{1}, Times: []float64{0, 0.7, 2, 4, 9},
		f: func(d []float64, t float64, y []float64) { d[0] = c * y[0] * math.Cos(t) },
		j: func(J []float64, t float64, _ []float64) { J[0] = c * math.Cos(t) },
		p: func(P []float64, t float64, y []float64) { P[0] = y[0] * math.Cos(t) },
		States: func(t float64) []float64 {
			return []float64{math.Exp(c * math.Sin(t))}
		},
		Slopes: func(t float64) []float64 {
			return []float64{math.Sin(t) * math.Exp(c*math.Sin(t))}
		},
	}
}

// tracking is y′ = −λ(y − a cos t) − a sin t from y(0) = a, whose solution a cos t
// does not show λ. A. Prothero and A. Robinson, Math. Comp. 28 (1974) 145-162.
func tracking() *Exact {
	const lambda, a = 200.0, 1.25
	return &Exact{
		Name: "tracking", n: 1, Theta: []float64{lambda, a},
		Start: []float64{a}, Times: []float64{0, 0.01, 0.1, 1, 3},
		f: func(d []float64, t float64, y []float64) {
			s, c := math.Sincos(t)
			d[0] = -lambda*(y[0]-a*c) - a*s
		},
		j: func(J []float64, _ float64, _ []float64) { J[0] = -lambda },
		p: func(P []float64, t float64, y []float64) {
			s, c := math.Sincos(t)
			P[0], P[1] = a*c-y[0], lambda*c-s
		},
		States: func(t float64) []float64 { return []float64{a * math.Cos(t)} },
		// The start is held, so ∂y/∂a = cos t − e^(−λt).
		Slopes: func(t float64) []float64 { return []float64{0, math.Cos(t) - math.Exp(-lambda*t)} },
	}
}
