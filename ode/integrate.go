package ode

import (
	"context"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
)

// integrate takes steps until the end of times.
func (s *Solver) integrate(ctx context.Context) error {
	p := &s.p
	if p.t == s.end {
		return nil
	}
	h, err := s.first()
	if err != nil {
		return err
	}
	limit := s.Options.MaxSteps
	if limit == 0 {
		limit = defaultMaxSteps
	}
	for {
		if s.spent%8 == 0 && ctx.Err() != nil {
			return s.failure(Cancelled, -1, context.Cause(ctx))
		}
		if s.spent == limit {
			return s.stuck(StepsSpent)
		}
		s.spent++
		var last bool
		h, last = s.fit(h)
		s.step = h
		if s.collapsed(h) {
			return s.stuck(s.blame)
		}
		tr := s.m.try(p, h)
		if tr.fate == broken {
			return s.systemFailed(tr.err)
		}
		if next, ok := s.refuse(h, &tr); !ok {
			h = next
			continue
		}
		if h, err = s.take(h, last, &tr); err != nil {
			return err
		}
		if last || s.sol.Ended {
			return nil
		}
	}
}

// fit bounds a step, and stretches it to the end of times where that is near.
func (s *Solver) fit(h float64) (float64, bool) {
	if most := s.Options.MaxStep; most > 0 && math.Abs(h) > most {
		h = math.Copysign(most, h)
	}
	room := (s.end - s.p.t) - s.p.tLow
	if math.Abs(h)*1.0001 >= math.Abs(room) {
		return room, true
	}
	return h, false
}

// collapsed reports a step lost in the rounding of time. The clock carries its
// own rounding errors along, so that steps may be well below an ulp of t.
func (s *Solver) collapsed(h float64) bool {
	return !(math.Abs(h) > 1e-4*ulp*math.Abs(s.p.t)) || math.Abs(h) < 1e-300
}

// stuck is the failure of steps too small or too many, with the component that
// the last refusal, or the error of the last step, points to.
func (s *Solver) stuck(r Reason) error {
	if s.holdback < 0 {
		s.holdback = s.m.culprit(&s.p, stepped)
	}
	return s.failure(r, s.holdback, nil)
}

// refuse decides whether a step is taken; if not, it says what size to try next.
func (s *Solver) refuse(h float64, tr *trial) (float64, bool) {
	st := &s.sol.Stats
	switch {
	case tr.fate != stepped:
		st.Failures++
		s.blame = Collapsed
		if tr.fate == unevaluable {
			s.blame = NotFinite
		}
		s.holdback = s.m.culprit(&s.p, tr.fate)
		return s.ctl.failed(h, tr), false
	case tr.ratio >= 1:
		st.Rejected++
		s.blame, s.holdback = Collapsed, s.m.culprit(&s.p, stepped)
		return s.ctl.refused(h, tr, s.m.power()), false
	}
	rise := s.m.rise()
	for _, i := range s.Options.NonNegative {
		if s.p.y[i]+rise[i] < -1/s.p.iw[i] {
			st.Rejected++
			s.blame, s.holdback = WouldBeNegative, i
			return s.ctl.failed(h, &trial{shrink: 0.5}), false
		}
	}
	return 0, true
}

// take makes the end of the step the new state and returns the next size.
func (s *Solver) take(h float64, last bool, tr *trial) (float64, error) {
	p := &s.p
	s.m.accept(p, h)
	s.sol.Stats.Steps++
	s.blame, s.holdback = Collapsed, -1
	t0 := p.t
	s.advance(h, last)
	if !s.tot.step(p, &s.sol.Stats.Drift) {
		return 0, s.failure(Collapsed, -1, nil)
	}
	s.weigh()
	if err := s.m.refresh(p); err != nil {
		return 0, s.systemFailed(err)
	}
	if i := s.sinking(h); i >= 0 {
		s.holdback = i
		return 0, s.failure(WouldBeNegative, i, nil)
	}
	if err := s.look(t0, h); err != nil {
		return 0, err
	}
	if err := s.deliver(h); err != nil {
		return 0, err
	}
	return s.m.settle(h, s.ctl.taken(h, tr, s.m.power())), nil
}

// advance adds the rise of the step to the state and h to the clock, and keeps
// what rounding leaves of both for the next step.
func (s *Solver) advance(h float64, last bool) {
	p := &s.p
	for k, d := range s.m.rise() {
		d += s.low[k]
		y := p.y[k] + d
		s.low[k] = d - (y - p.y[k])
		p.y[k] = y
	}
	for _, i := range s.Options.NonNegative {
		if p.y[i] < 0 {
			p.y[i], s.low[i] = 0, 0
		}
	}
	if last {
		p.t, p.tLow = s.end, 0
		return
	}
	d := h + p.tLow
	t := p.t + d
	p.tLow = d - (t - p.t)
	p.t = t
}

// sinking finds a component held at zero whose derivative has pulled it below for
// some steps: the exact solution does turn negative.
func (s *Solver) sinking(h float64) int {
	at := -1
	for _, i := range s.Options.NonNegative {
		if s.p.y[i] == 0 && s.p.f[i]*h < -1e-3/s.p.iw[i] {
			at = i
			break
		}
	}
	if at < 0 {
		s.pulled = 0
		return -1
	}
	if s.pulled++; s.pulled < 3 {
		return -1
	}
	return at
}

// between writes the state, or the whole state, at place x of the last step.
func (s *Solver) between(dst []float64, x float64) {
	if x >= 1 {
		copy(dst, s.p.y)
		return
	}
	s.m.polynomial(dst, x)
	plus(dst, 1, s.p.y[:len(dst)])
	for _, i := range s.Options.NonNegative {
		dst[i] = max(dst[i], 0)
	}
}

// look finds the events of the last step; a terminal one ends the solution.
func (s *Solver) look(t0, h float64) error {
	if len(s.Options.Events) == 0 {
		return nil
	}
	if err := s.m.complete(&s.p); err != nil {
		return s.systemFailed(err)
	}
	found, err := s.watch.step(t0, h, s.between)
	if err != nil {
		return s.failure(SystemFailed, -1, err)
	}
	n, params := s.flow.n, s.flow.p
	for _, c := range found {
		s.between(s.out, c.x)
		hit := Hit{Event: c.event, Time: t0 + c.x*h, Rising: c.rising, State: slices.Clone(s.out[:n])}
		if params > 0 {
			hit.Sensitivity = mat.NewDense(n, params, slices.Clone(s.out[n:]))
		}
		s.sol.Hits = append(s.sol.Hits, hit)
		if s.Options.Events[c.event].Terminal {
			s.sol.Ended, s.sol.EndTime = true, hit.Time
			copy(s.sol.EndState, hit.State)
			return nil
		}
	}
	return nil
}

// deliver writes the outputs that the last step has reached.
func (s *Solver) deliver(h float64) error {
	p, n := &s.p, s.flow.n
	reached := p.t
	if s.sol.Ended {
		reached = s.sol.EndTime
	}
	due := func() bool {
		return s.next < len(s.times) && (s.times[s.next] <= reached == s.forward || s.times[s.next] == reached)
	}
	if due() || s.Options.Keep {
		if err := s.m.complete(p); err != nil {
			return s.systemFailed(err)
		}
	}
	for ; due(); s.next++ {
		t := s.times[s.next]
		y, sens := s.sol.next(t)
		s.between(s.out, 1-((p.t-t)+p.tLow)/h)
		copy(y, s.out)
		copy(sens, s.out[n:])
	}
	if s.Options.Keep {
		b, coefs := s.m.coefficients()
		s.sol.kept.add(p, h, b, coefs)
	}
	return nil
}
