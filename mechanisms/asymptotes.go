package mechanisms

import (
	"fmt"
	"math"
)

// Asymptotes are the logarithms of the ligand activities at which the lower
// and the upper asymptote of the Hill plot cross half saturation: the intrinsic
// dissociation constants of the first and of the last ligand,
//
//	ln x_first = ln(n B_0/B_1) ,  ln x_last = ln(B_{n−1}/(n B_n)) .
//
// Their distance is the interaction energy: ΔG/RT = ln(x_last/x_first)
// (Wyman 1964), since x_first = 1/K′_1 and x_last = 1/K′_n.
func Asymptotes(c Curve) (first, last Measure) {
	if _, seen := c.(*watch); seen {
		m := nothing("the asymptotes of the Hill plot belong to binding, not to this response")
		return m, m
	}
	f, ok := c.(factored)
	if !ok {
		m := nothing("this curve has no binding polynomial")
		return m, m
	}
	b := f.polynomial()
	if math.IsInf(b.lnB[1], -1) {
		first = nothing("no molecule holds one ligand: the lower asymptote of the Hill plot does not have slope 1")
	} else {
		first = b.step(0, math.Log(float64(b.n)))
	}
	switch {
	case math.IsInf(b.lnB[b.n], -1):
		last = nothing("the last site never fills")
	case math.IsInf(b.lnB[b.n-1], -1):
		last = nothing(fmt.Sprintf("no molecule holds %d ligands: the upper asymptote of the Hill plot does not have slope 1", b.n-1))
	default:
		last = b.step(b.n-1, -math.Log(float64(b.n)))
	}
	return first, last
}

// step is ln(B_i/B_{i+1}) + ln ways, with gradient.
func (c *coefficients) step(i int, lnWays float64) Measure {
	m := Measure{Value: c.lnB[i] - c.lnB[i+1] + lnWays, Grad: make([]float64, c.k)}
	for k := range m.Grad {
		m.Grad[k] = c.row(i)[k] - c.row(i + 1)[k]
	}
	return m
}
