package ode

import (
	"context"
	"math"
)

// Solve integrates sys from y0 at times[0] and returns the states at times, which
// go one way, forward or back. A failure returns a *Failure and the states up to it.
func Solve(ctx context.Context, sys System, y0, times []float64, opts Options) (*Solution, error) {
	s := Solver{Options: opts}
	return s.Solve(ctx, nil, sys, y0, times)
}

// Solver keeps its workspace from one integration to the next. The zero value is
// ready; it serves one goroutine at a time.
type Solver struct {
	Options Options

	flow  flow
	p     point
	radau radau
	expl  explicit
	ctl   controller
	watch watcher
	tot   totals

	m        stepper
	sol      *Solution
	rtol     float64
	atol     []float64 // of the whole state
	times    []float64
	end      float64
	forward  bool
	next     int // times[next] is the next output
	out      []float64
	low      []float64 // what rounding has left of the state
	spent    int       // attempts
	blame    Reason
	holdback int
	pulled   int     // steps in a row that pulled a component below zero
	step     float64 // last size tried
}

// Solve is like the function Solve. It reuses dst, whose contents are lost; nil
// allocates.
func (s *Solver) Solve(ctx context.Context, dst *Solution, sys System, y0, times []float64) (*Solution, error) {
	if dst == nil {
		dst = new(Solution)
	}
	s.sol = dst
	if err := s.Options.check(sys, y0, times); err != nil {
		*dst = Solution{}
		return dst, &Failure{Reason: BadInput, Component: -1, Err: err}
	}
	s.prepare(sys, y0, times)
	err := s.begin()
	if err == nil {
		err = s.integrate(ctx)
	}
	s.finish()
	return dst, err
}

// prepare sets the workspace up for a question that has passed its check.
func (s *Solver) prepare(sys System, y0, times []float64) {
	o := &s.Options
	fl := &s.flow
	s.rtol = o.Rtol
	if s.rtol == 0 {
		s.rtol = defaultRtol
	}
	fl.bind(sys, o.Sensitivity != nil, &s.sol.Stats)
	fl.rtol = s.rtol
	n, all := fl.n, fl.size()
	s.sol.prepare(n, fl.p, times)
	p := &s.p
	p.y, p.f, p.iw = grown(p.y, all), grown(p.f, all), grown(p.iw, all)
	s.atol, s.out = grown(s.atol, all), grown(s.out, all)
	p.t, p.tLow = times[0], 0
	copy(p.y, y0)
	clear(p.y[n:])
	if sens := o.Sensitivity; sens != nil && sens.Start != nil {
		for i := range n {
			copy(p.y[n+i*fl.p:], sens.Start.RawRowView(i))
		}
	}
	s.low = grown(s.low, all)
	clear(s.low)
	s.tolerances(y0)
	s.times, s.end = times, times[len(times)-1]
	s.forward = s.end >= times[0]
	s.next, s.spent, s.blame, s.holdback, s.step, s.pulled = 0, 0, Collapsed, -1, 0, 0
	s.ctl.reset()
	if o.Method == Explicit {
		s.expl.resize(fl, o)
		s.m = &s.expl
	} else {
		s.radau.resize(fl, o, s.rtol)
		s.m = &s.radau
	}
}

// tolerances sets the absolute tolerance of each component and sensitivity.
func (s *Solver) tolerances(y0 []float64) {
	o, n, p := &s.Options, s.flow.n, s.flow.p
	a := o.Atol
	if a == 0 {
		var most float64
		for _, v := range y0 {
			most = max(most, math.Abs(v))
		}
		if most == 0 {
			most = 1
		}
		a = 1e-6 * s.rtol * most
	}
	for i := range n {
		s.atol[i] = a
		if o.AtolEach != nil {
			s.atol[i] = o.AtolEach[i]
		}
		for j := range p {
			scale := 1.0
			if o.Sensitivity.Scale != nil {
				scale = o.Sensitivity.Scale[j]
			}
			s.atol[n+i*p+j] = s.atol[i] / scale
		}
	}
}

// leastWeight keeps the weight of a component without absolute tolerance from
// vanishing with it.
const leastWeight = 1e-150

func (s *Solver) weigh() {
	p := &s.p
	for k, y := range p.y {
		p.iw[k] = 1 / max(s.atol[k]+s.rtol*math.Abs(y), leastWeight)
	}
}

// begin evaluates the start.
func (s *Solver) begin() error {
	p, n := &s.p, s.flow.n
	s.weigh()
	if err := s.m.begin(p); err != nil {
		return s.systemFailed(err)
	}
	if k := notFinite(p.f); k >= 0 {
		if k >= n {
			k = (k - n) / s.flow.p
		}
		return s.failure(NotFinite, k, nil)
	}
	if err := s.tot.begin(&s.Options, p, n, s.flow.p); err != nil {
		return &Failure{Reason: BadInput, Time: p.t, Component: -1, Err: err}
	}
	if err := s.watch.begin(s.Options.Events, p.t, p.y[:n]); err != nil {
		return s.failure(SystemFailed, -1, err)
	}
	y, sens := s.sol.next(p.t)
	copy(y, p.y)
	copy(sens, p.y[n:])
	s.next = 1
	return nil
}

func (s *Solver) finish() {
	p, n := &s.p, s.flow.n
	if !s.sol.Ended {
		s.sol.EndTime = p.t
		copy(s.sol.EndState, p.y[:n])
	}
	if s.expl.seemsStiff && s.m == stepper(&s.expl) {
		s.sol.Warnings = append(s.sol.Warnings,
			"the problem looks stiff to the explicit method: its steps are bounded by stability; use Radau")
	}
	s.m = nil
}

func (s *Solver) failure(r Reason, component int, err error) *Failure {
	f := &Failure{Reason: r, Time: s.p.t, Component: component, Step: s.step, Err: err}
	if component >= 0 {
		f.name = s.Options.name(component)
	}
	return f
}

func (s *Solver) systemFailed(err error) *Failure { return s.failure(SystemFailed, -1, err) }
