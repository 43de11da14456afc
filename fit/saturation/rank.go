package saturation

import (
	"math"
	"sort"
)

// tieWidth is the difference in AICc within which mechanisms tie (Burnham &
// Anderson 2002: within 2 there is substantial support).
const tieWidth = 2

// rank orders the answered candidates by AICc, finds twins, and fills AICc
// behind the leader and weights. Twins (one curve under several names) count
// once in the weights and share one value. It returns the order, leader first.
func rank(fits []*fitted) []int {
	var order []int
	for i, f := range fits {
		if f.answered() {
			order = append(order, i)
		}
	}
	sort.SliceStable(order, func(i, j int) bool {
		return fits[order[i]].row.AICc < fits[order[j]].row.AICc
	})
	if len(order) == 0 {
		return nil
	}
	findTwins(fits, order)
	best := float64(fits[order[0]].row.AICc)
	sum := 0.0
	for _, i := range order {
		fits[i].row.AICcBehind = fits[i].row.AICc - Real(best)
		if fits[i].twinOf < 0 {
			sum += math.Exp(-float64(fits[i].row.AICcBehind) / 2)
		}
	}
	for _, i := range order {
		fits[i].row.AICcWeight = Real(math.Exp(-float64(fits[i].row.AICcBehind)/2) / sum)
	}
	return order
}

// answered says whether a candidate has a fit that may be compared.
func (f *fitted) answered() bool {
	ok := f.row.Status == "converged" || f.row.Status == "at an edge"
	return ok && f.result != nil && !math.IsNaN(float64(f.row.AICc))
}

// twinTolerance is the largest difference of predictions, in units of the
// scatter, at which two fits are one curve.
const twinTolerance = 1e-3

// findTwins marks candidates whose fitted curves are those of an earlier one
// in the order with as many constants.
func findTwins(fits []*fitted, order []int) {
	for n, i := range order {
		fits[i].twinOf = -1
		for _, j := range order[:n] {
			if fits[j].twinOf < 0 && fits[i].k == fits[j].k && sameCurves(fits[i], fits[j]) {
				fits[i].twinOf = j
				break
			}
		}
	}
}

// sameCurves says whether two fits predict the same at every point.
func sameCurves(f, g *fitted) bool {
	for bi, b := range f.m.blocks {
		o := g.m.blocks[bi]
		s := f.deviations(b)
		o.predict(g.result.Theta, false)
		sigma := f.scatter
		if f.ss == 0 || math.IsNaN(sigma) {
			sigma = 1e-12
		}
		for i := range b.pts {
			if !(math.Abs(b.predicted(i)-o.predicted(i)) <= twinTolerance*sigma*s[i]) {
				return false
			}
		}
	}
	return true
}

// stand gives every candidate its standing but for `out`, which the bootstrap decides.
func stand(fits []*fitted, order []int) {
	for n, i := range order {
		f := fits[i]
		switch {
		case n == 0:
			f.row.Standing = "leads"
		case freerThan(f, fits[order[0]]):
			f.row.Standing = "open: leader, freer"
		case f.row.AICcBehind <= tieWidth:
			f.row.Standing = "ties"
		default:
			f.row.Standing = "open"
		}
	}
}

// freerThan says whether f is the mechanism of g with more of its constants
// allowed to differ: g is nested in f, and f is no rival of it.
func freerThan(f, g *fitted) bool {
	if f.row.Family != g.row.Family || f.row.Sites != g.row.Sites || len(f.m.consts) != len(g.m.consts) {
		return false
	}
	if f.m.free() <= g.m.free() {
		return false
	}
	for k := range f.m.consts {
		a, b := f.m.consts[k], g.m.consts[k]
		if a.Name != b.Name || a.Site != b.Site || a.Ligand != b.Ligand {
			return false
		}
		if key := g.m.differsBy(k); key != "" && key != f.m.differsBy(k) {
			return false
		}
		if given := f.m.given(k); given.Fixed != nil {
			if h := g.m.given(k); h.Fixed == nil || *h.Fixed != *given.Fixed {
				return false
			}
		}
	}
	return true
}
