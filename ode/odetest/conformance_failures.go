package odetest

import (
	"context"
	"errors"
	"fmt"
	"math"
	"strings"

	"gonum.org/v1/gonum/mat"

	"ligancy/ode"
)

// faulty is a System with errors.
type faulty struct {
	n int
	f func(d []float64, t float64, y []float64) error
}

func (s *faulty) Dim() int { return s.n }

func (s *faulty) Derivs(dst []float64, t float64, y []float64) error { return s.f(dst, t, y) }

func cancellation(ctx context.Context, opts ode.Options) error {
	ctx, cancel := context.WithCancelCause(ctx)
	why := errors.New("enough")
	sys := &faulty{1, func(d []float64, t float64, y []float64) error {
		if t > 5 {
			cancel(why)
		}
		d[0] = math.Cos(t)
		return nil
	}}
	opts.Rtol, opts.MaxStep = 1e-6, 0.1
	sol, err := ode.Solve(ctx, sys, []float64{0}, spread(0, 1000, 1000), opts)
	if !errors.Is(err, why) {
		return fmt.Errorf("the error is %v", err)
	}
	if sol.EndTime < 5 || sol.EndTime > 10 || len(sol.States) < 5 || len(sol.States) > 11 {
		return fmt.Errorf("%d states up to t = %g", len(sol.States), sol.EndTime)
	}
	for k, y := range sol.States {
		if math.Abs(y[0]-math.Sin(sol.Times[k])) > 1e-4 {
			return fmt.Errorf("the state at t = %g is off", sol.Times[k])
		}
	}
	return nil
}

// pole: y′ = y² from 1 goes to infinity at t = 1.
func pole(ctx context.Context, opts ode.Options) error {
	sys := &faulty{2, func(d []float64, _ float64, y []float64) error {
		d[0], d[1] = -y[0], y[1]*y[1]
		return nil
	}}
	opts.Rtol, opts.Names = 1e-6, []string{"calm", "wild"}
	sol, err := ode.Solve(ctx, sys, []float64{1, 1}, []float64{0, 0.5, 2}, opts)
	var f *ode.Failure
	if !errors.As(err, &f) || f.Reason != ode.Collapsed && f.Reason != ode.NotFinite {
		return fmt.Errorf("the error is %v", err)
	}
	if err := failsAs(err, f.Reason, 1, 1); err != nil {
		return err
	}
	if !strings.Contains(err.Error(), "wild") {
		return fmt.Errorf("the component is not named in %q", err)
	}
	if len(sol.States) != 2 || math.Abs(sol.States[1][1]-2) > 1e-4 {
		return fmt.Errorf("states before the pole: %v", sol.States)
	}
	return nil
}

func notNumber(ctx context.Context, opts ode.Options) error {
	sys := &faulty{2, func(d []float64, t float64, y []float64) error {
		d[0], d[1] = 1, 1
		if t > 1 {
			d[1] = math.NaN()
		}
		return nil
	}}
	_, err := ode.Solve(ctx, sys, []float64{0, 0}, []float64{0, 2}, opts)
	if err := failsAs(err, ode.NotFinite, 1, 1); err != nil {
		return err
	}
	_, err = ode.Solve(ctx, sys, []float64{0, 0}, []float64{1.5, 2}, opts)
	return failsAs(err, ode.NotFinite, 1.5, 1)
}

// domain: y′ = −√y reaches zero at t = 2, beyond which f has no value. Up to
// shortly before it must be solved.
func domain(ctx context.Context, opts ode.Options) error {
	sys := &faulty{1, func(d []float64, _ float64, y []float64) error {
		if y[0] < 0 {
			return fmt.Errorf("root of %g: %w", y[0], ode.ErrDomain)
		}
		d[0] = -math.Sqrt(y[0])
		return nil
	}}
	opts.Rtol, opts.Atol = 1e-6, 1e-12
	sol, err := ode.Solve(ctx, sys, []float64{1}, []float64{0, 1, 1.999}, opts)
	if err != nil {
		return err
	}
	if d := sol.States[1][0] - 0.25; math.Abs(d) > 1e-5 {
		return fmt.Errorf("y(1) is off by %g", d)
	}
	return nil
}

func systemError(ctx context.Context, opts ode.Options) error {
	why := errors.New("the pump is off")
	sys := &faulty{1, func(d []float64, t float64, _ []float64) error {
		if d[0] = 1; t > 1 {
			return why
		}
		return nil
	}}
	opts.MaxStep = 0.01
	_, err := ode.Solve(ctx, sys, []float64{0}, []float64{0, 2}, opts)
	if !errors.Is(err, why) {
		return fmt.Errorf("the error is %v", err)
	}
	return failsAs(err, ode.SystemFailed, 1, -1)
}

func bounded(ctx context.Context, opts ode.Options) error {
	e := oscillator()
	opts.MaxSteps = 7
	_, err := ode.Solve(ctx, e, e.Start, []float64{0, 500}, opts)
	var f *ode.Failure
	if !errors.As(err, &f) || f.Reason != ode.StepsSpent {
		return fmt.Errorf("the error is %v", err)
	}
	return nil
}

func badInput(ctx context.Context, opts ode.Options) error {
	e := chain()
	start, times := e.Start, e.Times
	inf := math.Inf(1)
	cases := []struct {
		what  string
		sys   ode.System
		y0, t []float64
		o     ode.Options
	}{
		{"no times", e, start, nil, opts},
		{"times that stand", e, start, []float64{0, 1, 1}, opts},
		{"times that turn", e, start, []float64{0, 2, 1}, opts},
		{"an infinite time", e, start, []float64{0, inf}, opts},
		{"a short start", e, start[:2], times, opts},
		{"a start that is no number", e, []float64{1, math.NaN(), 0}, times, opts},
		{"no component", &faulty{}, nil, times, opts},
		{"a negative tolerance", e, start, times, with(opts, func(o *ode.Options) { o.Rtol = -1e-6 })},
		{"a tolerance below rounding", e, start, times, with(opts, func(o *ode.Options) { o.Rtol = 1e-16 })},
		{"a tolerance above one", e, start, times, with(opts, func(o *ode.Options) { o.Rtol = 2 })},
		{"a negative absolute tolerance", e, start, times, with(opts, func(o *ode.Options) { o.Atol = -1 })},
		{"too few absolute tolerances", e, start, times, with(opts, func(o *ode.Options) { o.AtolEach = []float64{1} })},
		{"a zero start without absolute tolerance", e, start, times,
			with(opts, func(o *ode.Options) { o.AtolEach = []float64{1, 0, 1} })},
		{"a step that is no number", e, start, times, with(opts, func(o *ode.Options) { o.FirstStep = math.NaN() })},
		{"a negative step", e, start, times, with(opts, func(o *ode.Options) { o.MaxStep = -1 })},
		{"an unknown method", e, start, times, with(opts, func(o *ode.Options) { o.Method = 99 })},
		{"an unknown order", e, start, times, with(opts, func(o *ode.Options) { o.MinOrder = 7 })},
		{"orders crossed", e, start, times, with(opts, func(o *ode.Options) { o.MinOrder, o.MaxOrder = 13, 5 })},
		{"a component beyond the last", e, start, times, with(opts, func(o *ode.Options) { o.NonNegative = []int{3} })},
		{"totals of another size", e, start, times, with(opts, func(o *ode.Options) { o.Totals = mat.NewDense(1, 2, nil) })},
		{"totals held but not given", e, start, times, with(opts, func(o *ode.Options) { o.HoldTotals = true })},
		{"an event without function", e, start, times, with(opts, func(o *ode.Options) { o.Events = []ode.Event{{}} })},
		{"sensitivities without constants", &faulty{n: 3}, start, times,
			with(opts, func(o *ode.Options) { o.Sensitivity = &ode.Sensitivity{} })},
		{"sensitivities of another size", e, start, times, with(opts, func(o *ode.Options) {
			o.Sensitivity = &ode.Sensitivity{Start: mat.NewDense(2, 2, nil)}
		})},
		{"a scale of zero", e, start, times, with(opts, func(o *ode.Options) {
			o.Sensitivity = &ode.Sensitivity{Scale: []float64{1, 0}}
		})},
	}
	for _, c := range cases {
		sol, err := ode.Solve(ctx, c.sys, c.y0, c.t, c.o)
		if err := failsAs(err, ode.BadInput, math.NaN(), -1); err != nil {
			return fmt.Errorf("%s: %w", c.what, err)
		}
		if sol == nil || len(sol.States) > 0 {
			return fmt.Errorf("%s: a solution with states", c.what)
		}
	}
	return nil
}

// with is a copy of the options, changed.
func with(o ode.Options, change func(*ode.Options)) ode.Options {
	change(&o)
	return o
}
