package ode

import (
	"context"
	"errors"
	"fmt"
	"slices"

	"gonum.org/v1/gonum/mat"
)

// Phase is a stretch of time with a right-hand side of its own. At its start the
// state may jump.
type Phase struct {
	System System
	// Times after the start of the phase at which states are wanted; the last ends it.
	Times []float64
	// Enter changes the state, and its sensitivities (nil where not asked for), at
	// the start of the phase. nil changes nothing.
	Enter func(y []float64, sens *mat.Dense) error
}

// SolvePhases integrates phases one after another, from y0 at start. Each has a
// Solution of its own, whose first time and state are those of its start, after
// the jump. dst is reused as far as it goes.
//
// All systems have the same components and, where sensitivities are asked for, the
// same constants; Options.Sensitivity.Start belongs to y0. Totals are those at the
// start of each phase. The first failure ends the series, and its error names the
// phase; so does a terminal event, without error.
func (s *Solver) SolvePhases(ctx context.Context, dst []*Solution, phases []Phase,
	start float64, y0 []float64) ([]*Solution, error) {
	asked := s.Options.Sensitivity
	defer func() { s.Options.Sensitivity = asked }()
	at := handover{start: start, y: slices.Clone(y0)}
	if asked != nil {
		carried := *asked
		s.Options.Sensitivity = &carried
	}
	for k := range phases {
		if k == len(dst) {
			dst = append(dst, new(Solution))
		}
		if k == 0 {
			at.sens = s.startSensitivity(phases[0].System, len(y0))
		}
		if err := s.phase(ctx, dst[k], &phases[k], &at); err != nil {
			return dst[:k+1], fmt.Errorf("phase %d: %w", k+1, err)
		}
		if dst[k].Ended {
			return dst[:k+1], nil
		}
	}
	return dst[:len(phases)], nil
}

// startSensitivity is a copy of the sensitivities at the start that phases may change.
func (s *Solver) startSensitivity(sys System, n int) *mat.Dense {
	asked := s.Options.Sensitivity
	par, ok := sys.(ParamJacobianer)
	if asked == nil || !ok || par.NumParams() <= 0 || n == 0 {
		return nil
	}
	sens := mat.NewDense(n, par.NumParams(), nil)
	if asked.Start != nil {
		sens.Copy(asked.Start)
	}
	return sens
}

// handover is what one phase leaves to the next.
type handover struct {
	start float64
	y     []float64
	sens  *mat.Dense // nil where not asked for
}

// phase integrates one phase from what the one before has left.
func (s *Solver) phase(ctx context.Context, dst *Solution, ph *Phase, at *handover) error {
	if ph.System == nil || len(ph.Times) == 0 {
		return &Failure{Reason: BadInput, Component: -1, Err: errors.New("no system or no times")}
	}
	if ph.Enter != nil {
		if err := ph.Enter(at.y, at.sens); err != nil {
			return &Failure{Reason: BadInput, Time: at.start, Component: -1, Err: err}
		}
	}
	if at.sens != nil {
		s.Options.Sensitivity.Start = at.sens
	}
	times := append([]float64{at.start}, ph.Times...)
	if _, err := s.Solve(ctx, dst, ph.System, at.y, times); err != nil {
		return err
	}
	at.start = dst.EndTime
	copy(at.y, dst.EndState)
	if at.sens != nil && !dst.Ended {
		at.sens.Copy(dst.Sensitivities[len(dst.Sensitivities)-1])
	}
	return nil
}
