package fit

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// LackOfFit compares what a model leaves with what replicates differ by.
type LackOfFit struct {
	F           float64
	Lack, Error int     // degrees of freedom
	P           float64 // probability of a greater F, if the model holds
}

// PureError is the sum of squares of residuals about the mean of their group,
// and the number of groups. Rows of one group have the same prediction and the
// same standard deviation: replicates.
func PureError(residuals []float64, group []int) (ss float64, groups int) {
	type sum struct{ n, mean, ss float64 }
	all := map[int]*sum{}
	for i, g := range group {
		s := all[g]
		if s == nil {
			s = &sum{}
			all[g] = s
		}
		s.n++
		d := residuals[i] - s.mean
		s.mean += d / s.n
		s.ss += d * (residuals[i] - s.mean)
	}
	seen := map[int]bool{}
	for _, g := range group { // in the order of the rows: the same digits each time
		if !seen[g] {
			seen[g] = true
			ss += all[g].ss
		}
	}
	return ss, len(all)
}

// TestLackOfFit is the F test of a sum of squares of n residuals and p constants
// against the pure error of m groups of replicates,
//
//	F = ((SS − SS_pure)/(m − p)) / (SS_pure/(n − m)) .
//
// ok is false where there are no replicates, no more groups than constants, or
// no pure error.
//
// Draper NR & Smith H (1998) Applied Regression Analysis, ch. 2.
func TestLackOfFit(ss float64, n, p int, pure float64, m int) (t LackOfFit, ok bool) {
	t.Lack, t.Error = m-p, n-m
	if t.Lack <= 0 || t.Error <= 0 || !(pure > 0) || math.IsInf(ss, 0) {
		return t, false
	}
	t.F = max(ss-pure, 0) / float64(t.Lack) / (pure / float64(t.Error))
	t.P = distuv.F{D1: float64(t.Lack), D2: float64(t.Error)}.Survival(t.F)
	return t, true
}
