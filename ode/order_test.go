package ode

import (
	"math"
	"testing"
)

// pendulum is y″ = −sin y, smooth and not linear.
type pendulum struct{}

func (pendulum) Dim() int { return 2 }

func (pendulum) Derivs(dst []float64, _ float64, y []float64) error {
	dst[0], dst[1] = y[1], -math.Sin(y[0])
	return nil
}

// march takes m equal steps of one method to t = 2 and returns the end state and
// the state at the odd place 0.37 of a step of the last one.
func march(t *testing.T, o Options, m int) (end, between [2]float64) {
	t.Helper()
	s := Solver{Options: o, sol: new(Solution)}
	s.Options.Rtol, s.Options.Atol = 1e-13, 1e-13
	s.prepare(pendulum{}, []float64{1.2, 0.3}, []float64{0, 2})
	s.radau.kappa = 1e-2 // far below the errors measured
	if err := s.begin(); err != nil {
		t.Fatal(err)
	}
	h := 2 / float64(m)
	for range m {
		s.radau.jacWant = true
		tr := s.m.try(&s.p, h)
		if tr.fate != stepped {
			t.Fatalf("%+v", tr)
		}
		s.m.accept(&s.p, h)
		s.advance(h, false)
		s.weigh()
		if err := s.m.refresh(&s.p); err != nil {
			t.Fatal(err)
		}
	}
	if err := s.m.complete(&s.p); err != nil {
		t.Fatal(err)
	}
	s.between(between[:], 0.37)
	copy(end[:], s.p.y)
	return end, between
}

// Errors over step sizes fall with the order: 2s−1 and s+1 for collocation with s
// stages (Hairer and Wanner, IV.5; Hairer, Nørsett and Wanner, II.7), 8 and 8 (one
// step of an interpolant of order 7) for the explicit pair.
func TestConvergenceOrder(t *testing.T) {
	for _, c := range []struct {
		name           string
		o              Options
		coarse, fine   int
		order, between float64
	}{
		{"radau 5", Options{MinOrder: 5, MaxOrder: 5}, 20, 40, 5, 4},
		{"radau 9", Options{MinOrder: 9, MaxOrder: 9}, 5, 10, 9, 6},
		{"radau 13", Options{MinOrder: 13, MaxOrder: 13}, 2, 3, 13, 8},
		{"explicit", Options{Method: Explicit}, 8, 16, 8, 8},
	} {
		want, _ := march(t, Options{MinOrder: 13}, 64)
		e1, b1 := march(t, c.o, c.coarse)
		e2, b2 := march(t, c.o, c.fine)
		per := math.Log(float64(c.fine) / float64(c.coarse))
		got := math.Log(apart(e1, want)/apart(e2, want)) / per
		if math.Abs(got-c.order) > 0.6 {
			t.Errorf("%s: order %.2f at the end, not %g (errors %.3g, %.3g)",
				c.name, got, c.order, apart(e1, want), apart(e2, want))
		}
		got = math.Log(apart(b1, exactAt(t, 2-0.63*2/float64(c.coarse)))/
			apart(b2, exactAt(t, 2-0.63*2/float64(c.fine)))) / per
		if got < c.between-0.7 || got > c.between+2 {
			t.Errorf("%s: order %.2f between, not about %g", c.name, got, c.between)
		}
	}
}

func apart(a, b [2]float64) float64 { return math.Hypot(a[0]-b[0], a[1]-b[1]) }

// exactAt integrates to a time with steps so small that rounding rules.
func exactAt(t *testing.T, at float64) [2]float64 {
	t.Helper()
	s := Solver{Options: Options{Rtol: 1e-13, Atol: 1e-14, MaxStep: 0.02, Method: Explicit}}
	sol, err := s.Solve(t.Context(), nil, pendulum{}, []float64{1.2, 0.3}, []float64{0, at})
	if err != nil {
		t.Fatal(err)
	}
	return [2]float64(sol.EndState)
}
