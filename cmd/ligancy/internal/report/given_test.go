package report

import (
	"bytes"
	"math"
	"strings"
	"testing"

	"ligancy/fit/saturation"
	"ligancy/mechanisms"
)

// givenAnalysis is an invented inhibited enzyme with all constants given.
func givenAnalysis(t *testing.T) *saturation.Analysis {
	given := map[string]mechanisms.Given{}
	for name, v := range map[string]float64{"L": 100, "c": 0.01, "K_R": 0.2, "alanine.K_T": 1.5} {
		given[name] = mechanisms.Given{Value: &v}
	}
	family, _ := mechanisms.Lookup("mwc")
	m, err := family.Build(mechanisms.Definition{Sites: 4, Constants: given,
		Effectors: []mechanisms.Effector{{Name: "alanine", Binds: "T"}}})
	if err != nil {
		t.Fatal(err)
	}
	return &saturation.Analysis{
		Title: "An inhibited enzyme on paper", Origin: "invented data", Kelvin: math.NaN(),
		Ligand:     saturation.Substance{Name: "PEP", Unit: "mM"},
		Effectors:  []saturation.Substance{{Name: "alanine", Unit: "mM"}},
		Candidates: []saturation.Candidate{{Name: "alanine on T only", Family: "mwc", Mechanism: m, Given: given}},
		Curve: &saturation.CurveRequest{From: 0.01, To: 100, Points: 41,
			At: []saturation.Held{{Name: "alanine", Levels: []string{"0", "5"}, Values: []float64{0, 5}}}},
	}
}

func TestTextOfGivenCurves(t *testing.T) {
	a := givenAnalysis(t)
	o, err := a.Given()
	if err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	if err := New(a, o, Source{File: "enzyme.yaml"}).WriteGiven(&b, false); err != nil {
		t.Fatal(err)
	}
	golden(t, "given.txt", b.Bytes())
	for _, line := range strings.Split(b.String(), "\n") {
		if w := width(line); w > Width {
			t.Errorf("%d columns: %s", w, line)
		}
	}
}
