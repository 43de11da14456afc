package mechanisms

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// countedOf builds a mechanism that counts an effector.
func countedOf(t *testing.T, family string, d Definition, effector string) Mechanism {
	t.Helper()
	f, _ := Lookup(family)
	m, err := f.Build(d)
	if err != nil {
		t.Fatal(err)
	}
	c, ok := m.(Counting).Counted(effector)
	if !ok {
		t.Fatalf("%s does not count %s", family, effector)
	}
	return c
}

// Two ligands at one site: ⟨m⟩ = (y/K_y)/(1 + x/K + y/K_y), whose midpoint in x
// is K(1 + y/K_y) (Cheng & Prusoff 1973, from memory; exact mathematics).
func TestCountedCompetitionAtOneSite(t *testing.T) {
	m := countedOf(t, "states", Definition{States: []State{{Name: "E"}, {Name: "EL", Ligands: 1, Constants: map[string]float64{"K": -1}},
		{Name: "ET", Effectors: map[string]int{"tracer": 1}, Constants: map[string]float64{"K_t": -1}}}, Effectors: []Effector{{Name: "tracer"}}}, "tracer")
	at := map[string]float64{"K": 3, "K_t": 0.5}
	theta := make([]float64, len(m.Constants()))
	for i, c := range m.Constants() {
		theta[i] = math.Log(at[c.Name])
	}
	c := m.Curve().(Watched)
	c.Bind(theta, Environment{Effectors: []float64{2}})
	seen := c.Watch()
	for _, x := range []float64{0, 0.01, 1, 15, 300} {
		var got [1]float64
		seen.Saturation(got[:], []float64{math.Log(x)}, nil)
		if want := 4 / (1 + x/3 + 4); math.Abs(got[0]-want) > 1e-14 {
			t.Errorf("x %v: %v bound, want %v", x, got[0], want)
		}
	}
	half := XAt(seen, 0.5)
	if math.Abs(math.Exp(half.Value)-3*(1+4)) > 1e-9 {
		t.Errorf("midpoint %v, want 15", math.Exp(half.Value))
	}
}

// A counted mechanism binds the varied ligand as the mechanism itself does, and
// what it counts is ∂ ln Z/∂ ln y / n, by differences of Wyman's potential.
func TestCountedAgreesWithTheMechanism(t *testing.T) {
	both := []Effector{{Name: "tracer", Binds: "both", AtLigandSite: true}, {Name: "alanine", Binds: "T"}}
	f, _ := Lookup("mwc")
	m, err := f.Build(Definition{Sites: 4, Effectors: both})
	if err != nil {
		t.Fatal(err)
	}
	counted := countedOf(t, "mwc", Definition{Sites: 4, Effectors: both}, "tracer")
	theta := []float64{math.Log(900), math.Log(0.02), 0.2, 0.5, 1.4, -0.3}
	env := Environment{Effectors: []float64{0.7, 1.3}}
	a, b := m.Curve(), counted.Curve()
	a.Bind(theta, env)
	b.Bind(theta, env)
	lnx := []float64{-6, -1, 0, 1, 2, 5}
	n := len(theta)
	sa, sb := make([]float64, len(lnx)), make([]float64, len(lnx))
	ga, gb := mat.NewDense(len(lnx), n, nil), mat.NewDense(len(lnx), n, nil)
	a.Saturation(sa, lnx, ga)
	b.Saturation(sb, lnx, gb)
	for i := range lnx {
		if math.Abs(sa[i]-sb[i]) > 1e-13 {
			t.Errorf("saturation %v and %v", sa[i], sb[i])
		}
		for k := range n {
			if math.Abs(ga.At(i, k)-gb.At(i, k)) > 1e-12 {
				t.Errorf("gradients %v and %v", ga.At(i, k), gb.At(i, k))
			}
		}
	}
	checkMaxwell(t, counted, theta, env)
}

// checkMaxwell: ∂Ȳ/∂ln y = ∂⟨m⟩/n/∂ln x, each from the constants' gradients and
// from the curve's slope.
func checkMaxwell(t *testing.T, m Mechanism, theta []float64, env Environment) {
	t.Helper()
	c := m.Curve().(Watched)
	c.Bind(theta, env)
	var p Point
	for _, l := range []float64{-2, 0.3, 2} {
		c.At(l, &p)
		byY := 0.0
		for k, k2 := range m.Constants() {
			if k2.Ligand == "tracer" {
				byY -= float64(k2.Dimension) * p.GradY[k]
			}
		}
		const h = 1e-5
		var v [2]float64
		c.Watch().Saturation(v[:], []float64{l - h, l + h}, nil)
		if want := (v[1] - v[0]) / (2 * h); math.Abs(byY-want) > 1e-9 {
			t.Errorf("ln x %v: ∂Ȳ/∂ln y %v, ∂⟨m⟩/∂ln x %v", l, byY, want)
		}
	}
}

// A mechanism that does not bind an effector cannot count it.
func TestCountedRefuses(t *testing.T) {
	f, _ := Lookup("mwc")
	m, err := f.Build(Definition{Sites: 4, Effectors: []Effector{{Name: "alanine", Binds: "T"}}})
	if err != nil {
		t.Fatal(err)
	}
	if _, ok := m.(Counting).Counted("tracer"); ok {
		t.Error("an effector that is not there is counted")
	}
}
