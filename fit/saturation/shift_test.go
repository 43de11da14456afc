package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"ligancy/mechanisms"
)

// shiftStudy is six invented preparations of one site whose ln K scatter with
// deviation 1 (reference/truths.md, truth 11: 6 × 10 × 2, scatter 0.02).
func shiftStudy(t testing.TB, seed uint64, family string, sd float64) *Analysis {
	rng := rand.New(rand.NewPCG(seed, 1))
	d := Dataset{Name: "one", Noise: Constant, Response: Response{Kind: "saturation", Unit: "fraction", High: Setting{Value: 1}}}
	for p := range 6 {
		k := math.Exp(sd * rng.NormFloat64())
		for i := range 10 {
			x := math.Pow(10, -2+4*float64(i)/9)
			for range 2 {
				d.Points = append(d.Points, Point{X: x, Y: x/(k+x) + 0.02*rng.NormFloat64(), Preparation: string(rune('A' + p)), Row: len(d.Points) + 2})
			}
		}
	}
	def := mechanisms.Definition{}
	if family == "independent" {
		def.Classes = []mechanisms.Count{{Name: "only", Sites: 1}}
	}
	if family == "adair" {
		def.Sites = 2
	}
	m := build(t, family, def)
	return &Analysis{Ligand: Substance{Name: "ligand", Unit: "uM"}, Kelvin: math.NaN(), Data: []Dataset{d},
		Candidates: []Candidate{{Name: "pooled", Family: family, Mechanism: m}, {Name: "shifted", Family: family, Mechanism: m, ShiftByPreparation: true}},
		Settings:   Settings{Starts: 10, Seed: 1, Level: 0.95, Method: "profile", Draws: 0}}
}

// A shift by preparation explains the shallowness of pooled curves: pooled, n_H
// falls below 1; shifted, it is 1, and the deviation of ln K comes out.
func TestShiftExplainsPooling(t *testing.T) {
	out, err := shiftStudy(t, 5, "hill", 1).Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	pooled, shifted := quantity(t, out, "pooled", "constant", "n_H"), quantity(t, out, "shifted", "constant", "n_H")
	tau := quantity(t, out, "shifted", "noise", "SD of ln K between preparations")
	t.Logf("n_H pooled %.3f (%.3f to %.3f), shifted %.3f (%.3f to %.3f), tau %.3f; AICc behind %.1f", pooled.Value, pooled.Low, pooled.High,
		shifted.Value, shifted.Low, shifted.High, tau.Value, out.Mechanisms[0].AICcBehind)
	if !(pooled.High < 0.99) || !(shifted.Low < 1 && shifted.High > 1) || math.Abs(float64(shifted.Value)-1) > 0.05 {
		t.Errorf("n_H pooled %v, shifted %v", pooled.Value, shifted.Value)
	}
	if !(tau.Value > 0.4 && tau.Value < 1.8) || out.Mechanisms[0].AICcBehind < 100 {
		t.Errorf("tau %v, pooled %v behind", tau.Value, out.Mechanisms[0].AICcBehind)
	}
}

// Without scatter between preparations the shift vanishes and changes nothing.
func TestShiftVanishes(t *testing.T) {
	out, err := shiftStudy(t, 6, "independent", 0).Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	a, b := quantity(t, out, "pooled", "constant", "Kd"), quantity(t, out, "shifted", "constant", "Kd")
	if math.Abs(float64(a.Value/b.Value)-1) > 5e-3 {
		t.Errorf("K pooled %v, shifted %v", a.Value, b.Value)
	}
	if d := out.Mechanisms[1].AICcBehind; !(d > 0 && d < 3) {
		t.Errorf("a needless shift is %v behind", d)
	}
}

// quantity finds one quantity of an outcome.
func quantity(t testing.TB, out *Outcome, mechanism, of, name string) QuantityRow {
	t.Helper()
	for _, q := range out.Quantities {
		if q.Mechanism == mechanism && q.Of == of && q.Name == name {
			return q
		}
	}
	t.Fatalf("no %s %s of %s", of, name, mechanism)
	return QuantityRow{}
}

// The gradient of a shifted fit agrees with differences, on fitted scales that
// are logarithmic and linear.
func TestShiftGradients(t *testing.T) {
	for _, family := range []string{"hill", "adair", "independent"} {
		a := shiftStudy(t, 3, family, 1)
		a.Candidates = a.Candidates[1:]
		a.Data[0].Noise = Proportional
		checkBlockGradient(t, a)
		a.Data[0].Total, a.Data[0].SitesPresent.Value = true, 0.4
		checkBlockGradient(t, a)
	}
}
