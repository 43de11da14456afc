package ode

import (
	"errors"

	"gonum.org/v1/gonum/mat"
)

// System is the initial-value problem y′ = f(t, y).
type System interface {
	// Dim is the number n of components.
	Dim() int
	// Derivs writes f(t, y) to dst. It must neither keep nor change y. An error
	// ends the integration, except ErrDomain, which makes the step smaller.
	Derivs(dst []float64, t float64, y []float64) error
}

// Jacobianer is a System that knows its derivatives. Without it they are differenced.
type Jacobianer interface {
	System
	// Jacobian writes ∂fᵢ/∂yⱼ to row i, column j of dst, which arrives filled
	// with zeros and with a stride equal to n.
	Jacobian(dst *mat.Dense, t float64, y []float64) error
}

// ParamJacobianer is a System with p constants θ, for sensitivities ∂y/∂θ.
type ParamJacobianer interface {
	System
	// NumParams is p.
	NumParams() int
	// ParamJacobian writes ∂fᵢ/∂θⱼ to row i, column j of dst (n×p), which
	// arrives filled with zeros and with a stride equal to p.
	ParamJacobian(dst *mat.Dense, t float64, y []float64) error
}

// Patterner is a System that knows which components each derivative depends on.
// Differencing then moves several components at once.
type Patterner interface {
	System
	// Pattern lists, for each i, the j for which ∂fᵢ/∂yⱼ is not always zero.
	Pattern() [][]int
}

// ErrDomain is returned (or wrapped) by a System for a state at which it has no
// value. The step is tried again, smaller.
var ErrDomain = errors.New("ode: state outside the domain of the system")
