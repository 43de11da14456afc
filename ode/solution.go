package ode

import "gonum.org/v1/gonum/mat"

// Solution is what an integration found. After a failure or a terminal event it
// ends early.
type Solution struct {
	// Times are the times reached of those asked for; the first is the start.
	Times []float64
	// States has the state at each of Times.
	States [][]float64
	// Sensitivities has ∂y/∂θ (n×p) at each of Times, where asked for.
	Sensitivities []*mat.Dense
	// Hits are the events met, in the order of time.
	Hits []Hit
	// Ended is true where a terminal event ended the integration.
	Ended bool
	// EndTime and EndState are as far as the integration came.
	EndTime  float64
	EndState []float64

	Stats Stats
	// Warnings are no errors, but should be shown with the numbers.
	Warnings []string

	n, p   int
	flat   []float64    // behind States
	sens   []*mat.Dense // behind Sensitivities
	states [][]float64
	kept   record
}

// Stats counts the work of an integration.
type Stats struct {
	Steps          int // steps taken
	Rejected       int // steps refused for their error
	Failures       int // attempts at which the iteration or the system failed
	Evaluations    int // of f, without those of differences
	Differences    int // evaluations of f to difference Jacobians
	Jacobians      int
	Factorisations int // of the set of matrices of a step
	Iterations     int // of Newton
	// Orders counts the steps of order 5, 9 and 13 of Radau.
	Orders [3]int
	// Drift is the largest change of a total, relative to the size of its terms.
	Drift float64
}

// prepare gives the solution room for all times.
func (s *Solution) prepare(n, p int, times []float64) {
	m := len(times)
	s.n, s.p = n, p
	s.Times = append(s.Times[:0], times...)[:0]
	s.flat = grown(s.flat, m*n)
	s.states = grown(s.states, m)
	for k := range s.states {
		s.states[k] = s.flat[k*n : (k+1)*n : (k+1)*n]
	}
	s.States = s.states[:0]
	if p > 0 {
		s.sens = grown(s.sens, m)
		for k, d := range s.sens {
			if d == nil || d.RawMatrix().Rows != n || d.RawMatrix().Cols != p {
				s.sens[k] = mat.NewDense(n, p, nil)
			}
		}
	}
	s.Sensitivities = s.sens[:0]
	s.Hits, s.Warnings = s.Hits[:0], s.Warnings[:0]
	s.Ended, s.Stats = false, Stats{}
	s.EndState = grown(s.EndState, n)
	s.kept.reset(n, p)
}

// next opens the next output and returns where its state and sensitivities go.
func (s *Solution) next(t float64) (y, sens []float64) {
	k := len(s.States)
	s.Times = append(s.Times, t)
	s.States = s.states[:k+1]
	if s.p > 0 {
		s.Sensitivities = s.sens[:k+1]
		sens = s.sens[k].RawMatrix().Data
	}
	return s.States[k], sens
}
