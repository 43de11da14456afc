package saturation

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// dependentChange is the least singular value, of changes of unit length, that
// counts as a change of its own.
const dependentChange = 1e-9

// freedom is the number of independent ways in which the candidate's curves can
// change: the rank of their derivatives, at constants of no special kind. (Two
// conformations on two sites have three constants and two such ways.) Curves of
// different freedom are never twins, though one may end up in the other.
func (t *imitation) freedom() int {
	if t.rank > 0 {
		return t.rank
	}
	for _, theta := range t.boxed(3, 3) {
		t.rank = max(t.rank, t.rankAt(theta))
	}
	return t.rank
}

func (t *imitation) rankAt(theta []float64) int {
	n, k := 0, len(theta)
	for _, b := range t.m.blocks {
		n += len(b.rows)
	}
	jac := mat.NewDense(n, k, nil)
	row := 0
	for _, b := range t.m.blocks {
		b.predict(theta, true)
		for i := range b.rows {
			jac.SetRow(row, b.work.jHat.RawRowView(i))
			row++
		}
	}
	for j := range k {
		sum := 0.0
		for i := range n {
			sum += jac.At(i, j) * jac.At(i, j)
		}
		for i := range n {
			if sum > 0 && t.m.params[j].Low < t.m.params[j].High {
				jac.Set(i, j, jac.At(i, j)/math.Sqrt(sum))
			} else {
				jac.Set(i, j, 0)
			}
		}
	}
	var svd mat.SVD
	if !svd.Factorize(jac, mat.SVDNone) {
		return 0
	}
	rank := 0
	for _, v := range svd.Values(nil) {
		if v > dependentChange {
			rank++
		}
	}
	return rank
}
