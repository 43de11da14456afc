package fit

import (
	"errors"
	"math"
	"slices"
	"sort"

	"gonum.org/v1/gonum/mat"
)

// Combination is a direction in the space of the parameters: Σ Weights·θ. Where
// the parameters are logarithms it is a product of powers, and SD its relative
// standard deviation.
type Combination struct {
	Weights []float64 // one per parameter asked about, the largest 1
	SD      float64   // of the sum; 0 where Free
	Free    bool      // the data do not hold it at all
}

// Combinations are the eigenvectors of the information matrix of some of the
// parameters, all others left free to follow,
//
//	Σ_b J_bᵀJ_b/σ_b² , the others eliminated,
//
// from the stiffest to the loosest. Parameters on a bound, and fixed ones, stand
// still and have no weight. which holds the parameters asked about, in the order
// of Weights; nil means all.
//
// Gutenkunst RN et al. (2007) PLoS Comput Biol 3, e189 (stiff and loose
// directions).
func Combinations(p *Problem, r *Result, which []int) ([]Combination, error) {
	if which == nil {
		for j := range p.Parameters {
			which = append(which, j)
		}
	}
	rows, place, err := information(p, r, which)
	if err != nil {
		return nil, err
	}
	k := len(place)
	var svd mat.SVD
	if k == 0 {
		return nil, nil
	}
	if !svd.Factorize(rows, mat.SVDFull) {
		return nil, errors.New("fit: the information matrix cannot be taken apart")
	}
	s := svd.Values(nil)
	var v mat.Dense
	svd.VTo(&v)
	all := make([]Combination, k)
	for c := range all {
		w := make([]float64, len(which))
		top := 0.0
		for i, at := range place {
			w[at] = v.At(i, c)
			if math.Abs(w[at]) > math.Abs(top)*(1+1e-9) {
				top = w[at]
			}
		}
		for i := range w {
			w[i] /= top
		}
		all[c] = Combination{Weights: w, Free: s[c] <= 1e-13*s[0]}
		if !all[c].Free {
			all[c].SD = 1 / (s[c] * math.Abs(top))
		}
	}
	return all, nil
}

// information returns a square root of the information matrix of the free ones
// of which, the others eliminated, and where they stand in which.
func information(p *Problem, r *Result, which []int) (*mat.Dense, []int, error) {
	if slices.Contains(r.Sigma, 0) {
		return nil, nil, errors.New("fit: the scatter is not known")
	}
	s := newSolver(p.searched(), false)
	if len(r.Theta) != s.p || !s.begun(r.Theta) {
		return nil, nil, errors.New("fit: the result cannot be evaluated again")
	}
	var others, asked, place []int
	for i, j := range which {
		if s.low[j] < s.high[j] && r.Edges[j] == Inside {
			asked, place = append(asked, j), append(place, i)
		}
	}
	for _, j := range s.curved {
		if r.Edges[j] == Inside && !slices.Contains(asked, j) {
			others = append(others, j)
		}
	}
	if len(asked) == 0 {
		return nil, nil, nil
	}
	f := s.cur.f
	f.reset(f.n)
	for _, j := range append(others, asked...) {
		s.loadScaled(j, r.Sigma)
		f.push()
	}
	k, o := len(asked), len(others)
	root := mat.NewDense(k, k, nil)
	for i := range k {
		for j := i; j < k; j++ {
			root.Set(i, j, f.r[(o+i)*f.most+o+j])
		}
	}
	return root, place, nil
}

// Tie is a pair of parameters that the data hold together much better than
// apart: θ_I + Power·θ_J. With logarithms, Power near 1 means that only the
// product is held, near −1 only the ratio.
type Tie struct {
	I, J        int
	Power       float64
	SD          float64 // of the combination, all else free
	SDI, SDJ    float64 // of each alone
	Correlation float64
}

// Ties lists the pairs of parameters of a result whose correlation is at least
// that strong (0.99, say), the strongest first. Without a covariance there are
// none to list: Combinations tell what is held then.
func Ties(r *Result, correlation float64) []Tie {
	if r.Cov == nil {
		return nil
	}
	var ties []Tie
	n := r.Cov.SymmetricDim()
	for i := range n {
		for j := i + 1; j < n; j++ {
			a, b, c := r.Cov.At(i, i), r.Cov.At(j, j), r.Cov.At(i, j)
			if a == 0 || b == 0 {
				continue
			}
			rho := c / math.Sqrt(a*b)
			if math.Abs(rho) < correlation {
				continue
			}
			ties = append(ties, Tie{I: i, J: j, Power: -c / b, Correlation: rho,
				SD: math.Sqrt(max(a-c*c/b, 0)), SDI: math.Sqrt(a), SDJ: math.Sqrt(b)})
		}
	}
	sort.SliceStable(ties, func(a, b int) bool {
		return math.Abs(ties[a].Correlation) > math.Abs(ties[b].Correlation)
	})
	return ties
}

// Correlation of parameters i and j of a result; ok is false where one of them
// is fixed, on a bound, or not determined.
func (r *Result) Correlation(i, j int) (rho float64, ok bool) {
	if r.Cov == nil {
		return 0, false
	}
	a, b := r.Cov.At(i, i), r.Cov.At(j, j)
	if !(a > 0 && b > 0) {
		return 0, false
	}
	return min(max(r.Cov.At(i, j)/math.Sqrt(a*b), -1), 1), true
}

// Simple rounds the weights of a combination to fractions of small whole
// numbers, where that costs little: the standard deviation of the rounded sum
// may be up to twice that of the combination. cov is that of the parameters
// asked about. What cannot be rounded so is left as it is, with ok false.
func (c Combination) Simple(cov mat.Symmetric, denominator int) (rounded Combination, ok bool) {
	rounded = Combination{Weights: make([]float64, len(c.Weights))}
	for i, w := range c.Weights {
		rounded.Weights[i] = nearestFraction(w, denominator)
	}
	v := mat.NewVecDense(len(c.Weights), rounded.Weights)
	rounded.SD = math.Sqrt(max(mat.Inner(v, cov, v), 0))
	if c.Free || rounded.SD > 2*c.SD {
		return c, false
	}
	return rounded, true
}

// nearestFraction is the fraction nearest to w whose denominator is at most most.
func nearestFraction(w float64, most int) float64 {
	best, off := 0.0, math.Inf(1)
	for d := 1; d <= most; d++ {
		f := math.Round(w*float64(d)) / float64(d)
		if o := math.Abs(f - w); o < off*(1-1e-9) {
			best, off = f, o
		}
	}
	return best
}
