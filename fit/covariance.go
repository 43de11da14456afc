package fit

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/mat"
)

// covariance writes the covariance of the free parameters
//
//	(Σ_b J_bᵀJ_b/σ_b²)^{−1}
//
// of the current point, with σ_b = Sigma; nil where the design is singular. A
// block that is fitted perfectly counts with the least σ that its floor allows.
func (s *solver) covariance(r *Result) {
	if r.N <= r.Constants && !s.allKnown() {
		return // no scatter, no covariance
	}
	var interior []int
	for j := range r.Edges {
		if s.low[j] < s.high[j] && r.Edges[j] == Inside {
			interior = append(interior, j)
		}
	}
	s.begin(s.cur)
	for _, j := range interior {
		s.loadScaled(j, r.Sigma)
		if before, after := s.cur.f.push(); after == 0 {
			if before == 0 {
				r.warn("%s changes no residual", s.prob.Parameters[j].Name)
			} else {
				r.warn("%s cannot be told apart from the parameters before it", s.prob.Parameters[j].Name)
			}
			return
		}
	}
	if len(interior) > 0 {
		r.Cov = s.inverse(interior, r)
	}
}

// loadScaled writes column j of the Jacobian of the current point, in units of
// the standard deviations, into the next column.
func (s *solver) loadScaled(j int, sigma []float64) {
	a := s.cur.f.next()
	for b, v := range sigma {
		if v == 0 {
			v = math.Sqrt(s.floor[b] / max(s.count[b], 1))
		}
		for i := s.rows[b]; i < s.rows[b+1]; i++ {
			a[i] = s.cur.jraw[i*s.p+j] / v
		}
	}
}

// inverse is (RᵀR)^{−1} of the columns just taken apart, at the places of their
// parameters; nil where it cannot be had.
func (s *solver) inverse(interior []int, r *Result) *mat.SymDense {
	m, f := len(interior), s.cur.f
	inv := mat.NewTriDense(m, mat.Upper, nil)
	for i := 0; i < m; i++ {
		for k := i; k < m; k++ {
			inv.SetTri(i, k, f.r[i*f.most+k])
		}
	}
	var condition mat.Condition
	if err := inv.InverseTri(inv); err != nil && !errors.As(err, &condition) {
		r.warn("the covariance matrix does not exist: %v", err)
		return nil
	}
	cov := mat.NewSymDense(s.p, nil)
	for i, j := range interior {
		for k := i; k < m; k++ {
			var v float64
			for l := k; l < m; l++ {
				v += inv.At(i, l) * inv.At(k, l)
			}
			cov.SetSym(j, interior[k], v)
		}
	}
	return cov
}
