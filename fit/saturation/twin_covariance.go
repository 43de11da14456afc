package saturation

import "gonum.org/v1/gonum/mat"

// rootCovariance is a lower triangle C with C·Cᵀ the covariance of the first n
// numbers of a fit, zero in the rows of what is fixed or on an edge; nil where
// there is none.
func (f *fitted) rootCovariance(n int) *mat.TriDense {
	if f.result.Cov == nil {
		return nil
	}
	var at []int
	for i := range n {
		if f.result.Cov.At(i, i) > 0 {
			at = append(at, i)
		}
	}
	if len(at) == 0 {
		return nil
	}
	part := mat.NewSymDense(len(at), nil)
	for a, i := range at {
		for b, j := range at[:a+1] {
			part.SetSym(a, b, f.result.Cov.At(i, j))
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(part) {
		return nil
	}
	var l mat.TriDense
	chol.LTo(&l)
	root := mat.NewTriDense(n, mat.Lower, nil)
	for a, i := range at {
		for b, j := range at[:a+1] {
			root.SetTri(i, j, l.At(a, b))
		}
	}
	return root
}
