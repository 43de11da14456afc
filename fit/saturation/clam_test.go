package saturation

import (
	"context"
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"

	"ligancy/mechanisms"
)

// clamStudy is the gallery's oxygen study (invented data): two pH, three
// preparations, 72 points.
func clamStudy(t testing.TB) *Analysis {
	t.Helper()
	f, err := os.Open("testdata/clam.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = rune(35)
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	d := Dataset{Name: "curves", File: "clam.csv", Factors: []string{"pH"}, Noise: Constant,
		Response: Response{Kind: "saturation", Unit: "fraction", High: Setting{Value: 1}}}
	for i, r := range rows[1:] {
		x, _ := strconv.ParseFloat(r[2], 64)
		y, _ := strconv.ParseFloat(r[3], 64)
		d.Points = append(d.Points, Point{X: x, Y: y, Preparation: r[1], Levels: []string{r[0]}, Row: i + 2})
	}
	four := mechanisms.Definition{Sites: 4}
	all := map[string]string{"all": "pH"}
	return &Analysis{Title: "clam", Ligand: Substance{Name: "oxygen", Unit: "torr"}, Kelvin: 288.15, Data: []Dataset{d},
		Candidates: []Candidate{
			{Name: "Hill equation", Family: "hill", Mechanism: build(t, "hill", mechanisms.Definition{}), Differs: map[string]string{"K_half": "pH", "n_H": "pH"}},
			{Name: "stepwise", Family: "adair", Mechanism: build(t, "adair", four), Differs: all},
			{Name: "concerted, L differs", Family: "mwc", Mechanism: build(t, "mwc", four), Differs: map[string]string{"L": "pH"}},
			{Name: "concerted, K_R differs", Family: "mwc", Mechanism: build(t, "mwc", four), Differs: map[string]string{"K_R": "pH"}},
			{Name: "concerted, all differ", Family: "mwc", Mechanism: build(t, "mwc", four), Differs: all},
			{Name: "ring", Family: "sequential", Mechanism: build(t, "sequential", mechanisms.Definition{Sites: 4, Contacts: "square"}), Differs: map[string]string{"K": "pH"}},
			{Name: "two classes", Family: "independent", Mechanism: build(t, "independent", mechanisms.Definition{Classes: []mechanisms.Count{{Name: "tight", Sites: 2}, {Name: "loose", Sites: 2}}}), Differs: all},
		},
		Contrasts: []Contrast{{Of: []string{"x_half", "n_H", "L"}, Between: "pH"}},
		Settings:  Settings{Starts: 50, Seed: 1, Level: 0.95, Method: "profile", Draws: 199},
	}
}

// expected is one number of the draft result of the clam study.
type expected struct {
	of, name, curve       string
	value, low, high, tol float64
}

// The simulated clam study gives the draft's numbers. They were computed from
// the stated data with general-purpose libraries (design/drafts/fit.txt).
func TestClamGivesTheDraftNumbers(t *testing.T) {
	out, err := clamStudy(t).Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	for _, w := range []expected{
		{"position", "x_half", "pH 7.6", 5.44, 5.38, 5.50, 0.006},
		{"position", "x_half", "pH 7.0", 8.93, 8.84, 9.02, 0.006},
		{"hill", "n_H_half", "pH 7.6", 2.87, 2.81, 2.92, 0.006},
		{"hill", "n_H_half", "pH 7.0", 2.94, 2.88, 3.00, 0.006},
		{"constant", "K_R", "all", 0.90, 0.79, 1.01, 0.006},
		{"constant", "c", "all", 0.0116, 0.0101, 0.0131, 0.006},
		{"constant", "L", "pH 7.6", 1.5e3, 1.0e3, 2.5e3, 0.05},
		{"constant", "L", "pH 7.0", 9.4e3, 6.2e3, 1.5e4, 0.05},
		{"contrast", "L", "pH 7.0 / pH 7.6", 6.1, 5.8, 6.5, 0.01},
		{"contrast", "x_half", "pH 7.0 / pH 7.6", 1.643, 1.619, 1.667, 0.001},
		{"hill", "n_H_max", "pH 7.6", 2.88, math.NaN(), math.NaN(), 0.002},
	} {
		checkExpected(t, out, w)
	}
	for _, m := range out.Mechanisms {
		t.Logf("%-24s %-11s %d constants SS %.6g scatter %.4f lnL %.3f AICc behind %.2f weight %.3g %s agreeing %d/%d", m.Name, m.Status, m.Constants,
			float64(m.SumOfSquares), float64(m.Scatter), float64(m.LogLikelihood), float64(m.AICcBehind), float64(m.AICcWeight), m.Standing, m.StartsAgreeing, m.Starts)
	}
	t.Log(out.Verdict.Text)
}

func checkExpected(t *testing.T, out *Outcome, w expected) {
	t.Helper()
	for _, q := range out.Quantities {
		if q.Mechanism != "concerted, L differs" || q.Of != w.of || q.Name != w.name || q.Curve != w.curve {
			continue
		}
		t.Logf("%-10s %-16s %-16s %.5g (%.5g to %.5g) %s %s", w.of, w.name, w.curve, float64(q.Value), float64(q.Low), float64(q.High), q.Held, q.Interval)
		for _, p := range [][2]float64{{float64(q.Value), w.value}, {float64(q.Low), w.low}, {float64(q.High), w.high}} {
			if !math.IsNaN(p[1]) && !(math.Abs(p[0]-p[1]) <= w.tol*math.Abs(p[1])) {
				t.Errorf("%s %s: %.5g, draft %.5g", w.name, w.curve, p[0], p[1])
			}
		}
		return
	}
	t.Errorf("no row %s %s %s", w.of, w.name, w.curve)
}
