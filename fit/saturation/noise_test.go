package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/optimize"
	"gonum.org/v1/gonum/stat/distuv"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// noisyStudy is an invented one-site velocity curve, V 10 and K 1, with errors of a given law.
func noisyStudy(t testing.TB, noise Noise, draw func(rng *rand.Rand, y float64) float64) *Analysis {
	rng := rand.New(rand.NewPCG(21, 4))
	d := Dataset{Name: "one", Noise: noise, Response: Response{Kind: "velocity", Unit: "nkat", High: Setting{Free: true}}}
	for i := range 16 {
		x := math.Pow(10, -1.5+3*float64(i)/15)
		for range 4 {
			y := 10 * x / (1 + x)
			d.Points = append(d.Points, Point{X: x, Y: y + draw(rng, y), Row: len(d.Points) + 2})
		}
	}
	return &Analysis{Ligand: Substance{Name: "ligand", Unit: "mM"}, Kelvin: math.NaN(), Data: []Dataset{d},
		Candidates: []Candidate{{Name: "one site", Family: "hill", Mechanism: build(t, "hill", mechanisms.Definition{}), Given: map[string]mechanisms.Given{"n_H": {Fixed: ptr(1)}}}},
		Settings:   Settings{Starts: 8, Seed: 1, Level: 0.95, Method: "profile"}}
}

func fitOne(t *testing.T, a *Analysis) *fitted {
	t.Helper()
	f := a.fitCandidate(context.Background(), &a.Candidates[0], fit.Settings{Starts: 8, Seed: 1})
	if f.result == nil {
		t.Fatal(f.err)
	}
	return f
}

// minusLnL is −ln L written out by hand, with σ by maximum likelihood within.
type minusLnL func(a *Analysis, k, v float64, extra []float64) float64

// checkMaximum compares a fit with the maximum that a general-purpose optimiser
// (gonum optimize, Nelder–Mead) finds of the likelihood written out by hand.
func checkMaximum(t *testing.T, a *Analysis, cost minusLnL, extra []float64) *fitted {
	t.Helper()
	f := fitOne(t, a)
	p := optimize.Problem{Func: func(x []float64) float64 { return cost(a, math.Exp(x[0]), math.Exp(x[1]), x[2:]) }}
	best := math.Inf(1)
	var at []float64
	for range 4 {
		start := append([]float64{0.1, 2.2}, extra...)
		if at != nil {
			start = at
		}
		r, err := optimize.Minimize(p, start, &optimize.Settings{FuncEvaluations: 20000, Converger: &optimize.FunctionConverge{Absolute: 1e-13, Iterations: 400}}, &optimize.NelderMead{})
		if err != nil {
			t.Fatal(err)
		}
		best, at = r.F, r.X
	}
	if d := f.lnL + best; math.Abs(d) > 1e-6 {
		t.Errorf("ln L %.9f, the optimiser finds %.9f", f.lnL, -best)
	}
	if math.Abs(f.result.Theta[0]-at[0]) > 1e-4 {
		t.Errorf("ln K %.7f, the optimiser finds %.7f", f.result.Theta[0], at[0])
	}
	return f
}

// residualsAt are y − ŷ and ŷ at K and V.
func residualsAt(a *Analysis, k, v float64) (e, y []float64) {
	for _, p := range a.Data[0].Points {
		yHat := v * p.X / (k + p.X)
		e, y = append(e, p.Y-yHat), append(y, yHat)
	}
	return e, y
}

// lawCost is −ln L of σ·g, σ eliminated.
func lawCost(e, g []float64) float64 {
	n, ss, lnG := float64(len(e)), 0.0, 0.0
	for i := range e {
		ss += e[i] * e[i] / (g[i] * g[i])
		lnG += math.Log(g[i])
	}
	return n/2*(math.Log(2*math.Pi*ss/n)+1) + lnG
}

func largestResponse(a *Analysis) (top, rms float64) {
	for _, p := range a.Data[0].Points {
		top = math.Max(top, math.Abs(p.Y))
		rms += p.Y * p.Y / float64(len(a.Data[0].Points))
	}
	return top, math.Sqrt(rms)
}

func TestProportionalIsMaximumLikelihood(t *testing.T) {
	a := noisyStudy(t, Proportional, func(r *rand.Rand, y float64) float64 { return 0.05 * y * r.NormFloat64() })
	f := checkMaximum(t, a, func(a *Analysis, k, v float64, _ []float64) float64 {
		e, y := residualsAt(a, k, v)
		top, _ := largestResponse(a)
		for i := range y {
			y[i] = math.Hypot(y[i], 0.01*top)
		}
		return lawCost(e, y)
	}, nil)
	if math.Abs(f.scatter-0.05) > 0.01 {
		t.Errorf("scatter %v, truth 0.05", f.scatter)
	}
}

func TestMixedIsMaximumLikelihood(t *testing.T) {
	a := noisyStudy(t, Mixed, func(r *rand.Rand, y float64) float64 { return math.Hypot(0.1, 0.05*y) * r.NormFloat64() })
	checkMaximum(t, a, func(a *Analysis, k, v float64, extra []float64) float64 {
		e, y := residualsAt(a, k, v)
		top, rms := largestResponse(a)
		l := 1 / (1 + math.Exp(-extra[0]))
		for i := range y {
			y[i] = math.Sqrt((1-l)*rms*rms + l*(y[i]*y[i]+1e-4*top*top))
		}
		return lawCost(e, y)
	}, []float64{0})
}

func TestStudentIsMaximumLikelihood(t *testing.T) {
	a := noisyStudy(t, StudentT, func(r *rand.Rand, y float64) float64 {
		return 0.1 * distuv.StudentsT{Sigma: 1, Nu: 4, Src: r}.Rand()
	})
	checkMaximum(t, a, func(a *Analysis, k, v float64, extra []float64) float64 {
		e, _ := residualsAt(a, k, v)
		s := distuv.StudentsT{Sigma: math.Exp(extra[0]), Nu: 4}
		sum := 0.0
		for _, x := range e {
			sum -= s.LogProb(x)
		}
		return sum
	}, []float64{-2})
}

// A wild point moves a fit with constant scatter and hardly one with Student's t.
func TestStudentResistsAWildPoint(t *testing.T) {
	quiet := func(r *rand.Rand, _ float64) float64 { return 0.05 * r.NormFloat64() }
	shiftOf := func(noise Noise) float64 {
		a := noisyStudy(t, noise, quiet)
		before := fitOne(t, a).result.Theta[0]
		a.Data[0].Points[20].Y += 0.05 * 1e6
		return math.Abs(fitOne(t, a).result.Theta[0] - before)
	}
	if wild, resisted := shiftOf(Constant), shiftOf(StudentT); !(wild > 1) || !(resisted < 0.05) {
		t.Errorf("ln K moves by %v with constant scatter, %v with Student's t", wild, resisted)
	}
}

// Replicates that scatter in proportion get weights in proportion, those that
// scatter evenly even ones.
func TestReplicateWeights(t *testing.T) {
	for _, w := range []struct {
		name     string
		draw     func(r *rand.Rand, y float64) float64
		low, top float64 // of the ratio of deviations at the ends of the curve
	}{
		{"proportional", func(r *rand.Rand, y float64) float64 { return 0.05 * y * r.NormFloat64() }, 8, 40},
		{"constant", func(r *rand.Rand, _ float64) float64 { return 0.1 * r.NormFloat64() }, 0.9, 1.6},
	} {
		a := noisyStudy(t, Replicates, w.draw)
		m, err := newModel(a, &a.Candidates[0])
		if err != nil {
			t.Fatal(err)
		}
		s := m.blocks[0].noise.(*fixedScatter).s
		if ratio := s[len(s)-1] / s[0]; !(ratio > w.low && ratio < w.top) {
			t.Errorf("%s: deviations at the ends in the ratio %v", w.name, ratio)
		}
	}
}
