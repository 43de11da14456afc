package fit_test

import (
	"context"
	"math"
	"testing"

	"ligancy/fit"
)

func solve(tb testing.TB, p *fit.Problem, set fit.Settings) *fit.Result {
	tb.Helper()
	r, err := fit.Solve(context.Background(), p, set)
	if err != nil {
		tb.Fatal(err)
	}
	return r
}

func TestPeers(t *testing.T) {
	for _, s := range []struct {
		name string
		p    *fit.Problem
		best float64
	}{
		{"hill4", hill4(t, false), bestHill4},
		{"hill4 collapsed", hill4(t, true), bestHill4},
		{"adair4", adair4(t), bestAdair4},
		{"shallow", shallow(t), bestShallow},
		{"global", global(t), bestGlobal},
	} {
		miss, agree, evals := 0, 0, 0
		for seed := range uint64(50) {
			r := solve(t, s.p, fit.Settings{Seed: seed, Workers: 1})
			if math.Abs(r.Objective/s.best-1) > 1e-8 {
				miss++
				t.Logf("%s seed %d: %.12g, best %.12g", s.name, seed, r.Objective, s.best)
			}
			agree += r.Agreeing
			evals += r.Evals
			if seed == 0 {
				t.Logf("%v %v %.3g %v", r.Theta, r.Status, r.Offset, r.Warnings)
			}
		}
		t.Logf("%s: missed %d of 50, agreeing %.2f of 20, evals %.1f per start", s.name, miss, float64(agree)/50, float64(evals)/1000)
	}
}

func BenchmarkTwentyStarts(b *testing.B) {
	for _, s := range []struct {
		name string
		p    *fit.Problem
	}{
		{"hill4", hill4(b, true)},
		{"adair4", adair4(b)},
		{"shallow", shallow(b)},
		{"global", global(b)},
	} {
		b.Run(s.name, func(b *testing.B) {
			b.ReportAllocs()
			for range b.N {
				solve(b, s.p, fit.Settings{Workers: 1})
			}
		})
	}
}
