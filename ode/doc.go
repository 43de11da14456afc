// Package ode solves initial-value problems y′ = f(t, y), y(t₀) = y₀, stiff or
// not. It knows no chemistry.
//
// A System gives f; it may also give its derivatives (Jacobianer,
// ParamJacobianer) and its sparsity (Patterner). Solve integrates it and returns
// the states at the times asked for:
//
//	sol, err := ode.Solve(ctx, sys, y0, []float64{0, 1, 10}, ode.Options{Rtol: 1e-8})
//	y := sol.States[2] // at t = 10
//
// Two methods: Radau (collocation at Radau points, order 5, 9 or 13, for stiff
// problems and the default) and Explicit (a Runge–Kutta pair of order 8). A step
// is proposed by the method, sized by the controller and taken or refused by the
// loop; states between the ends of a step come from its polynomial, which is
// held to the same tolerance as the ends.
//
// An integration that fails returns an error which names the time and the
// component, and the states up to there. It never returns a number in place of
// one it could not compute.
package ode
