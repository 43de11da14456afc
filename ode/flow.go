package ode

import (
	"errors"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
)

// ulp is the distance from 1 to the next number.
const ulp = 0x1p-52

// flow is a System as the methods see it: counted, with Jacobians differenced
// where it has none, and with the variational equations.
type flow struct {
	sys   System
	jacer Jacobianer      // nil: differences
	par   ParamJacobianer // nil: no sensitivities
	n, p  int
	rtol  float64
	stats *Stats

	jac, parJac *mat.Dense // headers over the callers' memory
	diff        differencer
}

func (f *flow) bind(sys System, sensitive bool, stats *Stats) {
	f.sys, f.stats = sys, stats
	f.n, f.p = sys.Dim(), 0
	f.jacer, _ = sys.(Jacobianer)
	f.par = nil
	if sensitive {
		f.par = sys.(ParamJacobianer)
		f.p = f.par.NumParams()
		f.parJac = header(f.parJac, f.n, f.p)
	}
	f.jac = header(f.jac, f.n, f.n)
	if f.jacer == nil {
		f.diff.bind(sys)
	}
}

// header is a matrix whose memory is set before each use.
func header(old *mat.Dense, r, c int) *mat.Dense {
	if old != nil && old.RawMatrix().Rows == r && old.RawMatrix().Cols == c {
		return old
	}
	return mat.NewDense(r, c, nil)
}

// over points a header to memory.
func over(m *mat.Dense, data []float64) *mat.Dense {
	raw := m.RawMatrix()
	raw.Data = data[:raw.Rows*raw.Cols]
	m.SetRawMatrix(raw)
	return m
}

// size of the whole state: components and their sensitivities.
func (f *flow) size() int { return f.n * (1 + f.p) }

func (f *flow) derivs(dst []float64, t float64, y []float64) error {
	f.stats.Evaluations++
	return f.sys.Derivs(dst[:f.n], t, y[:f.n])
}

// place is where derivatives of f are wanted. Differences need f there, and weigh
// its rounding against the step h and the reciprocal weights iw.
type place struct {
	t        float64
	y, f, iw []float64
	h        float64
}

// jacobian writes ∂f/∂y, row-major.
func (f *flow) jacobian(dst []float64, at place) error {
	if dst = f.blank(dst); f.jacer != nil {
		return f.jacer.Jacobian(over(f.jac, dst), at.t, at.y[:f.n])
	}
	return f.diff.forward(f, dst, at)
}

// exactJacobian is jacobian by central differences where there is no formula:
// sensitivities are no better than it.
func (f *flow) exactJacobian(dst []float64, at place) error {
	if dst = f.blank(dst); f.jacer != nil {
		return f.jacer.Jacobian(over(f.jac, dst), at.t, at.y[:f.n])
	}
	return f.diff.central(f, dst, at)
}

// blank counts a Jacobian and clears its memory.
func (f *flow) blank(dst []float64) []float64 {
	f.stats.Jacobians++
	dst = dst[:f.n*f.n]
	clear(dst)
	return dst
}

// paramJacobian writes ∂f/∂θ, row-major.
func (f *flow) paramJacobian(dst []float64, t float64, y []float64) error {
	dst = dst[:f.n*f.p]
	clear(dst)
	return f.par.ParamJacobian(over(f.parJac, dst), t, y[:f.n])
}

// variational writes J S + ∂f/∂θ for S n×p; dst holds ∂f/∂θ on entry.
func (f *flow) variational(dst, jac, s []float64) {
	n, p := f.n, f.p
	for i := range n {
		d := dst[i*p : i*p+p]
		for j, v := range jac[i*n : i*n+n] {
			if v != 0 {
				plus(d, v, s[j*p:j*p+p])
			}
		}
	}
}

// plus adds l·x to y.
func plus(y []float64, l float64, x []float64) {
	y = y[:len(x)]
	for j, v := range x {
		y[j] += l * v
	}
}

// trouble is what an error of the System makes of a step.
func (f *flow) trouble(err error) trial {
	if errors.Is(err, ErrDomain) {
		return trial{fate: unevaluable, shrink: 0.25}
	}
	return trial{fate: broken, err: err}
}

// rms is the root mean square of x in units of the weights.
func rms(x, iw []float64) float64 {
	var s float64
	x = x[:len(iw)]
	for k, w := range iw {
		v := x[k] * w
		s += v * v
	}
	return math.Sqrt(s / float64(len(iw)))
}

// columns is the largest root mean square over the columns of x, one for each of
// sums.
func columns(x, iw, sums []float64) float64 {
	p := len(sums)
	clear(sums)
	for i := 0; i < len(iw); i += p {
		w := iw[i : i+p]
		for j, v := range x[i : i+p] {
			v *= w[j]
			sums[j] += v * v
		}
	}
	return math.Sqrt(slices.Max(sums) * float64(p) / float64(len(iw)))
}
