package ode

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Method names a way of stepping.
type Method uint8

const (
	// Radau is implicit: for stiff problems, and for any whose kind is unknown.
	Radau Method = iota
	// Explicit is cheaper where the problem is not stiff. Where stability bounds
	// its steps, as it does at last in every decay, states between their ends can
	// be off by some tens of tolerances.
	Explicit
)

func (m Method) String() string {
	switch m {
	case Radau:
		return "radau"
	case Explicit:
		return "explicit"
	}
	return fmt.Sprintf("method(%d)", uint8(m))
}

// Options sizes an integration. The zero value works.
type Options struct {
	Method Method

	// Rtol is the relative tolerance of each component; 0 means 1e-6.
	Rtol float64
	// Atol is the absolute tolerance of every component: about the size below
	// which a component does not matter, times Rtol. 0 means 1e-6·Rtol times
	// the largest component of the start (times 1 where that is zero).
	Atol float64
	// AtolEach replaces Atol component by component. nil means Atol.
	AtolEach []float64

	// FirstStep and MaxStep bound the step (without sign); 0 leaves them free.
	FirstStep, MaxStep float64
	// MaxSteps bounds the attempts; 0 means 100 000.
	MaxSteps int
	// MinOrder and MaxOrder bound the order of Radau: 5, 9 or 13. 0 leaves them free.
	MinOrder, MaxOrder int

	// Sensitivity asks for ∂y/∂θ; the System must be a ParamJacobianer.
	Sensitivity *Sensitivity
	// Events are looked for along the way.
	Events []Event
	// Totals are linear forms c·y that the exact solution keeps, one a row. Their
	// drift is reported; that f keeps them is checked at the start.
	Totals *mat.Dense
	// HoldTotals moves each new state back onto the totals of the start, by the
	// smallest change in units of the tolerance.
	HoldTotals bool
	// NonNegative lists components that the exact solution never makes negative.
	// A step that leaves one below minus its tolerance is taken again, smaller;
	// between that and zero it is set to zero.
	NonNegative []int

	// Keep stores every step, so that Solution.At can be asked for any time.
	Keep bool
	// Names of the components, for error messages. nil means numbers from 1.
	Names []string
}

// Sensitivity says how ∂y/∂θ is integrated. It obeys the linear equations
// S′ = (∂f/∂y) S + ∂f/∂θ, solved step by step with the matrices of the state.
type Sensitivity struct {
	// Start is ∂y₀/∂θ, n×p; nil means zero.
	Start *mat.Dense
	// Scale is the size of each θ: sensitivities are held to Rtol and to the
	// absolute tolerance of the component divided by Scale. nil means 1.
	Scale []float64
	// Uncontrolled leaves sensitivities out of the choice of the step.
	Uncontrolled bool
}

const (
	defaultRtol     = 1e-6
	defaultMaxSteps = 100_000
	// leastRtol is as far as rounding lets Newton's iteration go.
	leastRtol = 1e-13
)

// check lists everything that is wrong with the question.
func (o *Options) check(sys System, y0, times []float64) error {
	var all []error
	bad := func(format string, args ...any) { all = append(all, fmt.Errorf(format, args...)) }
	n := sys.Dim()
	switch {
	case n <= 0:
		bad("the system has %d components", n)
	case len(y0) != n:
		bad("the start has %d components, the system %d", len(y0), n)
	}
	if i := notFinite(y0); i >= 0 {
		bad("component %s of the start is %g", o.name(i), y0[i])
	}
	all = append(all, checkTimes(times)...)
	if o.Method > Explicit {
		bad("there is no method %d", o.Method)
	}
	if o.Rtol != 0 && !(o.Rtol >= leastRtol && o.Rtol < 1) {
		bad("relative tolerance %g is not between %g and 1", o.Rtol, leastRtol)
	}
	for i, a := range o.AtolEach {
		switch {
		case !(a >= 0) || math.IsInf(a, 0):
			bad("absolute tolerance %g of component %s is negative or not finite", a, o.name(i))
		case a == 0 && i < len(y0) && y0[i] == 0:
			bad("component %s starts at zero and needs an absolute tolerance", o.name(i))
		}
	}
	all = append(all, o.checkSizes(n)...)
	for _, v := range []struct {
		what string
		x    float64
	}{{"absolute tolerance", o.Atol}, {"first step", o.FirstStep}, {"longest step", o.MaxStep}} {
		if !(v.x >= 0) || math.IsInf(v.x, 0) {
			bad("%s %g is negative or not finite", v.what, v.x)
		}
	}
	if o.Sensitivity != nil {
		all = append(all, o.checkSensitivity(sys)...)
	}
	return errors.Join(all...)
}

func checkTimes(times []float64) (all []error) {
	if len(times) == 0 {
		return []error{errors.New("no times; the first is that of the start")}
	}
	if i := notFinite(times); i >= 0 {
		return []error{fmt.Errorf("time %d is %g", i+1, times[i])}
	}
	for i := 1; i < len(times); i++ {
		forward := times[len(times)-1] > times[0]
		if times[i] == times[i-1] || (times[i] > times[i-1]) != forward {
			return []error{fmt.Errorf("times must go one way: %g follows %g", times[i], times[i-1])}
		}
	}
	return nil
}

func (o *Options) checkSizes(n int) (all []error) {
	bad := func(format string, args ...any) { all = append(all, fmt.Errorf(format, args...)) }
	if o.AtolEach != nil && len(o.AtolEach) != n {
		bad("%d absolute tolerances for %d components", len(o.AtolEach), n)
	}
	if o.Names != nil && len(o.Names) != n {
		bad("%d names for %d components", len(o.Names), n)
	}
	for _, i := range o.NonNegative {
		if i < 0 || i >= n {
			bad("component %d cannot be held non-negative: there are %d", i+1, n)
		}
	}
	if o.Totals != nil {
		if r, c := o.Totals.Dims(); c != n || r > n {
			bad("totals are %d×%d for %d components", r, c, n)
		}
		for i := range o.Totals.RawMatrix().Rows {
			if row := o.Totals.RawRowView(i); notFinite(row) >= 0 {
				bad("total %d has the factor %g", i+1, row[notFinite(row)])
			}
		}
	}
	if o.HoldTotals && o.Totals == nil {
		bad("totals are to be held but none are given")
	}
	for _, q := range []int{o.MinOrder, o.MaxOrder} {
		if q != 0 && q != 5 && q != 9 && q != 13 {
			bad("order %d is not one of 5, 9 and 13", q)
		}
	}
	if o.MinOrder != 0 && o.MaxOrder != 0 && o.MinOrder > o.MaxOrder {
		bad("least order %d is above greatest order %d", o.MinOrder, o.MaxOrder)
	}
	if o.MaxSteps < 0 {
		bad("number of steps %d is negative", o.MaxSteps)
	}
	for i, e := range o.Events {
		if e.G == nil {
			bad("event %d has no function", i+1)
		}
	}
	return all
}

func (o *Options) checkSensitivity(sys System) (all []error) {
	par, ok := sys.(ParamJacobianer)
	if !ok {
		return []error{errors.New("sensitivities need a system that gives ∂f/∂θ")}
	}
	n, p := sys.Dim(), par.NumParams()
	if p <= 0 {
		all = append(all, fmt.Errorf("sensitivities to %d constants", p))
	}
	s := o.Sensitivity
	if s.Start != nil {
		if r, c := s.Start.Dims(); r != n || c != p {
			all = append(all, fmt.Errorf("∂y₀/∂θ is %d×%d, not %d×%d", r, c, n, p))
		} else if i := notFinite(s.Start.RawMatrix().Data); i >= 0 {
			all = append(all, errors.New("∂y₀/∂θ is not finite"))
		}
	}
	if s.Scale != nil && len(s.Scale) != p {
		all = append(all, fmt.Errorf("%d scales for %d constants", len(s.Scale), p))
	}
	for j, v := range s.Scale {
		if !(v > 0) || math.IsInf(v, 0) {
			all = append(all, fmt.Errorf("scale %g of constant %d is not positive", v, j+1))
		}
	}
	return all
}

// name is how component i is called in messages.
func (o *Options) name(i int) string {
	if i >= 0 && i < len(o.Names) {
		return o.Names[i]
	}
	return fmt.Sprint(i + 1)
}

// notFinite is the first index of an infinite value or of one that is no number; else −1.
func notFinite(x []float64) int {
	for i, v := range x {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return i
		}
	}
	return -1
}
