package saturation

import (
	"context"
	"math"
	"testing"

	"ligancy/mechanisms"
)

// factorOf is the row of one mechanism and curve.
func factorOf(t testing.TB, rows []FactorRow, mechanism, curve string) FactorRow {
	t.Helper()
	for _, r := range rows {
		if r.Mechanism == mechanism && r.Curve == curve {
			return r
		}
	}
	t.Fatalf("no factors of %s, %s", mechanism, curve)
	return FactorRow{}
}

// An interacting pair below n_H = 1 is that of two independent sites, whose
// constants are the negatives of the polynomial's roots.
func TestNegativePairFactors(t *testing.T) {
	out := decided(truths(t)[4].study(t, 0))
	r := factorOf(t, out.Factors, "interacting pair", "all")
	if r.Standing != factors || r.Share != 1 || r.Draws != 199 || math.Abs(float64(r.Behind)) > 1e-6 {
		t.Errorf("%+v", r)
	}
	if len(r.Roots) != 2 || len(r.Kd) != 2 {
		t.Fatalf("%d roots, %d sites", len(r.Roots), len(r.Kd))
	}
	for i, k := range r.Kd {
		if math.Abs(float64(k.Value+r.Roots[i].Re)) > 1e-4*float64(k.Value) || r.Roots[i].Im != 0 {
			t.Errorf("site %d: Kd %v, root %v", i+1, k.Value, r.Roots[i])
		}
		if !(k.Low < k.Value && k.Value < k.High) || k.Unit != "uM" {
			t.Errorf("site %d: %+v", i+1, k)
		}
	}
	if u := factorOf(t, out.Factors, "unlike pair", "all"); u.Standing != factorsBuilt {
		t.Errorf("unlike pair: %s", u.Standing)
	}
}

// Equal sites make a double root, which scatter splits into a complex pair in
// about half of the draws: the fit's own roots do not decide, and independent
// sites are not refused.
func TestDoubleRootIsNotRefused(t *testing.T) {
	for k := range 3 {
		out := decided(truths(t)[0].study(t, k))
		r := factorOf(t, out.Factors, "interacting pair", "all")
		if r.Standing != factors || !(r.Share > 0.05 && r.Share < 0.95) {
			t.Errorf("study %d: %s, %v of the draws factor", k, r.Standing, r.Share)
		}
		if s := factorOf(t, out.Factors, "stepwise", "all"); s.Standing != factors {
			t.Errorf("study %d: four sites %s (p %v)", k, s.Standing, s.P)
		}
	}
}

// Positively cooperative curves, and two positive dimers a hundredfold apart
// whose n_H is far below 1, are those of no independent sites; the dimers' exact
// polynomial has two complex pairs.
func TestNoIndependentSites(t *testing.T) {
	for _, number := range []int{2, 6} {
		tr := truths(t)[number-1]
		out := decided(tr.study(t, 0))
		r := factorOf(t, out.Factors, "stepwise", "all")
		if r.Standing != factorsRefused || len(r.Kd) != 0 || r.Share > 0.05 {
			t.Errorf("truth %d: %+v", number, r)
		}
		for _, z := range r.Roots {
			if z.Im == 0 {
				t.Errorf("truth %d: a real root, %v", number, z)
			}
		}
	}
}

// What is out, shifted by preparation or without a polynomial is not asked, and
// it is said why.
func TestFactorsNotAsked(t *testing.T) {
	out := decided(truths(t)[10].study(t, 0))
	for _, r := range out.Factors {
		if r.Standing != factorsUnasked || r.Why == nil {
			t.Errorf("%s: %s", r.Mechanism, r.Standing)
		}
		if r.Mechanism == "two populations" || r.Mechanism == "Hill" {
			t.Errorf("%s has no polynomial", r.Mechanism)
		}
	}
}

// Curves at two levels are asked together, each with sites of its own.
func TestFactorsCurveByCurve(t *testing.T) {
	a := clamStudy(t)
	a.Candidates = a.Candidates[1:3]
	a.Settings.Method = "covariance"
	out := decided(a)
	for _, name := range []string{"stepwise", "concerted, L differs"} {
		for _, curve := range []string{"pH 7.6", "pH 7.0"} {
			if r := factorOf(t, out.Factors, name, curve); r.Standing != factorsRefused || len(r.Roots) != 4 {
				t.Errorf("%s, %s: %+v", name, curve, r)
			}
		}
	}
}

// One in a hundred studies of independent sites may be refused, no more: four
// unlike sites whose free fit has complex roots more often than not.
func TestFactorsAreCalibrated(t *testing.T) {
	if testing.Short() {
		t.Skip("many studies")
	}
	const studies = 40
	refused, complexRoots := 0, 0
	four := mechanisms.Definition{Classes: []mechanisms.Count{{Name: "a", Sites: 2}, {Name: "b", Sites: 2}}}
	curve := curveOf(build(t, "independent", four), math.Log(0.3), math.Log(6))
	for k := range studies {
		a := studyOf(newRand(41, k), 0.01, wide, curve, among("stepwise")(t)).withDefaults()
		fits := a.fitAll(context.Background(), nil)
		a.compare(context.Background(), fits, nil)
		r := a.factorRows(context.Background(), fits)[0]
		if r.Standing == factorsRefused {
			refused++
		}
		for _, z := range r.Roots {
			if z.Im != 0 {
				complexRoots++
				break
			}
		}
	}
	t.Logf("%d of %d refused; %d fits with complex roots", refused, studies, complexRoots)
	if refused > 3 || complexRoots < studies/2 {
		t.Errorf("%d of %d refused; %d fits with complex roots", refused, studies, complexRoots)
	}
}
