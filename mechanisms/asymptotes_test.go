package mechanisms

import (
	"math"
	"testing"
)

// Stepwise intrinsic constants are themselves the crossings: Kd1 and Kdn. The
// energy between them is ΔG/RT = ln(Kdn/Kd1) (Wyman 1964).
func TestAsymptotesAreTheFirstAndLastIntrinsicConstants(t *testing.T) {
	m, err := buildAdair(Definition{Sites: 4})
	if err != nil {
		t.Fatal(err)
	}
	kd := []float64{60, 30, 6.6, 0.66} // invented
	theta, beta := make([]float64, 4), 1.0
	for i, k := range kd {
		beta *= float64(4-i) / float64(i+1) / k
		theta[i] = beta
	}
	c := m.Curve()
	c.Bind(theta, Environment{})
	first, last := Asymptotes(c)
	if math.Abs(math.Exp(first.Value)-60) > 1e-9 || math.Abs(math.Exp(last.Value)-0.66) > 1e-11 {
		t.Errorf("crossings at %v and %v, want 60 and 0.66", math.Exp(first.Value), math.Exp(last.Value))
	}
	if e := InteractionEnergy(c); math.Abs(last.Value-first.Value-e.Value) > 1e-12 {
		t.Errorf("distance %v, interaction energy %v", last.Value-first.Value, e.Value)
	}
	for k := range theta {
		h := 1e-6 * theta[k]
		up, down := append([]float64{}, theta...), append([]float64{}, theta...)
		up[k], down[k] = up[k]+h, down[k]-h
		for i, want := range []Measure{first, last} {
			c.Bind(up, Environment{})
			a, b := Asymptotes(c)
			hi := []Measure{a, b}[i].Value
			c.Bind(down, Environment{})
			a, b = Asymptotes(c)
			lo := []Measure{a, b}[i].Value
			if d := (hi - lo) / (2 * h); math.Abs(d-want.Grad[k]) > 1e-6*(1+math.Abs(d)) {
				t.Errorf("∂/∂θ_%d of crossing %d: %v, differences %v", k, i, want.Grad[k], d)
			}
		}
	}
}

func TestNoAsymptoteWithoutItsTerm(t *testing.T) {
	m, err := buildAdair(Definition{Sites: 4})
	if err != nil {
		t.Fatal(err)
	}
	c := m.Curve()
	c.Bind([]float64{0.1, 0.01, 0, 0.001}, Environment{})
	if first, last := Asymptotes(c); first.Why != "" || last.Why == "" || !math.IsNaN(last.Value) {
		t.Errorf("β_3 = 0: %q and %q", first.Why, last.Why)
	}
}
