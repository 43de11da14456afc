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
// says why. A start that is still under way after 150 steps goes on only if its
// sum of squares is below ten times that of the best that has arrived.
//
// Cancelling ctx returns the best so far, with status Stopped (or NoAnswer
// before the first start has ended). Which starts are tried, and every digit of
// the result, depend on the problem and on Settings.Starts, Seed and MaxIter
// alone.
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
	runs := make([]*run, len(all))
	for i, theta := range all {
		runs[i] = &run{theta: theta}
	}
	descendAll(ctx, s, set, runs, min(set.MaxIter, patience))
	if set.MaxIter > patience {
		set.Progress = nil
		descendAll(ctx, s, set, s.promising(runs), set.MaxIter-patience)
	}
	best := lowest(runs, func(*run) bool { return true })
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

// patience is the number of steps after which a start has to be promising.
const patience = 150

// promising are the runs that are still under way and may yet be the best.
func (s *solver) promising(runs []*run) []*run {
	best := lowest(runs, func(r *run) bool { return r.end == stationary || r.end == rounding })
	var some []*run
	for i := range runs {
		if r := runs[i]; r.end == exhausted && (best < 0 || r.obj < s.tenfold(runs[best].obj)) {
			some = append(some, r)
		}
	}
	return some
}

// tenfold is the objective at ten times the sums of squares.
func (s *solver) tenfold(obj float64) float64 {
	if s.joint {
		return obj + math.Ln10*sum(s.count)
	}
	return 10 * obj
}

// lowest is the index of the lowest run of those that are eligible, −1 for none.
func lowest(runs []*run, eligible func(*run) bool) int {
	best := -1
	for i, r := range runs {
		if r.end != failed && eligible(r) && (best < 0 || r.obj < runs[best].obj) {
			best = i
		}
	}
	return best
}

// descendAll takes every run further, in at most so many steps; what each came
// to depends on itself alone.
func descendAll(ctx context.Context, first *solver, set Settings, runs []*run, most int) {
	var next, ended atomic.Int64
	var telling sync.Mutex
	work := func(s *solver) {
		for {
			i := int(next.Add(1)) - 1
			if i >= len(runs) || ctx.Err() != nil {
				return
			}
			s.one(ctx, runs[i], most)
			done := int(ended.Add(1))
			if set.Progress != nil {
				telling.Lock()
				set.Progress(done, len(runs))
				telling.Unlock()
			}
		}
	}
	workers := min(set.Workers, len(runs))
	if workers <= 1 {
		work(first)
		return
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
}

// one descends from where a run is.
func (s *solver) one(ctx context.Context, r *run, most int) {
	s.evals, s.fault = 0, nil
	if s.begun(r.theta) {
		r.end = s.descend(ctx.Done(), rough, most)
		r.obj = s.cur.obj
		r.theta = append([]float64(nil), s.cur.theta...)
	}
	r.evals += s.evals
	r.fault = s.fault
}

// nothing says why no start gave a number.
func nothing(ctx context.Context, runs []*run) (*Result, error) {
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
func (s *solver) finish(ctx context.Context, r *run, most int) ending {
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
