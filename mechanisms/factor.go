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
	if n == 0 || !weakening(lnB) || complexBeyond(roots) {
		return nil, false
	}
	for _, gap := range []float64{0.1, 0.3, 1, 0.01, 0} {
		f := newSiteFit(lnB)
		lnK, worst := f.fit(gathered(roots, gap))
		if worst <= alike {
			slices.Sort(lnK)
			return lnK, true
		}
	}
	return nil, false
}

// complexBeyond says whether a root lies further from the negative axis than
// rounding can put one of n equal ones: about the nth root of it.
func complexBeyond(roots []complex128) bool {
	scatter := math.Max(5e-3, 20*math.Pow(1e-15, 1/float64(len(roots))))
	return slices.ContainsFunc(roots, func(z complex128) bool {
		return math.Abs(imag(z)) > scatter*cmplx.Abs(z) || real(z) >= 0 && scatter < 1
	})
}

// gathered is the ln of the sizes of the roots, those within a gap of one another
// replaced by their mean: rounding scatters a multiple root about its place.
func gathered(roots []complex128, gap float64) []float64 {
	lnK := make([]float64, len(roots))
	for i, z := range roots {
		lnK[i] = math.Log(cmplx.Abs(z))
	}
	slices.Sort(lnK)
	for first := 0; first < len(lnK); {
		last, sum := first, lnK[first]
		for last+1 < len(lnK) && lnK[last+1]-lnK[last] < gap {
			last++
			sum += lnK[last]
		}
		for i := first; i <= last; i++ {
			lnK[i] = sum / float64(last-first+1)
		}
		first = last + 1
	}
	return lnK
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
	res  *mat.VecDense // residuals, and as many zeros
	jac  *mat.Dense    // derivatives, and the damping below
}

func newSiteFit(lnB []float64) *siteFit {
	n := len(lnB) - 1
	return &siteFit{target: lnB, folding: newFolding(n, n), unit: make([]float64, n),
		res: mat.NewVecDense(2*n, nil), jac: mat.NewDense(2*n, n, nil)}
}

// fit moves ln K towards the target and returns the largest residual.
func (f *siteFit) fit(lnK []float64) ([]float64, float64) {
	worst, ss := f.eval(lnK)
	damping := 1e-2
	for range 200 {
		if worst <= 1e-2*alike || damping > 1e4 {
			break
		}
		next := f.step(lnK, damping)
		if next == nil {
			break
		}
		w, s := f.eval(next)
		if s < ss {
			lnK, worst, ss, damping = next, w, s, damping/4
			continue
		}
		damping *= 6
		f.eval(lnK)
	}
	return lnK, worst
}

// eval writes residuals and derivatives at ln K and returns the largest residual
// and the sum of squares.
func (f *siteFit) eval(lnK []float64) (worst, ss float64) {
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
		ss += r * r
	}
	return worst, ss
}

// step is ln K after one damped step; nil where there is none.
func (f *siteFit) step(lnK []float64, damping float64) []float64 {
	n := len(lnK)
	for i := range n {
		f.jac.Set(n+i, i, damping)
	}
	var qr mat.QR
	qr.Factorize(f.jac)
	var d mat.VecDense
	if qr.SolveVecTo(&d, false, f.res) != nil {
		return nil
	}
	next := slices.Clone(lnK)
	for i := range next {
		next[i] -= d.AtVec(i)
	}
	return next
}
