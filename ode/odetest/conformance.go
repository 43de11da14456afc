package odetest

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"

	"ligancy/ode"
)

// Check is one demand that every method must meet.
type Check struct {
	Name string
	// Run applies it to a method, and to what else opts say; tolerances are its own.
	Run func(ctx context.Context, opts ode.Options) error
}

// Conformance lists the demands.
func Conformance() []Check {
	return []Check{
		{"states meet the tolerance", accurate},
		{"states between steps meet the tolerance", accurateBetween},
		{"a smaller tolerance brings smaller errors", obedient},
		{"outputs do not change the steps", undisturbed},
		{"sensitivities meet the tolerance", sensitive},
		{"sensitivities to the start are carried", startCarried},
		{"sensitivities without formulas agree with differences", sensitiveDifferenced},
		{"time can run backwards", backwards},
		{"a change of unit changes nothing else", unitless},
		{"events are found where they are", events},
		{"a terminal event ends the solution", terminal},
		{"totals are kept", totalsKept},
		{"false totals are refused", falseTotals},
		{"components stay non-negative", nonNegative},
		{"a solver used again gives the same digits", reusable},
		{"cancelling returns what was found", cancellation},
		{"a pole collapses the step and is named", pole},
		{"a derivative that is no number is named", notNumber},
		{"a state without value makes the step smaller", domain},
		{"an error of the system ends the integration", systemError},
		{"the number of steps is bounded", bounded},
		{"bad input is refused", badInput},
	}
}

// allowance is how many tolerances an error may be: they add up over the steps,
// and more between the ends of explicit steps bounded by stability.
const allowance = 100

func accurate(ctx context.Context, opts ode.Options) error {
	return eachTolerance(func(rtol float64, e *Exact) error {
		o := opts
		o.Rtol, o.Atol = rtol, rtol
		sol, err := ode.Solve(ctx, e, e.Start, e.Times, o)
		if err != nil {
			return err
		}
		return near(e, sol.Times, sol.States, rtol)
	})
}

func eachTolerance(check func(rtol float64, e *Exact) error) error {
	for _, e := range Exacts() {
		for _, rtol := range []float64{1e-4, 1e-7, 1e-10} {
			if err := check(rtol, e); err != nil {
				return fmt.Errorf("%s, tolerance %g: %w", e.Name, rtol, err)
			}
		}
	}
	return nil
}

// near compares states with the closed form.
func near(e *Exact, times []float64, states [][]float64, rtol float64) error {
	if len(states) != len(times) {
		return fmt.Errorf("%d states at %d times", len(states), len(times))
	}
	for k, t := range times {
		for i, v := range e.States(t) {
			if d := math.Abs(states[k][i] - v); !(d <= allowance*rtol*(1+math.Abs(v))) {
				return fmt.Errorf("component %d at t = %g is off by %.3g", i+1, t, d)
			}
		}
	}
	return nil
}

func accurateBetween(ctx context.Context, opts ode.Options) error {
	return eachTolerance(func(rtol float64, e *Exact) error {
		o := opts
		o.Rtol, o.Atol, o.Keep = rtol, rtol, true
		end := e.Times[len(e.Times)-1]
		times := spread(0, end, 173)
		sol, err := ode.Solve(ctx, e, e.Start, times, o)
		if err != nil {
			return err
		}
		if err := near(e, times, sol.States, rtol); err != nil {
			return err
		}
		var y []float64
		for _, t := range spread(0, end, 91) {
			if y, err = sol.At(y, t); err != nil {
				return err
			}
			if err := near(e, []float64{t}, [][]float64{y}, rtol); err != nil {
				return fmt.Errorf("kept: %w", err)
			}
		}
		if _, err := sol.At(nil, end+1); err == nil {
			return errors.New("a state after the end was given")
		}
		return nil
	})
}

// spread is m+1 times evenly from a to b.
func spread(a, b float64, m int) []float64 {
	t := make([]float64, m+1)
	for i := range t {
		t[i] = a + (b-a)*float64(i)/float64(m)
	}
	t[m] = b
	return t
}

func obedient(ctx context.Context, opts ode.Options) error {
	for _, e := range Exacts() {
		var worst [2]float64
		for q, rtol := range []float64{1e-3, 1e-9} {
			o := opts
			o.Rtol, o.Atol = rtol, rtol
			sol, err := ode.Solve(ctx, e, e.Start, e.Times, o)
			if err != nil {
				return err
			}
			for k, t := range e.Times {
				for i, v := range e.States(t) {
					worst[q] = max(worst[q], math.Abs(sol.States[k][i]-v))
				}
			}
		}
		if worst[1] > max(1e-4*worst[0], 1e-9) {
			return fmt.Errorf("%s: error %.3g at tolerance 1e-3, %.3g at 1e-9", e.Name, worst[0], worst[1])
		}
	}
	return nil
}

func undisturbed(ctx context.Context, opts ode.Options) error {
	e := chain()
	opts.Rtol = 1e-7
	few, err := ode.Solve(ctx, e, e.Start, []float64{0, 20}, opts)
	if err != nil {
		return err
	}
	many, err := ode.Solve(ctx, e, e.Start, spread(0, 20, 500), opts)
	if err != nil {
		return err
	}
	if !slices.Equal(few.EndState, many.EndState) || few.Stats.Steps != many.Stats.Steps {
		return errors.New("500 outputs changed the end state")
	}
	if !slices.Equal(many.EndState, many.States[500]) {
		return errors.New("the last state is not the end state")
	}
	return nil
}

func sensitive(ctx context.Context, opts ode.Options) error {
	return eachTolerance(func(rtol float64, e *Exact) error {
		o := opts
		o.Rtol, o.Atol, o.Keep = rtol, rtol, true
		o.Sensitivity = &ode.Sensitivity{}
		sol, err := ode.Solve(ctx, e, e.Start, e.Times, o)
		if err != nil {
			return err
		}
		if err := near(e, sol.Times, sol.States, rtol); err != nil {
			return err
		}
		for k, t := range e.Times {
			if err := nearSlopes(e, t, sol.Sensitivities[k], rtol); err != nil {
				return err
			}
			kept, err := sol.SensitivityAt(nil, t)
			if err != nil {
				return err
			}
			if err := nearSlopes(e, t, kept, rtol); err != nil {
				return fmt.Errorf("kept: %w", err)
			}
		}
		return nil
	})
}

func nearSlopes(e *Exact, t float64, s *mat.Dense, rtol float64) error {
	for k, v := range e.Slopes(t) {
		if d := math.Abs(s.RawMatrix().Data[k] - v); !(d <= allowance*rtol*(1+math.Abs(v))) {
			return fmt.Errorf("sensitivity %d at t = %g is %.12g, not %.12g", k+1, t, s.RawMatrix().Data[k], v)
		}
	}
	return nil
}

// startCarried: with θ = ln y₀ and f free of θ, ∂y/∂θ of y′ = −ky is y itself.
func startCarried(ctx context.Context, opts ode.Options) error {
	e := &Exact{
		n: 1, Theta: []float64{0},
		f: func(d []float64, _ float64, y []float64) { d[0] = -0.5 * y[0] },
		j: func(J []float64, _ float64, _ []float64) { J[0] = -0.5 },
		p: func([]float64, float64, []float64) {},
	}
	opts.Rtol, opts.Sensitivity = 1e-9, &ode.Sensitivity{Start: mat.NewDense(1, 1, []float64{3})}
	sol, err := ode.Solve(ctx, e, []float64{3}, []float64{0, 1, 4}, opts)
	if err != nil {
		return err
	}
	for k := range sol.Times {
		y, s := sol.States[k][0], sol.Sensitivities[k].At(0, 0)
		if math.Abs(s-y) > 1e-8*y {
			return fmt.Errorf("at t = %g ∂y/∂ln y₀ is %g, not %g", sol.Times[k], s, y)
		}
	}
	return nil
}

// plain hides the Jacobian of a System.
type plain struct{ ode.ParamJacobianer }

// sensitiveDifferenced takes the derivatives of f by differences.
func sensitiveDifferenced(ctx context.Context, opts ode.Options) error {
	for _, e := range Exacts() {
		o := opts
		o.Rtol, o.Atol, o.Sensitivity = 1e-7, 1e-7, &ode.Sensitivity{}
		sol, err := ode.Solve(ctx, plain{e}, e.Start, e.Times, o)
		if err != nil {
			return fmt.Errorf("%s: %w", e.Name, err)
		}
		for k, t := range e.Times {
			if err := nearSlopes(e, t, sol.Sensitivities[k], 1e-7); err != nil {
				return fmt.Errorf("%s: %w", e.Name, err)
			}
		}
	}
	return nil
}

func backwards(ctx context.Context, opts ode.Options) error {
	e := oscillator()
	opts.Rtol, opts.Atol = 1e-9, 1e-9
	there, err := ode.Solve(ctx, e, e.Start, []float64{0, 2}, opts)
	if err != nil {
		return err
	}
	back, err := ode.Solve(ctx, e, there.EndState, []float64{2, 1, 0}, opts)
	if err != nil {
		return err
	}
	return near(e, back.Times, back.States, 1e-9)
}

// scaled is a System in other units: z = 2ᵏ y.
type scaled struct {
	sys   ode.Jacobianer
	by    float64
	y, dy []float64
}

func (s *scaled) Dim() int { return s.sys.Dim() }

func (s *scaled) Derivs(dst []float64, t float64, z []float64) error {
	for i, v := range z {
		s.y[i] = v / s.by
	}
	err := s.sys.Derivs(dst, t, s.y)
	for i := range dst {
		dst[i] *= s.by
	}
	return err
}

func (s *scaled) Jacobian(dst *mat.Dense, t float64, z []float64) error {
	for i, v := range z {
		s.y[i] = v / s.by
	}
	return s.sys.Jacobian(dst, t, s.y)
}

// unitless: a power of two is exact, so every digit must be the same.
func unitless(ctx context.Context, opts ode.Options) error {
	p, err := ByName("lotka")
	if err != nil {
		return err
	}
	sys := p.New().(ode.Jacobianer)
	opts.Rtol, opts.Atol = 1e-7, 1e-9
	one, err := ode.Solve(ctx, sys, p.Start, []float64{0, 3}, opts)
	if err != nil {
		return err
	}
	by := math.Ldexp(1, -40)
	z := &scaled{sys, by, make([]float64, 2), make([]float64, 2)}
	opts.Atol *= by
	two, err := ode.Solve(ctx, z, []float64{p.Start[0] * by, p.Start[1] * by}, []float64{0, 3}, opts)
	if err != nil {
		return err
	}
	for i, v := range one.EndState {
		if two.EndState[i] != v*by {
			return fmt.Errorf("component %d: %v in one unit, %v in the other", i+1, v, two.EndState[i]/by)
		}
	}
	return nil
}

func reusable(ctx context.Context, opts ode.Options) error {
	opts.Rtol = 1e-7
	s := ode.Solver{Options: opts}
	var sol *ode.Solution
	var first []float64
	for round := range 3 {
		for _, e := range Exacts() { // of different sizes
			var err error
			if sol, err = s.Solve(ctx, sol, e, e.Start, e.Times); err != nil {
				return err
			}
			if e.Name != "chain of two decays" {
				continue
			}
			if round == 0 {
				first = slices.Clone(sol.EndState)
			} else if !slices.Equal(first, sol.EndState) {
				return errors.New("the second use gave other digits")
			}
		}
	}
	return nil
}
