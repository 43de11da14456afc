package fit

import (
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
		a := s.cur.f.next()
		for b, sigma := range r.Sigma {
			if sigma *= sigma; sigma == 0 {
				sigma = s.floor[b] / max(s.count[b], 1)
			}
			sigma = math.Sqrt(sigma)
			for i := s.rows[b]; i < s.rows[b+1]; i++ {
				a[i] = s.cur.jraw[i*s.p+j] / sigma
			}
		}
		if before, after := s.cur.f.push(); after == 0 {
			if before == 0 {
				r.warn("%s changes no residual", s.prob.Parameters[j].Name)
			} else {
				r.warn("%s cannot be told apart from the parameters before it", s.prob.Parameters[j].Name)
			}
			return
		}
	}
	m := len(interior)
	if m == 0 {
		return
	}
	inv := mat.NewTriDense(m, mat.Upper, nil)
	for i := 0; i < m; i++ {
		for k := i; k < m; k++ {
			inv.SetTri(i, k, s.cur.f.r[i*s.cur.f.most+k])
		}
	}
	if err := inv.InverseTri(inv); err != nil {
		if _, ok := err.(mat.Condition); !ok {
			r.warn("the covariance matrix does not exist: %v", err)
			return
		}
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
	r.Cov = cov
}
