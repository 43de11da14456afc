package fit

import (
	"context"
	"errors"
	"fmt"
	"math"
	"runtime"
	"slices"
	"sync"
	"sync/atomic"

	"gonum.org/v1/gonum/mat"
)

// RefitSettings of Refit. The zero value works.
type RefitSettings struct {
	Draws   int // 0 means 1000
	Workers int // 0 means as many as there are processors; never changes a digit
	MaxIter int // per start; 0 means 300
	// Offset is the relative offset at which a refit has converged; 0 means 1e-5.
	// The sum of squares is then good to about its square.
	Offset float64
	// Progress, if set, is called now and then with the number of draws done.
	Progress func(done, of int)
}

// Refitted is what refits of replicate data came to, one row or entry per draw.
type Refitted struct {
	Theta     *mat.Dense // draws × parameters
	Objective []float64
	Status    []Status // NoAnswer where a draw was not reached, or cannot be evaluated
	Evals     int      // evaluations of residuals and derivatives, over all draws
}

// Started are replicates with starts of their own, at least one for each set:
// data that are not replicates of one another, but curves of one kind.
type Started interface {
	Replicates
	// Start writes the kth start of set i, from 0, and says whether there is one.
	Start(i, k int, theta []float64) bool
}

// Refit fits replicate data of a problem, each from the given starts (the
// estimate, as a rule, and nothing else), and keeps the best for each draw.
//
// The rows of p need to be those for which the replicates are made; p itself
// may be another mechanism for them. Cancelling ctx leaves the draws that have
// not been reached at status NoAnswer.
func Refit(ctx context.Context, p *Problem, starts [][]float64, data Replicates,
	set RefitSettings) (*Refitted, error) {

	if err := p.Check(); err != nil {
		return nil, fmt.Errorf("fit: %w", err)
	}
	for _, t := range starts {
		if len(t) != len(p.Parameters) {
			return nil, fmt.Errorf("fit: a start has %d values for %d parameters",
				len(t), len(p.Parameters))
		}
	}
	if _, own := data.(Started); len(starts) == 0 && !own {
		return nil, errors.New("fit: refits need a start")
	}
	set = set.filled(p)
	out := &Refitted{
		Theta:     mat.NewDense(set.Draws, len(p.Parameters), nil),
		Objective: make([]float64, set.Draws),
		Status:    make([]Status, set.Draws),
	}
	var next, ended, evals atomic.Int64
	var telling sync.Mutex
	work := func(s *solver) {
		defer func() { evals.Add(int64(s.evals)) }()
		rep := s.blank()
		for i := int(next.Add(1)) - 1; i < set.Draws && ctx.Err() == nil; i = int(next.Add(1)) - 1 {
			data.Draw(i, rep)
			s.adopt(rep)
			s.refit(ctx.Done(), data, starts, set, out, i)
			if done := int(ended.Add(1)); set.Progress != nil {
				telling.Lock()
				set.Progress(done, set.Draws)
				telling.Unlock()
			}
		}
	}
	var wg sync.WaitGroup
	for range set.Workers {
		wg.Go(func() { work(newSolver(p, p.clonable())) })
	}
	wg.Wait()
	out.Evals = int(evals.Load())
	return out, nil
}

func (set RefitSettings) filled(p *Problem) RefitSettings {
	if set.Draws <= 0 {
		set.Draws = 1000
	}
	if set.MaxIter <= 0 {
		set.MaxIter = 300
	}
	if set.Offset <= 0 {
		set.Offset = loose
	}
	if set.Workers <= 0 {
		set.Workers = runtime.GOMAXPROCS(0)
	}
	if !p.clonable() {
		set.Workers = 1
	}
	return set
}

// blank is a replicate to be filled.
func (s *solver) blank() *Replicate {
	n := len(s.blocks)
	return &Replicate{Shift: make([]float64, s.rows[n]), Within: make([]float64, n)}
}

// adopt puts replicate data in place of the data.
func (s *solver) adopt(rep *Replicate) {
	s.shift, s.weight = rep.Shift, rep.Weight
	copy(s.within, rep.Within)
	for b, block := range s.blocks {
		from, to := s.rows[b], s.rows[b+1]
		if o, ok := block.(Observed); ok && rep.Data != nil {
			o.Observe(rep.Data[from:to])
			clear(rep.Shift[from:to])
		}
		if rep.Weight != nil {
			s.count[b] = dot(rep.Weight[from:to], rep.Weight[from:to])
		}
	}
}

// refit descends from every start and writes the best as draw i.
func (s *solver) refit(done <-chan struct{}, data Replicates, starts [][]float64, set RefitSettings,
	out *Refitted, i int) {

	best := math.Inf(1)
	row := out.Theta.RawRowView(i)
	for k := 0; s.start(data, starts, i, k); k++ {
		if k == 0 {
			copy(row, s.cur.theta)
		}
		end, ok := s.again(done, set)
		if !ok {
			continue
		}
		if s.cur.obj >= best {
			continue
		}
		best = s.cur.obj
		copy(row, s.cur.theta)
		out.Objective[i], out.Status[i] = s.cur.obj, s.status(end)
	}
}

// status is what an ending is called in a result.
func (s *solver) status(end ending) Status {
	switch end {
	case failed:
		return NoAnswer
	case stationary, rounding:
		for j, v := range s.cur.theta {
			if s.low[j] < s.high[j] && (v == s.low[j] || v == s.high[j]) {
				return AtEdge
			}
		}
		return Converged
	}
	return Stopped
}

// Interval is the percentile interval of a quantity over the refits that
// converged, of that level. What the quantity makes infinite stays in the
// ranking: an end that falls on such a draw is open. It needs at least ten
// draws beyond each end.
func (d *Refitted) Interval(q Quantity, level float64) Interval {
	_, p := d.Theta.Dims()
	grad := make([]float64, p)
	var v []float64
	for i, s := range d.Status {
		if s != Converged && s != AtEdge {
			continue
		}
		if x := q(d.Theta.RawRowView(i), grad); !math.IsNaN(x) {
			v = append(v, x)
		}
	}
	slices.Sort(v)
	iv := Interval{Level: level, Method: "bootstrap"}
	if tail := (1 - level) / 2 * float64(len(v)); tail < 10 {
		iv.LowOpen, iv.HighOpen = true, true
		iv.Why = fmt.Sprintf("%d refits are too few for a level of %v", len(v), level)
		return iv
	}
	iv.Low, iv.LowOpen = finite(v, quantile(v, (1-level)/2), 1)
	iv.High, iv.HighOpen = finite(v, quantile(v, (1+level)/2), -1)
	if iv.LowOpen || iv.HighOpen {
		iv.Why = "it does not exist in that many of the refits"
	}
	return iv
}

// quantile interpolates between the order statistics of sorted v at (n−1)·q
// (definition 7 of Hyndman & Fan 1996, Am Stat 50, 361–365).
func quantile(v []float64, q float64) float64 {
	h := float64(len(v)-1) * q
	i := int(h)
	if i+1 >= len(v) || v[i] == v[i+1] {
		return v[min(i, len(v)-1)]
	}
	return v[i] + (h-float64(i))*(v[i+1]-v[i])
}

// finite returns x, or, where that is infinite, the outermost finite of sorted
// v, marked as open.
func finite(v []float64, x float64, d int) (float64, bool) {
	if !math.IsInf(x, 0) && !math.IsNaN(x) {
		return x, false
	}
	for k := range v {
		if d < 0 {
			k = len(v) - 1 - k
		}
		if !math.IsInf(v[k], 0) {
			return v[k], true
		}
	}
	return 0, true
}

// start puts the current point at the kth start of draw i.
func (s *solver) start(data Replicates, starts [][]float64, i, k int) bool {
	if own, ok := data.(Started); ok {
		if !own.Start(i, k, s.cur.theta) {
			return false
		}
		s.place(s.cur.theta)
		return true
	}
	if k >= len(starts) {
		return false
	}
	s.place(starts[k])
	return true
}

// again descends from the current point, briskly where that will do.
func (s *solver) again(done <-chan struct{}, set RefitSettings) (ending, bool) {
	if s.easy() && s.evaluate(s.cur) && s.descendBriskly(set.Offset) {
		return stationary, true
	}
	if !s.begun(s.cur.theta) {
		return failed, false
	}
	return s.descend(done, set.Offset, set.MaxIter), true
}
