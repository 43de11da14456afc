package saturation

import (
	"context"
	"encoding/csv"
	"math"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// published reads a table of the project's test data: the columns x and y, of
// the rows whose column `key` holds `value` (all where key is empty).
func published(t testing.TB, file, x, y, key, value string) []Point {
	t.Helper()
	f, err := os.Open("../../testdata/" + file)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	at := func(name string) int { return slices.Index(rows[0], name) }
	var pts []Point
	for i, row := range rows[1:] {
		if key != "" && row[at(key)] != value {
			continue
		}
		p := Point{Row: i + 2}
		p.X, _ = strconv.ParseFloat(row[at(x)], 64)
		p.Y, _ = strconv.ParseFloat(row[at(y)], 64)
		pts = append(pts, p)
	}
	return pts
}

// stated are conditions that a study may state.
var stated = map[string]string{"temperature": "25 degC", "buffer": "invented"}

// velocities are those of galactosyltransferase in membranes treated with
// puromycin, 12 points (Treloar 1974, in Bates & Watts 1988, A1.3).
func velocities(t testing.TB) *Analysis {
	d := Dataset{Name: "velocities", Noise: Constant, Incubation: math.NaN(),
		Points:   published(t, "galactosyltransferase_puromycin_treloar_1974.csv", "conc_ppm", "rate_counts_min2", "state", "treated"),
		Response: Response{Kind: "velocity", Unit: "counts/min per min", High: Setting{Free: true}}}
	return &Analysis{Ligand: Substance{Name: "substrate", Unit: "ppm"}, Kelvin: math.NaN(), Data: []Dataset{d},
		Candidates: among("one site", "Hill", "interacting pair")(t),
		Settings:   Settings{Starts: 20, Seed: 1, Level: 0.95, Method: "profile", Draws: 199}}
}

// blood is the standard oxygen curve of human blood, 51 points of a smoothed
// table (Severinghaus 1979, Table 1).
func blood(t testing.TB) *Analysis {
	d := Dataset{Name: "table 1", Noise: Constant, Incubation: math.NaN(),
		Points:   published(t, "blood_oxygen_severinghaus_1979.csv", "pO2_torr", "saturation_percent", "", ""),
		Response: Response{Kind: "saturation", Unit: "fraction", High: Setting{Value: 1}}}
	for i := range d.Points {
		d.Points[i].Y /= 100
	}
	return &Analysis{Ligand: Substance{Name: "oxygen", Unit: "torr"}, Kelvin: 310.15, Data: []Dataset{d}, Conditions: stated,
		Candidates: among("Hill", "stepwise", "concerted")(t),
		Settings:   Settings{Starts: 20, Seed: 1, Level: 0.95, Method: "profile", Draws: 199}}
}

// outcomeOf is the outcome of a study.
func outcomeOf(t testing.TB, a *Analysis) *Outcome {
	t.Helper()
	out, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// says checks that a verdict holds some words and not others.
func says(t *testing.T, v Verdict, words, not []string) {
	t.Helper()
	for _, w := range words {
		if !strings.Contains(v.Text, w) {
			t.Errorf("the verdict does not say %q:\n%s", w, v.Text)
		}
	}
	for _, w := range append(not, "is the mechanism", "proves", "must be") {
		if strings.Contains(v.Text, w) {
			t.Errorf("the verdict says %q:\n%s", w, v.Text)
		}
	}
}

// The velocities tie one site, a Hill equation and two interacting sites: they
// are not called negatively cooperative.
func TestVelocitiesAreNotCalledCooperative(t *testing.T) {
	out := outcomeOf(t, velocities(t))
	t.Log(out.Verdict.Text)
	if s := out.Verdict.Slope; s == slopeBelow || s == slopeAbove {
		t.Errorf("n_H is called %s", s)
	}
	if len(out.Verdict.Out) > 0 {
		t.Errorf("%v are called out", out.Verdict.Out)
	}
	says(t, out.Verdict, nil, []string{"shallow curve has several readings", "positive cooperativity"})
	checkNumbers(t, out)
}

// Blood's stepwise fit has β_3 at zero: the product Kd3·Kd4 is quoted, and
// neither of its factors.
func TestBloodReadsSensibly(t *testing.T) {
	out := outcomeOf(t, blood(t))
	t.Log(out.Verdict.Text)
	if out.Verdict.Leads != "stepwise" || out.Verdict.Slope != slopeAbove {
		t.Errorf("%s leads, n_H is called %q", out.Verdict.Leads, out.Verdict.Slope)
	}
	says(t, out.Verdict, []string{"Kd3·Kd4", "no molecule holds exactly 3"}, []string{" Kd3 at", " Kd4 at", "NaN", "Inf", "e+1"})
	checkNumbers(t, out)
}

// One-site data keep n_H 1, whatever else is tried.
func TestOneSiteKeepsItsSlope(t *testing.T) {
	tr := truths(t)[0]
	for k := range 2 {
		a := tr.study(t, k)
		a.Conditions = stated
		out := decided(a)
		if out.Verdict.Slope != slopeOne {
			t.Errorf("study %d: n_H is called %q", k, out.Verdict.Slope)
		}
		says(t, out.Verdict, []string{"is not different from 1", "no cooperativity"}, []string{"Not stated", "shallow"})
		checkNumbers(t, out)
	}
}

// Concerted and pairwise mechanisms of four sites are not told apart; what they
// share is positive cooperativity of four sites.
func TestWhatFourSitesShare(t *testing.T) {
	out := outcomeOf(t, truths(t)[1].study(t, 0))
	if out.Verdict.Slope != slopeAbove {
		t.Errorf("n_H is called %q", out.Verdict.Slope)
	}
	says(t, out.Verdict, []string{"are not told apart", "what they share is positive cooperativity of four sites."}, nil)
	checkNumbers(t, out)
}

// The number of sites is said to be given where no other was tried.
func TestSitesAreGivenNotFound(t *testing.T) {
	a := truths(t)[1].study(t, 0)
	a.Candidates = among("one site", "Hill", "concerted", "square")(t)
	out := outcomeOf(t, a)
	says(t, out.Verdict, []string{"four sites, a number that was given, not found"}, nil)
}

// Six points say nothing of the mechanism, and the verdict says why.
func TestSixPointsSayNothing(t *testing.T) {
	out := outcomeOf(t, truths(t)[11].study(t, 0))
	if out.Verdict.Slope != "" {
		t.Errorf("n_H is called %q", out.Verdict.Slope)
	}
	says(t, out.Verdict, []string{"Nothing can be concluded", "six points", "half saturation near", "measured twice"},
		[]string{"described best", "cooperativity"})
	checkNumbers(t, out)
}

// Without replicates, with one preparation, without conditions the verdict says
// what that costs.
func TestLimitsAreSaid(t *testing.T) {
	a := truths(t)[1].study(t, 0)
	d := &a.Data[0]
	d.Points = slices.DeleteFunc(d.Points, func(p Point) bool { return (p.Row-2)%3 != 0 })
	for i := range d.Points {
		d.Points[i].Preparation = "A"
	}
	out := outcomeOf(t, a)
	says(t, out.Verdict, []string{"No point was measured twice", "There is one preparation", "Not stated"}, nil)
	for i := range d.Points {
		d.Points[i].Preparation = string(rune('A' + i%2))
	}
	a.Conditions = stated
	says(t, outcomeOf(t, a).Verdict, nil, []string{"There is one preparation", "No preparation is named", "Not stated"})
}

// A run that was stopped says so; without draws nothing is said of any.
func TestStoppedRunsSaySo(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	a := truths(t)[1].study(t, 0)
	rec := &stopper{at: "asking which mechanisms are out", stop: cancel}
	out, err := a.Run(ctx, rec)
	if err != nil {
		t.Fatal(err)
	}
	if !out.Interrupted {
		t.Error("not marked as interrupted")
	}
	says(t, out.Verdict, []string{"The run was stopped"}, nil)
	b := truths(t)[1].study(t, 0)
	b.Settings.Draws = 0
	out = outcomeOf(t, b)
	if len(out.Verdict.Out) == 0 {
		t.Error("what is hopelessly behind is out without draws")
	}
	says(t, out.Verdict, []string{"no study needs to be simulated"}, []string{"of studies simulated"})
}

// stopper ends a run at one stage.
type stopper struct {
	at   string
	stop func()
}

func (s *stopper) Progress(stage string, _, _ int) {
	if stage == s.at {
		s.stop()
	}
}

// Nothing fitted, nothing said.
func TestNoAnswerIsSaid(t *testing.T) {
	a := truths(t)[1].study(t, 0)
	a.Data[0].Points = a.Data[0].Points[:2]
	a.Candidates = among("stepwise")(t)
	out := outcomeOf(t, a)
	says(t, out.Verdict, []string{"No mechanism could be fitted", "2 points cannot hold 4 constants"}, nil)
}

// The verdict's numbers hold for every constructed truth, and for two curves.
func TestVerdictNumbersStandInRows(t *testing.T) {
	for _, tr := range truths(t) {
		if testing.Short() && tr.number%3 != 0 {
			continue
		}
		checkNumbers(t, decided(tr.study(t, 1)))
	}
	if !testing.Short() {
		checkNumbers(t, outcomeOf(t, clamStudy(t)))
	}
}

// A Hill curve of 0.7 is that of simple sites whose ln K have a standard
// deviation of 1.850 (Sips 1948; design value from the closed form): the density
// integrates to 1, has that deviation, and gives the curve.
func TestSpreadIsThatOfSips(t *testing.T) {
	const h = 0.7
	if got := float64(spread(h)); math.Abs(got-1.850) > 5e-4 {
		t.Errorf("σ(ln K) is %v at h = 0.7", got)
	}
	density := func(t float64) float64 {
		return math.Sin(math.Pi*h) / (2 * math.Pi * (math.Cosh(h*t) + math.Cos(math.Pi*h)))
	}
	total, square := 0.0, 0.0
	x := []float64{0.01, 0.3, 1, 7, 400}
	y := make([]float64, len(x))
	const step = 0.01
	for s := -60.0; s <= 60; s += step {
		f := density(s) * step
		total += f
		square += s * s * f
		for i, v := range x {
			y[i] += f * v / (v + math.Exp(s))
		}
	}
	if math.Abs(total-1) > 1e-8 || math.Abs(math.Sqrt(square)-float64(spread(h))) > 1e-6 {
		t.Errorf("density integrates to %v with deviation %v", total, math.Sqrt(square))
	}
	for i, v := range x {
		if want := math.Pow(v, h) / (1 + math.Pow(v, h)); math.Abs(y[i]-want) > 1e-8 {
			t.Errorf("saturation at %v is %v, the Hill curve's %v", v, y[i], want)
		}
	}
}

// An end of an interval of h at 1 or above leaves no least spread but 0.
func TestSpreadRows(t *testing.T) {
	hill := &fitted{row: MechanismRow{Name: "Hill", Family: "hill"}}
	row := QuantityRow{Mechanism: "Hill", Curve: "all", Of: "constant", Name: "n_H", Value: 0.8, Low: 0.6, High: 1.1}
	got := spreadRows([]QuantityRow{row}, []*fitted{hill})
	if len(got) != 1 || got[0].Low != 0 || math.Abs(float64(got[0].High)-math.Pi/math.Sqrt(3)*math.Sqrt(1/0.36-1)) > 1e-12 {
		t.Errorf("rows %+v", got)
	}
	row.Value = 1.02
	if got := spreadRows([]QuantityRow{row}, []*fitted{hill}); len(got) != 0 {
		t.Errorf("a steep curve has no spread: %+v", got)
	}
}
