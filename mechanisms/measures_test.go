package mechanisms_test

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"ligancy/mechanisms"
	"ligancy/mechanisms/mechtest"
)

// measures are all numbers derived from a bound curve.
var measures = map[string]func(c mechanisms.Curve) mechanisms.Measure{
	"x_half": func(c mechanisms.Curve) mechanisms.Measure { return mechanisms.XAt(c, 0.5) },
	"x_01":   func(c mechanisms.Curve) mechanisms.Measure { return mechanisms.XAt(c, 0.01) },
	"x_99":   func(c mechanisms.Curve) mechanisms.Measure { return mechanisms.XAt(c, 0.99) },
	"half":   mechanisms.HillAtHalf,
	"max":    func(c mechanisms.Curve) mechanisms.Measure { n, _ := mechanisms.HillMax(c); return n },
	"max at": func(c mechanisms.Curve) mechanisms.Measure { _, at := mechanisms.HillMax(c); return at },
	"10–90":  mechanisms.Hill1090,
	"1–99":   func(c mechanisms.Curve) mechanisms.Measure { n, _ := mechanisms.Hill0199(c); return n },
	"width":  func(c mechanisms.Curve) mechanisms.Measure { _, w := mechanisms.Hill0199(c); return w },
	"median": mechanisms.Median,
	"energy": mechanisms.InteractionEnergy,
}

// Every measure's gradient against sixth-order differences of its value.
func TestMeasureGradients(t *testing.T) {
	for name, c := range every {
		t.Run(name, func(t *testing.T) {
			m := c.Build()
			rng := rand.New(rand.NewPCG(5, 6))
			theta, env := mechtest.Draw(rng, m), mechtest.DrawEnvironment(rng, m)
			curve := m.Curve()
			gradients(t, "", curve, curve, theta, env)
			if w, ok := curve.(mechanisms.Watched); ok {
				gradients(t, "response: ", curve, w.Watch(), theta, env)
			}
		})
	}
}

func gradients(t *testing.T, prefix string, bind, curve mechanisms.Curve, theta []float64, env mechanisms.Environment) {
	moved := append([]float64(nil), theta...)
	for name, f := range measures {
		bind.Bind(theta, env)
		m := f(curve)
		if m.Why != "" {
			if !math.IsNaN(m.Value) {
				t.Errorf("%s%s does not exist, and is %g", prefix, name, m.Value)
			}
			continue
		}
		for i := range theta {
			step := 1e-3
			if size := math.Abs(theta[i]); size < 0.1 && size > 0 {
				step *= size
			}
			at := func(h float64) float64 {
				moved[i] = theta[i] + h
				bind.Bind(moved, env)
				moved[i] = theta[i]
				return f(curve).Value
			}
			h := step
			want := (45*(at(h)-at(-h)) - 9*(at(2*h)-at(-2*h)) + (at(3*h) - at(-3*h))) / (60 * h)
			if math.IsNaN(want) { // at an edge of where it exists
				continue
			}
			if !(math.Abs(m.Grad[i]-want) <= 1e-6*(1+math.Abs(want))) {
				t.Errorf("%s∂%s/∂θ%d is %.10g, by differences %.10g", prefix, name, i, m.Grad[i], want)
			}
		}
	}
}

// A share is reached where it should be, whatever the curve.
func TestXAtReaches(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 8))
	for name, c := range every {
		m := c.Build()
		for range 20 {
			curve := m.Curve()
			curve.Bind(mechtest.Draw(rng, m), mechtest.DrawEnvironment(rng, m))
			for _, y := range []float64{1e-9, 0.01, 0.1, 0.5, 0.9, 0.99, 1 - 1e-9} {
				x := mechanisms.XAt(curve, y)
				if x.Why != "" {
					t.Errorf("%s: %g: %s", name, y, x.Why)
					continue
				}
				var p mechanisms.Point
				curve.At(x.Value, &p)
				if math.Abs(math.Log(p.Y/p.Empty)-math.Log(y/(1-y))) > 1e-12*(1+math.Abs(x.Value))*math.Max(1, p.NH) {
					t.Errorf("%s: at x_%g the share is %.17g", name, 100*y, p.Y)
				}
			}
		}
	}
}

// What does not exist is said, with the reason.
func TestMeasuresThatDoNotExist(t *testing.T) {
	adair := mechanisms.Definition{Sites: 4}
	states := listedStates
	states.Turnover = []mechanisms.Weight{{Name: "ES", Value: 1}}
	inhibited := mechtest.Case{Family: "states", Definition: states}.Build().Curve().(mechanisms.Watched)
	inhibited.Bind([]float64{0, 0, 1, 0}, mechanisms.Environment{Effectors: []float64{0}})
	n, at := mechanisms.HillMax(bound(t, "independent", mechanisms.Definition{Classes: twoClasses}, 1, 30))
	if n.Value != 1 {
		t.Errorf("independent sites: largest n_H is %g", n.Value)
	}
	_, even := mechanisms.HillMax(bound(t, "hill", mechanisms.Definition{}, 1, 2))
	noLast := bound(t, "adair", adair, 1, 1, 1, 0)
	for name, c := range map[string]struct {
		m    mechanisms.Measure
		says string
	}{
		"no first ligand":      {mechanisms.InteractionEnergy(bound(t, "adair", adair, 0, 1, 1, 1)), "one ligand"},
		"no third ligand":      {mechanisms.InteractionEnergy(bound(t, "adair", adair, 1, 1, 0, 1)), "3 ligands"},
		"no last ligand":       {mechanisms.InteractionEnergy(noLast), "never fills"},
		"median, no last":      {mechanisms.Median(noLast), "never fills"},
		"beyond the ceiling":   {mechanisms.XAt(noLast, 0.9), "ends at 0.75"},
		"one site":             {mechanisms.InteractionEnergy(bound(t, "adair", mechanisms.Definition{Sites: 1}, 1)), "one site"},
		"Hill's energy":        {mechanisms.InteractionEnergy(bound(t, "hill", mechanisms.Definition{}, 1, 2)), "Hill"},
		"Hill is even":         {even, "every saturation"},
		"independent, largest": {at, "both ends"},
		"mixture's energy":     {mechanisms.InteractionEnergy(every["simple parts"].Build().Curve()), "separate"},
		"no such share":        {mechanisms.XAt(noLast, 1.5), "not reached"},
		"inhibited":            {mechanisms.HillAtHalf(inhibited.Watch()), "not monotonic"},
		"inhibited, position":  {mechanisms.XAt(inhibited.Watch(), 0.5), "not monotonic"},
		"response's median":    {mechanisms.Median(inhibited.Watch()), "belongs to binding"},
		"response's energy":    {mechanisms.InteractionEnergy(inhibited.Watch()), "belongs to binding"},
	} {
		if !strings.Contains(c.m.Why, c.says) || !math.IsNaN(c.m.Value) {
			t.Errorf("%s: %g, %q", name, c.m.Value, c.m.Why)
		}
	}
	if x := mechanisms.XAt(inhibited, 0.5); x.Why != "" {
		t.Errorf("binding itself is monotonic: %s", x.Why)
	}
}

// Where β_3 is zero the upper slope of the Hill plot is 2; where the last site
// never fills it is 0.
func TestEndSlopes(t *testing.T) {
	var p mechanisms.Point
	c := bound(t, "adair", mechanisms.Definition{Sites: 4}, 0, 1, 0, 1)
	for lnx, want := range map[float64]float64{-400: 2, math.Inf(-1): 2, 400: 2, math.Inf(1): 2} {
		c.At(lnx, &p)
		if math.Abs(p.NH-want) > 1e-12 {
			t.Errorf("ln x = %g: n_H is %g, not %g", lnx, p.NH, want)
		}
	}
	c = bound(t, "adair", mechanisms.Definition{Sites: 3}, 1, 1, 0)
	c.At(60, &p)
	if p.NH > 1e-20 || math.Abs(p.Y-2.0/3) > 1e-15 {
		t.Errorf("without the last ligand: n_H is %g at saturation %g", p.NH, p.Y)
	}
}
