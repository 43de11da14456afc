package saturation

import (
	"context"
	"fmt"
	"math"
	"testing"

	"ligancy/mechanisms"
)

// Parametric and residual bootstraps of a well-determined fit agree with its
// profile intervals; the same draws come out whatever the number of workers.
func TestBootstrapAgreesWithProfiles(t *testing.T) {
	for _, by := range []string{byParametric, byResidual} {
		a := clamStudy(t)
		a.Candidates = a.Candidates[:1]
		a.Settings.Bootstrap = Bootstrap{Draws: 600, By: by}
		a.Settings.Workers = 1
		one := bootstrapOf(t, a)
		a.Settings.Workers = 4
		four := bootstrapOf(t, a)
		for name, b := range one {
			if f := four[name]; fmt.Sprint(f.Low, f.High) != fmt.Sprint(b.Low, b.High) {
				t.Errorf("%s, %s: one worker %v to %v, four %v to %v", by, name, b.Low, b.High, four[name].Low, four[name].High)
			}
		}
		out, err := a.Run(context.Background(), nil)
		if err != nil {
			t.Fatal(err)
		}
		for _, q := range out.Quantities {
			b, ok := one[q.Of+q.Name+q.Curve]
			if q.Interval != "profile" || !ok || q.Held != "both" {
				continue
			}
			width := float64(q.High - q.Low)
			if math.Abs(float64(b.Low-q.Low)) > 0.15*width || math.Abs(float64(b.High-q.High)) > 0.15*width {
				t.Errorf("%s, %s %s: bootstrap %v to %v, profile %v to %v", by, q.Name, q.Curve, b.Low, b.High, q.Low, q.High)
			}
		}
	}
}

func bootstrapOf(t *testing.T, a *Analysis) map[string]QuantityRow {
	t.Helper()
	out, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	rows := map[string]QuantityRow{}
	for _, q := range out.Quantities {
		if q.Interval == "bootstrap" {
			rows[q.Of+q.Name+q.Curve] = q
		}
	}
	if len(rows) == 0 {
		t.Fatal("no bootstrap rows")
	}
	return rows
}

// Preparations that differ make the bootstrap by preparation far wider than
// the one over points: the preparation is the unit of replication.
func TestBootstrapByPreparationIsWider(t *testing.T) {
	width := map[string]float64{}
	for _, by := range []string{byParametric, byPreparation} {
		a := shiftStudy(t, 5, "hill", 0.5)
		a.Candidates = a.Candidates[:1]
		a.Settings.Bootstrap = Bootstrap{Draws: 200, By: by}
		b := bootstrapOf(t, a)["constantK_halfall"]
		width[by] = math.Log(float64(b.High / b.Low))
	}
	if !(width[byPreparation] > 1.5*width[byParametric]) {
		t.Errorf("ln K interval %v wide by preparation, %v over points", width[byPreparation], width[byParametric])
	}
}

// One preparation cannot be drawn anew, and the rows say so.
func TestBootstrapOfOnePreparation(t *testing.T) {
	a := simpleStudy(t, "hill", mechanisms.Definition{}, Response{Kind: "signal", Low: Setting{Free: true}, High: Setting{Free: true}}, Constant)
	for i := range a.Data[0].Points {
		a.Data[0].Points[i].Preparation = ""
	}
	a.Settings.Bootstrap = Bootstrap{Draws: 20, By: byPreparation}
	for name, b := range bootstrapOf(t, a) {
		if b.Why == nil || !math.IsNaN(float64(b.Low)) {
			t.Errorf("%s: %v to %v", name, b.Low, b.High)
		}
	}
}

// Order statistics after Hyndman & Fan 1996, type 7 (the default of R and NumPy):
// quantile(1:10, 0.025) = 1.225.
func TestQuantile(t *testing.T) {
	v := []float64{1, 2, 3, 4, 5, 6, 7, 8, 9, 10}
	for p, want := range map[float64]float64{0: 1, 0.025: 1.225, 0.5: 5.5, 0.975: 9.775, 1: 10} {
		if got := quantile(v, p); math.Abs(got-want) > 1e-12 {
			t.Errorf("quantile %v: %v, want %v", p, got, want)
		}
	}
}
