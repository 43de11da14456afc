package fit

import (
	"context"
	"runtime"
	"sort"
	"sync"
	"sync/atomic"
)

// Wanted is what an interval is wanted of: a quantity, or, where that is nil, a
// parameter.
type Wanted struct {
	Parameter int
	Quantity  Quantity
}

// ProfileSettings of Profiles. The zero value works.
type ProfileSettings struct {
	Level   float64 // 0 means 0.95
	Workers int     // 0 means as many as there are processors; never changes a digit
	// Progress, if set, is called now and then with the number of intervals done.
	Progress func(done, of int)
}

// Profiles finds the profile-likelihood intervals of everything wanted, in that
// order (see Profiler). Two quantities that share memory need Workers 1.
//
// Where a profile meets a lower objective than that of r, the problem is solved
// again from there, r is replaced by what that gives, with a warning, and the
// intervals are found anew. The result to which they belong is returned.
func Profiles(ctx context.Context, p *Problem, r *Result, wanted []Wanted,
	set ProfileSettings) ([]Interval, *Result, error) {

	if set.Level == 0 {
		set.Level = 0.95
	}
	if set.Workers <= 0 {
		set.Workers = runtime.GOMAXPROCS(0)
	}
	if !p.clonable() {
		set.Workers = 1
	}
	for round := 0; ; round++ {
		ivs, better, err := profileAll(ctx, p, r, wanted, set)
		if err != nil || better == nil || round == 3 || ctx.Err() != nil {
			return ivs, r, err
		}
		lower, err := r.from(ctx, p, better)
		if err != nil {
			return ivs, r, err
		}
		if lower == nil {
			return ivs, r, nil
		}
		r = lower
	}
}

// from solves again from a better θ than that of r; nil where that is none.
func (r *Result) from(ctx context.Context, p *Problem, theta []float64) (*Result, error) {
	q := *p
	q.Starts = [][]float64{theta}
	n, err := Solve(ctx, &q, Settings{Starts: 1, Workers: 1})
	if err != nil {
		return nil, err
	}
	if n.Objective >= r.Objective {
		return nil, nil
	}
	n.Starts, n.Agreeing, n.Evals = r.Starts, 0, r.Evals+n.Evals
	n.warn("no start reached this minimum: a profile found it; more starts are needed")
	return n, nil
}

// profileAll finds all intervals, and the θ of the lowest objective below that
// of r which it met; nil for none.
func profileAll(ctx context.Context, p *Problem, r *Result, wanted []Wanted,
	set ProfileSettings) ([]Interval, []float64, error) {

	ivs := make([]Interval, len(wanted))
	workers := max(1, min(set.Workers, len(wanted)))
	profilers := make([]*Profiler, workers)
	for i := range profilers {
		f, err := NewProfiler(p, r, set.Level)
		if err != nil {
			return nil, nil, err
		}
		profilers[i] = f
	}
	var next, ended atomic.Int64
	var telling sync.Mutex
	var wg sync.WaitGroup
	for _, f := range profilers {
		wg.Go(func() {
			for i := int(next.Add(1)) - 1; i < len(wanted); i = int(next.Add(1)) - 1 {
				ivs[i] = f.wanted(ctx, wanted[i])
				done := int(ended.Add(1))
				if set.Progress != nil {
					telling.Lock()
					set.Progress(done, len(wanted))
					telling.Unlock()
				}
			}
		})
	}
	wg.Wait()
	var better []float64
	lowest := r.Objective
	for _, f := range profilers {
		if f.better != nil && f.lowest < lowest {
			better, lowest = f.better, f.lowest
		}
	}
	return ivs, better, nil
}

func (f *Profiler) wanted(ctx context.Context, w Wanted) Interval {
	if w.Quantity != nil {
		return f.Quantity(ctx, w.Quantity)
	}
	return f.Parameter(ctx, w.Parameter)
}

// TracePoint is one point of a profile.
type TracePoint struct {
	Value     float64
	Objective float64   // the least, with the parameter held at Value
	Theta     []float64 // where it is least
}

// Trace follows the profile of parameter j through values, and returns its
// points in the order of their values, the estimate among them: what the other
// parameters do there is the ridge along which they are tied. Values outside
// the bounds and those where nothing finite is found are left out.
func (f *Profiler) Trace(ctx context.Context, j int, values []float64) []TracePoint {
	r := f.result
	g := f.hold(j)
	points := []TracePoint{{r.Theta[j], r.Objective, r.Theta}}
	for _, d := range []float64{-1, 1} {
		var side []float64
		for _, v := range values {
			if d*(v-r.Theta[j]) > 0 && v >= g.low && v <= g.high {
				side = append(side, v)
			}
		}
		sort.Slice(side, func(a, b int) bool { return d*side[a] < d*side[b] })
		theta := r.Theta
		for _, v := range side {
			at, ok := g.turn(ctx, v, theta)
			if !ok || ctx.Err() != nil {
				break
			}
			f.meet(at.objective, at.theta)
			points = append(points, TracePoint{v, at.objective, at.theta})
			theta = at.theta
		}
	}
	sort.Slice(points, func(a, b int) bool { return points[a].Value < points[b].Value })
	return points
}
