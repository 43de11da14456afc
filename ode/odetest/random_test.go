package odetest

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/ode"
)

// association is a random network of reversible A + B ⇌ C and A ⇌ B with rates
// over eight decades. Each component has a mass, so that Σ mass·y is kept.
func association(r *rand.Rand, n int) (*network, []float64) {
	w := &network{n: n}
	mass := make([]float64, n)
	for i := range mass {
		mass[i] = float64(1 + i/3)
	}
	rate := func() float64 { return math.Pow(10, 8*r.Float64()-4) }
	for range 3 * n {
		a, b, c := r.IntN(n), r.IntN(n), r.IntN(n)
		switch {
		case a != b && mass[a] == mass[b]:
			w.steps = append(w.steps, reaction{rate(), a, -1, []int{b}}, reaction{rate(), b, -1, []int{a}})
		case a != b && mass[a]+mass[b] == mass[c]:
			w.steps = append(w.steps, reaction{rate(), a, b, []int{c}}, reaction{rate(), c, -1, []int{a, b}})
		}
	}
	return w, mass
}

// Random networks are solved, keep their mass, stay non-negative, and agree with a
// solution a thousand times finer.
func TestRandomNetworks(t *testing.T) {
	r := rand.New(rand.NewPCG(17, 23))
	times := []float64{0, 1e-5, 1e-3, 0.1, 10, 1e4}
	for trial := range 150 {
		n := 3 + trial%14
		w, mass := association(r, n)
		y0 := make([]float64, n)
		for i := range y0 {
			if r.Float64() < 0.5 {
				y0[i] = math.Pow(10, -3*r.Float64())
			}
		}
		y0[0] = 1
		o := ode.Options{Rtol: 1e-6, Atol: 1e-12, Totals: mat.NewDense(1, n, mass)}
		if trial%2 == 0 {
			o.NonNegative = spreadIndices(n)
		}
		var sys ode.System = w
		if trial%3 == 0 {
			sys = bare{w}
		}
		sol, err := ode.Solve(t.Context(), sys, y0, times, o)
		if err != nil {
			t.Fatalf("trial %d: %v", trial, err)
		}
		fine, err := ode.Solve(t.Context(), w, y0, times, ode.Options{Rtol: 1e-9, Atol: 1e-15})
		if err != nil {
			t.Fatalf("trial %d: %v", trial, err)
		}
		// Rounding of f over long steps moves totals by h·ε·|f|; held, they stay.
		if sol.Stats.Drift > 1e-7 {
			t.Errorf("trial %d: drift %g", trial, sol.Stats.Drift)
		}
		o.HoldTotals = true
		held, err := ode.Solve(t.Context(), sys, y0, times, o)
		if err != nil {
			t.Fatalf("trial %d: %v", trial, err)
		}
		if d := weighted(mass, held.EndState)/weighted(mass, y0) - 1; math.Abs(d) > 4e-15 {
			t.Errorf("trial %d: the total held is off by %g", trial, d)
		}
		for k, y := range sol.States {
			for i, v := range y {
				if v < -1e-10 || v < 0 && o.NonNegative != nil {
					t.Errorf("trial %d, t = %g: component %d is %g", trial, times[k], i+1, v)
				}
				if d := math.Abs(v - fine.States[k][i]); d > 1e-4*math.Abs(v)+1e-9 {
					t.Errorf("trial %d, t = %g: component %d is %g, finer %g", trial, times[k], i+1, v, fine.States[k][i])
				}
			}
		}
		if sol.Stats.Steps > 600 {
			t.Errorf("trial %d: %d steps", trial, sol.Stats.Steps)
		}
	}
}

func weighted(c, y []float64) (sum float64) {
	for i, v := range y {
		sum += c[i] * v
	}
	return sum
}

func spreadIndices(n int) []int {
	all := make([]int, n)
	for i := range all {
		all[i] = i
	}
	return all
}
