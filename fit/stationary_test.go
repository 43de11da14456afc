package fit_test

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
)

// Random curves with random bounds, weights and data, some of them absurd: a
// result is finite, lies in its box, and where it is said to have converged,
// the gradient of the objective, computed here anew, is zero along what is free
// and points outwards on every bound.
func TestStationaryOrSaid(t *testing.T) {
	rng := rand.New(rand.NewPCG(31, 1))
	number := 400
	if testing.Short() {
		number = 60
	}
	converged, edges := 0, 0
	for range number {
		p := randomProblem(rng)
		r, err := fit.Solve(context.Background(), p, fit.Settings{Starts: 5, Workers: 1, MaxIter: 200})
		if err != nil {
			continue // an error is an answer, if it is no panic
		}
		checkFinite(t, r)
		for j, v := range r.Theta {
			q := p.Parameters[j]
			if v < q.Low || v > q.High {
				t.Fatalf("θ[%d] = %v lies outside %v to %v", j, v, q.Low, q.High)
			}
			onBound := q.Low < q.High && (v == q.Low || v == q.High)
			if onBound != (r.Edges[j] != fit.Inside) {
				t.Fatalf("θ[%d] = %v between %v and %v: edge %v", j, v, q.Low, q.High, r.Edges[j])
			}
		}
		if r.Status == fit.Converged || r.Status == fit.AtEdge {
			converged++
			checkStationary(t, p, r)
		}
		if r.Status == fit.AtEdge {
			edges++
		}
	}
	if converged < number*8/10 || edges < number/20 {
		t.Errorf("%d of %d converged, %d on an edge", converged, number, edges)
	}
}

// randomProblem is one or two hill curves with a line, in some disguise.
func randomProblem(rng *rand.Rand) *fit.Problem {
	model := func(x float64, p, g []float64) float64 {
		f := hill(x, p[:3], g)
		g[3] = x
		return f + p[3]*x
	}
	p := &fit.Problem{Parameters: []fit.Parameter{
		{Name: "V", Low: 0, High: 1e3, StartLow: 1, StartHigh: 20, Linear: rng.IntN(2) == 0},
		{Name: "ln K", Low: -6, High: 6, StartLow: -3, StartHigh: 3},
		{Name: "ln h", Low: -2, High: 2, StartLow: -1, StartHigh: 1},
		{Name: "slope", Low: math.Inf(-1), High: math.Inf(1), StartLow: -0.1, StartHigh: 0.1, Linear: rng.IntN(2) == 0},
	}}
	switch rng.IntN(6) {
	case 0:
		p.Parameters[1].High = rng.NormFloat64() // cuts through the truth
	case 1:
		p.Parameters[3].Low = 0
	case 2:
		p.Parameters[2].Low, p.Parameters[2].High = 0, 0
	case 3:
		p.Parameters[0].Low, p.Parameters[0].High = 4, 6
	}
	for k := range p.Parameters { // start boxes lie inside the bounds
		q := &p.Parameters[k]
		q.StartLow, q.StartHigh = max(q.StartLow, q.Low), min(q.StartHigh, q.High)
		if q.StartLow > q.StartHigh {
			q.StartLow, q.StartHigh = q.Low, q.Low
		}
	}
	for range 1 + rng.IntN(2) {
		b := &simple{f: model}
		scatter := math.Exp(2 * rng.NormFloat64())
		theta := []float64{10 * rng.Float64(), rng.NormFloat64(), 0.5 * rng.NormFloat64(), 0.05 * rng.NormFloat64()}
		for i := range 6 + rng.IntN(12) {
			x := math.Exp(float64(i)/2 - 3)
			b.x = append(b.x, x)
			b.y = append(b.y, model(x, theta, make([]float64, 4))+scatter*rng.NormFloat64())
			b.sd = append(b.sd, math.Exp(rng.NormFloat64()))
		}
		switch rng.IntN(8) {
		case 0:
			b.y[0] = 1e9
		case 1:
			for i := range b.y {
				b.y[i] = 0
			}
		case 2:
			b.sd[1] = math.Inf(1) // weight zero
		}
		p.Blocks = append(p.Blocks, b)
		p.Scatter = append(p.Scatter, fit.Scatter(rng.IntN(2)))
	}
	return p
}

func checkStationary(tb testing.TB, p *fit.Problem, r *fit.Result) {
	tb.Helper()
	m := len(p.Parameters)
	gradient, length := make([]float64, m), make([]float64, m)
	var total float64
	joint := len(p.Blocks) > 1
	allKnown := true
	for _, s := range p.Scatter {
		allKnown = allKnown && s == fit.Known
	}
	for k, b := range p.Blocks {
		n := b.Len()
		res, jac := make([]float64, n), mat.NewDense(n, m, nil)
		if err := b.Eval(res, jac, r.Theta); err != nil {
			tb.Fatal(err)
		}
		var ss float64
		for _, v := range res {
			ss += v * v
		}
		w := 1.0
		if joint && !allKnown && p.Scatter[k] == fit.Unknown {
			if ss < 1e-20 {
				return // fitted perfectly: the likelihood has no bound
			}
			w = float64(n) / ss
		}
		total += w * ss
		for i, v := range res {
			for j := range gradient {
				gradient[j] += w * v * jac.At(i, j)
				length[j] += w * jac.At(i, j) * jac.At(i, j)
			}
		}
	}
	for j, g := range gradient {
		if p.Parameters[j].Low == p.Parameters[j].High || length[j] == 0 || total < 1e-20 {
			continue
		}
		g /= math.Sqrt(length[j] * total)
		switch r.Edges[j] {
		case fit.OnLow:
			g = min(g, 0)
		case fit.OnHigh:
			g = max(g, 0)
		}
		if math.Abs(g) > 2e-6 {
			tb.Errorf("%s: relative gradient %.3g at %v, edges %v, %v, offset %g", p.Parameters[j].Name, g, r.Theta, r.Edges, r.Status, r.Offset)
		}
	}
}
