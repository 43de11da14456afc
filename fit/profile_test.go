package fit_test

import (
	"context"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"

	"ligancy/fit"
)

func profiler(tb testing.TB, p *fit.Problem, r *fit.Result, level float64) *fit.Profiler {
	tb.Helper()
	f, err := fit.NewProfiler(p, r, level)
	if err != nil {
		tb.Fatal(err)
	}
	return f
}

// Source: GSL 2.7.1, SciPy 1.10.1, lmfit 1.1.0 and R 4.2.2 agree on these bounds
// to 2e-6.
func TestProfileHill4(t *testing.T) {
	for _, collapse := range []bool{false, true} {
		p := hill4(t, collapse)
		f := profiler(t, p, solve(t, p, fit.Settings{}), 0.95)
		for j, want := range [][2]float64{{-0.101038, 0.342996}, {7.891061, 9.554936}, {-4.717745, -4.356593}} {
			iv := f.Parameter(context.Background(), j)
			if math.Abs(iv.Low-want[0]) > 2e-6 || math.Abs(iv.High-want[1]) > 2e-6 {
				t.Errorf("%s: %.9f to %.9f, want %v", p.Parameters[j].Name, iv.Low, iv.High, want)
			}
			if iv.LowOpen || iv.HighOpen || iv.LowEdge || iv.HighEdge || iv.Why != "" || iv.Level != 0.95 || iv.Method != "profile" {
				t.Errorf("%+v", iv)
			}
		}
		if f.Better() != nil {
			t.Error("a lower objective than the lowest")
		}
	}
}

// Source: R's confint of nls(rate ~ V*conc/(K + conc)) on the treated membranes,
// as its documentation of profiles prints it (from memory): V 197.30212848 to
// 229.29006490, K 0.04692517 to 0.08615995.
func TestProfileMichaelisMenten(t *testing.T) {
	p := membranes(t, "treated", 2, hyperbola)
	f := profiler(t, p, solve(t, p, fit.Settings{}), 0.95)
	v, k := f.Parameter(context.Background(), 0), f.Parameter(context.Background(), 1)
	near(t, "V low", v.Low, 197.30212848, 2e-5)
	near(t, "V high", v.High, 229.29006490, 2e-5)
	near(t, "K low", math.Exp(k.Low), 0.04692517, 2e-4)
	near(t, "K high", math.Exp(k.High), 0.08615995, 2e-4)
}

// A straight line has t intervals exactly, whatever the parameter or linear
// combination; with σ known, z intervals.
func TestProfileStraightLine(t *testing.T) {
	at2 := func(theta, grad []float64) float64 {
		grad[0], grad[1] = 1, 2
		return theta[0] + 2*theta[1]
	}
	p := fiveOnALine(false)
	r := solve(t, p, fit.Settings{})
	q := distuv.StudentsT{Sigma: 1, Nu: 3}.Quantile(0.975)
	known := *p
	known.Scatter = []fit.Scatter{fit.Known}
	rk := solve(t, &known, fit.Settings{})
	for _, c := range []struct {
		name     string
		wanted   fit.Wanted
		value, v float64 // estimate, variance for σ = 1
	}{
		{"a", fit.Wanted{Parameter: 0}, 1.4, 0.6},
		{"b", fit.Wanted{Parameter: 1}, 0.8, 0.1},
		{"a+2b", fit.Wanted{Quantity: at2}, 3, 0.2},
	} {
		for _, x := range []struct {
			p    *fit.Problem
			r    *fit.Result
			half float64
		}{
			{p, r, q * math.Sqrt(1.2*c.v)},
			{&known, rk, distuv.UnitNormal.Quantile(0.975) * math.Sqrt(c.v)},
		} {
			ivs, _, err := fit.Profiles(context.Background(), x.p, x.r, []fit.Wanted{c.wanted}, fit.ProfileSettings{})
			if err != nil {
				t.Fatal(err)
			}
			near(t, c.name+" low", ivs[0].Low, c.value-x.half, 1e-9)
			near(t, c.name+" high", ivs[0].High, c.value+x.half, 1e-9)
		}
	}
}

// The ends of a profile by brute force: at each value of the parameter all the
// others are fitted from many starts, and the limit found by bisection.
func TestProfileAgainstRefits(t *testing.T) {
	p := adair4(t)
	r := solve(t, p, fit.Settings{})
	f := profiler(t, p, r, 0.9)
	tq := distuv.StudentsT{Sigma: 1, Nu: 68}.Quantile(0.95)
	limit := r.Objective * (1 + tq*tq/68)
	at := func(j int, v float64) float64 {
		q := *p
		q.Parameters = append([]fit.Parameter(nil), p.Parameters...)
		q.Parameters[j].Low, q.Parameters[j].High = v, v
		q.Starts = [][]float64{r.Theta}
		return solve(t, &q, fit.Settings{Starts: 5}).Objective
	}
	for j := range 3 {
		iv := f.Parameter(context.Background(), j)
		for _, far := range []float64{iv.Low - 0.5, iv.High + 0.5} {
			in, out := r.Theta[j], far
			for range 45 {
				if mid := (in + out) / 2; at(j, mid) < limit {
					in = mid
				} else {
					out = mid
				}
			}
			end := iv.Low
			if far > iv.High {
				end = iv.High
			}
			if math.Abs(end-in) > 1e-7 {
				t.Errorf("%s: %.10f, by refits %.10f", p.Parameters[j].Name, end, in)
			}
		}
	}
}

// ln K4 of the stepwise study is not held below: its interval ends on the bound.
func TestProfileReachesBound(t *testing.T) {
	p := adair4(t)
	f := profiler(t, p, solve(t, p, fit.Settings{}), 0.95)
	iv := f.Parameter(context.Background(), 3)
	if !iv.LowEdge || iv.LowOpen || iv.Low != p.Parameters[3].Low || iv.HighEdge || iv.HighOpen || iv.Why == "" {
		t.Errorf("%+v", iv)
	}
	// Without the bound it is open, as far as it can be followed.
	p.Parameters[3].Low, p.Parameters[2].High = math.Inf(-1), math.Inf(1)
	f = profiler(t, p, solve(t, p, fit.Settings{}), 0.95)
	iv = f.Parameter(context.Background(), 3)
	if !iv.LowOpen || iv.LowEdge || iv.HighOpen || iv.Low > -20 || math.IsInf(iv.Low, 0) || iv.Why == "" {
		t.Errorf("%+v", iv)
	}
	// The same of a quantity, by its pull: K4 itself reaches zero, no further.
	f = profiler(t, p, solve(t, p, fit.Settings{}), 0.95)
	k4 := f.Quantity(context.Background(), func(theta, grad []float64) float64 {
		clear(grad)
		grad[3] = math.Exp(theta[3])
		return grad[3]
	})
	if !k4.LowOpen || k4.Low > 1e-3 || k4.Low < 0 || k4.HighOpen {
		t.Errorf("%+v", k4)
	}
	near(t, "K4 high", k4.High, math.Exp(iv.High), 1e-7)
}

// Parameters that are already on a bound have their interval from there.
func TestProfileFromBound(t *testing.T) {
	p := &fit.Problem{Parameters: free("b1", "b2"), Blocks: []fit.Block{valley{}}}
	p.Parameters[0].High = 0.5
	p.Starts = [][]float64{{-1.2, 1}}
	r := solve(t, p, fit.Settings{})
	f := profiler(t, p, r, 0.95)
	iv := f.Parameter(context.Background(), 0)
	// SS(b1) = (1 − b1)², so that (1 − b1)² = 0.25·(1 + t²/1) at the lower end.
	q := distuv.StudentsT{Sigma: 1, Nu: 1}.Quantile(0.975)
	near(t, "b1 low", iv.Low, 1-0.5*math.Sqrt(1+q*q), 1e-9)
	if iv.High != 0.5 || !iv.HighEdge || iv.HighOpen || iv.LowEdge {
		t.Errorf("%+v", iv)
	}
}

// A plateau that was not reached: the half-saturation has no upper end but its
// bound, nor has the plateau; their ratio has both.
func TestProfileOpenPlateau(t *testing.T) {
	b := &simple{f: func(x float64, p, g []float64) float64 {
		v := math.Exp(p[0])
		y := hyperbola(x, []float64{v, p[1]}, g)
		g[0] *= v
		return y
	}}
	for i := range 12 {
		x := 0.02 * float64(i+1)
		b.x = append(b.x, x)
		b.y = append(b.y, x/(1+x)+0.03*math.Sin(5*float64(i)))
	}
	p := &fit.Problem{Parameters: free("ln V", "ln K"), Blocks: []fit.Block{b}}
	for j := range p.Parameters {
		p.Parameters[j].StartLow, p.Parameters[j].StartHigh = -2, 3
		p.Parameters[j].Low, p.Parameters[j].High = -20, 30
	}
	r := solve(t, p, fit.Settings{})
	plateau := func(theta, grad []float64) float64 {
		grad[0], grad[1] = math.Exp(theta[0]), 0
		return grad[0]
	}
	ratio := func(theta, grad []float64) float64 {
		grad[0], grad[1] = 1, -1
		return theta[0] - theta[1]
	}
	ivs, _, err := fit.Profiles(context.Background(), p, r,
		[]fit.Wanted{{Parameter: 1}, {Quantity: plateau}, {Quantity: ratio}}, fit.ProfileSettings{})
	if err != nil {
		t.Fatal(err)
	}
	if iv := ivs[0]; !iv.HighEdge || iv.LowOpen || iv.High != 30 || !(iv.Low < r.Theta[1]) || iv.Why == "" {
		t.Errorf("ln K: %+v", iv)
	}
	if iv := ivs[1]; !iv.HighOpen || iv.LowOpen || iv.High < 1e3 || iv.Why == "" {
		t.Errorf("V: %+v", iv)
	}
	if iv := ivs[2]; iv.LowOpen || iv.HighOpen || !(iv.High-iv.Low < 1) {
		t.Errorf("ratio: %+v", iv)
	}
}

func TestProfileOfNothing(t *testing.T) {
	p := fiveOnALine(false)
	r := solve(t, p, fit.Settings{})
	f := profiler(t, p, r, 0.95)
	iv := f.Quantity(context.Background(), func(theta, grad []float64) float64 { return math.Inf(1) })
	if !iv.LowOpen || !iv.HighOpen || !strings.Contains(iv.Why, "does not exist") {
		t.Errorf("an infinite quantity: %+v", iv)
	}
	// A quantity that does not exist beyond some place is followed up to there.
	wall := r.Theta[1] + 0.05
	iv = f.Quantity(context.Background(), func(theta, grad []float64) float64 {
		grad[0], grad[1] = 0, 1
		if theta[1] > wall {
			return math.Inf(1)
		}
		return theta[1]
	})
	if !iv.HighOpen || iv.LowOpen || iv.High > wall || iv.High < wall-0.01 {
		t.Errorf("up to %g: %+v", wall, iv)
	}
	// A constant has no width.
	iv = f.Quantity(context.Background(), func(theta, grad []float64) float64 { clear(grad); return 3 })
	if math.Abs(iv.Low-3) > 1e-9 || math.Abs(iv.High-3) > 1e-9 {
		t.Errorf("a constant: %+v", iv)
	}
	if _, err := fit.NewProfiler(p, r, 1); err == nil {
		t.Error("a level of 1")
	}
	if _, err := fit.NewProfiler(hill4(t, true), r, 0.95); err == nil {
		t.Error("the result of another problem")
	}
	p.Parameters[0].Low, p.Parameters[0].High = 1.4, 1.4
	f = profiler(t, p, solve(t, p, fit.Settings{}), 0.95)
	if iv := f.Parameter(context.Background(), 0); iv.Low != 1.4 || iv.High != 1.4 || iv.Why != "held fixed" {
		t.Errorf("a fixed parameter: %+v", iv)
	}
	two := fiveOnALine(false)
	b := *two.Blocks[0].(*simple)
	b.x, b.y = b.x[:2], b.y[:2]
	two.Blocks[0] = &b
	f = profiler(t, two, solve(t, two, fit.Settings{}), 0.95)
	if iv := f.Parameter(context.Background(), 0); !iv.LowOpen || !iv.HighOpen || iv.Why == "" {
		t.Errorf("no freedom left: %+v", iv)
	}
}

// Several scatters: the ends solve the likelihood-ratio equation, as a scan of
// refits with the parameter held shows.
func TestProfileSeveralScatters(t *testing.T) {
	p := twoTables()
	r := solve(t, p, fit.Settings{})
	f := profiler(t, p, r, 0.95)
	iv := f.Parameter(context.Background(), 1)
	nu := float64(r.N - r.Constants)
	q := distuv.StudentsT{Sigma: 1, Nu: nu}.Quantile(0.975)
	limit := r.Objective + float64(r.N)*math.Log1p(q*q/nu)
	for _, end := range []float64{iv.Low, iv.High} {
		h := *p
		h.Parameters = append([]fit.Parameter(nil), p.Parameters...)
		h.Parameters[1].Low, h.Parameters[1].High = end, end
		near(t, "objective", solve(t, &h, fit.Settings{}).Objective, limit, 1e-9)
	}
	if !(iv.Low < r.Theta[1] && r.Theta[1] < iv.High) {
		t.Errorf("%v of %v", iv, r.Theta[1])
	}
}

// twoTables are two hyperbolas of one half-saturation and different scatter.
func twoTables() *fit.Problem {
	first := func(x float64, p, g []float64) float64 { return hyperbola(x, p[:2], g) }
	second := func(x float64, p, g []float64) float64 {
		f := hyperbola(x, []float64{p[2], p[1]}, g)
		g[2], g[0] = g[0], 0
		return f
	}
	a, b := &simple{f: first}, &simple{f: second}
	for i := range 16 {
		x := math.Exp(float64(i)/3 - 2.5)
		a.x, b.x = append(a.x, x), append(b.x, x)
		a.y = append(a.y, 10*x/(1.5+x)+0.1*math.Sin(11*float64(i)))
		b.y = append(b.y, 3*x/(1.5+x)+0.3*math.Cos(7*float64(i)))
	}
	return &fit.Problem{Parameters: free("V1", "ln K", "V2"), Blocks: []fit.Block{a, b}}
}

// A start in the wrong valley: the profile finds the lower one, and says so.
func TestProfileFindsBetterMinimum(t *testing.T) {
	p := &fit.Problem{Parameters: free("a"), Blocks: []fit.Block{hostile{3, func(res []float64, jac *mat.Dense, th []float64) error {
		// Two wells: the one near 2 is lower.
		a := th[0]
		res[0] = 1 + 0.05*(2-a)
		res[1] = 0.3 * (a + 2) * (a - 2)
		if jac != nil {
			jac.Set(0, 0, -0.05)
			jac.Set(1, 0, 0.6*a)
		}
		return nil
	}}}}
	p.Starts = [][]float64{{-2.1}}
	wrong := solve(t, p, fit.Settings{Starts: 1})
	if wrong.Theta[0] > 0 {
		t.Fatalf("the start is in the right valley: %v", wrong.Theta)
	}
	ivs, r, err := fit.Profiles(context.Background(), p, wrong, []fit.Wanted{{Parameter: 0}}, fit.ProfileSettings{})
	if err != nil {
		t.Fatal(err)
	}
	near(t, "a", r.Theta[0], 2.03380179022, 1e-9) // root of 0.0025a − 0.1025 + 0.18a·(a² − 4) = 0, by hand
	if !strings.Contains(strings.Join(r.Warnings, " "), "a profile found it") || r.Agreeing != 0 {
		t.Errorf("warnings %v, %d agree", r.Warnings, r.Agreeing)
	}
	if !(ivs[0].Low < 2 && ivs[0].High > 2) {
		t.Errorf("%+v", ivs[0])
	}
}

func TestProfilesWorkersAndInterruption(t *testing.T) {
	p := hill4(t, true)
	r := solve(t, p, fit.Settings{})
	var wanted []fit.Wanted
	for j := range p.Parameters {
		wanted = append(wanted, fit.Wanted{Parameter: j}, fit.Wanted{Quantity: func(theta, grad []float64) float64 {
			clear(grad)
			grad[j] = math.Exp(theta[j])
			return grad[j]
		}})
	}
	one, _, err := fit.Profiles(context.Background(), p, r, wanted, fit.ProfileSettings{Workers: 1})
	if err != nil {
		t.Fatal(err)
	}
	most := 0
	four, _, err := fit.Profiles(context.Background(), p, r, wanted, fit.ProfileSettings{Workers: 4, Progress: func(done, of int) {
		most = max(most, done)
		if of != 6 {
			t.Errorf("of %d intervals", of)
		}
	}})
	if err != nil || most != 6 {
		t.Fatal(err, most)
	}
	if d := cmp.Diff(one, four); d != "" {
		t.Error(d)
	}
	for j := range p.Parameters { // a profile does not care for the scale
		near(t, "low", one[2*j+1].Low, math.Exp(one[2*j].Low), 1e-8)
		near(t, "high", one[2*j+1].High, math.Exp(one[2*j].High), 1e-8)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	open, _, err := fit.Profiles(ctx, adair4(t), solve(t, adair4(t), fit.Settings{}), []fit.Wanted{{Parameter: 3}}, fit.ProfileSettings{})
	if err != nil || !open[0].LowOpen || !strings.Contains(open[0].Why, "interrupted") {
		t.Errorf("%+v, %v", open, err)
	}
}

func TestTrace(t *testing.T) {
	p := hill4(t, true)
	r := solve(t, p, fit.Settings{})
	f := profiler(t, p, r, 0.95)
	iv := f.Parameter(context.Background(), 1)
	points := f.Trace(context.Background(), 1, []float64{iv.High, 8, iv.Low, 9, 1e6})
	if len(points) != 5 {
		t.Fatalf("%d points", len(points))
	}
	lowest := 0
	for i, q := range points {
		if i > 0 && !(q.Value > points[i-1].Value) {
			t.Error("the values are not in order")
		}
		if q.Objective < points[lowest].Objective {
			lowest = i
		}
		if q.Theta[1] != q.Value {
			t.Errorf("θ = %v at %v", q.Theta, q.Value)
		}
	}
	if points[lowest].Value != r.Theta[1] {
		t.Errorf("lowest at %v", points[lowest].Value)
	}
	near(t, "both ends", points[0].Objective, points[4].Objective, 1e-9)
	// Along the ridge ln K_R falls as ln L rises.
	if !(points[0].Theta[0] > r.Theta[0] && points[4].Theta[0] < r.Theta[0]) {
		t.Errorf("K_R goes from %v to %v", points[0].Theta[0], points[4].Theta[0])
	}
}

func BenchmarkProfileHill4(b *testing.B) {
	p := hill4(b, true)
	r := solve(b, p, fit.Settings{})
	b.ReportAllocs()
	for range b.N {
		f, err := fit.NewProfiler(p, r, 0.95)
		if err != nil {
			b.Fatal(err)
		}
		for j := range p.Parameters {
			f.Parameter(context.Background(), j)
		}
	}
}

// Where the ratio of affinities is hardly held, the profile has several
// branches: beyond a closed end no refit, from whatever start, comes below the
// limit; at an end on a bound, one does.
func TestProfileBranches(t *testing.T) {
	rng := rand.New(rand.NewPCG(21, 1))
	studies := 12
	if testing.Short() {
		studies = 3
	}
	for range studies {
		c := &curve{model: concerted}
		for i := range 24 {
			c.x = append(c.x, math.Exp(math.Log(0.1)+math.Log(1e4)*float64(i)/23))
			c.root = append(c.root, 1)
		}
		c.y = make([]float64, 24)
		concerted(c.y, nil, c.x, []float64{0, math.Log(1e5), math.Log(1e-3)})
		for i := range c.y {
			c.y[i] += 0.02 * rng.NormFloat64()
		}
		p := &fit.Problem{Parameters: boxes(boxHill4), Blocks: []fit.Block{c}}
		r := solve(t, p, fit.Settings{})
		f := profiler(t, p, r, 0.95)
		q := distuv.StudentsT{Sigma: 1, Nu: 21}.Quantile(0.975)
		limit := r.Objective * (1 + q*q/21)
		for j := range p.Parameters {
			iv := f.Parameter(context.Background(), j)
			for _, e := range []struct {
				at   float64
				edge bool
			}{{iv.Low, iv.LowEdge}, {iv.High, iv.HighEdge}} {
				at := e.at
				if !e.edge {
					at += 0.03 * (at - r.Theta[j])
				}
				h := *p
				h.Parameters = append([]fit.Parameter(nil), p.Parameters...)
				if at <= h.Parameters[j].Low || at >= h.Parameters[j].High {
					at = e.at
				}
				h.Parameters[j].Low, h.Parameters[j].High = at, at
				h.Starts = [][]float64{r.Theta}
				ss := solve(t, &h, fit.Settings{Starts: 12}).Objective
				if e.edge != (ss < limit*(1+1e-9)) {
					t.Errorf("%s, end %v (bound: %v): %v at %v, limit %v", p.Parameters[j].Name, e.at, e.edge, ss, at, limit)
				}
			}
		}
	}
}
