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
// once in the weights, at the lowest AICc among them. It returns the order,
// leader first.
func rank(fits []*fitted, c *curves) []int {
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
	findTwins(fits, order, c)
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

// twinLikelihood is the largest difference in ln L of fits that may be one
// curve: both are the best of their kind.
const twinLikelihood = 0.01

// findTwins marks candidates that draw the same curves as an earlier one in the
// order, each at its own constants and around them.
func findTwins(fits []*fitted, order []int, c *curves) {
	for n, i := range order {
		fits[i].twinOf = -1
		for _, j := range order[:n] {
			near := math.Abs(fits[i].lnL-fits[j].lnL) <= twinLikelihood
			if near && fits[j].twinOf < 0 && c.twins(i, j) {
				fits[i].twinOf = j
				break
			}
		}
	}
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
		case f.row.AICcBehind <= tieWidth || f.twinOf >= 0 && f.twinOf == order[0]:
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
