package fit

import "gonum.org/v1/gonum/mat"

// Status says how a fit ended.
type Status uint8

const (
	// NoAnswer: no start reached a minimum.
	NoAnswer Status = iota
	// Converged: a stationary minimum inside the bounds.
	Converged
	// AtEdge: a minimum on at least one bound; a result like any other.
	AtEdge
	// Stopped: interrupted, or out of iterations; the best so far.
	Stopped
)

// Edge says on which of its bounds a parameter lies.
type Edge int8

const (
	OnLow  Edge = -1
	Inside Edge = 0
	OnHigh Edge = 1
)

// Settings of Solve. The zero value works.
type Settings struct {
	Starts  int    // number of starts; 0 means 20
	Seed    uint64 // of the low-discrepancy sequence
	Workers int    // 0 means as many as there are processors; never changes a digit
	MaxIter int    // per start; 0 means 2000
	// Progress, if set, is called now and then with the number of starts done.
	Progress func(done, of int)
}

// Result is the best minimum found.
type Result struct {
	Theta     []float64
	Status    Status
	Edges     []Edge
	Objective float64   // see Problem
	SS        []float64 // per block
	Residuals []float64 // all blocks in order
	N         int       // residuals, collapsed ones counted in full
	Constants int       // parameters that are not fixed: ν = N − Constants
	Free      int       // parameters neither fixed nor on an edge
	Offset    float64   // relative offset ‖Q₁ᵀr‖/‖r‖ at the end
	Starts    int       // starts tried
	Agreeing  int       // starts that reached the same minimum
	Evals     int
	Cov       *mat.SymDense // of θ, zero rows for fixed parameters and edges; nil if singular
	Sigma     []float64     // per block: √(SS/(N−p)), or 1 where known
	Warnings  []string
}

// Quantity is a function of θ whose interval is wanted: it returns its value
// and writes its gradient. ±Inf is a value that does not exist: an open end.
type Quantity func(theta, grad []float64) float64

// Interval is an interval for a parameter or a quantity.
type Interval struct {
	Low, High         float64
	LowOpen, HighOpen bool // no such end: the profile stays below its limit as far as it can be followed
	// LowEdge and HighEdge: the end is a bound of the parameter, reached below the limit.
	LowEdge, HighEdge bool
	Level             float64 // the level reached
	Method            string  // "profile", "covariance", "bootstrap"
	Why               string  // why an end is missing, or what was not reached
}

var statusNames = [...]string{"no answer", "converged", "at an edge", "stopped"}

func (s Status) String() string { return statusNames[s] }
