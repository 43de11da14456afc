package mechanisms

import (
	"math"
	"math/cmplx"
	"slices"

	"gonum.org/v1/gonum/mat"
)

// alike is how close the coefficients of independent sites must come, in ln.
const alike = 1e-6

// independentSites finds the ln K of independent sites whose polynomial has the
// coefficients lnB, by damped least squares on ln B_i from the sizes of the
// roots: ∂ln B_i/∂ln K_c = −(share of the molecules with i ligands that have one
// at c). Where a step of association gets stronger there are none (Newton's
// inequalities).
func independentSites(lnB []float64, roots []complex128) (lnK []float64, ok bool) {
	n := len(lnB) - 1
	if n == 0 || !weakening(lnB) {
		return nil, false
	}
	lnK = make([]float64, n)
	for i, z := range roots {
		lnK[i] = math.Log(cmplx.Abs(z))
	}
	f := siteFit{target: lnB, folding: newFolding(n, n), unit: make([]float64, n),
		res: mat.NewVecDense(n, nil), jac: mat.NewDense(n, n, nil)}
	worst := f.eval(lnK)
	damping := 1e-3
	for range 100 {
		if worst <= 1e-3*alike {
			break
		}
		next := f.step(lnK, damping)
		if next == nil {
			break
		}
		if w := f.eval(next); w < worst {
			lnK, worst, damping = next, w, damping/10
		} else if damping *= 10; damping > 1e6 {
			break
		} else {
			f.eval(lnK)
		}
	}
	slices.Sort(lnK)
	return lnK, worst <= alike
}

// weakening says whether the intrinsic association constants do not increase.
func weakening(lnB []float64) bool {
	n := len(lnB) - 1
	before := math.Inf(1)
	for i := 1; i <= n; i++ {
		k := lnB[i] - lnB[i-1] + math.Log(float64(i)/float64(n-i+1))
		if !(k <= before+alike) {
			return false
		}
		before = k
	}
	return true
}

// siteFit is the least-squares problem of independentSites.
type siteFit struct {
	target []float64
	folding
	unit []float64
	res  *mat.VecDense
	jac  *mat.Dense
}

// eval writes residuals and derivatives at ln K and returns the largest residual.
func (f *siteFit) eval(lnK []float64) (worst float64) {
	n := len(lnK)
	f.start()
	for c, l := range lnK {
		clear(f.unit)
		f.unit[c] = 1
		f.times(1, l, f.unit)
	}
	for i := range n {
		r := f.lnB[i+1] - (f.target[i+1] - f.target[0])
		f.res.SetVec(i, r)
		f.jac.SetRow(i, f.d[(i+1)*n:(i+2)*n])
		worst = math.Max(worst, math.Abs(r))
	}
	return worst
}

// step is ln K after one damped step; nil where there is none.
func (f *siteFit) step(lnK []float64, damping float64) []float64 {
	n := len(lnK)
	var normal mat.SymDense
	normal.SymOuterK(1, f.jac.T())
	for i := range n {
		normal.SetSym(i, i, normal.At(i, i)*(1+damping)+1e-14)
	}
	var chol mat.Cholesky
	if !chol.Factorize(&normal) {
		return nil
	}
	var g, d mat.VecDense
	g.MulVec(f.jac.T(), f.res)
	if chol.SolveVecTo(&d, &g) != nil {
		return nil
	}
	next := slices.Clone(lnK)
	for i := range next {
		next[i] -= d.AtVec(i)
	}
	return next
}
