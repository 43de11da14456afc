package main

import (
	"context"
	"math"
	"os"
	"testing"

	"ligancy/fit/saturation"
	"ligancy/specs"
)

// published is one fit of real data with figures from outside the project:
// reference fits by general-purpose libraries (NumPy/SciPy 1.10, R 4.2.2), or
// certified by NIST where it says so.
type published struct {
	study, mechanism string
	ss               float64
	want             []figure
}

// figure is one number of a fit.
type figure struct {
	of, name, curve string
	value, tol      float64 // tol relative
}

var publishedFits = []published{
	// Severinghaus 1979, Table 1; unweighted on saturation.
	{"blood.yaml", "Hill equation", 4.59946e-3, []figure{
		{"constant", "K_half", "all", 26.3842, 1e-5}, {"constant", "n_H", "all", 2.64661, 1e-5}}},
	{"blood.yaml", "stepwise", 7.48608e-4, []figure{
		{"position", "x_half", "all", 26.8317, 1e-5}, {"hill", "n_H_half", "all", 2.7317, 5e-5},
		{"hill", "n_H_max", "all", 2.8169, 5e-5},
		// β1 0.0246600, β2 9.20562e-4, β3 0, β4 2.567613e-6 as intrinsic dissociation constants.
		{"constant", "Kd1", "all", 4 / 0.0246600, 1e-5}, {"constant", "Kd2", "all", 1.5 * 0.0246600 / 9.20562e-4, 1e-5},
		{"constant", "Kd3·Kd4", "all", 9.20562e-4 / (6 * 2.567613e-6), 1e-5}}},
	{"blood.yaml", "concerted", 1.29240e-3, []figure{
		{"constant", "L", "all", 6.503e6, 1e-2}, {"constant", "K_R", "all", 0.48995, 1e-3}, {"constant", "c", "all", 0.48995 / 111.393, 1e-3},
		{"position", "x_half", "all", 26.916, 5e-5}, {"hill", "n_H_half", "all", 2.7668, 5e-5}}},
	{"blood_20_80.yaml", "Hill equation", 1.44917e-4, []figure{
		{"constant", "K_half", "all", 26.6166, 1e-5}, {"constant", "n_H", "all", 2.62872, 1e-5}}},
	// Mills, Johnson & Ackers 1976, 44 points.
	{"haemoglobin.yaml", "Hill equation", 1.806765e-3, []figure{
		{"constant", "K_half", "all", 8.69746, 1e-5}, {"constant", "n_H", "all", 3.14357, 1e-5}}},
	{"haemoglobin.yaml", "stepwise", 6.101608e-4, []figure{
		{"position", "x_half", "all", 8.74582, 1e-5}, {"hill", "n_H_half", "all", 3.23405, 1e-5}, {"hill", "n_H_max", "all", 3.2561, 5e-5},
		// β1 0.0285459, β2 0.00432459, β3 0, β4 1.92264e-4.
		{"constant", "Kd1", "all", 4 / 0.0285459, 1e-5}, {"constant", "Kd2", "all", 1.5 * 0.0285459 / 0.00432459, 1e-5},
		{"constant", "Kd3·Kd4", "all", 0.00432459 / (6 * 1.92264e-4), 1e-4}}},
	{"haemoglobin.yaml", "concerted", 9.334435e-4, []figure{
		{"constant", "L", "all", 8.741e5, 1e-2}, {"constant", "K_R", "all", 0.27698, 1e-3}, {"constant", "c", "all", 0.27698 / 81.069, 1e-3},
		{"position", "x_half", "all", 8.7532, 1e-3}, {"hill", "n_H_half", "all", 3.2671, 1e-3}}},
	{"haemoglobin.yaml", "square", 1.899271e-3, []figure{{"constant", "K", "all", 1 / 0.00528057, 1e-4}, {"constant", "K_BB", "all", 21.749, 1e-4}}},
	{"haemoglobin.yaml", "tetrahedral", 1.992917e-3, []figure{{"constant", "K", "all", 1 / 0.00639429, 1e-4}, {"constant", "K_BB", "all", 6.85783, 1e-4}}},
	{"haemoglobin.yaml", "one site", 1.365087, []figure{{"constant", "Kd", "all", 7.07601, 1e-5}}},
	{"haemoglobin.yaml", "Hill equation, plateau free", 1.608515e-3, []figure{
		{"constant", "K_half", "all", 8.7468, 1e-4}, {"constant", "n_H", "all", 3.09452, 1e-5}, {"response", "high", "all", 1.0069, 1e-4}}},
	// Treloar 1974, in Bates & Watts 1988 A1.3; R nls and SciPy agree.
	{"galactosyltransferase_treated.yaml", "one site", 1195.4488, []figure{
		{"response", "V", "all", 212.68358, 1e-6}, {"constant", "Kd", "all", 0.06412103, 1e-5}}},
	{"galactosyltransferase_treated.yaml", "Hill equation", 809.8615, []figure{
		{"response", "V", "all", 237.9474, 1e-5}, {"constant", "K_half", "all", 0.0858824, 1e-4}, {"constant", "n_H", "all", 0.739395, 1e-5}}},
	{"galactosyltransferase_treated.yaml", "two sites", 810.267, nil},
	{"galactosyltransferase_untreated.yaml", "one site", 859.6043, []figure{
		{"response", "V", "all", 160.28007, 1e-6}, {"constant", "Kd", "all", 0.04770823, 1e-6}}},
	{"galactosyltransferase_untreated.yaml", "Hill equation", 434.0385, []figure{
		{"response", "V", "all", 195.1284, 1e-5}, {"constant", "K_half", "all", 0.0824148, 1e-4}, {"constant", "n_H", "all", 0.620699, 1e-5}}},
	{"galactosyltransferase_untreated.yaml", "two sites", 443.157, nil},
	// NIST StRD Misra1d, certified; K_d = 1/b2.
	{"adsorption.yaml", "one site", 5.6419295283e-02, []figure{
		{"response", "Bmax", "all", 4.3736970754e+02, 1e-9}, {"constant", "Kd", "all", 3308.265, 1e-6}}},
	// Davidian & Giltinan 1995, sec. 5.2.4, run 1; R and SciPy agree.
	{"elisa.yaml", "Hill equation", 4.789569e-3, []figure{
		{"response", "high", "all", 2.34518, 1e-5}, {"constant", "K_half", "all", 4.40654, 1e-5}, {"constant", "n_H", "all", 0.960195, 1e-5}}},
}

// Every published or certified fit is reached from the default starts: sums of
// squares to 1e-5 relative, constants to the tolerance stated.
func TestPublishedFits(t *testing.T) {
	outcomes := map[string]*saturation.Outcome{}
	for _, p := range publishedFits {
		out := outcomes[p.study]
		if out == nil {
			out = runStudy(t, p.study)
			outcomes[p.study] = out
		}
		checkPublished(t, p, out)
	}
}

// runStudy fits one study of the top-level testdata folder.
func runStudy(t *testing.T, name string) *saturation.Outcome {
	t.Helper()
	study, complaints := specs.Load(os.DirFS("../../testdata"), name)
	if complaints.HasErrors() {
		t.Fatalf("%s: %v", name, complaints)
	}
	a, complaints := study.Build()
	if complaints.HasErrors() {
		t.Fatalf("%s: %v", name, complaints)
	}
	out, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	return out
}

func checkPublished(t *testing.T, p published, out *saturation.Outcome) {
	t.Helper()
	found := false
	for _, m := range out.Mechanisms {
		if m.Name != p.mechanism {
			continue
		}
		found = true
		rel := float64(m.SumOfSquares)/p.ss - 1
		t.Logf("%-38s %-14s SS %.8g (published %.8g, %+.1e)  %s", p.study, p.mechanism, float64(m.SumOfSquares), p.ss, rel, m.Status)
		if !(math.Abs(rel) <= 1e-5) {
			t.Errorf("%s, %s: sum of squares %.9g, published %.9g (%+.1e)", p.study, p.mechanism, float64(m.SumOfSquares), p.ss, rel)
		}
	}
	if !found {
		t.Errorf("%s: no mechanism %q", p.study, p.mechanism)
	}
	for _, f := range p.want {
		checkFigure(t, p, f, out)
	}
}

func checkFigure(t *testing.T, p published, f figure, out *saturation.Outcome) {
	t.Helper()
	for _, q := range out.Quantities {
		if q.Mechanism != p.mechanism || q.Of != f.of || q.Name != f.name || q.Curve != f.curve {
			continue
		}
		rel := float64(q.Value)/f.value - 1
		t.Logf("%-38s %-14s %-9s %.8g (published %.8g, %+.1e)", p.study, p.mechanism, f.name, float64(q.Value), f.value, rel)
		if !(math.Abs(rel) <= f.tol) {
			t.Errorf("%s, %s: %s %.9g, published %.9g (%+.1e)", p.study, p.mechanism, f.name, float64(q.Value), f.value, rel)
		}
		return
	}
	t.Errorf("%s, %s: no %s row %q of curve %q", p.study, p.mechanism, f.of, f.name, f.curve)
}
