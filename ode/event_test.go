package ode

import (
	"math"
	"testing"
)

// Zeros of hard functions are found to the last places of time.
func TestRoot(t *testing.T) {
	for _, c := range []struct {
		name string
		g    func(t float64) float64
		zero float64
	}{
		{"line", func(t float64) float64 { return t - 0.3 }, 0.3},
		{"cubic", func(t float64) float64 { return math.Pow(t-0.7, 3) }, 0.7},
		{"flat", func(t float64) float64 { return math.Atan(1e8 * (t - 0.123)) }, 0.123},
		{"steep on one side", func(t float64) float64 { return math.Exp(50*t) - math.Exp(30) }, 0.6},
		{"jump", func(t float64) float64 { return math.Copysign(1, t-0.4142) }, 0.4142},
	} {
		calls := 0
		w := watcher{
			events: []Event{{G: func(t float64, _ []float64) float64 { calls++; return c.g(t) }}},
			y:      make([]float64, 1),
		}
		x, err := w.root(bracket{0, 0, 1, 0, 1, c.g(0), c.g(1)}, func([]float64, float64) {})
		if err != nil || math.Abs(x-c.zero) > 1e-14 && math.Abs(c.g(x)) > 1e-40 {
			t.Errorf("%s: %.17g, not %g (%v)", c.name, x, c.zero, err)
		}
		if calls > 200 {
			t.Errorf("%s took %d evaluations", c.name, calls)
		}
	}
}

// Two crossings in one step are both seen when a quarter of it lies between.
func TestLooks(t *testing.T) {
	g := func(x float64) float64 { return (x - 0.2) * (x - 0.6) }
	var w watcher
	events := []Event{{G: func(t float64, _ []float64) float64 { return g(t - 10) }}}
	if err := w.begin(events, 10, []float64{0}); err != nil {
		t.Fatal(err)
	}
	found, err := w.step(10, 1, func([]float64, float64) {})
	if err != nil || len(found) != 2 {
		t.Fatalf("%v, %v", found, err)
	}
	close1(t, "first", found[0].x, 0.2, 1e-14)
	close1(t, "second", found[1].x, 0.6, 1e-14)
	if found[0].rising || !found[1].rising {
		t.Error("directions are wrong")
	}
}

func TestEventWithoutNumber(t *testing.T) {
	_, err := Solve(t.Context(), pendulum{}, []float64{1, 0}, []float64{0, 1}, Options{
		Events: []Event{{Name: "lost", G: func(t float64, _ []float64) float64 { return math.Sqrt(0.5 - t) }}},
	})
	f, ok := err.(*Failure)
	if !ok || f.Reason != SystemFailed || !math.Signbit(-f.Time) || err.Error() == "" {
		t.Errorf("the error is %v", err)
	}
}
