package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
	"ligancy/mechanisms"
	"ligancy/mechanisms/kinetics"
)

// Traces of an invented tetramer, in µM and seconds.
var (
	tetramerTheta = []float64{math.Log(200), math.Log(0.02), math.Log(1.5)} // L, c, K_R
	tetramerPhi   = []float64{math.Log(5), math.Log(2)}                     // exchange, k_on
)

func concertedTetramer() mechanisms.Mechanism {
	f, _ := mechanisms.Lookup("mwc")
	m, err := f.Build(mechanisms.Definition{Sites: 4})
	if err != nil {
		panic(err)
	}
	return m
}

func rateOf(v float64, order int) Rate { return Rate{Each: []float64{v}, Order: order} }

// traceStudy is eight association traces of 200 points each, with a little scatter.
func traceStudy(points int, sd float64) *Analysis {
	c := Candidate{Name: "concerted", Family: "mwc", Mechanism: concertedTetramer(),
		Rates: map[string]Rate{"k_on": rateOf(1, 2), "exchange": rateOf(10, 1)}}
	a := &Analysis{Ligand: Substance{Name: "ligand", Unit: "uM"}, Kelvin: 298, Candidates: []Candidate{c},
		Settings: Settings{Starts: 10, Seed: 1, Level: 0.95, Method: "covariance", Workers: 2}}
	d := Dataset{Name: "traces", Trace: true, Incubation: math.NaN(), Noise: Constant,
		Response: Response{Kind: "saturation", Unit: "fraction", High: Setting{Value: 1}},
		Phases:   []Phase{{Add: 1, Seconds: 4}}}
	model, err := a.Candidates[0].Kinetics()
	if err != nil {
		panic(err)
	}
	b := model.Bound()
	if err := b.Bind(tetramerTheta, tetramerPhi, mechanisms.Environment{}); err != nil {
		panic(err)
	}
	rng := rand.New(rand.NewPCG(7, 7))
	for k := range 8 {
		x := 0.5 * math.Pow(2, float64(k))
		p := kinetics.Program{Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: x, Seconds: 4}}}
		var times []float64
		for i := range points {
			times = append(times, 4*float64(i+1)/float64(points))
		}
		course, err := b.Run(context.Background(), &p, times, false)
		if err != nil {
			panic(err)
		}
		for i, t := range times {
			d.Points = append(d.Points, Point{X: x, Seconds: t, Y: course.Saturation[i] + sd*rng.NormFloat64(), Row: len(d.Points) + 2})
		}
	}
	a.Data = []Dataset{d}
	return a
}

// The residuals' derivatives by constants, rates and ends agree with differences.
func TestTraceDerivatives(t *testing.T) {
	for name, change := range map[string]func(*Analysis){
		"clamped":    func(*Analysis) {},
		"used up":    func(a *Analysis) { a.Data[0].Total, a.Data[0].SitesPresent.Value = true, 3 },
		"two phases": func(a *Analysis) { a.Data[0].Phases = []Phase{{Add: 1, Seconds: 1}, {Dilute: 10, Seconds: 3}} },
		"free ends": func(a *Analysis) {
			a.Data[0].Response = Response{Kind: "signal", Low: Setting{Free: true}, High: Setting{Free: true}}
		},
	} {
		a := traceStudy(5, 0.01)
		change(a)
		m, err := newModel(a, &a.Candidates[0])
		if err != nil {
			t.Fatal(name, err)
		}
		theta := make([]float64, len(m.params))
		for i := range theta {
			theta[i] = 0.3
		}
		copy(theta, tetramerTheta)
		b := m.blocks[0]
		res, jac := make([]float64, b.Len()), mat.NewDense(b.Len(), len(theta), nil)
		if err := b.Eval(res, jac, theta); err != nil {
			t.Fatal(name, err)
		}
		for k := range theta {
			const h = 1e-4
			up, down := make([]float64, b.Len()), make([]float64, b.Len())
			q := append([]float64(nil), theta...)
			q[k] += h
			if err := b.Eval(up, nil, q); err != nil {
				t.Fatal(err)
			}
			q[k] -= 2 * h
			if err := b.Eval(down, nil, q); err != nil {
				t.Fatal(err)
			}
			for i := range res {
				if want := (up[i] - down[i]) / (2 * h); math.Abs(jac.At(i, k)-want) > 2e-5*math.Max(1, math.Abs(want)) {
					t.Errorf("%s: derivative of residual %d by parameter %d is %g, not %g", name, i, k, jac.At(i, k), want)
				}
			}
		}
	}
}

// Traces without scatter give back the constants and rates that made them.
func TestTracesGiveBackConstants(t *testing.T) {
	a := traceStudy(25, 0)
	m, err := newModel(a, &a.Candidates[0])
	if err != nil {
		t.Fatal(err)
	}
	r, err := fit.Solve(context.Background(), m.problem(), fit.Settings{Starts: 6, Seed: 1, Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range append(append([]float64(nil), tetramerTheta...), tetramerPhi...) {
		if math.Abs(r.Theta[i]-want) > 1e-6 {
			t.Errorf("%s is %g, not %g", m.params[i].Name, r.Theta[i], want)
		}
	}
}

// A whole run: rates stand among the constants, with their units and intervals; an
// equilibrium curve of the same sample joins in.
func TestRunWithTraces(t *testing.T) {
	a := traceStudy(20, 0.005)
	rest := Dataset{Name: "curve", Incubation: math.NaN(), Noise: Constant, Response: a.Data[0].Response}
	curve := concertedTetramer().Curve()
	curve.Bind(tetramerTheta, mechanisms.Environment{})
	var y [1]float64
	rng := rand.New(rand.NewPCG(8, 8))
	for k := range 10 {
		x := 0.3 * math.Pow(2, float64(k))
		curve.Saturation(y[:], []float64{math.Log(x)}, nil)
		rest.Points = append(rest.Points, Point{X: x, Y: y[0] + 0.005*rng.NormFloat64(), Row: k + 2})
	}
	a.Data = append(a.Data, rest)
	a.Settings.Method, a.Settings.Draws = "profile", 0
	out, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	want := map[string]float64{"L": 200, "c": 0.02, "K_R": 1.5, "exchange": 5, "k_on": 2}
	units := map[string]string{"exchange": "1/s", "k_on": "1/(uM s)"}
	found := 0
	for _, q := range out.Quantities {
		v, ok := want[q.Name]
		if q.Of != "constant" || !ok {
			continue
		}
		found++
		if !(float64(q.Low) < v && v < float64(q.High)) {
			t.Errorf("%s: %g lies outside %g … %g (%s)", q.Name, v, q.Low, q.High, q.Held)
		}
		if u := units[q.Name]; u != "" && q.Unit != u {
			t.Errorf("%s is in %s, not %s", q.Name, q.Unit, u)
		}
	}
	if found != len(want) {
		t.Errorf("%d of %d constants in the result", found, len(want))
	}
	if s := out.Mechanisms[0].Status; s != "converged" {
		t.Errorf("status %s", s)
	}
}

// What cannot be followed is said, and is no residual.
func TestTraceComplaints(t *testing.T) {
	for words, change := range map[string]func(*Analysis){
		"has no rates":                  func(a *Analysis) { a.Candidates[0].Rates = nil },
		"cut off":                       func(a *Analysis) { delete(a.Candidates[0].Rates, "exchange") },
		"rates.k_on: is in 1/s":         func(a *Analysis) { a.Candidates[0].Rates["k_on"] = rateOf(1, 1) },
		"the last phase ends at 1 s":    func(a *Analysis) { a.Data[0].Phases[0].Seconds = 1 },
		"phase 1, from 0 s, lasts -1 s": func(a *Analysis) { a.Data[0].Phases[0].Seconds = -1 },
		"before the first phase began":  func(a *Analysis) { a.Data[0].Points[0].Seconds = -3 },
		"sites_present as a number":     func(a *Analysis) { a.Data[0].Total, a.Data[0].SitesPresent.FromBmax = true, 1 },
	} {
		a := traceStudy(3, 0)
		change(a)
		if _, err := newModel(a, &a.Candidates[0]); err == nil || !strings.Contains(err.Error(), words) {
			t.Errorf("the complaint is %v, without %q", err, words)
		}
	}
	a := traceStudy(3, 0)
	m, err := newModel(a, &a.Candidates[0])
	if err != nil {
		t.Fatal(err)
	}
	res := make([]float64, m.blocks[0].Len())
	if err := m.blocks[0].Eval(res, nil, []float64{0, 0, 0, 800, 800}); err == nil {
		t.Error("rates beyond all numbers give residuals")
	}
}

// Eight traces of 200 points of the tetramer network, ten starts, on two workers.
func TestTraceSpeed(t *testing.T) {
	if testing.Short() {
		t.Skip("a speed")
	}
	a := traceStudy(200, 0.005)
	m, err := newModel(a, &a.Candidates[0])
	if err != nil {
		t.Fatal(err)
	}
	begin := time.Now()
	r, err := fit.Solve(context.Background(), m.problem(), fit.Settings{Starts: 10, Seed: 1, Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("%v, %d evaluations, %d of %d starts agree", time.Since(begin), r.Evals, r.Agreeing, r.Starts)
}
