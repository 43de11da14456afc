package kinetics_test

import (
	"context"
	"fmt"
	"math"
	"testing"

	"ligancy/mechanisms"
	"ligancy/mechanisms/kinetics"
	"ligancy/mechanisms/mechtest"
)

func turning(t *testing.T, states []string, steps []mechanisms.Step, constants ...float64) *kinetics.Progress {
	t.Helper()
	d := mechanisms.Definition{Steps: steps}
	for _, s := range states {
		d.States = append(d.States, mechanisms.State{Name: s})
	}
	g := kinetics.NewProgress(mechtest.Case{Family: "cycle", Definition: d}.Build().(mechanisms.Driven))
	if err := g.Bind(logs(constants), nil, mechanisms.Environment{}); err != nil {
		t.Fatal(err)
	}
	return g
}

var michaelis = []mechanisms.Step{{From: "E", To: "ES", Ligands: 1, Rate: "k1", Back: "k2"}, {From: "ES", To: "E", Rate: "k3", Product: true}}

// lambert is W(e^a): w + ln w = a, by Newton's method.
func lambert(a float64) float64 {
	w := math.Max(a, 1e-3)
	if a < 0 {
		w = math.Exp(a)
	}
	for range 100 {
		w -= (w + math.Log(w) - a) / (1 + 1/w)
		if w <= 0 {
			w = 1e-300
		}
	}
	return w
}

// The progress of Michaelis and Menten's enzyme, little of it: x = K W((x_0/K)
// e^((x_0 − Vt)/K)) (Schnell & Mendoza 1997, J. Theor. Biol. 187:207), to first order in
// the enzyme over the substrate and K.
func TestProgressIsLambert(t *testing.T) {
	const k1, k2, k3, x0, enzyme = 10., 4., 6., 2., 1e-6
	const km, v = (k2 + k3) / k1, k3 * enzyme
	g := turning(t, []string{"E", "ES"}, michaelis, k1, k2, k3)
	long := 3 * x0 / v
	p := &kinetics.Program{Sites: enzyme, Tolerance: 1e-11, Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: x0, Seconds: long}}}
	var times []float64
	for i := range 11 {
		times = append(times, long*float64(i)/10)
	}
	c, err := g.Run(context.Background(), p, times, false)
	if err != nil {
		t.Fatal(err)
	}
	for i, s := range times {
		x := km * lambert(math.Log(x0/km)+(x0-v*s)/km)
		near(t, fmt.Sprintf("substrate at %g s", s), c.Free[i], x, 3e-6)
		near(t, "product", c.Seen[i], x0-x, 3e-6)
	}
}

// With the substrate held, an enzyme settles from E to its steady state: v t less the
// share of the burst, (v/λ)(1 − e^(−λt)), λ = k_1 x + k_2 + k_3, exactly.
func TestBurst(t *testing.T) {
	const k1, k2, k3, x = 2., 3., 5., 4.
	g := turning(t, []string{"E", "ES"}, michaelis, k1, k2, k3)
	p := &kinetics.Program{Tolerance: 1e-12, Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: x, Seconds: 2}}}
	times := []float64{0, 0.01, 0.1, 0.5, 2}
	c, err := g.Run(context.Background(), p, times, true)
	if err != nil {
		t.Fatal(err)
	}
	const rate = k1*x + k2 + k3
	for i, s := range times {
		near(t, fmt.Sprintf("turnovers at %g s", s), c.Seen[i], k3*k1*x/rate*(s+math.Expm1(-rate*s)/rate), 1e-10)
	}
	for k := range 3 {
		const h = 1e-5
		at := func(by float64) float64 {
			q := []float64{k1, k2, k3}
			q[k] *= math.Exp(by)
			c, err := turning(t, []string{"E", "ES"}, michaelis, q...).Run(context.Background(), p, []float64{0.5}, false)
			if err != nil {
				t.Fatal(err)
			}
			return c.Seen[0]
		}
		near(t, "gradient", c.Grad.At(3, k), (at(h)-at(-h))/(2*h), 1e-6)
	}
}

// A slow enzyme starts where it rests without substrate.
func TestProgressStartsAtRest(t *testing.T) {
	g := turning(t, []string{"E", "F", "ES"}, append([]mechanisms.Step{{From: "E", To: "F", Rate: "k4", Back: "k5"}}, michaelis...), 1, 3, 2, 3, 5)
	c, err := g.Run(context.Background(), &kinetics.Program{Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: 1, Seconds: 1}}}, []float64{0, 1}, false)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "share of E", c.Shares[0][0], 0.75, 1e-15)
	near(t, "share of F", c.Shares[0][1], 0.25, 1e-15)
	_, err = g.Run(context.Background(), &kinetics.Program{Phases: []kinetics.Phase{{Action: kinetics.Block, Amount: 1, Seconds: 1}}}, []float64{1}, false)
	complains(t, err, "unlabelled")
}
