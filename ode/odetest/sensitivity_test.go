package odetest

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/ode"
)

// tuned is a network with the logarithms of some of its rates as constants.
type tuned struct {
	network
	free []int
}

func (w *tuned) NumParams() int { return len(w.free) }

func (w *tuned) ParamJacobian(dst *mat.Dense, _ float64, y []float64) error {
	raw := dst.RawMatrix()
	add := func(i, j int, v float64) { raw.Data[i*raw.Stride+j] += v }
	for j, s := range w.free {
		r := &w.steps[s]
		v := r.rate * y[r.a]
		if r.b >= 0 {
			v *= y[r.b]
			add(r.b, j, -v)
		}
		add(r.a, j, -v)
		for _, k := range r.out {
			add(k, j, v)
		}
	}
	return nil
}

func tunedTetramer() (*tuned, Problem) {
	p := tetramer()
	return &tuned{*p.New().(*network), []int{0, 1, 2, 3, 8, 9, 16, 17}}, p
}

// decadeTimes is 0 and m times spread over decades from a to b.
func decadeTimes(a, b float64, m int) []float64 {
	t := make([]float64, m+1)
	for i := range m {
		t[i+1] = a * math.Pow(b/a, float64(i)/float64(m-1))
	}
	return t
}

// Sensitivities of the tetramer against differences of order 4 of its solutions.
func TestNetworkSensitivities(t *testing.T) {
	w, p := tunedTetramer()
	times := decadeTimes(1e-4, 10, 25)
	o := ode.Options{Rtol: 1e-9, Atol: 1e-20, Sensitivity: &ode.Sensitivity{}}
	sol, err := ode.Solve(t.Context(), w, p.Start, times, o)
	if err != nil {
		t.Fatal(err)
	}
	fine := ode.Options{Rtol: 1e-12, Atol: 1e-24}
	const h = 1e-2
	for j, s := range w.free {
		run := func(by float64) *ode.Solution {
			v := &network{n: w.n, steps: append([]reaction(nil), w.steps...)}
			v.steps[s].rate *= math.Exp(by)
			moved, err := ode.Solve(t.Context(), v, p.Start, times, fine)
			if err != nil {
				t.Fatal(err)
			}
			return moved
		}
		a, b, c, d := run(h), run(-h), run(2*h), run(-2*h)
		for k := range times {
			for i := range w.n {
				near, far := a.States[k][i]-b.States[k][i], c.States[k][i]-d.States[k][i]
				want := (8*near - far) / (12 * h)
				e := math.Abs(sol.Sensitivities[k].At(i, j) - want)
				if e > 1e-7*math.Abs(want)+1e-9*sol.States[k][i]+o.Atol {
					t.Errorf("t = %.3g: ∂y%d/∂θ%d is %.10g, by differences %.10g",
						times[k], i+1, j+1, sol.Sensitivities[k].At(i, j), want)
				}
			}
		}
	}
}

// Both methods, and sensitivities left out of the error control, tell the same.
func TestSensitivitiesUncontrolled(t *testing.T) {
	w, p := tunedTetramer()
	times := decadeTimes(1e-4, 0.1, 8)
	o := ode.Options{Rtol: 1e-10, Atol: 1e-20, Sensitivity: &ode.Sensitivity{}}
	want, err := ode.Solve(t.Context(), w, p.Start, times, o)
	if err != nil {
		t.Fatal(err)
	}
	for _, m := range []ode.Method{ode.Radau, ode.Explicit} {
		o := ode.Options{Method: m, Rtol: 1e-8, Atol: 1e-18, Sensitivity: &ode.Sensitivity{Uncontrolled: true}}
		sol, err := ode.Solve(t.Context(), w, p.Start, times, o)
		if err != nil {
			t.Fatal(err)
		}
		for k, s := range sol.Sensitivities {
			for i, v := range s.RawMatrix().Data {
				ref := want.Sensitivities[k].RawMatrix().Data[i]
				if math.Abs(v-ref) > 1e-4*math.Abs(ref)+1e-6*want.States[k][i/len(w.free)]+50*o.Atol {
					t.Errorf("%v, t = %.3g: sensitivity %d is %.10g, not %.10g", m, times[k], i+1, v, ref)
				}
			}
		}
	}
}

// A network of eleven components solved again allocates nothing.
func TestNetworkAllocations(t *testing.T) {
	w, p := tunedTetramer()
	times := decadeTimes(1e-4, 10, 5)
	for _, sens := range []*ode.Sensitivity{nil, {}} {
		s := ode.Solver{Options: ode.Options{Rtol: 1e-6, Atol: 1e-18, Sensitivity: sens}}
		var sol *ode.Solution
		got := testing.AllocsPerRun(3, func() {
			var err error
			if sol, err = s.Solve(t.Context(), sol, w, p.Start, times); err != nil {
				t.Fatal(err)
			}
		})
		if got > 0 {
			t.Errorf("sensitivities %v: %g allocations", sens != nil, got)
		}
	}
}

// BenchmarkSensitivities is one trace of a fit: 200 points, 8 constants.
func BenchmarkSensitivities(b *testing.B) {
	w, p := tunedTetramer()
	times := decadeTimes(1e-4, 10, 200)
	s := ode.Solver{Options: ode.Options{Rtol: 1e-6, Atol: 1e-18, Sensitivity: &ode.Sensitivity{}}}
	var sol *ode.Solution
	for b.Loop() {
		var err error
		if sol, err = s.Solve(b.Context(), sol, w, p.Start, times); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(sol.Stats.Steps), "steps")
}
