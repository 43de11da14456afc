package fit

import (
	"context"
	"errors"
	"fmt"
	"math"
	"runtime"
	"sync"
	"sync/atomic"
)

// run is what one start came to.
type run struct {
	end   ending
	theta []float64
	obj   float64
	evals int
	fault error
}

// Solve finds the best minimum of a problem from many starts.
//
// A start that cannot be evaluated is passed over; where none can, the error
// says why. Cancelling ctx returns the best so far, with status Stopped (or
// NoAnswer before the first start has ended). Which starts are tried, and every
// digit of the result, depend on the problem and on Settings.Starts, Seed and
// MaxIter alone.
//
// Blocks that are no Cloner are evaluated by one worker.
func Solve(ctx context.Context, p *Problem, set Settings) (*Result, error) {
	if err := p.Check(); err != nil {
		return nil, fmt.Errorf("fit: %w", err)
	}
	set = set.filled(p)
	all := starts(p, set.Starts, set.Seed)
	s := newSolver(p, false)
	s.setFloor(all[0])
	runs := descendAll(ctx, s, set, all)
	best := -1
	for i, r := range runs {
		if r.end != failed && (best < 0 || r.obj < runs[best].obj) {
			best = i
		}
	}
	if best < 0 {
		return nothing(ctx, runs)
	}
	end := s.finish(ctx, runs[best], set.MaxIter)
	if s.idle() {
		return nil, errors.New("fit: no residual depends on any parameter (are all weights zero?)")
	}
	if ctx.Err() != nil {
		end = interrupted
	}
	res := s.result(end)
	res.count(runs, s.slack(res.Objective))
	return res, nil
}

// setFloor keeps the logarithm of a sum of squares finite where a block comes to
// be fitted perfectly: as a share of what it is at theta.
func (s *solver) setFloor(theta []float64) {
	s.place(theta)
	if !s.joint || !s.evaluate(s.cur) {
		return
	}
	for b, ss := range s.cur.ss {
		s.floor[b] = max(perfect*ss, s.floor[b])
	}
}

// idle says whether the Jacobian of the current point is zero throughout.
func (s *solver) idle() bool {
	for _, v := range s.cur.jraw {
		if v != 0 {
			return false
		}
	}
	return len(s.linear)+len(s.curved) > 0
}

func (set Settings) filled(p *Problem) Settings {
	if set.Starts <= 0 {
		set.Starts = 20
	}
	if set.MaxIter <= 0 {
		set.MaxIter = 2000
	}
	if set.Workers <= 0 {
		set.Workers = runtime.GOMAXPROCS(0)
	}
	for _, b := range p.Blocks {
		if _, ok := b.(Cloner); !ok {
			set.Workers = 1
		}
	}
	return set
}

// descendAll runs every start; what each came to stands at its own index.
func descendAll(ctx context.Context, first *solver, set Settings, all [][]float64) []run {
	runs := make([]run, len(all))
	var next, ended atomic.Int64
	var telling sync.Mutex
	work := func(s *solver) {
		for {
			i := int(next.Add(1)) - 1
			if i >= len(all) || ctx.Err() != nil {
				return
			}
			runs[i] = s.one(ctx, all[i], set.MaxIter)
			done := int(ended.Add(1))
			if set.Progress != nil {
				telling.Lock()
				set.Progress(done, len(all))
				telling.Unlock()
			}
		}
	}
	workers := min(set.Workers, len(all))
	if workers == 1 {
		work(first)
		return runs
	}
	var wg sync.WaitGroup
	for range workers {
		wg.Go(func() {
			s := newSolver(first.prob, true)
			copy(s.floor, first.floor)
			work(s)
		})
	}
	wg.Wait()
	return runs
}

// one descends from one start.
func (s *solver) one(ctx context.Context, theta []float64, most int) run {
	s.evals, s.fault = 0, nil
	if !s.begun(theta) {
		return run{evals: s.evals, fault: s.fault}
	}
	end := s.descend(ctx.Done(), rough, most)
	at := append([]float64(nil), s.cur.theta...)
	return run{end: end, theta: at, obj: s.cur.obj, evals: s.evals}
}

// nothing says why no start gave a number.
func nothing(ctx context.Context, runs []run) (*Result, error) {
	if ctx.Err() != nil {
		return &Result{
			Status:   NoAnswer,
			Warnings: []string{"interrupted before the first start had ended"},
		}, nil
	}
	for _, r := range runs {
		if r.fault != nil {
			return nil, fmt.Errorf("fit: no start can be evaluated: %w", r.fault)
		}
	}
	return nil, errors.New("fit: no start can be evaluated: residuals or their derivatives " +
		"are not finite (a standard deviation of zero does that)")
}

// finish takes the best run on to where rounding ends it.
func (s *solver) finish(ctx context.Context, r run, most int) ending {
	s.begun(r.theta)
	end := r.end
	if end == stationary {
		end = s.descend(ctx.Done(), enough, most)
	}
	s.polish()
	switch {
	case s.offset <= enough:
		return stationary
	case s.atRounding():
		return rounding
	}
	return end
}

// polish takes full Gauss–Newton steps while each brings the relative offset
// down, without the sum of squares to guide them: that no longer resolves them.
func (s *solver) polish() {
	s.factor()
	for range 50 {
		if s.offset == 0 {
			return
		}
		last, obj := s.offset, s.cur.obj
		s.propose(math.Inf(1))
		if !s.evaluate(s.try) {
			return
		}
		s.cur, s.try = s.try, s.cur
		s.factor()
		if s.offset > 0.9*last || s.cur.obj > obj+1e-9*math.Abs(obj) {
			s.cur, s.try = s.try, s.cur
			s.factor()
			return
		}
	}
}
