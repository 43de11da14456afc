// Package fit is weighted nonlinear least squares with bounds, for problems
// with few parameters, tied constants and several minima. It knows no chemistry.
//
// A Problem is residual Blocks over shared Parameters. Solve finds its best
// minimum from many starts; a Profiler (or Profiles, for many at once) the
// profile-likelihood intervals of parameters and of any Quantity; Refit fits
// replicate data (Parametric, Residual, ByGroup) or a screen of many curves;
// Combinations and Ties say what the data hold together and what apart;
// Likelihood, Contest, TestLackOfFit, Runs and LeaveOut compare models.
//
// Every number depends on the problem, the data and the stated settings alone:
// never on the number of workers or the order in which they finish. What cannot
// be had (an end of an interval, a covariance, a criterion) is said in words and
// flags; no result holds NaN.
package fit

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Parameter is one fitted number on the scale on which it is fitted.
type Parameter struct {
	Name      string
	Low, High float64 // bounds, −Inf and +Inf where there are none; Low == High holds it fixed
	// StartLow and StartHigh bound the box in which starts are drawn. Equal
	// values give one start. NaN means: use the problem's Start alone.
	StartLow, StartHigh float64
	// Linear says that every residual is linear in this parameter, so that it
	// is solved for, not searched.
	Linear bool
}

// Block is a set of residuals r(θ) with one scatter: already divided by their
// standard deviation where that is known, else relative to one unknown σ.
type Block interface {
	Len() int
	// Eval writes residuals and, where jac is not nil (Len × len(θ)), ∂r/∂θ. jac
	// arrives filled with zeros, so that only what is not zero need be written.
	Eval(res []float64, jac *mat.Dense, theta []float64) error
}

// Cloner is a Block with workspace of its own; each worker takes a clone.
type Cloner interface {
	Block
	Clone() Block
}

// Pooled is a Block whose rows are weighted means of replicates. What lies
// within the replicates is constant, but counts: Pooled returns its sum of
// squares and how many residuals there are beyond Len.
type Pooled interface {
	Block
	Pooled() (ss float64, more int)
}

// Scatter says what is known of the standard deviation of a block.
type Scatter uint8

const (
	// Unknown scatter: one σ for the block is estimated.
	Unknown Scatter = iota
	// Known scatter: residuals are in units of their standard deviation.
	Known
)

// Problem is a sum of blocks over shared parameters.
//
// With one block of unknown scatter, or known scatter throughout, the objective
// is the sum of squares. Otherwise it is −2 ln likelihood up to a constant:
// Σ_known SS_b + Σ_unknown N_b ln(SS_b).
type Problem struct {
	Parameters []Parameter
	Blocks     []Block
	Scatter    []Scatter   // per block; nil means all Unknown
	Starts     [][]float64 // starts to be tried before drawn ones; may be nil
}

// Check says what is wrong with a problem, all at once.
func (p *Problem) Check() error {
	if len(p.Parameters) == 0 {
		return errors.New("no parameters")
	}
	if len(p.Scatter) != 0 && len(p.Scatter) != len(p.Blocks) {
		return fmt.Errorf("scatter is given for %d of %d blocks", len(p.Scatter), len(p.Blocks))
	}
	rows, n := p.count()
	if rows == 0 {
		return errors.New("no residuals")
	}
	var errs []error
	free := 0
	for _, q := range p.Parameters {
		errs = append(errs, q.check())
		if q.Low < q.High {
			free++
		}
	}
	for i, s := range p.Starts {
		if len(s) != len(p.Parameters) {
			errs = append(errs, fmt.Errorf("start %d has %d values for %d parameters",
				i+1, len(s), len(p.Parameters)))
		}
		if !allFinite(s) {
			errs = append(errs, fmt.Errorf("start %d is not finite", i+1))
		}
	}
	if n < free {
		errs = append(errs, fmt.Errorf("%d residuals cannot settle %d parameters", n, free))
	}
	return errors.Join(errs...)
}

// count returns how many rows the blocks have, and how many residuals these
// stand for.
func (p *Problem) count() (rows, residuals int) {
	for _, b := range p.Blocks {
		rows += b.Len()
		residuals += b.Len()
		if q, ok := b.(Pooled); ok {
			_, more := q.Pooled()
			residuals += more
		}
	}
	return rows, residuals
}

func (q *Parameter) check() error {
	if !(q.Low <= q.High) || math.IsInf(q.Low, 1) || math.IsInf(q.High, -1) {
		return fmt.Errorf("parameter %s: bounds %v and %v are not in order", q.Name, q.Low, q.High)
	}
	if q.StartLow > q.StartHigh || math.IsInf(q.StartLow, 0) || math.IsInf(q.StartHigh, 0) {
		return fmt.Errorf("parameter %s: starts cannot be drawn between %v and %v",
			q.Name, q.StartLow, q.StartHigh)
	}
	return nil
}
