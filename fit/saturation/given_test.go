package saturation

import (
	"math"
	"testing"

	"ligancy/mechanisms"
)

func ptr(v float64) *float64 { return &v }

// Haemoglobin after Monod, Wyman & Changeux 1965 (second-hand): n 4, L 9054,
// c 0.014 gives n_H 2.853231 at half saturation and 2.855885 at most (exact
// mathematics from those constants).
func TestGivenConstantsGiveTheCurve(t *testing.T) {
	a := &Analysis{Ligand: Substance{Name: "oxygen", Unit: "torr"}, Kelvin: math.NaN(), Curve: &CurveRequest{From: 0.1, To: 100, Points: 31},
		Candidates: []Candidate{{Name: "concerted", Family: "mwc", Mechanism: build(t, "mwc", mechanisms.Definition{Sites: 4}),
			Given: map[string]mechanisms.Given{"L": {Value: ptr(9054)}, "c": {Fixed: ptr(0.014)}, "K_R": {Start: ptr(1)}}}}}
	out, err := a.Given()
	if err != nil {
		t.Fatal(err)
	}
	if n := quantity(t, out, "concerted", "hill", "n_H_half"); math.Abs(float64(n.Value)-2.853231) > 1e-6 {
		t.Errorf("n_H %v", n.Value)
	}
	if n := quantity(t, out, "concerted", "hill", "n_H_max"); math.Abs(float64(n.Value)-2.855885) > 1e-6 {
		t.Errorf("maximum n_H %v", n.Value)
	}
	if x := quantity(t, out, "concerted", "position", "x_half"); math.Abs(float64(x.Value)-9.89680) > 1e-5 {
		t.Errorf("x_half %v", x.Value)
	}
	if len(out.Curves) != 31 || out.Mechanisms[0].Status != "given" {
		t.Errorf("%d curve rows, status %s", len(out.Curves), out.Mechanisms[0].Status)
	}
	sums := map[Real]float64{}
	for _, p := range out.Populations {
		sums[p.X] += float64(p.Share)
	}
	for x, s := range sums {
		if math.Abs(s-1) > 1e-12 {
			t.Errorf("populations at %v sum to %v", x, s)
		}
	}
}

// A missing value is named, with what to write.
func TestGivenSaysWhatIsMissing(t *testing.T) {
	a := &Analysis{Candidates: []Candidate{{Name: "concerted", Family: "mwc", Mechanism: build(t, "mwc", mechanisms.Definition{Sites: 4})}}}
	_, err := a.Given()
	want := `mechanism "concerted" has no value for L, c and K_R: write constants: {L: {value: …}}`
	if err == nil || err.Error() != want {
		t.Errorf("got %v, want %s", err, want)
	}
}
