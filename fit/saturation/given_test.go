package saturation

import (
	"math"
	"strings"
	"testing"

	"ligancy/mechanisms"
)

func givenValue(v float64) mechanisms.Given { return mechanisms.Given{Value: &v} }

// givenStudy is a concerted protein at constants from a publication, and a
// Hill equation that lacks one.
func givenStudy(t *testing.T) *Analysis {
	given := map[string]mechanisms.Given{"L": givenValue(9054), "c": givenValue(0.014), "K_R": givenValue(2)}
	k := map[string]mechanisms.Given{"K_half": givenValue(3)}
	return &Analysis{Ligand: Substance{Name: "oxygen", Unit: "torr"}, Kelvin: math.NaN(),
		Candidates: []Candidate{
			{Name: "concerted", Family: "mwc", Mechanism: build(t, "mwc", mechanisms.Definition{Sites: 4, Constants: given}), Given: given},
			{Name: "Hill equation", Family: "hill", Mechanism: build(t, "hill", mechanisms.Definition{Constants: k}), Given: k},
		}}
}

func TestGivenConstantsGiveTheirCurves(t *testing.T) {
	a := givenStudy(t)
	out, populations, err := a.Given()
	if err != nil {
		t.Fatal(err)
	}
	if s := out.Mechanisms[0].Status; s != "given" {
		t.Errorf("status %q", s)
	}
	if m := out.Mechanisms[1]; m.Status != "no answer" || m.Why == nil || *m.Why != "no value for n_H" {
		t.Errorf("%+v", m)
	}
	// Monod, Wyman & Changeux 1965: α₅₀ 9.89680, n₅₀ 2.853231, n_max 2.855885 (second-hand; exact formula agrees).
	for name, want := range map[string]float64{"x_half": 2 * 9.89680, "n_H_half": 2.853231, "n_H_max": 2.855885, "n_H_max_at": 0.534132} {
		found := false
		for _, q := range out.Quantities {
			if q.Name == name && q.Mechanism == "concerted" {
				found = true
				if math.Abs(float64(q.Value)-want) > 1e-6*want {
					t.Errorf("%s = %.8g, want %.8g", name, float64(q.Value), want)
				}
				if q.Held != "fixed" || q.Interval != "none" {
					t.Errorf("%s has an interval: %+v", name, q)
				}
			}
		}
		if !found {
			t.Errorf("no %s", name)
		}
	}
	if len(out.Curves) != gridPoints {
		t.Errorf("%d curve rows", len(out.Curves))
	}
	sums := map[Real]Real{}
	for _, p := range populations {
		sums[p.X] += p.Share
	}
	if len(sums) != gridPoints {
		t.Errorf("populations at %d values", len(sums))
	}
	for x, s := range sums {
		if math.Abs(float64(s)-1) > 1e-12 {
			t.Errorf("populations at %g sum to %.15g", float64(x), float64(s))
		}
	}
}

func TestGivenCurvesFollowTheRequest(t *testing.T) {
	a := givenStudy(t)
	a.Effectors = []Substance{{Name: "alanine", Unit: "mM"}}
	given := map[string]mechanisms.Given{"L": givenValue(100), "c": givenValue(0.01), "K_R": givenValue(1), "alanine.K_T": givenValue(1)}
	a.Candidates = []Candidate{{Name: "inhibited", Family: "mwc", Given: given, Mechanism: build(t, "mwc", mechanisms.Definition{
		Sites: 4, Constants: given, Effectors: []mechanisms.Effector{{Name: "alanine", Binds: "T"}}})}}
	a.Curve = &CurveRequest{From: 0.1, To: 1000, Points: 5, At: []Held{{Name: "alanine", Values: []float64{0, 1}}}}
	out, _, err := a.Given()
	if err != nil {
		t.Fatal(err)
	}
	var got []string
	for _, c := range out.Curves {
		got = append(got, c.Curve+" "+number(math.Round(float64(c.X)*1000)/1000))
	}
	const want = "alanine 0 mM 0.1; alanine 0 mM 1; alanine 0 mM 10; alanine 0 mM 100; alanine 0 mM 1000; " +
		"alanine 1 mM 0.1; alanine 1 mM 1; alanine 1 mM 10; alanine 1 mM 100; alanine 1 mM 1000"
	if s := strings.Join(got, "; "); s != want {
		t.Errorf("%s", s)
	}
	// An inhibitor at 1 K_T on four protomers multiplies L by 2⁴.
	if out.Curves[2].Saturation <= out.Curves[7].Saturation {
		t.Error("the inhibitor does not inhibit")
	}
}

func TestGivenRefuses(t *testing.T) {
	a := givenStudy(t)
	a.Candidates = a.Candidates[1:]
	if _, _, err := a.Given(); err == nil || !strings.Contains(err.Error(), `"Hill equation" lacks n_H`) {
		t.Error(err)
	}
	for says, r := range map[string]CurveRequest{
		"from must lie below to": {From: 10, To: 1},
		"points must lie":        {Points: 1},
		"combinations":           {At: []Held{{Name: "a", Values: make([]float64, 100)}}},
	} {
		b := givenStudy(t)
		b.Curve = &r
		if _, _, err := b.Given(); err == nil || !strings.Contains(err.Error(), says) {
			t.Errorf("%v does not say %q", err, says)
		}
	}
}
