package odetest

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/ode"
)

// linear is y′ = Ay.
type linear struct{ a *mat.Dense }

func (l linear) Dim() int { n, _ := l.a.Dims(); return n }

func (l linear) Derivs(dst []float64, _ float64, y []float64) error {
	for i := range dst {
		dst[i] = 0
		for j, v := range l.a.RawRowView(i) {
			dst[i] += v * y[j]
		}
	}
	return nil
}

func (l linear) Jacobian(dst *mat.Dense, _ float64, _ []float64) error {
	dst.Copy(l.a)
	return nil
}

// exchange is a random network of first-order steps with rates over some decades:
// columns sum to zero.
func exchange(r *rand.Rand, n int, decades float64) linear {
	a := mat.NewDense(n, n, nil)
	for i := range n {
		for j := range n {
			if i != j && (r.Float64() < 0.4 || i == j+1) {
				k := math.Pow(10, decades*(r.Float64()-0.5))
				a.Set(i, j, k)
				a.Set(j, j, a.At(j, j)-k)
			}
		}
	}
	return linear{a}
}

// Random networks against the matrix exponential of gonum.
func TestLinearNetworks(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 5))
	var shared ode.Solver
	for trial := range 60 {
		n := 2 + trial%13
		o := ode.Options{Rtol: 1e-9, Atol: 1e-12}
		decades := 6.0
		if trial%3 == 0 {
			o.Method, decades = ode.Explicit, 2
		}
		l := exchange(r, n, decades)
		y0 := make([]float64, n)
		y0[trial%n] = 1
		totals := mat.NewDense(1, n, nil)
		for i := range n {
			totals.Set(0, i, 1)
		}
		o.Totals = totals
		times := []float64{0, 0.01, 0.1, 1, 10}
		sol, err := ode.Solve(t.Context(), l, y0, times, o)
		if err != nil {
			t.Fatal(err)
		}
		// What a solver did before changes no digit.
		shared.Options = o
		again, err := shared.Solve(t.Context(), nil, l, y0, times)
		if err != nil || !slices.Equal(again.EndState, sol.EndState) {
			t.Errorf("trial %d: a used solver gives %v, a new one %v", trial, again.EndState, sol.EndState)
		}
		if sol.Stats.Drift > 1e-13 {
			t.Errorf("trial %d: drift %g", trial, sol.Stats.Drift)
		}
		for k, at := range times {
			var q, e mat.Dense
			q.Scale(at, l.a)
			e.Exp(&q)
			for i, v := range sol.States[k] {
				if d := math.Abs(v - e.At(i, trial%n)); d > 1e-7*(1e-4+e.At(i, trial%n)) {
					t.Errorf("trial %d, %d states, t = %g: component %d is off by %.3g", trial, n, at, i+1, d)
				}
			}
		}
	}
}
