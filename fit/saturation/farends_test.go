package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"ligancy/mechanisms"
)

// Two unlike sites on the treated galactosyltransferase velocities (Treloar
// 1974, in Bates & Watts 1988 A1.3): the looser constant has no upper end, and
// half saturation none either. Ends that only the box of the search makes are
// not printed as ends.
func TestEndsThatTheBoxMakesAreOpen(t *testing.T) {
	d := Dataset{Name: "v", Noise: Constant, Response: Response{Kind: "velocity", High: Setting{Free: true}}}
	for _, p := range [][3]float64{{0.02, 76, 47}, {0.06, 97, 107}, {0.11, 123, 139}, {0.22, 159, 152}, {0.56, 191, 201}, {1.1, 207, 200}} {
		d.Points = append(d.Points, Point{X: p[0], Y: p[1]}, Point{X: p[0], Y: p[2]})
	}
	pair := mechanisms.Definition{Classes: []mechanisms.Count{{Name: "tight", Sites: 1}, {Name: "loose", Sites: 1}}}
	a := &Analysis{Ligand: Substance{Name: "substrate", Unit: "ppm"}, Kelvin: math.NaN(), Data: []Dataset{d}, Settings: Settings{Seed: 1, Starts: 20},
		Candidates: []Candidate{{Name: "unlike pair", Family: "independent", Mechanism: build(t, "independent", pair)}}}
	out, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	open := 0
	for _, q := range out.Quantities {
		if q.Of == "constant" || q.Of == "position" {
			if q.Interval == "profile" && q.High > 1e4*q.Value {
				t.Errorf("%s ends at %v, %.0g times its value", q.Name, q.High, q.High/q.Value)
			}
			if q.Held == "low end only" {
				open++
			}
		}
	}
	if open < 2 {
		t.Errorf("%d numbers without an upper end", open)
	}
}

// A constant on its own bound keeps the end that it has: exclusive binding
// (c near zero) is held at its high end only.
func TestAConstantOnItsBoundKeepsItsOtherEnd(t *testing.T) {
	c := &coverageTruths[2]
	mech := build(t, "mwc", mechanisms.Definition{Sites: 4})
	curve := mech.Curve()
	curve.Bind(c.theta(mech), mechanisms.Environment{})
	d := Dataset{Name: "one", Noise: Constant, Response: Response{Kind: "saturation", High: Setting{Value: 1}}}
	rng := rand.New(rand.NewPCG(3, 77))
	for i := range 24 {
		l := math.Log(c.low) + math.Log(c.high/c.low)*float64(i)/23
		var y [1]float64
		curve.Saturation(y[:], []float64{l}, nil)
		for range 3 {
			d.Points = append(d.Points, Point{X: math.Exp(l), Y: y[0] + 0.01*rng.NormFloat64()})
		}
	}
	a := &Analysis{Ligand: Substance{Name: "ligand", Unit: "uM"}, Kelvin: math.NaN(), Data: []Dataset{d}, Settings: Settings{Seed: 1, Starts: 12},
		Candidates: []Candidate{{Name: "concerted", Family: "mwc", Mechanism: mech}}}
	out, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	if q := quantity(t, out, "concerted", "constant", "c"); q.Held != "high end only" || !(q.High > 1e-4 && q.High < 0.1) {
		t.Errorf("c %v (%v to %v), %s", q.Value, q.Low, q.High, q.Held)
	}
}
