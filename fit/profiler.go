package fit

import (
	"context"
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Profiler finds profile-likelihood intervals around one result. The interval
// of a parameter or quantity g holds the values that g takes where the
// objective, minimised over all else, stays below its limit. With t the
// two-sided Student quantile of ν = N − Constants degrees of freedom and z that
// of the normal distribution, the limit is
//
//	SS_min·(1 + t²/ν)          one σ, unknown
//	SS_min + z²                σ known throughout
//	−2lnL_min + N·ln(1 + t²/ν) several blocks, one σ unknown at least
//
// The third is the first, written as a likelihood ratio, with the residuals of
// all blocks counted together.
//
// Each end is followed from the estimate, so that it is the first place where
// the limit is met; a second region of low objective beyond a ridge is not part
// of the interval.
//
// A Profiler is a workspace for one goroutine.
//
// Bates DM & Watts DG (1988) Nonlinear Regression Analysis, ch. 6; Venzon DJ &
// Moolgavkar SH (1988) Appl Stat 37, 87–94; Raue A et al. (2009)
// Bioinformatics 25, 1923–1929.
type Profiler struct {
	original *Problem
	problem  *Problem // every parameter searched, none solved for
	result   *Result
	level    float64
	limit    float64 // of the objective
	why      string  // why there is no interval at all

	s      *solver
	e      *extreme
	free   []int     // parameters that are not fixed
	grad   []float64 // of the quantity
	ahead  []float64 // θ to which the last two stations of a profile point
	better []float64 // θ of a lower objective, met on the way
	lowest float64
}

// NewProfiler prepares intervals of that level (0.95, say) around r, which
// Solve has found for p.
func NewProfiler(p *Problem, r *Result, level float64) (*Profiler, error) {
	if !(level > 0 && level < 1) {
		return nil, fmt.Errorf("fit: a level of %v lies outside 0 to 1", level)
	}
	if len(r.Theta) != len(p.Parameters) {
		return nil, errors.New("fit: the result is not one of this problem")
	}
	f := &Profiler{original: p, problem: p.searched(), result: r, level: level, lowest: r.Objective}
	f.s = newSolver(f.problem, p.clonable())
	f.free = f.s.curved
	f.e = newExtreme(len(f.free))
	f.grad = make([]float64, len(p.Parameters))
	if !f.s.begun(r.Theta) {
		return nil, errors.New("fit: the result cannot be evaluated again")
	}
	f.setLimit()
	return f, nil
}

// searched is p with every parameter searched.
func (p *Problem) searched() *Problem {
	q := *p
	q.Parameters = append([]Parameter(nil), p.Parameters...)
	for j := range q.Parameters {
		if r := &q.Parameters[j]; r.Linear {
			r.Linear, r.StartLow, r.StartHigh = false, math.NaN(), math.NaN()
		}
	}
	return &q
}

func (p *Problem) clonable() bool {
	for _, b := range p.Blocks {
		if _, ok := b.(Cloner); !ok {
			return false
		}
	}
	return true
}

func (f *Profiler) setLimit() {
	r, s := f.result, f.s
	nu := float64(r.N - r.Constants)
	half := 0.5 + f.level/2
	switch {
	case s.allKnown():
		z := distuv.UnitNormal.Quantile(half)
		f.limit = r.Objective + z*z
		return
	case nu <= 0:
		f.why = "as many parameters as residuals: the scatter is not known"
		return
	case !s.joint && r.Objective == 0:
		f.why = "the data are fitted perfectly: the scatter is not known"
		return
	}
	t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: nu}.Quantile(half)
	if s.joint {
		f.limit = r.Objective + float64(r.N)*math.Log1p(t*t/nu)
		return
	}
	f.limit = r.Objective * (1 + t*t/nu)
}

// Better returns the θ of the lowest objective met so far, if that is below the
// result's by more than rounding: Solve from there, and the intervals have to
// be found again. Else nil.
func (f *Profiler) Better() []float64 { return f.better }

// Parameter is the interval of parameter j.
func (f *Profiler) Parameter(ctx context.Context, j int) Interval {
	q := f.problem.Parameters[j]
	t := target{
		value: func(theta, grad []float64) float64 {
			clear(grad)
			grad[j] = 1
			return theta[j]
		},
		parameter: j,
	}
	if q.Low == q.High {
		return Interval{Low: q.Low, High: q.Low, Level: f.level, Method: "profile", Why: "held fixed"}
	}
	return f.interval(ctx, t)
}

// Quantity is the interval of a function of θ.
func (f *Profiler) Quantity(ctx context.Context, g Quantity) Interval {
	return f.interval(ctx, target{value: g, parameter: -1})
}

// target is what an interval is wanted of.
type target struct {
	value     Quantity
	parameter int // −1 where it is no parameter
}

// end is one end of an interval.
type end struct {
	value      float64
	open, edge bool
	why        string
}

func (f *Profiler) interval(ctx context.Context, t target) Interval {
	iv := Interval{Level: f.level, Method: "profile"}
	v := t.value(f.result.Theta, f.grad)
	switch {
	case math.IsInf(v, 0) || math.IsNaN(v):
		iv.LowOpen, iv.HighOpen, iv.Why = true, true, "it does not exist at the estimate"
		return iv
	case f.why != "":
		iv.Low, iv.High, iv.LowOpen, iv.HighOpen, iv.Why = v, v, true, true, f.why
		return iv
	}
	low, high := f.end(ctx, t, v, -1), f.end(ctx, t, v, 1)
	iv.Low, iv.LowOpen, iv.LowEdge = low.value, low.open, low.edge
	iv.High, iv.HighOpen, iv.HighEdge = high.value, high.open, high.edge
	iv.Why = low.why
	if high.why != "" && high.why != low.why {
		if iv.Why != "" {
			iv.Why += "; "
		}
		iv.Why += high.why
	}
	return iv
}

// end finds the end in direction d of a target whose estimate is v.
func (f *Profiler) end(ctx context.Context, t target, v, d float64) end {
	if j := t.parameter; j >= 0 {
		if d < 0 && v <= f.s.low[j] || d > 0 && v >= f.s.high[j] {
			return end{value: v, edge: true}
		}
	}
	if ctx.Err() != nil {
		return end{value: v, open: true, why: "interrupted"}
	}
	g, straight, ok := f.leap(t, v, d)
	if ok {
		f.probe(ctx)
		if straight || f.ends(ctx, t, v, g) {
			return end{value: g}
		}
	}
	e := f.follow(ctx, t, v, d)
	f.probe(ctx)
	if ok && !e.open && !e.edge && d*(e.value-g) < 0 {
		return end{value: g}
	}
	return e
}

// ends says whether the profile is above its limit just beyond an end that a
// leap has found: seen from the estimate, another branch may lie lower there.
func (f *Profiler) ends(ctx context.Context, t target, v, end float64) bool {
	beyond := end + 0.02*(end-v)
	g := f.guide(t, math.Abs(end-v))
	if low, high := g.bounds(); beyond <= low || beyond >= high {
		return true
	}
	at, ok := g.turn(ctx, beyond, f.result.Theta)
	return !ok || at.objective >= f.limit || math.Abs(at.value-v) <= math.Abs(end-v)
}

// probe goes down from where an end was found, all parameters free: if that
// leads to a lower minimum than the result's, it is kept.
func (f *Profiler) probe(ctx context.Context) {
	if f.s.begun(f.s.cur.theta) {
		f.s.descend(ctx.Done(), 1e-3, 50)
		f.meet(f.s.cur.obj, f.s.cur.theta)
	}
}
