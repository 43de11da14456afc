package saturation

import (
	"context"
	"math"
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
