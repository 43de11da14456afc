// Package fit is weighted nonlinear least squares with bounds, for problems
// with few parameters, tied constants and several minima. It knows no chemistry.
package fit

import "gonum.org/v1/gonum/mat"

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
	// Eval writes residuals and, where jac is not nil (Len × len(θ)), ∂r/∂θ.
	Eval(res []float64, jac *mat.Dense, theta []float64) error
}

// Cloner is a Block with workspace of its own; each worker takes a clone.
type Cloner interface {
	Block
	Clone() Block
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
