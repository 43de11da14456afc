package saturation

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"ligancy/mechanisms"
)

// sketch describes an invented study of one curve.
type sketch struct {
	y          func(x float64) float64
	low, high  float64 // decades of ligand
	levels     int
	replicates int
	names      []string // of preparations; one each for the replicates where there are as many
	scatter    float64
	seed       uint64
	response   Response
	candidates []Candidate
}

// study draws the points.
func (s sketch) study(t testing.TB) *Analysis {
	t.Helper()
	rng := rand.New(rand.NewPCG(s.seed, 77))
	if s.response.Kind == "" {
		s.response = Response{Kind: "saturation", Unit: "fraction", High: Setting{Value: 1}}
	}
	d := Dataset{Name: "one", Noise: Constant, Response: s.response, Incubation: math.NaN()}
	for i := range s.levels {
		x := math.Pow(10, s.low+(s.high-s.low)*float64(i)/float64(s.levels-1))
		for k := range s.replicates {
			p := Point{X: x, Y: s.y(x) + s.scatter*rng.NormFloat64(), Row: len(d.Points) + 2}
			if len(s.names) > 0 {
				p.Preparation = s.names[k%len(s.names)]
			}
			d.Points = append(d.Points, p)
		}
	}
	if s.candidates == nil {
		s.candidates = []Candidate{
			{Name: "one site", Family: "independent", Mechanism: build(t, "independent", oneSite())},
			{Name: "Hill equation", Family: "hill", Mechanism: build(t, "hill", mechanisms.Definition{})},
		}
	}
	return &Analysis{Title: "sketch", Ligand: Substance{Name: "ligand", Unit: "nM"}, Kelvin: 298.15,
		Data:       []Dataset{d},
		Candidates: s.candidates, Settings: Settings{Starts: 10, Seed: 1, Level: 0.95, Method: "profile",
			Draws: 99}}
}

// hyperbola is one site with K 1; hillCurve a Hill curve with K 1.
func hyperbola(x float64) float64 { return x / (1 + x) }

func hillOf(h float64) func(float64) float64 {
	return func(x float64) float64 { return expit(h * math.Log(x)) }
}

// plain is the design of most studies: 24 levels in triplicate over four decades.
func plain(y func(float64) float64) sketch {
	return sketch{y: y, low: -2, high: 2, levels: 24, replicates: 3, names: []string{"A", "B", "C"},
		scatter: 0.01, seed: 4}
}

// analysed is the outcome of a study.
func analysed(t testing.TB, a *Analysis) *Outcome {
	t.Helper()
	out, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// explained finds an explanation.
func explained(t testing.TB, out *Outcome, what string) ExplanationRow {
	t.Helper()
	for _, r := range out.Explanations {
		if r.Explanation == what {
			return r
		}
	}
	var all []string
	for _, r := range out.Explanations {
		all = append(all, r.Explanation)
	}
	t.Fatalf("no explanation %q among %q", what, all)
	return ExplanationRow{}
}

// report logs the explanations of an outcome.
func reportExplanations(t testing.TB, out *Outcome) {
	t.Helper()
	for _, r := range out.Explanations {
		t.Log(fmt.Sprintf("%-8s %-55s %-9s", r.Slope, r.Explanation, r.Standing), "twin:", deref(r.TwinOf),
			"own:", deref(r.Mechanism), "behind:", figures(float64(r.AICcBehind), 3),
			"value:", figures(float64(r.Value), 4), figures(float64(r.Low), 4), figures(float64(r.High), 4),
			"|", deref(r.Why))
	}
	t.Log(out.Verdict.Text)
}

func deref(s *string) string {
	if s == nil {
		return ""
	}
	return *s
}

func four() mechanisms.Definition { return mechanisms.Definition{Sites: 4} }

func env() mechanisms.Environment { return mechanisms.Environment{} }
