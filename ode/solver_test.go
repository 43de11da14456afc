package ode

import (
	"errors"
	"math"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// A solver used again allocates nothing, however many steps it takes.
func TestAllocations(t *testing.T) {
	for _, o := range []Options{
		{Rtol: 1e-8},
		{Rtol: 1e-8, Method: Explicit},
		{Rtol: 1e-8, Totals: mat.NewDense(1, 2, []float64{0, 0}), HoldTotals: false, NonNegative: nil},
	} {
		s := Solver{Options: o}
		var sol *Solution
		run := func(end float64) func() {
			times := []float64{0, end / 3, end}
			y0 := []float64{1, 0}
			return func() {
				var err error
				if sol, err = s.Solve(t.Context(), sol, pendulum{}, y0, times); err != nil {
					t.Fatal(err)
				}
			}
		}
		run(200)()
		few, many := testing.AllocsPerRun(5, run(2)), testing.AllocsPerRun(5, run(200))
		if few > 0 || many > 0 {
			t.Errorf("%v: %g allocations for a short run, %g for a long one", o.Method, few, many)
		}
	}
}

func TestFailureMessages(t *testing.T) {
	why := errors.New("why")
	for _, c := range []struct {
		f    Failure
		want string
	}{
		{Failure{Reason: BadInput, Err: why}, "ode: why"},
		{Failure{Reason: Collapsed, Time: 1.5, Step: 1e-20, Component: 2, name: "RL"},
			"ode: at t = 1.5 the step collapsed to 1e-20: component RL cannot be held to its tolerance"},
		{Failure{Reason: Collapsed, Time: 1.5, Step: 1e-20, Component: -1},
			"ode: at t = 1.5 the step collapsed to 1e-20"},
		{Failure{Reason: NotFinite, Time: 2, Component: 0, name: "1"},
			"ode: at t = 2 the derivative of component 1 is not finite"},
		{Failure{Reason: NotFinite, Time: 2, Component: -1}, "ode: at t = 2 a derivative is not finite"},
		{Failure{Reason: WouldBeNegative, Time: 3, Component: 0, name: "L"},
			"ode: at t = 3 component L turns negative at every step tried, though it should not"},
		{Failure{Reason: StepsSpent, Time: 3, Step: 0.5, Component: 0, name: "L"},
			"ode: at t = 3 the number of steps ran out; the last one was 0.5, held back by component L"},
		{Failure{Reason: SystemFailed, Time: 4, Err: why}, "ode: at t = 4 the system failed: why"},
		{Failure{Reason: Cancelled, Time: 4, Err: why}, "ode: at t = 4 stopped: why"},
	} {
		if got := c.f.Error(); got != c.want {
			t.Errorf("%q, not %q", got, c.want)
		}
	}
	if !errors.Is(&Failure{Err: why}, why) {
		t.Error("the cause is hidden")
	}
}

// The clock carries its rounding errors along: 10 000 equal steps of 0.1 end at
// 1000, and steps far below an ulp of t still count.
func TestClock(t *testing.T) {
	s := Solver{sol: new(Solution)}
	s.prepare(pendulum{}, []float64{0, 0}, []float64{0, 1e9})
	s.m = &s.expl
	s.expl.gain = make([]float64, 2)
	for range 10000 {
		s.advance(0.1, false)
	}
	close1(t, "clock", s.p.t+s.p.tLow, 1000, 2e-16)
	s.p.t, s.p.tLow = 1e6, 0
	for range 1000 {
		s.advance(1e-13, false)
	}
	if got := (s.p.t - 1e6) + s.p.tLow; math.Abs(got-1e-10) > 1e-22 {
		t.Errorf("the clock moved by %g", got)
	}
}

// A start without any step is a solution with one state.
func TestOneTime(t *testing.T) {
	sol, err := Solve(t.Context(), pendulum{}, []float64{1, 2}, []float64{7}, Options{})
	if err != nil || len(sol.States) != 1 || sol.States[0][1] != 2 || sol.EndTime != 7 {
		t.Errorf("%+v, %v", sol, err)
	}
}

// f = 0 costs few steps.
func TestRest(t *testing.T) {
	for _, m := range []Method{Radau, Explicit} {
		sol, err := Solve(t.Context(), pendulum{}, []float64{0, 0}, []float64{0, 1e6}, Options{Method: m})
		if err != nil || sol.EndState[0] != 0 || sol.Stats.Steps > 40 {
			t.Errorf("%v: %+v, %v", m, sol.Stats, err)
		}
	}
}

// A stiff problem given to the explicit method is solved, with a warning.
func TestStiffWarning(t *testing.T) {
	sol, err := Solve(t.Context(), fast{}, []float64{0}, []float64{0, 10}, Options{Method: Explicit})
	if err != nil {
		t.Fatal(err)
	}
	if len(sol.Warnings) != 1 || !strings.Contains(sol.Warnings[0], "use Radau") {
		t.Errorf("warnings %q", sol.Warnings)
	}
	if sol, err = Solve(t.Context(), fast{}, []float64{0}, []float64{0, 10}, Options{}); err != nil ||
		len(sol.Warnings) > 0 {
		t.Errorf("radau: %v, %q", err, sol.Warnings)
	}
	if sol.Stats.Steps > 60 {
		t.Errorf("radau took %d steps", sol.Stats.Steps)
	}
}

// fast is y′ = −1000 (y − 1).
type fast struct{}

func (fast) Dim() int { return 1 }

func (fast) Derivs(dst []float64, _ float64, y []float64) error {
	dst[0] = -1000 * (y[0] - 1)
	return nil
}

// The largest step is heeded, and so is the first.
func TestStepBounds(t *testing.T) {
	for _, m := range []Method{Radau, Explicit} {
		sol, err := Solve(t.Context(), pendulum{}, []float64{1, 0}, []float64{0, 1},
			Options{Method: m, MaxStep: 0.01, FirstStep: 0.5, Rtol: 1e-3})
		if err != nil || sol.Stats.Steps < 100 || sol.Stats.Steps > 103 {
			t.Errorf("%v: %d steps, %v", m, sol.Stats.Steps, err)
		}
	}
}

// decay is y′ = −k y with θ = ln k.
type decay struct{ k float64 }

func (d decay) Dim() int { return 1 }

func (d decay) Derivs(dst []float64, _ float64, y []float64) error {
	dst[0] = -d.k * y[0]
	return nil
}

func (d decay) Jacobian(dst *mat.Dense, _ float64, _ []float64) error {
	dst.Set(0, 0, -d.k)
	return nil
}

func (d decay) NumParams() int { return 1 }

func (d decay) ParamJacobian(dst *mat.Dense, _ float64, y []float64) error {
	dst.Set(0, 0, -d.k*y[0])
	return nil
}

// Two decays (both scaled by one θ) with an addition and a tenfold dilution between.
func TestPhases(t *testing.T) {
	add := func(y []float64, s *mat.Dense) error { y[0] += 5; return nil }
	dilute := func(y []float64, s *mat.Dense) error {
		y[0] /= 10
		if s != nil {
			s.Scale(0.1, s)
		}
		return nil
	}
	phases := []Phase{
		{System: decay{2}, Times: []float64{0.5, 1}},
		{System: decay{0.5}, Times: []float64{3}, Enter: add},
		{System: decay{0.5}, Times: []float64{3.5, 4}, Enter: dilute},
	}
	for _, m := range []Method{Radau, Explicit} {
		s := Solver{Options: Options{Method: m, Rtol: 1e-10, Sensitivity: &Sensitivity{}}}
		asked := s.Options.Sensitivity
		var all []*Solution
		for range 2 { // the second time in the same memory
			var err error
			if all, err = s.SolvePhases(t.Context(), all, phases, 0, []float64{1}); err != nil {
				t.Fatal(err)
			}
		}
		if s.Options.Sensitivity != asked || asked.Start != nil {
			t.Error("the options were changed")
		}
		y1 := math.Exp(-2)
		s1 := -2 * y1
		e2 := math.Exp(-1)
		y2, s2 := (y1+5)*e2, s1*e2-1*(y1+5)*e2
		e3 := math.Exp(-0.5)
		y3, s3 := y2/10*e3, s2/10*e3-0.5*y2/10*e3
		close1(t, "after phase 1", all[0].EndState[0], y1, 1e-9)
		close1(t, "start of phase 2", all[1].States[0][0], y1+5, 1e-9)
		close1(t, "after phase 2", all[1].EndState[0], y2, 1e-9)
		close1(t, "after phase 3", all[2].EndState[0], y3, 1e-9)
		close1(t, "sensitivity 1", all[0].Sensitivities[2].At(0, 0), s1, 1e-9)
		close1(t, "sensitivity 2", all[1].Sensitivities[1].At(0, 0), s2, 1e-9)
		close1(t, "sensitivity 3", all[2].Sensitivities[2].At(0, 0), s3, 1e-9)
	}
}

func TestPhasesFail(t *testing.T) {
	why := errors.New("the syringe is empty")
	good := Phase{System: decay{1}, Times: []float64{1}}
	for _, c := range []struct {
		name string
		bad  Phase
		want string
	}{
		{"enter", Phase{System: decay{1}, Times: []float64{2},
			Enter: func([]float64, *mat.Dense) error { return why }}, "phase 2: ode: the syringe is empty"},
		{"no times", Phase{System: decay{1}}, "phase 2: ode: no system or no times"},
		{"overlap", Phase{System: decay{1}, Times: []float64{0.5, 2}}, "phase 2: ode: times must go one way"},
		{"other size", Phase{System: pendulum{}, Times: []float64{2}},
			"phase 2: ode: the start has 1 components, the system 2"},
	} {
		var s Solver
		all, err := s.SolvePhases(t.Context(), nil, []Phase{good, c.bad}, 0, []float64{1})
		if err == nil || !strings.HasPrefix(err.Error(), c.want) {
			t.Errorf("%s: %v", c.name, err)
		}
		if len(all) != 2 || len(all[0].States) != 2 {
			t.Errorf("%s: the first phase is lost", c.name)
		}
	}
}

// A terminal event ends the series of phases.
func TestPhasesEnd(t *testing.T) {
	s := Solver{Options: Options{Events: []Event{{
		G: func(_ float64, y []float64) float64 { return y[0] - 0.5 }, Terminal: true}}}}
	phases := []Phase{
		{System: decay{1}, Times: []float64{5}}, {System: decay{1}, Times: []float64{9}},
	}
	all, err := s.SolvePhases(t.Context(), nil, phases, 0, []float64{1})
	if err != nil || len(all) != 1 || !all[0].Ended {
		t.Errorf("%d phases, %v", len(all), err)
	}
	close1(t, "time", all[0].EndTime, math.Ln2, 1e-5)
}

func FuzzSolve(f *testing.F) {
	f.Add(1e-6, 0.0, 1.0, 0.1, 0.0, uint8(0))
	f.Add(1e-3, 1e-9, -5.0, 1e300, 1e-3, uint8(1))
	f.Add(math.NaN(), math.Inf(1), math.Inf(-1), 0.0, -1.0, uint8(2))
	f.Fuzz(func(t *testing.T, rtol, atol, end, y0, first float64, method uint8) {
		sol, err := Solve(t.Context(), pendulum{}, []float64{y0, 0}, []float64{0, end}, Options{
			Method: Method(method), Rtol: rtol, Atol: atol, FirstStep: first, MaxSteps: 200,
		})
		if err == nil && (len(sol.States) != 2 || notFinite(sol.EndState) >= 0) {
			t.Errorf("a solution without numbers: %v", sol.EndState)
		}
	})
}
