package saturation

import (
	"context"
	"math"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"

	"ligancy/mechanisms"
)

// The lack of fit of a wrong mechanism shows against the replicates; that of
// the truth does not, and the truth foretells better what is left out.
func TestAssessmentTellsMisfit(t *testing.T) {
	out, err := clamStudy(t).Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	by := map[string]MechanismRow{}
	for _, m := range out.Mechanisms {
		by[m.Name] = m
		t.Logf("%-24s lack of fit p %.3g, runs p %.3g, prediction error %.4f", m.Name, float64(m.LackOfFitP), float64(m.RunsP), float64(m.PredictionError))
	}
	right, wrong := by["concerted, L differs"], by["Hill equation"]
	if right.LackOfFitP < 0.05 || right.RunsP < 0.05 {
		t.Errorf("the leader: lack of fit p %v, runs p %v", right.LackOfFitP, right.RunsP)
	}
	if wrong.LackOfFitP > 1e-3 || wrong.PredictionError < 1.3*right.PredictionError {
		t.Errorf("the Hill equation: lack of fit p %v, prediction error %v", wrong.LackOfFitP, wrong.PredictionError)
	}
	if len(out.Nested) != 1 || out.Nested[0].Freedom != 2 || !(out.Nested[0].PDraws > 0.05) {
		t.Errorf("nested pairs: %+v", out.Nested)
	}
}

// One class of sites is nested in the same mechanism with an exponent that
// differs; where the truth is the special case, χ² and draws agree.
func TestNestedDrawsAgreeWithChiSquare(t *testing.T) {
	a := clamStudy(t)
	m := build(t, "hill", mechanisms.Definition{})
	a.Candidates = []Candidate{
		{Name: "K differs", Family: "hill", Mechanism: m, Differs: map[string]string{"K_half": "pH"}},
		{Name: "both differ", Family: "hill", Mechanism: m, Differs: map[string]string{"all": "pH"}},
	}
	out, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	if len(out.Nested) != 1 {
		t.Fatalf("nested pairs: %+v", out.Nested)
	}
	n := out.Nested[0]
	t.Logf("statistic %.3f, χ² p %.4f, draws p %.4f of %d", n.Statistic, n.PChiSquare, n.PDraws, n.Draws)
	if math.Abs(float64(n.PChiSquare-n.PDraws)) > 0.06 {
		t.Errorf("χ² p %v, draws p %v", n.PChiSquare, n.PDraws)
	}
}

// The lack-of-fit F of the treated galactosyltransferase velocities (Treloar
// 1974, in Bates & Watts 1988): pure error 7·10² or so on 6 degrees of freedom,
// worked out here from the six pairs of velocities by hand.
func TestLackOfFitOfPublishedVelocities(t *testing.T) {
	pairs := [][3]float64{{0.02, 76, 47}, {0.06, 97, 107}, {0.11, 123, 139}, {0.22, 159, 152}, {0.56, 191, 201}, {1.1, 207, 200}}
	d := Dataset{Name: "v", Noise: Constant, Response: Response{Kind: "velocity", High: Setting{Free: true}}}
	pure := 0.0
	for _, p := range pairs {
		d.Points = append(d.Points, Point{X: p[0], Y: p[1]}, Point{X: p[0], Y: p[2]})
		pure += (p[1] - p[2]) * (p[1] - p[2]) / 2
	}
	a := &Analysis{Ligand: Substance{Name: "substrate", Unit: "ppm"}, Kelvin: math.NaN(), Data: []Dataset{d}, Settings: Settings{Seed: 1},
		Candidates: []Candidate{{Name: "one site", Family: "independent", Mechanism: build(t, "independent", mechanisms.Definition{Classes: []mechanisms.Count{{Name: "only", Sites: 1}}})}}}
	f := fitOne(t, a)
	f.row.Standing = "leads"
	f.assess(context.Background())
	stat := (1195.4488 - pure) / 4 / (pure / 6)
	want := distuv.F{D1: 4, D2: 6}.Survival(stat)
	if math.Abs(float64(f.row.LackOfFitP)-want) > 1e-6 {
		t.Errorf("lack of fit p %v, by hand %v (F %v)", f.row.LackOfFitP, want, stat)
	}
}

// A long recording is left out by stretches of neighbours on one curve, a short
// one concentration by concentration.
func TestStretchesJoinNeighbours(t *testing.T) {
	at := map[[2]float64]int{}
	var group []int
	for i := range 1000 {
		at[[2]float64{float64(i % 2), float64(1000 - i)}] = i
		group = append(group, i)
	}
	stretches(group, at)
	cells := map[int]map[int]bool{}
	for i, g := range group {
		if g < 0 || g >= mostLeftOut {
			t.Fatalf("group %d", g)
		}
		if cells[g] == nil {
			cells[g] = map[int]bool{}
		}
		cells[g][i%2] = true
	}
	if len(cells) != mostLeftOut {
		t.Errorf("%d groups", len(cells))
	}
	for g, c := range cells {
		if len(c) > 1 {
			t.Errorf("group %d joins two curves", g)
		}
	}
	few := []int{0, 1, 2}
	stretches(few, map[[2]float64]int{{0, 1}: 0, {0, 2}: 1, {0, 3}: 2})
	if few[0] != 0 || few[1] != 1 || few[2] != 2 {
		t.Errorf("%v", few)
	}
}
