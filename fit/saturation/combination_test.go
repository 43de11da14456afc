package saturation

import (
	"context"
	"math"
	"strings"
	"testing"

	"ligancy/mechanisms"
)

// In a four-site MWC fit L and K_R are tied: the data fix about K_R·L^(1/4)
// (theory sheet, section 7; Middendorf & Aldrich 2017), far better than L alone.
func TestTiedConstantsOfMWC(t *testing.T) {
	a := clamStudy(t)
	a.Data[0].Points = a.Data[0].Points[:36] // one pH
	a.Candidates = []Candidate{{Name: "concerted", Family: "mwc", Mechanism: build(t, "mwc", mechanisms.Definition{Sites: 4})}}
	a.Contrasts = nil
	out, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	l := quantity(t, out, "concerted", "constant", "L")
	var tie, stiff, loose QuantityRow
	for _, q := range out.Quantities {
		switch {
		case q.Of != "combination":
		case strings.HasPrefix(q.Name, "stiffest"):
			stiff = q
		case strings.HasPrefix(q.Name, "loosest"):
			loose = q
		default:
			tie = q
		}
	}
	t.Logf("tie %s %.4g (%.4g to %.4g) %s; L %.3g (%.3g to %.3g)", tie.Name, tie.Value, tie.Low, tie.High, tie.Unit, l.Value, l.Low, l.High)
	t.Logf("%s (%.4g to %.4g) | %s (%.4g to %.4g)", stiff.Name, stiff.Low, stiff.High, loose.Name, loose.Low, loose.High)
	if !strings.Contains(tie.Name, "K_R") || !strings.Contains(tie.Name, "L^(1/") || tie.Unit != "torr" {
		t.Errorf("the tie is %s in %s", tie.Name, tie.Unit)
	}
	width := func(q QuantityRow) float64 { return math.Log(float64(q.High / q.Low)) }
	if !(width(tie) < width(l)/6) || !(width(stiff) < width(tie)*1.5) || !(width(loose) >= 0.5*width(l)) {
		t.Errorf("ln widths: tie %v, L %v, stiffest %v, loosest %v", width(tie), width(l), width(stiff), width(loose))
	}
	if !strings.Contains(out.Verdict.Text, "alone only within a factor") {
		t.Errorf("the verdict does not speak of the tie:\n%s", out.Verdict.Text)
	}
}

func TestFraction(t *testing.T) {
	for v, want := range map[float64]float64{0.26: 0.25, -0.34: -1.0 / 3, 0.98: 1, 0.01: 0, 0.5: 0.5} {
		if got := fraction(v, 6); math.Abs(got-want) > 1e-12 {
			t.Errorf("%v: %v, want %v", v, got, want)
		}
	}
	for w, want := range map[float64]string{1: "", 0.25: "^(1/4)", -1: "^-1", 0.37: "^0.37"} {
		if got := powerWords(w); got != want {
			t.Errorf("%v: %q, want %q", w, got, want)
		}
	}
}
