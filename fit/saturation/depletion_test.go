package saturation

import (
	"math"
	"testing"
)

// A balance closes to 1e-12 relative for every combination of weak and tight
// binding, many and few sites, with and without nonspecific binding.
func TestFreeLigandClosesTheBalance(t *testing.T) {
	c := lookupCurve(t, "mwc", map[string]int{"sites": 4}, []float64{math.Log(1e4), math.Log(0.01), 0})
	p := newPoint(3)
	for _, lnX := range []float64{-60, -20, -3, 0, 2, 10, 40} {
		for _, s := range []float64{1e-12, 1e-3, 1, 1e3, 1e9} {
			for _, ns := range []float64{0, 1e-6, 0.3, 100} {
				b := balance{lnTotal: lnX, sites: s, ns: ns}
				lnx := freeLigand(c, b, p)
				x := math.Exp(lnx)
				got := math.Log(x+s*p.Y+ns*x) - lnX
				if !(math.Abs(got) <= 1e-12) {
					t.Errorf("X %g, sites %g, ν %g: balance open by %g", math.Exp(lnX), s, ns, got)
				}
			}
		}
	}
}

// One site against total ligand, r = sites/K: K_app = K(1 + r/2) and midpoint
// n_H = (1 + r/2)/(1 + r/4). Exact mathematics; the figures are those of
// reference/practice.md (computed).
func TestOneSiteAgainstTotalLigand(t *testing.T) {
	c := lookupCurve(t, "independent", nil, []float64{0})
	p := newPoint(1)
	for _, w := range []struct{ r, nH float64 }{{0.1, 1.024}, {1, 1.200}, {10, 1.714}, {100, 1.962}} {
		b := balance{lnTotal: math.Log(1 + w.r/2), sites: w.r}
		lnx := freeLigand(c, b, p)
		if math.Abs(lnx) > 1e-14 {
			t.Errorf("r %g: free ligand at the midpoint is %g K, want 1", w.r, math.Exp(lnx))
		}
		got := p.NH * b.slopeAgainstTotal(lnx, p)
		exact := (1 + w.r/2) / (1 + w.r/4)
		if math.Abs(got-exact) > 1e-13 || math.Abs(got-w.nH) > 6e-4 {
			t.Errorf("r %g: n_H against total ligand %.6f, want %.6f", w.r, got, exact)
		}
	}
}
