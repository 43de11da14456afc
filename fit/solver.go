package fit

import (
	"errors"
	"fmt"
	"math"
	"slices"
)

// solver is the workspace of one worker: nothing in it is allocated after
// newSolver, however many fits it makes.
type solver struct {
	prob   *Problem
	blocks []Block
	p      int   // parameters
	rows   []int // first row of each block, and N
	known  []bool
	within []float64 // per block: sum of squares within collapsed rows
	count  []float64 // per block: N_b, collapsed rows counted in full
	floor  []float64 // per block: the least SS that its logarithm takes
	joint  bool      // the objective is Σ N ln SS

	low, high []float64
	linear    []int // free parameters that are solved for
	curved    []int // free parameters that are searched

	shift, weight []float64 // replicate data: added to residuals, and on rows

	cur, try, best *point
	f              *columns  // [Φ | J] of the current point, then its trial
	free           []int     // columns of f: the parameter of each
	lin            int       // how many of them are linear
	span           []float64 // D: the longest that each column has been
	step           *boxedStep
	brisk          brisk
	change         []float64 // of θ
	hits           []int     // of each parameter: steps in a row that ended on its bound
	left, offset   float64   // ‖z‖ of the current point; relative to its residuals
	width          []float64 // a quarter of each start box, 0 where there is none
	evals          int
	fault          error
}

const (
	perfect = 1e-28  // a sum of squares below this share of the first is zero
	least   = 1e-290 // and so is one below this
)

// Pooled is a Block whose rows are weighted means of replicates. What lies
// within the replicates is constant, but counts: Pooled returns its sum of
// squares and how many residuals there are beyond Len.
type Pooled interface {
	Block
	Pooled() (ss float64, more int)
}

// Check says what is wrong with a problem.
func (p *Problem) Check() error {
	if len(p.Parameters) == 0 {
		return errors.New("no parameters")
	}
	if len(p.Scatter) != 0 && len(p.Scatter) != len(p.Blocks) {
		return fmt.Errorf("scatter is given for %d of %d blocks", len(p.Scatter), len(p.Blocks))
	}
	n, free := 0, 0
	for _, b := range p.Blocks {
		n += b.Len()
	}
	if n == 0 {
		return errors.New("no residuals")
	}
	var errs []error
	for _, q := range p.Parameters {
		if !(q.Low <= q.High) || math.IsInf(q.Low, 1) || math.IsInf(q.High, -1) {
			errs = append(errs, fmt.Errorf("parameter %s: bounds %v and %v are not in order", q.Name, q.Low, q.High))
		}
		if q.StartLow > q.StartHigh || math.IsInf(q.StartLow, 0) || math.IsInf(q.StartHigh, 0) {
			errs = append(errs, fmt.Errorf("parameter %s: starts cannot be drawn between %v and %v", q.Name, q.StartLow, q.StartHigh))
		}
		if q.Low < q.High {
			free++
		}
	}
	for i, s := range p.Starts {
		if len(s) != len(p.Parameters) {
			errs = append(errs, fmt.Errorf("start %d has %d values for %d parameters", i+1, len(s), len(p.Parameters)))
		}
		if !allFinite(s) {
			errs = append(errs, fmt.Errorf("start %d is not finite", i+1))
		}
	}
	for _, b := range p.Blocks {
		if q, ok := b.(Pooled); ok {
			_, more := q.Pooled()
			n += more
		}
	}
	if n < free {
		errs = append(errs, fmt.Errorf("%d residuals cannot settle %d parameters", n, free))
	}
	return errors.Join(errs...)
}

// newSolver lays out the workspace. clone asks for copies of the blocks; it is
// an error of the caller to ask it of blocks that cannot be cloned.
func newSolver(p *Problem, clone bool) *solver {
	s := &solver{prob: p, p: len(p.Parameters)}
	s.blocks = append(s.blocks, p.Blocks...)
	if clone {
		for i, b := range s.blocks {
			s.blocks[i] = b.(Cloner).Clone()
		}
	}
	nb := len(s.blocks)
	s.rows = make([]int, nb+1)
	s.known, s.within = make([]bool, nb), make([]float64, nb)
	s.count, s.floor = make([]float64, nb), make([]float64, nb)
	unknown := 0
	for i, b := range s.blocks {
		s.rows[i+1] = s.rows[i] + b.Len()
		s.count[i] = float64(b.Len())
		if q, ok := b.(Pooled); ok {
			ss, more := q.Pooled()
			s.within[i] = ss
			s.count[i] += float64(more)
		}
		s.floor[i] = least
		s.known[i] = p.Scatter != nil && p.Scatter[i] == Known
		if !s.known[i] {
			unknown++
		}
	}
	s.joint = unknown > 0 && nb > 1
	s.low, s.high, s.width = make([]float64, s.p), make([]float64, s.p), make([]float64, s.p)
	for j, q := range p.Parameters {
		s.low[j], s.high[j] = q.Low, q.High
		if q.StartLow < q.StartHigh && !q.Linear {
			s.width[j] = (q.StartHigh - q.StartLow) / 4
		}
		switch {
		case q.Low == q.High:
		case q.Linear:
			s.linear = append(s.linear, j)
		default:
			s.curved = append(s.curved, j)
		}
	}
	m := len(s.linear) + len(s.curved)
	s.cur, s.try = newPoint(s.rows, s.p, m), newPoint(s.rows, s.p, m)
	s.span, s.change = make([]float64, s.p), make([]float64, s.p)
	s.step = newBoxedStep(m)
	s.hits = make([]int, s.p)
	return s
}

// allKnown says whether the scatter of every block is known.
func (s *solver) allKnown() bool { return !slices.Contains(s.known, false) }
