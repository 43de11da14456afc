package report

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"

	"ligancy/fit/saturation"
)

// The invented ark-clam study, its outcome made by hand: numbers as a fit of
// these data prints them, so that the report can be tested without fitting.

const leader = "concerted, L differs"

func some(s string) *string { return &s }

// clamAnalysis reads the study's 72 invented points.
func clamAnalysis(t testing.TB) *saturation.Analysis {
	f, err := os.Open("testdata/clam.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	records, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	set := saturation.Dataset{Name: "curves", File: "clam.csv", Factors: []string{"pH"}, Noise: saturation.Constant,
		Response: saturation.Response{Kind: "saturation", Unit: "fraction", High: saturation.Setting{Value: 1}}}
	for i, r := range records[1:] {
		set.Points = append(set.Points, saturation.Point{
			X: parse(t, r[2]), Y: parse(t, r[3]), Preparation: r[1], Levels: []string{r[0]}, Row: i + 2,
		})
	}
	return &saturation.Analysis{
		Title: "Oxygen binding by ark-clam haemoglobin at two pH", Origin: "invented data",
		Ligand: saturation.Substance{Name: "oxygen", Symbol: "pO2", Unit: "torr"},
		Data:   []saturation.Dataset{set},
		Settings: saturation.Settings{Starts: 50, Seed: 1, Level: 0.95, Method: "profile",
			Draws: 199},
	}
}

func parse(t testing.TB, s string) float64 {
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// clamOutcome is the outcome by hand.
func clamOutcome(a *saturation.Analysis) *saturation.Outcome {
	nan := saturation.Real(math.NaN())
	standing := func(name, family string, k int, scatter, behind, weight saturation.Real, word string) saturation.MechanismRow {
		return saturation.MechanismRow{Name: name, Family: family, Sites: 4, Status: "converged", Constants: k, Points: 72,
			SumOfSquares: scatter * scatter * saturation.Real(72-k), Scatter: scatter, AICc: behind - 443.6,
			AICcBehind: behind, AICcWeight: weight, LogLikelihood: nan, BIC: nan, Starts: 50, StartsAgreeing: 47, Standing: word}
	}
	o := &saturation.Outcome{
		Mechanisms: []saturation.MechanismRow{
			standing(leader, "mwc", 4, 0.0105, 0, 0.73, "leads"),
			standing("concerted, all differ", "mwc", 6, 0.0105, 2.2, 0.25, "open: leader, freer"),
			standing("stepwise", "adair", 8, 0.0106, 7.1, 0.02, "open"),
			standing("concerted, K_R differs", "mwc", 4, 0.0119, 17.8, 1e-4, "out"),
			standing("ring", "sequential", 3, 0.0122, 20.1, 3e-5, "out"),
			standing("Hill equation", "hill", 4, 0.0161, 60.9, 1e-14, "out"),
			standing("two classes", "independent", 4, 0.150, 382.7, 1e-84, "out"),
		},
		Quantities: clamQuantities(),
		Correlations: []saturation.CorrelationRow{
			{Mechanism: leader, A: "L, pH 7.6", B: "K_R", R: -0.9955},
			{Mechanism: leader, A: "L, pH 7.0", B: "K_R", R: -0.9962},
			{Mechanism: leader, A: "K_R", B: "c", R: 0.62},
		},
		Objections: []saturation.Objection{
			{ID: "ends", Group: "say in the paper", Text: "The ends were set, not fitted (0 and 1).",
				Effect: some("Fitted, n_H moves by 0.02 and L by 15 %: small"), Remedy: some("response: {low: free, high: free}")},
			{ID: "preparations", Group: "say in the paper", Text: "Three preparations. Five is the usual least for a conclusion",
				Source: some("Br J Pharmacol 2018;175:2709")},
			{ID: "strenda", Group: "for completeness",
				Text: "Not stated: organism, preparation, concentration of haem. STRENDA level 1A asks for them."},
			{ID: "spacing", Group: "asked and found good", Text: "Spacing of pressures"},
		},
		Verdict: saturation.Verdict{
			Text: clamVerdict, Leads: leader, Open: []string{"concerted, all differ", "stepwise"},
			Out: []string{"concerted, K_R differs", "ring", "Hill equation", "two classes"},
		},
		Defaults: map[string]string{"mechanisms.ring.K_AB": "1"},
	}
	for i, pt := range a.Data[0].Points {
		o.Points = append(o.Points, saturation.PointRow{Data: "curves", Row: pt.Row, Curve: "pH " + pt.Levels[0],
			Preparation: &a.Data[0].Points[i].Preparation, X: saturation.Real(pt.X), Y: saturation.Real(pt.Y), Mechanism: leader})
	}
	return o
}

const clamVerdict = "Both curves are those of a four-site concerted protein (MWC) in which pH moves only L, with a " +
	"scatter of 0.011 in saturation. Freeing K_R and c as well brings nothing that pays for two more constants. A Hill " +
	"equation, interacting sites on a ring, a change of K_R alone and two unlike classes do not describe these curves. " +
	"Half saturation rises from 5.4 to 8.9 torr between pH 7.6 and 7.0 (Bohr coefficient -0.36), while n_H at half " +
	"saturation stays near 2.9.\nStill open: stepwise binding (8 constants) gives nearly the same curves; these data " +
	"cannot refuse it."

func clamQuantities() []saturation.QuantityRow {
	var rows []saturation.QuantityRow
	add := func(curve, of, name, unit string, value, low, high float64) {
		rows = append(rows, saturation.QuantityRow{Mechanism: leader, Curve: curve, Of: of, Name: name, Unit: unit,
			Value: saturation.Real(value), Low: saturation.Real(low), High: saturation.Real(high),
			Level: 0.95, Interval: "profile", Held: "both"})
	}
	nan := math.NaN()
	add("all", "constant", "K_R", "torr", 0.901, 0.794, 1.009)
	add("all", "constant", "c", "1", 0.0116, 0.0101, 0.0131)
	add("all", "combination", "K_R · (L, pH 7.6)^(1/4)", "torr", 5.642, 5.568, 5.718)
	add("all", "combination", "stiffest: K_R · (L, pH 7.0)^0.15 · (L, pH 7.6)^0.12", "torr", 7.124, 7.073, 7.174)
	add("pH 7.6", "constant", "L", "1", 1540, 1010, 2490)
	add("pH 7.0", "constant", "L", "1", 9410, 6210, 15100)
	for _, c := range []struct {
		label                     string
		half, low, high           float64
		n, nLow, nHigh            float64
		steepest, at, hillReading float64
		x01, x10, x90, x99        float64
	}{
		{"pH 7.6", 5.44, 5.38, 5.50, 2.865, 2.812, 2.921, 2.88, 0.41, 2.61, 0.62, 2.45, 13.2, 90.6},
		{"pH 7.0", 8.93, 8.84, 9.02, 2.94, 2.88, 3.00, 2.94, 0.51, 2.78, 0.74, 3.93, 19.9, 96.3},
	} {
		add(c.label, "hill", "n_H_half", "1", c.n, c.nLow, c.nHigh)
		add(c.label, "hill", "n_H_max", "1", c.steepest, c.steepest-0.05, c.steepest+0.05)
		add(c.label, "position", "n_H_max_at", "1", c.at, c.at-0.01, c.at+0.01)
		add(c.label, "hill", "n_H_hill_reading", "1", c.hillReading, c.hillReading-0.05, c.hillReading+0.05)
		add(c.label, "position", "x_half", "torr", c.half, c.low, c.high)
		add(c.label, "position", "x_01", "torr", c.x01, nan, nan)
		add(c.label, "position", "x_10", "torr", c.x10, nan, nan)
		add(c.label, "position", "x_90", "torr", c.x90, nan, nan)
		add(c.label, "position", "x_99", "torr", c.x99, nan, nan)
	}
	add("pH 7.0 / pH 7.6", "contrast", "x_half", "1", 1.643, 1.619, 1.667)
	add("pH 7.0 / pH 7.6", "contrast", "Bohr_coefficient", "1", -0.3594, -0.3698, -0.3487)
	add("pH 7.0 − pH 7.6", "contrast", "n_H_half", "1", 0.072, -0.012, 0.155)
	add("pH 7.0 / pH 7.6", "contrast", "L", "1", 6.13, 5.79, 6.49)
	return rows
}

func clamDocument(t testing.TB) *Document {
	a := clamAnalysis(t)
	return New(a, clamOutcome(a), Source{Version: "0.1.0", File: "clam.yaml", SHA256: "5e", Digests: map[string]string{"clam.csv": "c5"}})
}
