package mechanisms

import (
	"math"
	"testing"
)

// The mass balance t/(1−t)^m = G closes to rounding from the weakest to the
// tightest assembly, and t + (1−t) = 1.
func TestSplitCloses(t *testing.T) {
	for _, m := range []float64{2, 3, 4, 8, 16} {
		before := -1.0
		for lnG := -700.0; lnG <= 700; lnG += 0.37 {
			share, rest := split(lnG, m)
			if share < before-2e-15 || math.Abs(share+rest-1) > 1e-15 {
				t.Fatalf("m = %g, ln G = %g: %g and %g", m, lnG, share, rest)
			}
			before = share
			if share == 0 || rest == 0 {
				continue
			}
			if off := math.Log(share) - m*math.Log(rest) - lnG; math.Abs(off) > 1e-12*math.Max(1, 1e-2*math.Abs(lnG)) {
				t.Errorf("m = %g, ln G = %g: open by a factor 1 + %g", m, lnG, off)
			}
		}
	}
	if share, rest := split(math.Inf(-1), 2); share != 0 || rest != 1 {
		t.Errorf("no protein: %g and %g", share, rest)
	}
}
