package fit_test

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"ligancy/fit"
)

func likelihood(tb testing.TB, p *fit.Problem, r *fit.Result) fit.Likelihood {
	tb.Helper()
	l, ok := r.Likelihood(p)
	if !ok {
		tb.Fatal("no likelihood")
	}
	return l
}

// Source: AICc of the treated membranes computed from R's and SciPy's sums of
// squares: 64.22 one class, 64.26 Hill, 64.26 two-site Adair, constants of the
// normal law, N·(ln 2π + 1), left out.
func TestAICcOfMembranes(t *testing.T) {
	var all []float64
	for _, c := range []struct {
		constants int
		f         formula
		want      float64
	}{
		{2, hyperbola, 64.22}, {3, hill, 64.26}, {3, pair, 64.26},
	} {
		p := membranes(t, "treated", c.constants, c.f)
		if c.want == 64.26 {
			p.Parameters[1] = fit.Parameter{Name: "1", Low: -20, High: 20, StartLow: -4, StartHigh: 6}
			p.Parameters[2] = fit.Parameter{Name: "2", Low: -20, High: 20, StartLow: -2, StartHigh: 6}
		}
		l := likelihood(t, p, solve(t, p, fit.Settings{Starts: 40}))
		if l.K != c.constants+1 || l.N != 12 {
			t.Errorf("K = %d, N = %d", l.K, l.N)
		}
		aicc, ok := l.AICc()
		if got := aicc - 12*(math.Log(2*math.Pi)+1); !ok || math.Abs(got-c.want) > 0.005 {
			t.Errorf("%d constants: %.4f, want %.2f", c.constants, got, c.want)
		}
		all = append(all, aicc)
	}
	w := fit.Weights(all)
	for _, v := range w { // a tie: each about a third
		if v < 0.3 || v > 0.37 {
			t.Errorf("weights %v", w)
		}
	}
}

// ln L of a normal sample is the sum of the log densities at σ² = SS/N.
func TestLikelihood(t *testing.T) {
	p := fiveOnALine(false)
	r := solve(t, p, fit.Settings{})
	l := likelihood(t, p, r)
	v := 3.6 / 5
	var want float64
	for _, e := range r.Residuals {
		want -= e*e/(2*v) + math.Log(2*math.Pi*v)/2
	}
	near(t, "ln L", l.LnL, want, 1e-12)
	near(t, "BIC", l.BIC(), -2*want+3*math.Log(5), 1e-12)
	known := *p
	known.Scatter = []fit.Scatter{fit.Known}
	l = likelihood(t, &known, solve(t, &known, fit.Settings{}))
	near(t, "ln L, σ known", l.LnL, -3.6/2-5*math.Log(2*math.Pi)/2, 1e-12)
	if l.K != 2 {
		t.Errorf("K = %d", l.K)
	}
	// Too few points for AICc: N = 5, K = 4.
	if _, ok := (fit.Likelihood{K: 4, N: 5}).AICc(); ok {
		t.Error("AICc does not exist at N = K + 1")
	}
	// Exact: K = 4 and N = 8 add 2K(K+1)/(N−K−1) = 40/3.
	if a, _ := (fit.Likelihood{K: 4, N: 8}).AICc(); math.Abs(a-8-40.0/3) > 1e-12 {
		t.Errorf("%v", a)
	}
	perfect := *r
	perfect.SS = []float64{0}
	if _, ok := perfect.Likelihood(p); ok {
		t.Error("a perfect fit has no likelihood")
	}
}

func TestLikelihoodOfCollapsed(t *testing.T) {
	a, b := hill4(t, false), hill4(t, true)
	la, lb := likelihood(t, a, solve(t, a, fit.Settings{})), likelihood(t, b, solve(t, b, fit.Settings{}))
	near(t, "ln L", lb.LnL, la.LnL, 1e-12)
	if la.N != lb.N || la.K != lb.K {
		t.Errorf("%+v and %+v", la, lb)
	}
}

func TestWeights(t *testing.T) {
	w := fit.Weights([]float64{10, 12, math.NaN(), 10})
	e := math.Exp(-1)
	for i, want := range []float64{1 / (2 + e), e / (2 + e), 0, 1 / (2 + e)} {
		if math.Abs(w[i]-want) > 1e-15 {
			t.Errorf("weights %v", w)
		}
	}
	if w := fit.Weights([]float64{math.NaN()}); w[0] != 0 {
		t.Errorf("no criterion at all: %v", w)
	}
	if w := fit.Weights(nil); len(w) != 0 {
		t.Error("nothing")
	}
}

// Reference: upper 5 % point of χ² with 1 degree of freedom 3.841459, with 3
// 7.814728 (published tables).
func TestLikelihoodRatio(t *testing.T) {
	for d, x := range map[int]float64{1: 3.841459, 3: 7.814728} {
		r, err := fit.LikelihoodRatio(fit.Likelihood{LnL: -x / 2, K: 2, N: 20}, fit.Likelihood{K: 2 + d, N: 20})
		if err != nil {
			t.Fatal(err)
		}
		near(t, "p", r.ChiSquare, 0.05, 1e-5)
		if r.Freedom != d || r.Drawn != 0 || r.Draws != 1 {
			t.Errorf("%+v", r)
		}
	}
	if _, err := fit.LikelihoodRatio(fit.Likelihood{K: 3}, fit.Likelihood{K: 3}); err == nil {
		t.Error("nothing freer")
	}
	if _, err := fit.LikelihoodRatio(fit.Likelihood{K: 3, N: 4}, fit.Likelihood{K: 4, N: 5}); err == nil {
		t.Error("other data")
	}
}

// Line against parabola when the line holds: the bootstrap has to agree with
// the exact F test, and to be about uniform over studies.
func TestLikelihoodRatioByDraws(t *testing.T) {
	parabola := func(x float64, p, g []float64) float64 {
		g[0], g[1], g[2] = 1, x, x*x
		return p[0] + p[1]*x + p[2]*x*x
	}
	rng := rand.New(rand.NewPCG(5, 5))
	small := 0
	const studies = 40
	for range studies {
		b := &simple{f: straight}
		for i := range 8 {
			b.x = append(b.x, float64(i))
			b.y = append(b.y, float64(i)+rng.NormFloat64())
		}
		c := *b
		c.f = parabola
		k := fit.Contest{
			Special: &fit.Problem{Parameters: free("a", "b"), Blocks: []fit.Block{b}},
			Freer:   &fit.Problem{Parameters: free("a", "b", "c"), Blocks: []fit.Block{&c}},
		}
		k.SpecialResult, k.FreerResult = solve(t, k.Special, fit.Settings{}), solve(t, k.Freer, fit.Settings{})
		r, err := k.LikelihoodRatio(context.Background(), 1, fit.RefitSettings{Draws: 499})
		if err != nil {
			t.Fatal(err)
		}
		// F = (SS0 − SS1)/(SS1/5) and 1, 5 degrees of freedom.
		ss0, ss1 := k.SpecialResult.Objective, k.FreerResult.Objective
		exact, ok := fit.TestLackOfFit(ss0, 8, 2, ss1, 3)
		if !ok || math.Abs(exact.P-r.Draws) > 0.09 {
			t.Errorf("by draws %.3f, exact %.3f", r.Draws, exact.P)
		}
		if r.Drawn != 499 || r.Freedom != 1 {
			t.Errorf("%+v", r)
		}
		if r.Draws < 0.5 {
			small++
		}
	}
	if small < studies/4 || small > studies*3/4 {
		t.Errorf("%d of %d below 0.5", small, studies)
	}
}

// Reference: upper 5 % point of F with 3 and 10 degrees of freedom 3.7083
// (published tables).
func TestLackOfFitF(t *testing.T) {
	// pure = 10 over 10 degrees, SS − pure = 3·3.7083
	l, ok := fit.TestLackOfFit(10+3*3.7083, 15, 2, 10, 5)
	if !ok || l.Lack != 3 || l.Error != 10 {
		t.Fatalf("%+v", l)
	}
	near(t, "F", l.F, 3.7083, 1e-12)
	near(t, "p", l.P, 0.05, 1e-4)
	for _, c := range []struct {
		n, p, m int
		pure    float64
	}{{5, 2, 5, 0}, {10, 5, 5, 1}, {10, 2, 5, 0}, {10, 2, 5, math.NaN()}} {
		if _, ok := fit.TestLackOfFit(3, c.n, c.p, c.pure, c.m); ok {
			t.Errorf("%+v: there is no such test", c)
		}
	}
}

func TestPureError(t *testing.T) {
	ss, groups := fit.PureError([]float64{1, 2, 3, 5, 9, 7}, []int{4, 4, 4, 1, 1, 8})
	if ss != 2+8 || groups != 3 {
		t.Errorf("%v in %d groups", ss, groups)
	}
	// The replicates of the study, collapsed and not.
	b, r := hill4(t, true).Blocks[0].(*curve), solve(t, hill4(t, false), fit.Settings{})
	group := make([]int, 72)
	for i := range group {
		group[i] = i / 3
	}
	pure, m := fit.PureError(r.Residuals, group)
	near(t, "pure error", pure, b.ss, 1e-10)
	l, ok := fit.TestLackOfFit(r.Objective, 72, 3, pure, m)
	if !ok || l.Lack != 21 || l.Error != 48 || l.P < 0.01 || l.P > 0.99 { // the model is the true one
		t.Errorf("%+v", l)
	}
}

// Brute force: all orders of a signs + and b signs −.
func TestRunsAgainstEnumeration(t *testing.T) {
	for _, c := range [][2]int{{1, 1}, {3, 2}, {5, 5}, {2, 7}, {6, 4}} {
		n := c[0] + c[1]
		count := map[int]float64{}
		all := 0.0
		for mask := range 1 << n {
			above := 0
			runs := 1
			for i := range n {
				above += mask >> i & 1
				if i > 0 && mask>>i&1 != mask>>(i-1)&1 {
					runs++
				}
			}
			if above == c[0] {
				count[runs]++
				all++
			}
		}
		for runs, k := range count {
			res := withRuns(runs, c[0], c[1])
			got, ok := fit.Runs(res)
			if !ok || got.Runs != runs || got.Above != c[0] || got.Below != c[1] {
				t.Fatalf("%v of %v: %+v", runs, c, got)
			}
			var few, different, mean float64
			for r, m := range count {
				if r <= runs {
					few += m / all
				}
				if m <= k {
					different += m / all
				}
				mean += float64(r) * m / all
			}
			near(t, "few", got.Few, few, 1e-9)
			near(t, "different", got.Different, different, 1e-9)
			near(t, "expected", got.Expected, mean, 1e-9)
		}
	}
	// Published table (Swed & Eisenhart 1943): with ten of each, six runs or
	// fewer have a probability of 0.019.
	got, _ := fit.Runs(withRuns(6, 10, 10))
	if math.Abs(got.Few-0.019) > 5e-4 {
		t.Errorf("P(≤ 6) = %v", got.Few)
	}
	if _, ok := fit.Runs([]float64{1, 2, 0, 3}); ok {
		t.Error("all on one side")
	}
	if _, ok := fit.Runs(nil); ok {
		t.Error("nothing")
	}
	// Zeros are left out; many residuals do not overflow.
	if got, ok := fit.Runs([]float64{1, 0, 1, -1, 0, -1}); !ok || got.Runs != 2 || got.Above != 2 || got.Below != 2 {
		t.Errorf("%+v", got)
	}
	if got, ok := fit.Runs(withRuns(3000, 5000, 5000)); !ok || !(got.Few >= 0 && got.Few < 1e-9) || got.Different < got.Few {
		t.Errorf("%+v", got)
	}
}

// withRuns makes residuals with so many runs, a above and b below zero.
func withRuns(runs, a, b int) []float64 {
	for _, first := range []float64{1, -1} {
		left := map[float64]int{1: a, -1: b}
		blocks := map[float64]int{first: (runs + 1) / 2, -first: runs / 2}
		if blocks[1] > a || blocks[-1] > b {
			continue
		}
		var res []float64
		for r, s := 0, first; r < runs; r, s = r+1, -s {
			blocks[s]--
			n := 1
			if blocks[s] == 0 {
				n = left[s]
			}
			for range n {
				res = append(res, s)
			}
			left[s] -= n
		}
		return res
	}
	panic("no such order")
}

// Closed form of linear models: the residual of a row left out is e/(1−h), h
// its leverage (the PRESS residual).
func TestLeaveOut(t *testing.T) {
	p := fiveOnALine(false)
	r := solve(t, p, fit.Settings{})
	l, err := fit.LeaveOut(context.Background(), p, r, []int{0, 1, 2, 3, 4}, fit.RefitSettings{})
	if err != nil {
		t.Fatal(err)
	}
	var want float64
	for i, e := range r.Residuals {
		h := 0.2 + (float64(i)-2)*(float64(i)-2)/10
		press := e / (1 - h)
		want += press * press
		near(t, "row", l.Groups[i], press*press, 1e-9)
	}
	near(t, "SS", l.SS, want, 1e-9)
	near(t, "rms", l.RootMeanSquare(), math.Sqrt(want/5), 1e-9)
	if l.N != 5 || len(l.Failed) != 0 {
		t.Errorf("%+v", l)
	}
	// By concentration of the study: a little more than the fit itself leaves.
	q := hill4(t, false)
	group := make([]int, 72)
	for i := range group {
		group[i] = i / 3
	}
	rq := solve(t, q, fit.Settings{})
	l, err = fit.LeaveOut(context.Background(), q, rq, group, fit.RefitSettings{})
	if err != nil || !(l.SS > rq.Objective && l.SS < 1.3*rq.Objective) {
		t.Errorf("%v from %v, %v", l.SS, rq.Objective, err)
	}
	for _, g := range [][]int{{0, 1}, {0, 0, 0, 0, 0}, {0, 1, 2, 3, -1}, {0, 1, 2, 3, 9}} {
		if _, err := fit.LeaveOut(context.Background(), p, r, g, fit.RefitSettings{}); err == nil {
			t.Errorf("groups %v", g)
		}
	}
}
