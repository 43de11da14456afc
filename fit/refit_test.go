package fit_test

import (
	"context"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"

	"ligancy/fit"
)

func refit(tb testing.TB, p *fit.Problem, start []float64, data fit.Replicates, set fit.RefitSettings) *fit.Refitted {
	tb.Helper()
	d, err := fit.Refit(context.Background(), p, [][]float64{start}, data, set)
	if err != nil {
		tb.Fatal(err)
	}
	return d
}

func parametric(tb testing.TB, p *fit.Problem, r *fit.Result, seed uint64) fit.Replicates {
	tb.Helper()
	data, err := fit.Parametric(p, r, seed)
	if err != nil {
		tb.Fatal(err)
	}
	return data
}

func column(d *fit.Refitted, j int) []float64 {
	n, _ := d.Theta.Dims()
	v := make([]float64, n)
	mat.Col(v, j, d.Theta)
	return v
}

// For a straight line the refits scatter exactly as the covariance says:
// 4,000 draws estimate a standard deviation to 1.1 %.
func TestParametricStraightLine(t *testing.T) {
	p := fiveOnALine(false)
	r := solve(t, p, fit.Settings{})
	d := refit(t, p, r.Theta, parametric(t, p, r, 1), fit.RefitSettings{Draws: 4000})
	for j := range 2 {
		v := column(d, j)
		near(t, "mean", stat.Mean(v, nil), r.Theta[j], 0.05)
		near(t, "sd", stat.StdDev(v, nil), math.Sqrt(r.Cov.At(j, j)), 0.05)
	}
	near(t, "correlation", stat.Correlation(column(d, 0), column(d, 1), nil), -0.2/math.Sqrt(0.06), 0.03)
	// SS/σ² has ν = 3 degrees of freedom.
	near(t, "mean SS", stat.Mean(d.Objective, nil), 1.2*3, 0.06)
}

// Collapsed replicates scatter like those that are not.
func TestParametricCollapsed(t *testing.T) {
	var sds, ss [2]float64
	for i, collapse := range []bool{false, true} {
		p := hill4(t, collapse)
		r := solve(t, p, fit.Settings{})
		d := refit(t, p, r.Theta, parametric(t, p, r, 1), fit.RefitSettings{Draws: 1500})
		sds[i] = stat.StdDev(column(d, 1), nil)
		ss[i] = stat.Mean(d.Objective, nil)
		near(t, "mean SS", ss[i], bestHill4, 0.02)
		for _, s := range d.Status {
			if s != fit.Converged && s != fit.AtEdge {
				t.Fatalf("a draw ended %v", s)
			}
		}
		iv := d.Interval(func(theta, _ []float64) float64 { return theta[1] }, 0.95)
		if math.Abs(iv.Low-7.89) > 0.12 || math.Abs(iv.High-9.55) > 0.12 || iv.Method != "bootstrap" {
			t.Errorf("%+v: far from the profile, 7.89 to 9.55", iv)
		}
	}
	near(t, "sd of ln L", sds[1], sds[0], 0.08)
}

// What a refit finds is the optimum of its own data: as good as from many starts.
func TestRefitsReachTheirOptimum(t *testing.T) {
	for _, p := range []*fit.Problem{hill4(t, true), adair4(t), global(t)} {
		r := solve(t, p, fit.Settings{})
		data := parametric(t, p, r, 7)
		const draws = 12
		warm := refit(t, p, r.Theta, data, fit.RefitSettings{Draws: draws})
		many := [][]float64{r.Theta}
		rng := rand.New(rand.NewPCG(1, 2))
		for range 8 {
			theta := slices.Clone(r.Theta)
			for j := range theta[:3] {
				theta[j] += rng.NormFloat64()
			}
			many = append(many, theta)
		}
		cold, err := fit.Refit(context.Background(), p, many, data, fit.RefitSettings{Draws: draws, Offset: 1e-7})
		if err != nil {
			t.Fatal(err)
		}
		for i := range draws {
			if warm.Objective[i] > cold.Objective[i]*(1+1e-6) {
				t.Errorf("draw %d: %.10g from the estimate, %.10g from many starts", i, warm.Objective[i], cold.Objective[i])
			}
		}
	}
}

func TestRefitWorkersChangeNoDigit(t *testing.T) {
	p := adair4(t)
	r := solve(t, p, fit.Settings{})
	data := parametric(t, p, r, 3)
	one := refit(t, p, r.Theta, data, fit.RefitSettings{Draws: 60, Workers: 1})
	seen := 0
	five := refit(t, p, r.Theta, data, fit.RefitSettings{Draws: 60, Workers: 5, Progress: func(done, of int) { seen = max(seen, done) }})
	if !mat.Equal(one.Theta, five.Theta) || !slices.Equal(one.Objective, five.Objective) || !slices.Equal(one.Status, five.Status) {
		t.Error("the refits differ")
	}
	if seen != 60 {
		t.Errorf("progress to %d of 60", seen)
	}
	// A draw does not depend on how many there are.
	ten := refit(t, p, r.Theta, data, fit.RefitSettings{Draws: 10})
	if !slices.Equal(ten.Objective, one.Objective[:10]) {
		t.Error("the first ten differ")
	}
	if other := refit(t, p, r.Theta, parametric(t, p, r, 4), fit.RefitSettings{Draws: 10}); slices.Equal(other.Objective, ten.Objective) {
		t.Error("another number, the same draws")
	}
}

func TestRefitInterrupted(t *testing.T) {
	p := hill4(t, true)
	r := solve(t, p, fit.Settings{})
	ctx, cancel := context.WithCancel(context.Background())
	d, err := fit.Refit(ctx, p, [][]float64{r.Theta}, parametric(t, p, r, 1), fit.RefitSettings{
		Draws: 200, Workers: 1, Progress: func(done, _ int) {
			if done == 50 {
				cancel()
			}
		}})
	if err != nil {
		t.Fatal(err)
	}
	reached := 0
	for _, s := range d.Status {
		if s != fit.NoAnswer {
			reached++
		}
	}
	if reached != 50 {
		t.Errorf("%d draws reached", reached)
	}
	if iv := d.Interval(func(theta, _ []float64) float64 { return theta[0] }, 0.95); !iv.LowOpen || !strings.Contains(iv.Why, "too few") {
		t.Errorf("%+v", iv)
	}
}

// Residual draws have the scatter of the residuals, whatever their shape.
func TestResidualDraws(t *testing.T) {
	p := hill4(t, false)
	r := solve(t, p, fit.Settings{})
	data, err := fit.Residual(p, r, 1)
	if err != nil {
		t.Fatal(err)
	}
	d := refit(t, p, r.Theta, data, fit.RefitSettings{Draws: 1000})
	near(t, "sd of ln K_R", stat.StdDev(column(d, 0), nil), math.Sqrt(r.Cov.At(0, 0)), 0.15)
	near(t, "mean SS", stat.Mean(d.Objective, nil), bestHill4, 0.03)
	rep := &fit.Replicate{Shift: make([]float64, 72), Within: make([]float64, 1)}
	data.Draw(5, rep)
	for i, s := range rep.Shift { // what was drawn is a residual, stretched
		e := (s + r.Residuals[i]) / math.Sqrt(72.0/69)
		if !slices.ContainsFunc(r.Residuals, func(v float64) bool { return math.Abs(v-stat.Mean(r.Residuals, nil)-e) < 1e-12 }) {
			t.Fatalf("%v is no residual", e)
		}
	}
	if _, err := fit.Residual(hill4(t, true), r, 1); err == nil {
		t.Error("collapsed replicates have no residuals of their own")
	}
}

// Six groups that differ by more than their points scatter: only draws of whole
// groups see it. The mean of six group means has the variance of those means/6.
func TestGroupDraws(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 3))
	level := func(x float64, p, g []float64) float64 { g[0] = 1; return p[0] }
	b := &simple{f: level}
	var group []int
	var means []float64
	for g := range 6 {
		centre := 10 + 2*rng.NormFloat64()
		means = append(means, centre)
		for range 10 {
			b.x = append(b.x, 0)
			b.y = append(b.y, centre)
			group = append(group, 100+7*g) // any numbers will do
		}
	}
	p := &fit.Problem{Parameters: free("level"), Blocks: []fit.Block{b}}
	r := solve(t, p, fit.Settings{})
	data, err := fit.ByGroup(p, group, 1)
	if err != nil {
		t.Fatal(err)
	}
	d := refit(t, p, r.Theta, data, fit.RefitSettings{Draws: 4000})
	_, sd := stat.PopMeanStdDev(means, nil)
	near(t, "sd", stat.StdDev(column(d, 0), nil), sd/math.Sqrt(6), 0.04)
	for _, c := range []struct {
		p     *fit.Problem
		group []int
		want  string
	}{
		{p, group[:3], "3 of 60 rows"},
		{p, make([]int, 60), "one group alone"},
		{hill4(t, true), append([]int{1}, make([]int, 23)...), "collapsed"},
	} {
		if _, err := fit.ByGroup(c.p, c.group, 1); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%v, want %q", err, c.want)
		}
	}
}

// growing is a hyperbola whose scatter is proportional to the curve: its data
// have to be replaced, shifting residuals would not do.
type growing struct {
	simple
}

func (g *growing) Clone() fit.Block { c := *g; return &c }

func (g *growing) Eval(res []float64, jac *mat.Dense, theta []float64) error {
	grad := make([]float64, len(theta))
	for i, x := range g.x {
		f := g.f(x, theta, grad)
		res[i] = (f - g.y[i]) / f
		if jac != nil {
			for j, d := range grad {
				jac.Set(i, j, d*g.y[i]/(f*f))
			}
		}
	}
	return nil
}

func (g *growing) Predict(mean, sd, theta []float64) {
	grad := make([]float64, len(theta))
	for i, x := range g.x {
		mean[i] = g.f(x, theta, grad)
		sd[i] = mean[i]
	}
}

func (g *growing) Observe(y []float64) { g.y = y }

func TestObservedBlocks(t *testing.T) {
	b := &growing{simple: simple{f: hyperbola}}
	for i := range 20 {
		x := math.Exp(float64(i)/3 - 3)
		b.x = append(b.x, x)
		b.y = append(b.y, 10*x/(2+x)*(1+0.05*math.Sin(9*float64(i))))
	}
	p := &fit.Problem{Parameters: free("V", "ln K"), Blocks: []fit.Block{b}}
	p.Starts = [][]float64{{8, 0}}
	r := solve(t, p, fit.Settings{Starts: 1})
	d := refit(t, p, r.Theta, parametric(t, p, r, 1), fit.RefitSettings{Draws: 2000})
	near(t, "sd of V", stat.StdDev(column(d, 0), nil), math.Sqrt(r.Cov.At(0, 0)), 0.06)
	near(t, "sd of ln K", stat.StdDev(column(d, 1), nil), math.Sqrt(r.Cov.At(1, 1)), 0.06)
	near(t, "SS", stat.Mean(d.Objective, nil), r.Objective, 0.03)
}

// Draws in which a quantity does not exist stay in the ranking.
func TestBootstrapOpenEnd(t *testing.T) {
	d := &fit.Refitted{Theta: mat.NewDense(1000, 1, nil), Objective: make([]float64, 1000), Status: make([]fit.Status, 1000)}
	for i := range 1000 {
		d.Theta.Set(i, 0, float64(i))
		d.Status[i] = fit.Converged
	}
	q := func(theta, _ []float64) float64 {
		if theta[0] >= 900 {
			return math.Inf(1)
		}
		return theta[0]
	}
	iv := d.Interval(q, 0.95)
	if math.Abs(iv.Low-24.975) > 1e-9 || iv.LowOpen || !iv.HighOpen || iv.High != 899 || iv.Why == "" {
		t.Errorf("%+v", iv)
	}
	for i := range d.Status {
		d.Status[i] = fit.Stopped
	}
	if iv := d.Interval(q, 0.95); !iv.LowOpen || !iv.HighOpen {
		t.Errorf("nothing converged: %+v", iv)
	}
}

func TestRefitComplaints(t *testing.T) {
	p := fiveOnALine(false)
	r := solve(t, p, fit.Settings{})
	data := parametric(t, p, r, 1)
	if _, err := fit.Refit(context.Background(), p, nil, data, fit.RefitSettings{}); err == nil {
		t.Error("no start")
	}
	if _, err := fit.Refit(context.Background(), p, [][]float64{{1}}, data, fit.RefitSettings{}); err == nil {
		t.Error("a short start")
	}
	two := fiveOnALine(false)
	b := *two.Blocks[0].(*simple)
	b.x, b.y = b.x[:2], b.y[:2]
	two.Blocks[0] = &b
	if _, err := fit.Parametric(two, solve(t, two, fit.Settings{}), 1); err == nil {
		t.Error("no scatter to draw from")
	}
	if _, err := fit.Parametric(hill4(t, false), r, 1); err == nil {
		t.Error("the result of another problem")
	}
}

func benchRefit(b *testing.B, p *fit.Problem) {
	r := solve(b, p, fit.Settings{})
	data := parametric(b, p, r, 1)
	b.ReportAllocs()
	b.ResetTimer()
	for range b.N {
		d := refit(b, p, r.Theta, data, fit.RefitSettings{Draws: 1000, Workers: 1})
		b.ReportMetric(float64(unreached(d)), "failed")
	}
}

func BenchmarkRefitHill4(b *testing.B)  { benchRefit(b, hill4(b, true)) }
func BenchmarkRefitAdair4(b *testing.B) { benchRefit(b, adair4(b)) }
func BenchmarkRefitGlobal(b *testing.B) { benchRefit(b, global(b)) }
