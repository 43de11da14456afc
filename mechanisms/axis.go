package mechanisms

import "math"

// axis keeps the ligand values of the last call: a fit asks for the same points
// again and again, and an exponential costs as much as a point.
type axis struct {
	lnx, x []float64
	top    float64 // largest ln x
	plain  bool    // all x > 0 are ordinary numbers
}

// reach is how far from 1 a number may lie, in ln, so that the product of two is
// an ordinary number.
const reach = 300

// at returns x = e^{ln x}.
func (a *axis) at(lnx []float64) []float64 {
	if len(lnx) == len(a.lnx) {
		same := true
		for i, l := range lnx {
			if l != a.lnx[i] {
				same = false
				break
			}
		}
		if same {
			return a.x
		}
	}
	if cap(a.lnx) < len(lnx) {
		a.lnx, a.x = make([]float64, len(lnx)), make([]float64, len(lnx))
	}
	a.lnx, a.x = a.lnx[:len(lnx)], a.x[:len(lnx)]
	copy(a.lnx, lnx)
	a.top, a.plain = math.Inf(-1), true
	for i, l := range lnx {
		a.x[i] = math.Exp(l)
		a.top = math.Max(a.top, l)
		a.plain = a.plain && (math.Abs(l) <= 2*reach || l < 0 && math.IsInf(l, -1))
	}
	return a.x
}
