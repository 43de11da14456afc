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
	inf, nan := math.Inf(1), math.NaN()
	set := func(change func(o *ode.Options)) question {
		o := opts
		change(&o)
		return question{e, e.Start, e.Times, o}
	}
	at := func(times ...float64) question { return question{e, e.Start, times, opts} }
	from := func(start ...float64) question { return question{e, start, e.Times, opts} }
	small := mat.NewDense(2, 2, nil)
	cases := []struct {
		what string
		q    question
	}{
		{"no times", at()},
		{"times that stand", at(0, 1, 1)},
		{"times that turn", at(0, 2, 1)},
		{"an infinite time", at(0, inf)},
		{"a short start", from(1, 0)},
		{"a start that is no number", from(1, nan, 0)},
		{"no component", question{&faulty{}, nil, e.Times, opts}},
		{"a negative tolerance", set(func(o *ode.Options) { o.Rtol = -1e-6 })},
		{"a tolerance below rounding", set(func(o *ode.Options) { o.Rtol = 1e-16 })},
		{"a tolerance above one", set(func(o *ode.Options) { o.Rtol = 2 })},
		{"a negative absolute tolerance", set(func(o *ode.Options) { o.Atol = -1 })},
		{"too few absolute tolerances", set(func(o *ode.Options) { o.AtolEach = []float64{1} })},
		{"an infinite absolute tolerance", set(func(o *ode.Options) { o.AtolEach = []float64{1, 1, inf} })},
		{"a zero start without tolerance", set(func(o *ode.Options) { o.AtolEach = []float64{1, 0, 1} })},
		{"a step that is no number", set(func(o *ode.Options) { o.FirstStep = nan })},
		{"a negative step", set(func(o *ode.Options) { o.MaxStep = -1 })},
		{"a negative number of steps", set(func(o *ode.Options) { o.MaxSteps = -1 })},
		{"an unknown method", set(func(o *ode.Options) { o.Method = 99 })},
		{"an unknown order", set(func(o *ode.Options) { o.MinOrder = 7 })},
		{"orders crossed", set(func(o *ode.Options) { o.MinOrder, o.MaxOrder = 13, 5 })},
		{"a component beyond the last", set(func(o *ode.Options) { o.NonNegative = []int{3} })},
		{"names of another number", set(func(o *ode.Options) { o.Names = []string{"A"} })},
		{"totals of another size", set(func(o *ode.Options) { o.Totals = mat.NewDense(1, 2, nil) })},
		{"totals without numbers", set(func(o *ode.Options) { o.Totals = mat.NewDense(1, 3, []float64{1, 1, nan}) })},
		{"totals held but not given", set(func(o *ode.Options) { o.HoldTotals = true })},
		{"an event without function", set(func(o *ode.Options) { o.Events = []ode.Event{{}} })},
		{"sensitivities without constants", question{&faulty{n: 3}, e.Start, e.Times,
			ode.Options{Method: opts.Method, Sensitivity: &ode.Sensitivity{}}}},
		{"sensitivities of another size", set(func(o *ode.Options) { o.Sensitivity = &ode.Sensitivity{Start: small} })},
		{"a scale of zero", set(func(o *ode.Options) { o.Sensitivity = &ode.Sensitivity{Scale: []float64{1, 0}} })},
		{"a scale too few", set(func(o *ode.Options) { o.Sensitivity = &ode.Sensitivity{Scale: []float64{1}} })},
	}
	for _, c := range cases {
		sol, err := ode.Solve(ctx, c.q.sys, c.q.start, c.q.times, c.q.opts)
		if err := failsAs(err, ode.BadInput, nan, -1); err != nil {
			return fmt.Errorf("%s: %w", c.what, err)
		}
		if sol == nil || len(sol.States) > 0 {
			return fmt.Errorf("%s: a solution with states", c.what)
		}
	}
	return nil
}

// question is what is put to ode.Solve.
type question struct {
	sys          ode.System
	start, times []float64
	opts         ode.Options
}
