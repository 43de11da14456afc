package numerics

import (
	"math"
	"testing"
)

func TestIdentitiesHold(t *testing.T) {
	worst := 0.0
	for _, r := range Identities() {
		worst = max(worst, r.Relative)
		if !r.Held {
			t.Errorf("%s, %s: %.15g, exact %.15g (%.1e)", r.Check, r.At, r.Reached, r.Exact, r.Relative)
		}
	}
	t.Logf("worst relative deviation %.1e", worst)
}

// The closed forms themselves give the values that general-purpose tools gave
// for them (computed, NumPy/SciPy 1.10).
func TestClosedFormsGiveComputedValues(t *testing.T) {
	want := map[[2]string]float64{
		{"two sites: midpoint n_H", "k1/k2 = 0.01"}:                             1.8181818,
		{"two sites: midpoint n_H", "k1/k2 = 0.25"}:                             1.3333333,
		{"two sites: midpoint n_H", "k1/k2 = 4"}:                                0.6666667,
		{"two sites: midpoint n_H", "k1/k2 = 100"}:                              0.1818182,
		{"two sites: x_90/x_10", "k1/k2 = 0.01"}:                                11.741239,
		{"two sites: x_90/x_10", "k1/k2 = 4"}:                                   273.70406,
		{"two sites: x_90/x_10", "k1/k2 = 100"}:                                 6417.9874,
		{"two unlike sites: midpoint n_H", "ratio 10"}:                          0.7301261,
		{"two unlike sites: midpoint n_H", "ratio 100"}:                         0.3305785,
		{"two unlike sites: midpoint n_H", "ratio 1000"}:                        0.1188552,
		{"Hill equation: x_90/x_10", "h = 2.7"}:                                 5.0915065,
		{"Hill equation: x_90/x_10", "h = 2.8"}:                                 4.8039867,
		{"concerted, symmetrical: midpoint n_H", "n 4, c 0.01, L = c^(-n/2)"}:   3.0082645,
		{"concerted, symmetrical: midpoint n_H", "n 4, c 0.0005, L = c^(-n/2)"}: 3.74328,
		{"concerted as stepwise: x_50/K_R", "n 4, L 9054, c 0.014"}:             9.89680,
		{"concerted as stepwise: midpoint n_H", "n 4, L 9054, c 0.014"}:         2.8532307,
		{"square contacts: midpoint n_H", "K_BB = 12"}:                          2.8755760,
		{"tetrahedral contacts: midpoint n_H", "K_BB = 12"}:                     3.6669749,
		{"concerted: n_H", "n 4, L 9054, c 0.014, x 9.8968 K_R"}:                2.8532307,
	}
	found := 0
	for _, r := range Identities() {
		w, ok := want[[2]string{r.Check, r.At}]
		if !ok {
			continue
		}
		found++
		if !(math.Abs(r.Exact-w) <= 3e-6*w) {
			t.Errorf("%s, %s: %.9g, computed %.9g", r.Check, r.At, r.Exact, w)
		}
	}
	if found != len(want) {
		t.Errorf("%d of %d values were compared", found, len(want))
	}
}
