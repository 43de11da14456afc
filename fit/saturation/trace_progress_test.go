package saturation

import (
	"context"
	"math"
	"testing"

	"ligancy/fit"
	"ligancy/mechanisms"
	"ligancy/mechanisms/kinetics"
)

// Progress curves give back the rates of the enzyme that made them: the substrate runs
// out, product is what is seen.
func TestProgressCurvesGiveBackRates(t *testing.T) {
	c := Candidate{Name: "enzyme", Family: "cycle", Mechanism: built(t, "cycle", mechanisms.Definition{
		States: []mechanisms.State{{Name: "E"}, {Name: "ES"}},
		Steps:  []mechanisms.Step{{From: "E", To: "ES", Ligands: 1, Rate: "k1", Back: "k2"}, {From: "ES", To: "E", Rate: "k3", Product: true}}})}
	theta := []float64{math.Log(2), math.Log(3), math.Log(5)}
	a := &Analysis{Ligand: Substance{Name: "PEP", Unit: "uM"}, Candidates: []Candidate{c}, Settings: Settings{Starts: 8, Seed: 1}}
	d := Dataset{Name: "progress", Trace: true, Total: true, SitesPresent: SitesPresent{Value: 0.5}, Incubation: math.NaN(), Noise: Constant,
		Response: Response{Kind: "signal", Unit: "uM", High: Setting{Value: 1}}, Phases: []Phase{{Add: 1, Seconds: 6}}}
	g := kinetics.NewProgress(c.Mechanism.(mechanisms.Driven))
	if err := g.Bind(theta, nil, mechanisms.Environment{}); err != nil {
		t.Fatal(err)
	}
	for _, x := range []float64{1, 4, 16} {
		p := d.program(x)
		var times []float64
		for i := range 15 {
			times = append(times, 0.02*math.Pow(1.5, float64(i)))
		}
		course, err := g.Run(context.Background(), &p, times, false)
		if err != nil {
			t.Fatal(err)
		}
		for i, s := range times {
			d.Points = append(d.Points, Point{X: x, Seconds: s, Y: course.Seen[i], Row: len(d.Points) + 2})
		}
	}
	a.Data = []Dataset{d}
	m, err := newModel(a, &a.Candidates[0])
	if err != nil {
		t.Fatal(err)
	}
	r, err := fit.Solve(context.Background(), m.problem(), fit.Settings{Starts: 8, Seed: 1, Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range theta {
		if math.Abs(r.Theta[i]-want) > 1e-4 {
			t.Errorf("%s is %g, not %g", m.params[i].Name, math.Exp(r.Theta[i]), math.Exp(want))
		}
	}
}

// A slow-transition enzyme of one site, read at steady state: its velocities are fitted
// as any family's, and n_H is not 1.
func TestVelocitiesOfACycle(t *testing.T) {
	c := Candidate{Name: "mnemonic", Family: "cycle", Mechanism: built(t, "cycle", mechanisms.Definition{
		States: []mechanisms.State{{Name: "E"}, {Name: "F"}, {Name: "ES"}, {Name: "FS"}},
		Steps: []mechanisms.Step{{From: "E", To: "ES", Ligands: 1, Rate: "k1", Back: "k2"}, {From: "ES", To: "FS", Rate: "k3"},
			{From: "F", To: "FS", Ligands: 1, Rate: "k4", Back: "k5"}, {From: "FS", To: "F", Rate: "k6", Product: true},
			{From: "F", To: "E", Rate: "k7", Back: "k8"}}})}
	rates := []float64{1, 10, 100, 100, 10, 0.1, 10, 0.01}
	c.Given = map[string]mechanisms.Given{}
	for i, k := range c.Mechanism.Constants() {
		if k.Name != "k4" && k.Name != "k6" {
			c.Given[k.Name] = mechanisms.Given{Fixed: &rates[i]}
		}
	}
	a := &Analysis{Ligand: Substance{Name: "PEP", Unit: "uM"}, Kelvin: math.NaN(), Candidates: []Candidate{c}, Settings: Settings{Starts: 8, Seed: 1, Method: "covariance"}}
	d := Dataset{Name: "velocities", Incubation: math.NaN(), Noise: Constant, Response: Response{Kind: "velocity", Unit: "uM/s", High: Setting{Value: 2}}}
	curve := c.Mechanism.Curve()
	curve.Bind(logsOf(rates), mechanisms.Environment{})
	var y [1]float64
	for i := range 14 {
		x := 1e-3 * math.Pow(2.2, float64(i))
		curve.(mechanisms.Watched).Watch().Saturation(y[:], []float64{math.Log(x)}, nil)
		d.Points = append(d.Points, Point{X: x, Y: 2*y[0] + 1e-5*math.Sin(float64(7*i)), Row: i + 2})
	}
	a.Data = []Dataset{d}
	out, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	found := map[string]float64{}
	for _, q := range out.Quantities {
		found[q.Name] = float64(q.Value)
	}
	if math.Abs(found["k4"]/100-1) > 0.05 || math.Abs(found["k6"]/0.1-1) > 0.01 {
		t.Errorf("k4 %g, k6 %g", found["k4"], found["k6"])
	}
	if !(found["n_H_half"] > 1.3) {
		t.Errorf("n_H %g", found["n_H_half"])
	}
	for _, q := range out.Quantities {
		if q.Name == "k4" && q.Unit != "1/(uM s)" || q.Name == "k6" && q.Unit != "1/s" {
			t.Errorf("%s is in %s", q.Name, q.Unit)
		}
	}
}

func logsOf(v []float64) []float64 {
	out := make([]float64, len(v))
	for i, x := range v {
		out[i] = math.Log(x)
	}
	return out
}
