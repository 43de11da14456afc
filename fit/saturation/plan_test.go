package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"reflect"
	"strings"
	"testing"

	"ligancy/mechanisms"
)

// planned is an analysis of a velocity V x/(K + x) with K = 10 and V = 1, and a plan.
func planned(t *testing.T, plan PlanRequest, families ...tried) *Analysis {
	t.Helper()
	rng := rand.New(rand.NewPCG(1, 2))
	d := Dataset{Name: "velocities", Noise: Constant, Incubation: math.NaN(),
		Response: Response{Kind: "velocity", Unit: "nkat/mg", High: Setting{Free: true}}}
	for _, x := range []float64{0.5, 2, 5, 10, 20, 50, 90} {
		for range 2 {
			d.Points = append(d.Points, Point{X: x, Y: x/(10+x) + 0.01*rng.NormFloat64()})
		}
	}
	a := &Analysis{Ligand: Substance{Name: "PEP", Unit: "mM"}, Kelvin: math.NaN(), Data: []Dataset{d}, Plan: &plan,
		Settings: Settings{Starts: 5, Seed: 1, Draws: 99}}
	for _, def := range families {
		f, ok := mechanisms.Lookup(def.family)
		if !ok {
			t.Fatal(def.family)
		}
		m, err := f.Build(def.Definition)
		if err != nil {
			t.Fatal(err)
		}
		a.Candidates = append(a.Candidates, Candidate{Name: def.family, Family: def.family, Mechanism: m})
	}
	return a
}

// tried is a mechanism to try.
type tried struct {
	family string
	mechanisms.Definition
}

var oneClass = tried{"independent", mechanisms.Definition{Classes: []mechanisms.Count{{Name: "only", Sites: 1}}}}

// The D-optimal design of V x/(K + x) with constant scatter has half its readings at the
// highest x and half at K x/(2K + x): Bates & Watts 1988, Nonlinear regression analysis,
// 3.14, from memory; Duggleby 1979 J theor Biol 81:671, from memory; and maximised here
// by brute force over pairs of values.
func TestConstantsAreHeldByTheTwoKnownValues(t *testing.T) {
	a := planned(t, PlanRequest{Low: 0.1, High: 100, Points: 400, Aim: "constants"}, oneClass)
	out, err := a.NextMeasurement(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	k := 10.0
	if want, got := k*100/(2*k+100), bruteSecond(k, 100); math.Abs(want-got) > 0.01 {
		t.Fatalf("the formula gives %v, brute force %v", want, got)
	}
	step := math.Pow(1000, 1.0/(planGrid-1))
	high, low := 0, 0
	for _, r := range out.Measure {
		switch x := float64(r.X); {
		case math.Abs(x-100) < 1e-9:
			high += r.Replicates
		case x > 8.333/step/step && x < 8.333*step*step:
			low += r.Replicates
		default:
			t.Errorf("%d readings at %v", r.Replicates, x)
		}
	}
	if high+low != 400 || math.Abs(float64(high-low)) > 20 {
		t.Errorf("%d at the highest value, %d at the lower", high, low)
	}
	for _, r := range out.Precision {
		if !(r.After < r.Now) {
			t.Errorf("%s: %v, then %v", r.Name, r.Now, r.After)
		}
	}
}

// bruteSecond maximises |det| of the gradients at x and at the highest value.
func bruteSecond(k, high float64) float64 {
	at, most := 0.0, 0.0
	for x := 0.01; x < high; x += 0.005 {
		det := x/(k+x)*(-high/((k+high)*(k+high))) - high/(k+high)*(-x/((k+x)*(k+x)))
		if math.Abs(det) > most {
			at, most = x, math.Abs(det)
		}
	}
	return at
}

func TestAPlanIsTheSameWhateverTheCores(t *testing.T) {
	hill := tried{family: "hill"}
	var first *PlanOutcome
	for _, workers := range []int{1, 2, 8} {
		a := planned(t, PlanRequest{Low: 0.1, High: 100, Points: 6, Replicates: 2, Series: 2, Aim: "discriminate"}, oneClass, hill)
		a.Settings.Workers = workers
		out, err := a.NextMeasurement(context.Background(), nil)
		if err != nil {
			if strings.Contains(err.Error(), "left open") {
				t.Skip(err)
			}
			t.Fatal(err)
		}
		if first == nil {
			first = out
			checkSeries(t, out)
		}
		if !reflect.DeepEqual(rowsOf(out), rowsOf(first)) {
			t.Errorf("another plan with %d workers", workers)
		}
	}
}

func rowsOf(o *PlanOutcome) any { return []any{o.Of, o.Measure, o.Odds} }

func checkSeries(t *testing.T, o *PlanOutcome) {
	t.Helper()
	n := 0
	for _, r := range o.Measure {
		n += r.Replicates
		if steps := math.Log2(100 / float64(r.X)); math.Abs(steps-math.Round(steps)) > 1e-9 {
			t.Errorf("%v is no step of the series", r.X)
		}
		if r.Replicates%2 != 0 {
			t.Errorf("%d readings where two are taken together", r.Replicates)
		}
	}
	if n != 12 {
		t.Errorf("%d readings", n)
	}
	for _, r := range o.Odds {
		if !(r.Chosen >= 0 && r.Chosen <= 1) || r.Studies != planStudies {
			t.Errorf("%+v", r)
		}
	}
}

func TestWhatCannotBePlannedIsSaid(t *testing.T) {
	for says, change := range map[string]func(*Analysis){
		"asks for no plan": func(a *Analysis) { a.Plan = nil },
		"needs data":       func(a *Analysis) { a.Data = nil },
		"followed in time": func(a *Analysis) { a.Data[0].Trace = true },
		"its replicates":   func(a *Analysis) { a.Data[0].Noise = Replicates },
		"is left open":     func(a *Analysis) { a.Plan.Aim = "discriminate" },
		"plan: at:   asks for": func(a *Analysis) {
			a.Data[0].Factors = []string{"pH"}
			a.Plan.At = []Held{{Name: "pH", Levels: []string{"9"}}}
			levelled(a)
		},
	} {
		a := planned(t, PlanRequest{Aim: "constants"}, oneClass)
		change(a)
		if _, err := a.NextMeasurement(context.Background(), nil); err == nil || !strings.Contains(err.Error(), says) {
			t.Errorf("%s: %v", says, err)
		}
	}
}

func levelled(a *Analysis) {
	for i := range a.Data[0].Points {
		a.Data[0].Points[i].Levels = []string{"7"}
	}
}
