package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"ligancy/mechanisms"
)

// dimerTetramer is non-cooperative dimers (K 10) that assemble into tetramers
// whose four sites are tighter one after the other.
func dimerTetramer(t testing.TB) mechanisms.Mechanism {
	small := mechanisms.Part{Name: "dimer", Family: "independent", Definition: &mechanisms.Definition{Classes: []mechanisms.Count{{Name: "dimer", Sites: 2}}}}
	large := mechanisms.Part{Name: "tetramer", Family: "adair", Definition: &mechanisms.Definition{Sites: 4}}
	return build(t, "assembly", mechanisms.Definition{Small: &small, Large: &large})
}

// An invented dimer–tetramer set at three protein concentrations: n_H falls with
// dilution towards that of the dimer, as the closed form has it (theory sheet,
// section 3), and K_assembly is recovered.
func TestAssemblySteepensWithConcentration(t *testing.T) {
	m := dimerTetramer(t)
	consts := m.Constants()
	truth := map[string]float64{"K_assembly": 0.5, "Kd": 3, "beta1": 4 / 60.0, "beta2": 6 / (60.0 * 30), "beta3": 4 / (60.0 * 30 * 6.6), "beta4": 1 / (60.0 * 30 * 6.6 * 0.66)}
	theta := make([]float64, len(consts))
	for i, c := range consts {
		v, ok := truth[c.Name]
		if !ok {
			t.Fatalf("no truth for %s", c.Name)
		}
		theta[i] = scaled(c, v)
	}
	a := &Analysis{Ligand: Substance{Name: "oxygen", Unit: "uM"}, Kelvin: math.NaN(), Settings: Settings{Starts: 20, Seed: 1, Level: 0.95, Method: "profile"},
		Candidates: []Candidate{{Name: "assembly", Family: "assembly", Mechanism: m}}}
	rng := rand.New(rand.NewPCG(9, 9))
	curve := m.Curve()
	names := []string{"concentrated", "middle", "dilute"}
	for i, p := range []float64{100, 2, 0.05} {
		curve.Bind(theta, mechanisms.Environment{Protomers: p})
		d := Dataset{Name: names[i], Noise: Constant, SitesPresent: SitesPresent{Value: p, Unit: "uM"}, Response: Response{Kind: "saturation", High: Setting{Value: 1}}}
		for k := range 20 {
			x := math.Pow(10, -1+3*float64(k)/19)
			var y [1]float64
			curve.Saturation(y[:], []float64{math.Log(x)}, nil)
			for range 2 {
				d.Points = append(d.Points, Point{X: x, Y: y[0] + 0.004*rng.NormFloat64(), Row: len(d.Points) + 2})
			}
		}
		a.Data = append(a.Data, d)
	}
	out, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	if k := quantity(t, out, "assembly", "constant", "K_assembly"); !(k.Low < 0.5 && k.High > 0.5) || k.Unit != "uM^-1" {
		t.Errorf("K_assembly %v (%v to %v) %s, truth 0.5", k.Value, k.Low, k.High, k.Unit)
	}
	last := math.Inf(1)
	for i, p := range []float64{100, 2, 0.05} {
		var got QuantityRow
		for _, q := range out.Quantities {
			if q.Name == "n_H_half" && q.Curve == names[i] {
				got = q
			}
		}
		curve.Bind(theta, mechanisms.Environment{Protomers: p})
		want := mechanisms.HillAtHalf(curve).Value
		t.Logf("%s: n_H %.3f (%.3f to %.3f), closed form %.3f", names[i], got.Value, got.Low, got.High, want)
		if !(float64(got.Low) < want && want < float64(got.High)) || !(float64(got.Value) < last) {
			t.Errorf("%s: n_H %v (%v to %v), closed form %v", names[i], got.Value, got.Low, got.High, want)
		}
		last = float64(got.Value)
	}
}

// Without the concentration of the macromolecule an assembly is refused.
func TestAssemblyNeedsAConcentration(t *testing.T) {
	a := simpleStudy(t, "hill", mechanisms.Definition{}, Response{Kind: "saturation", High: Setting{Value: 1}}, Constant)
	a.Candidates = []Candidate{{Name: "assembly", Family: "assembly", Mechanism: dimerTetramer(t)}}
	if _, err := newModel(a, &a.Candidates[0]); err == nil {
		t.Error("an assembly at no concentration is accepted")
	}
}
