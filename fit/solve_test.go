package fit_test

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"reflect"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize"

	"ligancy/fit"
)

func solve(tb testing.TB, p *fit.Problem, set fit.Settings) *fit.Result {
	tb.Helper()
	r, err := fit.Solve(context.Background(), p, set)
	if err != nil {
		tb.Fatal(err)
	}
	checkFinite(tb, r)
	return r
}

// checkFinite looks into every number of a result.
func checkFinite(tb testing.TB, r *fit.Result) {
	tb.Helper()
	var look func(name string, v reflect.Value)
	look = func(name string, v reflect.Value) {
		switch v.Kind() {
		case reflect.Float64:
			if f := v.Float(); math.IsNaN(f) || math.IsInf(f, 0) {
				tb.Errorf("%s is %v", name, f)
			}
		case reflect.Slice:
			for i := range v.Len() {
				look(name, v.Index(i))
			}
		}
	}
	v := reflect.ValueOf(*r)
	for i := range v.NumField() {
		look(v.Type().Field(i).Name, v.Field(i))
	}
	if r.Cov != nil {
		for i := range r.Cov.SymmetricDim() {
			for j := range r.Cov.SymmetricDim() {
				look("Cov", reflect.ValueOf(r.Cov.At(i, j)))
			}
		}
	}
}

// The best sums of squares on which four general-purpose libraries agree, from
// 50 different sets of starts.
func TestGlobalOptimum(t *testing.T) {
	for _, s := range []struct {
		name     string
		p        *fit.Problem
		best     float64
		agreeing float64 // of 20, on average, at least
	}{
		{"hill4", hill4(t, false), bestHill4, 19},
		{"hill4 collapsed", hill4(t, true), bestHill4, 19},
		{"adair4", adair4(t), bestAdair4, 19},
		{"shallow", shallow(t), bestShallow, 19},
		{"global", global(t), bestGlobal, 13},
	} {
		t.Run(s.name, func(t *testing.T) {
			number := uint64(50)
			if testing.Short() {
				number = 5
			}
			agree := 0
			for seed := range number {
				r := solve(t, s.p, fit.Settings{Seed: seed})
				if math.Abs(r.Objective/s.best-1) > 1e-8 {
					t.Errorf("seed %d: %.12g, best %.12g", seed, r.Objective, s.best)
				}
				if r.Status != fit.Converged || r.Offset > 1e-9 {
					t.Errorf("seed %d: %v, relative offset %g", seed, r.Status, r.Offset)
				}
				agree += r.Agreeing
			}
			if mean := float64(agree) / float64(number); mean < s.agreeing {
				t.Errorf("%.1f of 20 starts agree", mean)
			}
		})
	}
}

// Replicates collapsed to their mean change neither estimate, nor sum of
// squares, nor scatter.
func TestCollapsed(t *testing.T) {
	a, b := solve(t, hill4(t, false), fit.Settings{}), solve(t, hill4(t, true), fit.Settings{})
	for j := range a.Theta {
		if math.Abs(a.Theta[j]-b.Theta[j]) > 1e-10 {
			t.Errorf("θ[%d] = %v and %v", j, a.Theta[j], b.Theta[j])
		}
	}
	near(t, "SS", b.SS[0], a.SS[0], 1e-12)
	near(t, "σ", b.Sigma[0], a.Sigma[0], 1e-12)
	if a.N != 72 || b.N != 72 || len(b.Residuals) != 24 {
		t.Errorf("N = %d and %d, %d rows", a.N, b.N, len(b.Residuals))
	}
	if !mat.EqualApprox(a.Cov, b.Cov, 1e-10) {
		t.Error("the covariances differ")
	}
}

func TestWorkersChangeNoDigit(t *testing.T) {
	p := global(t)
	one := solve(t, p, fit.Settings{Workers: 1, Seed: 3})
	for _, w := range []int{2, 3, 8} {
		more := solve(t, p, fit.Settings{Workers: w, Seed: 3})
		if d := cmp.Diff(one, more, cmp.Comparer(sameMatrix)); d != "" {
			t.Errorf("%d workers: %s", w, d)
		}
	}
	if again := solve(t, p, fit.Settings{Workers: 1, Seed: 3}); !cmp.Equal(one, again, cmp.Comparer(sameMatrix)) {
		t.Error("a second run differs")
	}
}

func sameMatrix(a, b *mat.SymDense) bool {
	return a == nil && b == nil || a != nil && b != nil && mat.Equal(a, b)
}

// straight is y = a + b·x, θ = a, b.
func straight(x float64, p, g []float64) float64 {
	g[0], g[1] = 1, x
	return p[0] + p[1]*x
}

func free(names ...string) []fit.Parameter {
	var p []fit.Parameter
	for _, n := range names {
		p = append(p, fit.Parameter{Name: n, Low: math.Inf(-1), High: math.Inf(1), StartLow: -1, StartHigh: 1})
	}
	return p
}

func fiveOnALine(linear bool) *fit.Problem {
	p := &fit.Problem{
		Parameters: free("a", "b"),
		Blocks:     []fit.Block{&simple{x: []float64{0, 1, 2, 3, 4}, y: []float64{1, 3, 2, 5, 4}, f: straight}},
	}
	for j := range p.Parameters {
		p.Parameters[j].Linear = linear
	}
	return p
}

// Closed form: b = 0.8, a = 1.4, SS = 3.6; Cov = σ²(XᵀX)⁻¹ with σ² = 1.2.
func TestStraightLine(t *testing.T) {
	for _, linear := range []bool{false, true} {
		r := solve(t, fiveOnALine(linear), fit.Settings{})
		near(t, "a", r.Theta[0], 1.4, 1e-13)
		near(t, "b", r.Theta[1], 0.8, 1e-13)
		near(t, "SS", r.Objective, 3.6, 1e-13)
		near(t, "σ", r.Sigma[0], math.Sqrt(1.2), 1e-13)
		near(t, "var a", r.Cov.At(0, 0), 1.2*0.6, 1e-12)
		near(t, "cov", r.Cov.At(0, 1), -1.2*0.2, 1e-12)
		near(t, "var b", r.Cov.At(1, 1), 1.2*0.1, 1e-12)
		if r.N != 5 || r.Free != 2 || r.Constants != 2 || r.Status != fit.Converged {
			t.Errorf("%+v", r)
		}
	}
}

// Parameters that are solved for come out as if they were searched.
func TestLinearParameters(t *testing.T) {
	p := global(t)
	a := solve(t, p, fit.Settings{})
	q := *p
	q.Parameters = append([]fit.Parameter(nil), p.Parameters...)
	q.Starts = [][]float64{a.Theta}
	for j := range q.Parameters {
		q.Parameters[j].Linear = false
		q.Starts[0][j] *= 1.01
	}
	b := solve(t, &q, fit.Settings{Starts: 1})
	for j := range b.Theta {
		if math.Abs(a.Theta[j]/1.01-b.Theta[j]) > 1e-9*math.Abs(b.Theta[j]) {
			t.Errorf("%s: %v and %v", p.Parameters[j].Name, a.Theta[j]/1.01, b.Theta[j])
		}
	}
	near(t, "SS", b.Objective, a.Objective, 1e-12)
}

// A linear parameter that would turn negative is held at zero, and the others
// are those of the fit without it.
func TestLinearParameterHeldAtZero(t *testing.T) {
	x := []float64{0.5, 1, 2, 4, 8, 16}
	y := make([]float64, len(x))
	for i, v := range x {
		y[i] = 10*v/(2+v) - 0.05*v + 0.01*math.Sin(7*v) // a falling line is not nonspecific binding
	}
	both := func(x float64, p, g []float64) float64 {
		f := hyperbola(x, p, g)
		if len(p) == 3 {
			g[2] = x
			f += p[2] * x
		}
		return f
	}
	parameters := []fit.Parameter{
		{Name: "Bmax", Low: 0, High: math.Inf(1), Linear: true},
		{Name: "ln K", Low: -10, High: 10, StartLow: -3, StartHigh: 3},
		{Name: "slope", Low: 0, High: math.Inf(1), Linear: true},
	}
	block := []fit.Block{&simple{x: x, y: y, f: both}}
	with := solve(t, &fit.Problem{Parameters: parameters, Blocks: block}, fit.Settings{})
	without := solve(t, &fit.Problem{Parameters: parameters[:2], Blocks: block}, fit.Settings{})
	if with.Status != fit.AtEdge || with.Edges[2] != fit.OnLow || with.Theta[2] != 0 || with.Free != 2 || with.Constants != 3 {
		t.Errorf("%v, edges %v, θ %v, %d free", with.Status, with.Edges, with.Theta, with.Free)
	}
	near(t, "Bmax", with.Theta[0], without.Theta[0], 1e-9)
	near(t, "ln K", with.Theta[1], without.Theta[1], 1e-9)
	if with.Cov == nil || with.Cov.At(2, 2) != 0 {
		t.Error("a parameter on its bound has no variance")
	}
}

// Outside reference: gonum's quasi-Newton minimiser on the same likelihood of
// two tables that share a slope and scatter differently.
func TestSeveralScatters(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 1))
	xs := make([]float64, 20)
	a, b := make([]float64, 20), make([]float64, 20)
	for i := range xs {
		xs[i] = math.Exp(float64(i)/3 - 3)
		a[i] = 10*xs[i]/(1.5+xs[i]) + 0.1*rng.NormFloat64()
		b[i] = 3*xs[i]/(1.5+xs[i]) + 0.4*rng.NormFloat64()
	}
	second := func(x float64, p, g []float64) float64 {
		k := math.Exp(p[1])
		u := x / (k + x)
		g[1], g[2] = -p[2]*u*(1-u), u
		return p[2] * u
	}
	first := func(x float64, p, g []float64) float64 { return hyperbola(x, p, g) }
	blocks := []fit.Block{&simple{x: xs, y: a, f: first}, &simple{x: xs[:12], y: b[:12], f: second}}
	for _, linear := range []bool{false, true} {
		p := &fit.Problem{Parameters: free("V1", "ln K", "V2"), Blocks: blocks}
		p.Parameters[0].Linear, p.Parameters[2].Linear = linear, linear
		r := solve(t, p, fit.Settings{})
		if r.Status != fit.Converged || r.Offset > 1e-10 {
			t.Errorf("%v, offset %g", r.Status, r.Offset)
		}
		near(t, "objective", r.Objective, 20*math.Log(r.SS[0])+12*math.Log(r.SS[1]), 1e-12)
		want := minimum(t, blocks, []float64{20, 12}, []float64{8, 0, 2})
		for j := range want {
			near(t, p.Parameters[j].Name, r.Theta[j], want[j], 1e-6)
		}
		near(t, "σ1", r.Sigma[0], math.Sqrt(r.SS[0]/20*32/29), 1e-12)
		near(t, "σ2", r.Sigma[1], math.Sqrt(r.SS[1]/12*32/29), 1e-12)
	}
	// One known scatter beside an unknown one.
	known := *blocks[1].(*simple)
	known.sd = make([]float64, len(known.x))
	for i := range known.sd {
		known.sd[i] = 0.4
	}
	p := &fit.Problem{Parameters: free("V1", "ln K", "V2"), Blocks: []fit.Block{blocks[0], &known},
		Scatter: []fit.Scatter{fit.Unknown, fit.Known}}
	r := solve(t, p, fit.Settings{})
	near(t, "objective", r.Objective, 20*math.Log(r.SS[0])+r.SS[1], 1e-12)
	want := minimum(t, p.Blocks, []float64{20, 0}, []float64{8, 0, 2})
	for j := range want {
		near(t, p.Parameters[j].Name, r.Theta[j], want[j], 1e-6)
	}
	if r.Sigma[1] != 1 {
		t.Errorf("a known σ is %v", r.Sigma[1])
	}
}

// Two tables, everything linear: the weights alone have to be found.
func TestSeveralScattersLinear(t *testing.T) {
	x := []float64{0, 1, 2, 3, 4, 5}
	one := &simple{x: x, y: []float64{1, 3, 2, 5, 4, 6}, f: straight}
	two := &simple{x: x, y: []float64{1.3, 1.9, 3.1, 3.8, 5.2, 6.1}, f: straight}
	p := &fit.Problem{Parameters: free("a", "b"), Blocks: []fit.Block{one, two}}
	want := minimum(t, p.Blocks, []float64{6, 6}, []float64{1, 1})
	for _, linear := range []bool{true, false} {
		p.Parameters[0].Linear, p.Parameters[1].Linear = linear, linear
		r := solve(t, p, fit.Settings{})
		if r.Status != fit.Converged || r.Offset > 1e-10 {
			t.Errorf("linear %v: %v, offset %g", linear, r.Status, r.Offset)
		}
		near(t, "a", r.Theta[0], want[0], 1e-6)
		near(t, "b", r.Theta[1], want[1], 1e-6)
	}
}

// minimum of Σ N ln SS (N > 0) + Σ SS (N = 0) by gonum's BFGS.
func minimum(tb testing.TB, blocks []fit.Block, n, start []float64) []float64 {
	tb.Helper()
	value := func(theta, grad []float64) float64 {
		var f float64
		clear(grad)
		for b, block := range blocks {
			res := make([]float64, block.Len())
			jac := mat.NewDense(block.Len(), len(theta), nil)
			if err := block.Eval(res, jac, theta); err != nil {
				tb.Fatal(err)
			}
			var ss float64
			for _, v := range res {
				ss += v * v
			}
			w := 1.0
			if n[b] > 0 {
				w = n[b] / ss
				f += n[b] * math.Log(ss)
			} else {
				f += ss
			}
			for i, v := range res {
				for j := range grad {
					grad[j] += 2 * w * v * jac.At(i, j)
				}
			}
		}
		return f
	}
	p := optimize.Problem{
		Func: func(x []float64) float64 { return value(x, make([]float64, len(x))) },
		Grad: func(g, x []float64) { value(x, g) },
	}
	r, err := optimize.Minimize(p, start, &optimize.Settings{GradientThreshold: 1e-7}, &optimize.BFGS{})
	if r == nil {
		tb.Fatal(err)
	}
	return r.X
}

// An optimum on a bound: Rosenbrock's valley with b1 ≤ 0.5 has its lowest point
// at (0.5, 0.25), where the sum of squares is 0.25.
func TestBound(t *testing.T) {
	p := &fit.Problem{Parameters: free("b1", "b2"), Blocks: []fit.Block{valley{}}}
	p.Parameters[0].High = 0.5
	p.Starts = [][]float64{{-1.2, 1}}
	r := solve(t, p, fit.Settings{})
	if r.Status != fit.AtEdge || !reflect.DeepEqual(r.Edges, []fit.Edge{fit.OnHigh, fit.Inside}) {
		t.Errorf("%v, %v", r.Status, r.Edges)
	}
	near(t, "b1", r.Theta[0], 0.5, 0)
	near(t, "b2", r.Theta[1], 0.25, 1e-12)
	near(t, "SS", r.Objective, 0.25, 1e-12)
	if r.Agreeing != r.Starts || r.Starts != 20 {
		t.Errorf("%d of %d starts agree", r.Agreeing, r.Starts)
	}
}

// valley is Rosenbrock's: residuals 1 − b1 and 10(b2 − b1²). (Moré, Garbow &
// Hillstrom 1981, ACM Trans Math Softw 7, problem 1.) A third row keeps ν > 0.
type valley struct{}

func (valley) Len() int         { return 3 }
func (valley) Clone() fit.Block { return valley{} }
func (valley) Eval(res []float64, jac *mat.Dense, b []float64) error {
	res[0], res[1], res[2] = 1-b[0], 10*(b[1]-b[0]*b[0]), 0
	if jac != nil {
		jac.Set(0, 0, -1)
		jac.Set(1, 0, -20*b[0])
		jac.Set(1, 1, 10)
	}
	return nil
}

// Every multiplier of a bound has the right sign: brute force over all sets of
// bounds of random linear problems with a curved parameter beside them.
func TestBoundsAgainstBruteForce(t *testing.T) {
	rng := rand.New(rand.NewPCG(9, 1))
	for range 60 {
		const n, m = 7, 3
		a, y := make([][]float64, n), make([]float64, n)
		for i := range a {
			a[i] = []float64{rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64()}
			y[i] = 2 * rng.NormFloat64()
		}
		f := func(i float64, p, g []float64) float64 {
			var v float64
			for j := range m {
				g[j] = a[int(i)][j]
				v += g[j] * p[j]
			}
			return v
		}
		x := []float64{0, 1, 2, 3, 4, 5, 6}
		best := math.Inf(1)
		for mask := range 27 {
			p := &fit.Problem{Parameters: free("a", "b", "c"), Blocks: []fit.Block{&simple{x: x, y: y, f: f}}}
			for j, k := 0, mask; j < m; j, k = j+1, k/3 {
				p.Parameters[j].Linear = true
				if k%3 > 0 {
					p.Parameters[j].Low = float64(k%3-1) * 0.5
					p.Parameters[j].High = p.Parameters[j].Low
				}
			}
			r := solve(t, p, fit.Settings{Starts: 1})
			inside := true
			for _, v := range r.Theta {
				inside = inside && v >= 0 && v <= 0.5
			}
			if inside {
				best = min(best, r.Objective)
			}
		}
		for _, linear := range []bool{false, true} {
			p := &fit.Problem{Parameters: free("a", "b", "c"), Blocks: []fit.Block{&simple{x: x, y: y, f: f}}}
			for j := range p.Parameters {
				p.Parameters[j].Linear, p.Parameters[j].Low, p.Parameters[j].High = linear, 0, 0.5
				p.Parameters[j].StartLow, p.Parameters[j].StartHigh = 0, 0.5
			}
			r := solve(t, p, fit.Settings{Starts: 4})
			if math.Abs(r.Objective-best) > 1e-9*best || r.Agreeing != r.Starts {
				t.Errorf("linear %v: %v leaves %v, brute force %v; %d of %d agree", linear, r.Theta, r.Objective, best, r.Agreeing, r.Starts)
			}
		}
	}
}

func TestFixedParameters(t *testing.T) {
	p := hill4(t, true)
	p.Parameters[2].Low, p.Parameters[2].High = math.Log(0.01), math.Log(0.01)
	r := solve(t, p, fit.Settings{})
	if r.Theta[2] != math.Log(0.01) || r.Constants != 2 || r.Free != 2 || r.Cov.At(2, 2) != 0 {
		t.Errorf("θ = %v, %d constants", r.Theta, r.Constants)
	}
	for j := range p.Parameters {
		p.Parameters[j].Low, p.Parameters[j].High = r.Theta[j], r.Theta[j]
	}
	all := solve(t, p, fit.Settings{})
	if all.Status != fit.Converged || all.Free != 0 {
		t.Errorf("all fixed: %+v", all)
	}
	near(t, "SS", all.Objective, r.Objective, 1e-12)
}

// The result does not depend on the units of the response or of a parameter.
func TestScaleInvariance(t *testing.T) {
	for _, u := range []float64{1e-60, 1e-9, 1e9, 1e60} {
		r := solve(t, membranes(t, "treated", 2, hyperbola), fit.Settings{})
		p := membranes(t, "treated", 2, hyperbola)
		b := p.Blocks[0].(*simple)
		for i := range b.y {
			b.y[i] *= u
		}
		p.Parameters[0].High = math.Inf(1)
		s := solve(t, p, fit.Settings{})
		near(t, "V", s.Theta[0], r.Theta[0]*u, 1e-9)
		near(t, "ln K", s.Theta[1], r.Theta[1], 1e-9)
		if s.Status != fit.Converged {
			t.Errorf("unit %g: %v", u, s.Status)
		}
	}
}

func TestPerfectFit(t *testing.T) {
	for _, truth := range [][]float64{{0, 0}, {3, 1}, {5, -2}} { // ln V, ln K: zeros are the awkward ones
		f := func(x float64, p, g []float64) float64 {
			v := math.Exp(p[0])
			y := hyperbola(x, []float64{v, p[1]}, g)
			g[0] *= v
			return y
		}
		b := &simple{x: []float64{0.1, 0.3, 1, 3, 10, 30}, f: f}
		for _, x := range b.x {
			b.y = append(b.y, f(x, truth, make([]float64, 2)))
		}
		p := &fit.Problem{Parameters: free("ln V", "ln K"), Blocks: []fit.Block{b}}
		for j := range p.Parameters {
			p.Parameters[j].StartLow, p.Parameters[j].StartHigh = -3, 6
		}
		r := solve(t, p, fit.Settings{})
		if r.Status != fit.Converged || r.Objective > 1e-24 {
			t.Errorf("truth %v: %v, SS %g, %v", truth, r.Status, r.Objective, r.Warnings)
		}
		for j := range truth {
			if math.Abs(r.Theta[j]-truth[j]) > 1e-12 {
				t.Errorf("θ = %v, want %v", r.Theta, truth)
			}
		}
		joint := *p
		joint.Blocks = []fit.Block{b, b}
		if r := solve(t, &joint, fit.Settings{}); r.Status != fit.Converged || len(r.Warnings) == 0 {
			t.Errorf("two blocks: %v %v", r.Status, r.Warnings)
		}
	}
}

func TestWildOutlier(t *testing.T) {
	p := hill4(t, false)
	b := p.Blocks[0].(*curve)
	b.y[30] += 1e6 * 0.01 // a million σ
	r := solve(t, p, fit.Settings{})
	if r.Status == fit.NoAnswer || r.Status == fit.Stopped {
		t.Errorf("%v %v", r.Status, r.Warnings)
	}
}

func TestUndetermined(t *testing.T) {
	product := func(x float64, p, g []float64) float64 {
		f := math.Exp(p[0]+p[1]) * x
		g[0], g[1] = f, f
		return f
	}
	x, y := []float64{1, 2, 3, 4}, []float64{2.1, 3.9, 6.2, 7.8}
	p := &fit.Problem{Parameters: free("ln a", "ln b"), Blocks: []fit.Block{&simple{x: x, y: y, f: product}}}
	r := solve(t, p, fit.Settings{})
	if r.Status != fit.Converged || r.Cov != nil || !strings.Contains(strings.Join(r.Warnings, " "), "ln b") {
		t.Errorf("only the product: %v, Cov %v, %v", r.Status, r.Cov, r.Warnings)
	}
	near(t, "a·b", math.Exp(r.Theta[0]+r.Theta[1]), 1.99, 1e-12) // Σxy/Σx² = 59.7/30

	one := &simple{x: []float64{2, 2, 2, 2}, y: []float64{1, 1.1, 0.9, 1}, f: hyperbola}
	r = solve(t, &fit.Problem{Parameters: free("V", "ln K"), Blocks: []fit.Block{one}}, fit.Settings{})
	if r.Cov != nil || len(r.Warnings) == 0 {
		t.Errorf("one x: Cov %v, %v", r.Cov, r.Warnings)
	}
	near(t, "SS", r.Objective, 0.02, 1e-9)

	idle := func(x float64, p, g []float64) float64 {
		g[0], g[1] = x, 0
		return p[0] * x
	}
	r = solve(t, &fit.Problem{Parameters: free("a", "b"), Blocks: []fit.Block{&simple{x: x, y: y, f: idle}}}, fit.Settings{})
	if r.Cov != nil || !strings.Contains(strings.Join(r.Warnings, " "), "b changes no residual") {
		t.Errorf("an idle parameter: %v", r.Warnings)
	}
}

func TestAsManyParametersAsResiduals(t *testing.T) {
	b := &simple{x: []float64{1, 2}, y: []float64{1, 3}, f: straight}
	r := solve(t, &fit.Problem{Parameters: free("a", "b"), Blocks: []fit.Block{b}}, fit.Settings{})
	if r.Sigma[0] != 0 || r.Cov != nil || len(r.Warnings) == 0 {
		t.Errorf("σ %v, Cov %v, %v", r.Sigma, r.Cov, r.Warnings)
	}
	near(t, "b", r.Theta[1], 2, 1e-12)
}

// hostile misbehaves in one way or another.
type hostile struct {
	n    int
	eval func(res []float64, jac *mat.Dense, theta []float64) error
}

func (h hostile) Len() int { return h.n }
func (h hostile) Eval(res []float64, jac *mat.Dense, theta []float64) error {
	return h.eval(res, jac, theta)
}

func TestBadProblems(t *testing.T) {
	good := fiveOnALine(false)
	change := func(f func(p *fit.Problem)) *fit.Problem {
		p := *good
		p.Parameters = append([]fit.Parameter(nil), good.Parameters...)
		f(&p)
		return &p
	}
	block := func(f func(res []float64, jac *mat.Dense, theta []float64) error) func(p *fit.Problem) {
		return func(p *fit.Problem) { p.Blocks = []fit.Block{hostile{5, f}} }
	}
	nan, inf := math.NaN(), math.Inf(1)
	for _, c := range []struct {
		name string
		p    *fit.Problem
		want string
	}{
		{"nothing", &fit.Problem{}, "no parameters"},
		{"no data", change(func(p *fit.Problem) { p.Blocks = nil }), "no residuals"},
		{"too few", change(func(p *fit.Problem) { p.Blocks = []fit.Block{hostile{1, nil}} }), "1 residuals cannot settle 2 parameters"},
		{"bounds", change(func(p *fit.Problem) { p.Parameters[0].Low, p.Parameters[0].High = 2, 1 }), "parameter a: bounds"},
		{"NaN bound", change(func(p *fit.Problem) { p.Parameters[1].Low = nan }), "parameter b: bounds"},
		{"box", change(func(p *fit.Problem) { p.Parameters[1].StartHigh = inf }), "parameter b: starts"},
		{"start", change(func(p *fit.Problem) { p.Starts = [][]float64{{1}} }), "1 values for 2"},
		{"NaN start", change(func(p *fit.Problem) { p.Starts = [][]float64{{1, nan}} }), "not finite"},
		{"scatter", change(func(p *fit.Problem) { p.Scatter = make([]fit.Scatter, 3) }), "3"},
		{"error", change(block(func([]float64, *mat.Dense, []float64) error { return errors.New("the tube broke") })), "the tube broke"},
		{"NaN", change(block(func(r []float64, _ *mat.Dense, _ []float64) error { r[2] = nan; return nil })), "not finite"},
		{"σ zero", change(func(p *fit.Problem) {
			b := *p.Blocks[0].(*simple)
			b.sd = []float64{1, 1, 0, 1, 1}
			p.Blocks = []fit.Block{&b}
		}), "standard deviation of zero"},
		{"NaN derivative", change(block(func(_ []float64, j *mat.Dense, _ []float64) error { j.Set(0, 0, nan); return nil })), "not finite"},
		{"weights zero", change(block(func(r []float64, _ *mat.Dense, _ []float64) error { clear(r); return nil })), "all weights zero"},
	} {
		_, err := fit.Solve(context.Background(), c.p, fit.Settings{})
		if err == nil || !strings.Contains(err.Error(), c.want) || !strings.HasPrefix(err.Error(), "fit: ") {
			t.Errorf("%s: %v, want something of %q", c.name, err, c.want)
		}
	}
}

// Residuals that are not finite beyond a border: steps across it are rejected,
// starts beyond it passed over.
func TestBorder(t *testing.T) {
	p := &fit.Problem{Parameters: free("a"), Blocks: []fit.Block{hostile{4, func(res []float64, jac *mat.Dense, th []float64) error {
		for i := range res {
			res[i] = math.Log(th[0]) - float64(i)/2
			if jac != nil {
				jac.Set(i, 0, 1/th[0])
			}
		}
		return nil
	}}}}
	p.Parameters[0].StartLow, p.Parameters[0].StartHigh = -1, 1000
	r := solve(t, p, fit.Settings{Starts: 40})
	near(t, "a", r.Theta[0], math.Exp(0.75), 1e-9)
	if r.Agreeing < 38 {
		t.Errorf("%d of %d starts agree", r.Agreeing, r.Starts)
	}
}

func TestInterrupted(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	r, err := fit.Solve(ctx, hill4(t, true), fit.Settings{})
	if err != nil || r.Status != fit.NoAnswer {
		t.Errorf("before the first start: %v, %v", r, err)
	}
	ctx, cancel = context.WithCancel(context.Background())
	seen := 0
	r, err = fit.Solve(ctx, hill4(t, true), fit.Settings{Workers: 1, Progress: func(done, of int) {
		if seen = done; done == 7 {
			cancel()
		}
		if of != 20 {
			t.Errorf("of %d starts", of)
		}
	}})
	if err != nil || r.Status != fit.Stopped || r.Starts != 7 || seen != 7 || len(r.Warnings) == 0 {
		t.Errorf("after seven starts: %v, %v starts, %v", r.Status, r.Starts, err)
	}
	near(t, "SS", r.Objective, bestHill4, 1e-6)
	checkFinite(t, r)
}

func TestOutOfIterations(t *testing.T) {
	p := hill4(t, true)
	p.Starts = [][]float64{{5, 1, -1}}
	r := solve(t, p, fit.Settings{Starts: 1, MaxIter: 3})
	if r.Status != fit.Stopped || !strings.Contains(strings.Join(r.Warnings, " "), "out of iterations") {
		t.Errorf("%v %v", r.Status, r.Warnings)
	}
}

// Nothing is allocated per iteration: a fit of few and one of many iterations
// take the same memory.
func TestNoAllocationPerIteration(t *testing.T) {
	for _, p := range []*fit.Problem{hill4(t, true), global(t)} {
		far := make([]float64, len(p.Parameters))
		copy(far, []float64{5, 12, -8, 8, -1})
		p.Starts = [][]float64{far}
		few := testing.AllocsPerRun(5, func() { solveOnly(p, 1) })
		many := testing.AllocsPerRun(5, func() { solveOnly(p, 200) })
		if many > few { // the warning of the few is one more
			t.Errorf("%v allocations with one iteration, %v with many", few, many)
		}
	}
}

func solveOnly(p *fit.Problem, iterations int) {
	if r, err := fit.Solve(context.Background(), p, fit.Settings{Starts: 1, Workers: 1, MaxIter: iterations}); err != nil || r == nil {
		panic(err)
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
				if _, err := fit.Solve(context.Background(), s.p, fit.Settings{Workers: 1}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
