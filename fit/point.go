package fit

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// point is a problem evaluated at one θ.
type point struct {
	theta []float64
	res   []float64    // N residuals
	jraw  []float64    // N × P, row after row
	jac   []*mat.Dense // the rows of each block, a view of jraw
	ss    []float64    // per block, what lies within collapsed rows included
	obj   float64      // see Problem
	scale []float64    // per block: √(N_b/SS_b) where several σ are unknown, else 1

	f      *columns // its scaled Jacobian taken apart, linear parameters first
	free   []int    // the parameter of each column of f
	lin    int      // how many of them are linear
	solved bool     // f holds the linear columns of the present θ
}

func newPoint(rows []int, p, free int) *point {
	b, n := len(rows)-1, rows[len(rows)-1]
	pt := &point{
		theta: make([]float64, p), res: make([]float64, n), jraw: make([]float64, n*p),
		jac: make([]*mat.Dense, b), ss: make([]float64, b), scale: make([]float64, b),
		f: newColumns(n, free), free: make([]int, 0, free),
	}
	for k := range pt.jac {
		if rows[k+1] > rows[k] && p > 0 {
			pt.jac[k] = mat.NewDense(rows[k+1]-rows[k], p, pt.jraw[rows[k]*p:rows[k+1]*p])
		}
	}
	return pt
}

// evaluate fills pt at its θ and says whether everything is finite. An error of
// a block is kept in s.fault and counts as not finite.
func (s *solver) evaluate(pt *point) bool {
	return s.glance(pt) && allFinite(pt.jraw)
}

// glance is evaluate for those who look at the Jacobian themselves.
func (s *solver) glance(pt *point) bool {
	s.evals++
	pt.solved = false
	clear(pt.jraw)
	for b, block := range s.blocks {
		if pt.jac[b] == nil {
			continue
		}
		res := pt.res[s.rows[b]:s.rows[b+1]]
		if err := block.Eval(res, pt.jac[b], pt.theta); err != nil {
			s.fault = err
			return false
		}
	}
	s.replace(pt)
	s.measure(pt)
	return !math.IsNaN(pt.obj) && !math.IsInf(pt.obj, 1)
}

// replace turns residuals of the data into those of a replicate.
func (s *solver) replace(pt *point) {
	if s.shift != nil {
		for i, d := range s.shift {
			pt.res[i] += d
		}
	}
	if s.weight == nil {
		return
	}
	p := s.p
	for i, w := range s.weight {
		pt.res[i] *= w
		row := pt.jraw[i*p : (i+1)*p]
		for j := range row {
			row[j] *= w
		}
	}
}

// measure computes the sums of squares, the objective and the scales of pt from
// its residuals.
func (s *solver) measure(pt *point) {
	pt.obj = 0
	for b := range s.blocks {
		r := pt.res[s.rows[b]:s.rows[b+1]]
		ss := dot(r, r) + s.within[b]
		pt.ss[b], pt.scale[b] = ss, 1
		if !s.joint || s.known[b] {
			pt.obj += ss
			continue
		}
		ss = max(ss, s.floor[b])
		pt.scale[b] = math.Sqrt(s.count[b] / ss)
		pt.obj += s.count[b] * math.Log(ss)
	}
}

// total is the squared length of the scaled residuals.
func (s *solver) total(pt *point) float64 {
	var t float64
	for b, ss := range pt.ss {
		t += pt.scale[b] * pt.scale[b] * ss
	}
	return t
}

// allFinite says whether a holds neither NaN nor ±Inf (nor what adds up to that).
func allFinite(a []float64) bool {
	var s0, s1, s2, s3 float64
	for len(a) >= 4 {
		s0 += a[0]
		s1 += a[1]
		s2 += a[2]
		s3 += a[3]
		a = a[4:]
	}
	for _, v := range a {
		s0 += v
	}
	s := (s0 + s1) + (s2 + s3)
	return s-s == 0
}
