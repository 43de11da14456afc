package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"ligancy/mechanisms"
)

// competition is one site for an unlabelled ligand and a tracer.
func competition(t testing.TB) mechanisms.Mechanism {
	return build(t, "states", mechanisms.Definition{Effectors: []mechanisms.Effector{{Name: "tracer"}},
		States: []mechanisms.State{{Name: "R"}, {Name: "RL", Ligands: 1, Constants: map[string]float64{"K_i": -1}},
			{Name: "RT", Effectors: map[string]int{"tracer": 1}, Constants: map[string]float64{"K_d": -1}}}})
}

// displacementStudy is an invented displacement curve: K_i 3 nM, K_d 0.5 nM,
// 1 nM tracer added, Bmax 100 fmol/mg, nonspecific 2 fmol/mg per nM.
func displacementStudy(t testing.TB, total bool, sites, scatter float64) *Analysis {
	rng := rand.New(rand.NewPCG(17, 2))
	free := Setting{Free: true}
	d := Dataset{Name: "displacement", Noise: Constant, Total: total, Response: Response{Kind: "bound", Unit: "fmol/mg", Of: "tracer", High: free, Nonspecific: free}}
	if total {
		d.SitesPresent.FromBmax = sites / 100
	}
	a := &Analysis{Ligand: Substance{Name: "octopamine", Unit: "nM"}, Effectors: []Substance{{Name: "tracer", Unit: "nM"}}, Kelvin: math.NaN(),
		Candidates: []Candidate{{Name: "one site", Family: "states", Mechanism: competition(t)}},
		Settings:   Settings{Starts: 10, Seed: 1, Level: 0.95, Method: "profile"}}
	for i := range 12 {
		x := math.Pow(10, -2+5*float64(i)/11)
		for range 2 {
			for _, tr := range []float64{0.2, 1, 5} {
				d.Points = append(d.Points, Point{X: x, Effectors: []float64{tr}, Row: len(d.Points) + 2})
			}
		}
	}
	d.Points = append(d.Points, Point{X: 0, Effectors: []float64{1}}, Point{X: 1e4, Effectors: []float64{1}, Blocked: true})
	for i := range d.Points {
		p := &d.Points[i]
		p.Y = displacedTruth(p.X, p.Effectors[0], total, sites, p.Blocked) + scatter*rng.NormFloat64()
	}
	a.Data = []Dataset{d}
	return a
}

// displacedTruth solves one site with both ligands by bisection on the free
// site fraction: written out here, apart from the package's own solver.
func displacedTruth(x, tr float64, total bool, sites float64, blocked bool) float64 {
	const ki, kd = 3.0, 0.5
	if !total {
		if blocked {
			return 2 * tr
		}
		return 100*(tr/kd)/(1+x/ki+tr/kd) + 2*tr
	}
	nu := sites / 100 * 2
	if blocked {
		return 2 * tr / (1 + nu)
	}
	low, high := 0.0, sites // free sites
	for range 200 {
		r := (low + high) / 2
		fx := x / (1 + r/ki)
		ft := tr / (1 + nu + r/kd)
		if r*(1+fx/ki+ft/kd) > sites {
			high = r
		} else {
			low = r
		}
	}
	ft := tr / (1 + nu + low/kd)
	return 100*low*ft/kd/sites + 2*ft
}

// Displacement reaches the truth on both axes, with few sites and with many.
func TestDisplacementReachesTheTruth(t *testing.T) {
	for _, w := range []struct {
		total bool
		sites float64
	}{{false, 0}, {true, 0.01}, {true, 1}, {true, 20}} {
		a := displacementStudy(t, w.total, w.sites, 0)
		f := fitOne(t, a)
		for i, p := range f.m.params {
			if p.kind != ofConstant {
				continue
			}
			want := map[string]float64{"K_i": 3, "K_d": 0.5}[p.Name[:3]]
			if got := math.Exp(f.result.Theta[i]); math.Abs(got/want-1) > 1e-6 {
				t.Errorf("total %v, sites %v: %s %v, truth %v (SS %g)", w.total, w.sites, p.Name, got, want, f.ss)
			}
		}
	}
}

// Gradients of displacement on both axes agree with differences.
func TestDisplacementGradients(t *testing.T) {
	for _, total := range []bool{false, true} {
		for _, sites := range []float64{0.05, 5} {
			a := displacementStudy(t, total, sites, 0.5)
			checkBlockGradient(t, a)
			a.Data[0].SitesPresent = SitesPresent{Value: sites}
			checkBlockGradient(t, a)
			a.Data[0].SitesPresent = SitesPresent{FromBmax: sites / 100}
			m, err := newModel(a, &a.Candidates[0])
			if err != nil {
				t.Fatal(err)
			}
			theta := []float64{math.Log(3), math.Log(0.5), 100, 2}
			for _, c := range m.curveCells() {
				for _, q := range m.displacementWanted(c) {
					checkQuantityGradient(t, "displacement", q, theta)
				}
			}
		}
	}
}

// On a free axis the midpoint is K_i(1 + t/K_d) (Cheng & Prusoff 1973, from
// memory; exact); with few sites the IC50 against added ligand comes to that.
func TestDisplacementMidpoint(t *testing.T) {
	for _, total := range []bool{false, true} {
		out, err := displacementStudy(t, total, 1e-4, 0.2).Run(context.Background(), nil)
		if err != nil {
			t.Fatal(err)
		}
		name := map[bool]string{false: "x_half", true: "IC50_total"}[total]
		seen := 0
		ki, kd := quantity(t, out, "one site", "constant", "K_i"), quantity(t, out, "one site", "constant", "K_d")
		for _, q := range out.Quantities {
			if q.Name != name {
				continue
			}
			tr := map[string]float64{"tracer 0.2 nM": 0.2, "tracer 1 nM": 1, "tracer 5 nM": 5}[q.Curve]
			want := float64(ki.Value) * (1 + tr/float64(kd.Value))
			if math.Abs(float64(q.Value)/want-1) > 1e-3 {
				t.Errorf("%s, %s: %v, want %v", name, q.Curve, q.Value, want)
			}
			seen++
		}
		if seen != 3 {
			t.Errorf("total %v: %d midpoints", total, seen)
		}
	}
}

// A mechanism that does not bind the tracer is refused with what to do.
func TestDisplacementRefusesOtherMechanisms(t *testing.T) {
	a := displacementStudy(t, false, 0, 0)
	a.Candidates = []Candidate{{Name: "one class", Family: "adair", Mechanism: build(t, "adair", mechanisms.Definition{Sites: 1})}}
	if _, err := newModel(a, &a.Candidates[0]); err == nil {
		t.Error("a mechanism without the tracer is accepted")
	}
}
