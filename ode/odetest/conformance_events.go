package odetest

import (
	"context"
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/ode"
)

// events: y = cos 3t is zero at (k+½)π/3, falling where k is even; it starts at a
// zero of y′.
func events(ctx context.Context, opts ode.Options) error {
	e := oscillator()
	opts.Rtol, opts.Atol = 1e-10, 1e-10
	opts.Events = []ode.Event{
		{Name: "zero", G: func(_ float64, y []float64) float64 { return y[0] }},
		{Name: "falling", G: func(_ float64, y []float64) float64 { return y[0] }, Direction: -1},
		{Name: "turn", G: func(_ float64, y []float64) float64 { return y[1] }, Direction: 1},
		{Name: "clock", G: func(t float64, _ []float64) float64 { return t - 4 }},
	}
	sol, err := ode.Solve(ctx, e, e.Start, []float64{0, 5}, opts)
	if err != nil {
		return err
	}
	var want []ode.Hit
	add := func(event int, t float64, rising bool) {
		if t < 5 {
			want = append(want, ode.Hit{Event: event, Time: t, Rising: rising})
		}
	}
	for k := range 6 {
		t := (float64(k) + 0.5) * math.Pi / 3
		add(0, t, k%2 == 1)
		if k%2 == 0 {
			add(1, t, false)
		}
		if k%2 == 0 { // y′ = −3 sin 3t rises through zero at odd multiples of π/3
			add(2, float64(k+1)*math.Pi/3, true)
		}
	}
	add(3, 4, true)
	if len(sol.Hits) != len(want) {
		return fmt.Errorf("%d hits, not %d: %v", len(sol.Hits), len(want), sol.Hits)
	}
	for _, w := range want {
		if err := hasHit(e, sol.Hits, w); err != nil {
			return err
		}
	}
	for i := 1; i < len(sol.Hits); i++ {
		if sol.Hits[i].Time < sol.Hits[i-1].Time {
			return errors.New("hits are not in the order of time")
		}
	}
	return nil
}

func hasHit(e *Exact, hits []ode.Hit, w ode.Hit) error {
	for _, h := range hits {
		if h.Event == w.Event && math.Abs(h.Time-w.Time) < 1e-8 {
			if h.Rising != w.Rising {
				return fmt.Errorf("event %d at t = %g has the wrong direction", h.Event, h.Time)
			}
			return near(e, []float64{h.Time}, [][]float64{h.State}, 1e-9)
		}
	}
	return fmt.Errorf("event %d at t = %g was not found", w.Event, w.Time)
}

func terminal(ctx context.Context, opts ode.Options) error {
	e := chain()
	opts.Rtol, opts.Sensitivity = 1e-9, &ode.Sensitivity{}
	opts.Events = []ode.Event{
		{G: func(_ float64, y []float64) float64 { return y[0] - 0.5 }, Terminal: true},
		{G: func(_ float64, y []float64) float64 { return y[0] - 0.1 }},
	}
	sol, err := ode.Solve(ctx, e, e.Start, []float64{0, 0.1, 0.2, 5}, opts)
	if err != nil {
		return err
	}
	half := math.Ln2 / 2
	switch {
	case !sol.Ended || len(sol.Hits) != 1:
		return fmt.Errorf("ended: %v, %d hits", sol.Ended, len(sol.Hits))
	case math.Abs(sol.EndTime-half) > 1e-8:
		return fmt.Errorf("ended at %g, not %g", sol.EndTime, half)
	case len(sol.Times) != 3 || len(sol.States) != 3:
		return fmt.Errorf("%d outputs before the event, not 3", len(sol.Times))
	case math.Abs(sol.EndState[0]-0.5) > 1e-8:
		return fmt.Errorf("the end state is %g", sol.EndState[0])
	}
	return nearSlopes(e, sol.EndTime, sol.Hits[0].Sensitivity, 1e-8)
}

// totalsKept: mass action keeps linear totals to rounding, with and without help.
func totalsKept(ctx context.Context, opts ode.Options) error {
	p, err := ByName("tetramer")
	if err != nil {
		return err
	}
	c := mat.NewDense(2, 11, []float64{
		0, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1,
		1, 0, 1, 2, 3, 4, 0, 1, 2, 3, 4,
	})
	opts.Rtol, opts.Atol, opts.Totals = 1e-6, 1e-18, c
	for _, hold := range []bool{false, true} {
		opts.HoldTotals = hold
		sol, err := ode.Solve(ctx, p.New(), p.Start, []float64{0, 1e-3, 1e-2}, opts)
		if err != nil {
			return err
		}
		if sol.Stats.Drift > 1e-13 {
			return fmt.Errorf("held: %v, drift %.3g", hold, sol.Stats.Drift)
		}
		for _, y := range sol.States {
			for i, want := range []float64{1e-6, 5e-6} {
				var sum float64
				for k, v := range y {
					sum += c.At(i, k) * v
				}
				if math.Abs(sum-want) > 1e-12*want {
					return fmt.Errorf("held: %v, total %d is off by %.3g", hold, i+1, sum-want)
				}
			}
		}
	}
	return nil
}

func falseTotals(ctx context.Context, opts ode.Options) error {
	e := chain()
	opts.Totals = mat.NewDense(1, 3, []float64{1, 1, 0})
	_, err := ode.Solve(ctx, e, []float64{1, 1, 0}, e.Times, opts)
	return failsAs(err, ode.BadInput, math.NaN(), -1)
}

// nonNegative: y′ = −k y from a loose tolerance, and a system that turns negative.
func nonNegative(ctx context.Context, opts ode.Options) error {
	e := chain()
	opts.Rtol, opts.Atol, opts.NonNegative = 1e-2, 1e-3, []int{0, 1, 2}
	sol, err := ode.Solve(ctx, e, e.Start, spread(0, 40, 400), opts)
	if err != nil {
		return err
	}
	for k, y := range sol.States {
		for i, v := range y {
			if v < 0 {
				return fmt.Errorf("component %d at t = %g is %g", i+1, sol.Times[k], v)
			}
		}
	}
	down := &Exact{
		n: 1, f: func(d []float64, _ float64, _ []float64) { d[0] = -1 },
		j: func([]float64, float64, []float64) {},
	}
	opts.NonNegative = []int{0}
	_, err = ode.Solve(ctx, down, []float64{1}, []float64{0, 2}, opts)
	return failsAs(err, ode.WouldBeNegative, 1, 0)
}

// failsAs checks a Failure; a time that is no number is not compared.
func failsAs(err error, reason ode.Reason, at float64, component int) error {
	var f *ode.Failure
	switch {
	case !errors.As(err, &f):
		return fmt.Errorf("the error is %v", err)
	case f.Reason != reason:
		return fmt.Errorf("reason %d in %q", f.Reason, err)
	case math.Abs(f.Time-at) > 0.02*math.Abs(at):
		return fmt.Errorf("time %g in %q, not about %g", f.Time, err, at)
	case f.Component != component:
		return fmt.Errorf("component %d in %q", f.Component, err)
	}
	return nil
}
