package fit_test

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
)

// Fits of published tables against other programs' answers.

// simple is a curve whose formula writes f and its derivatives for one x.
type simple struct {
	x, y []float64
	f    formula
	sd   []float64 // nil: 1
}

func (s *simple) Len() int         { return len(s.x) }
func (s *simple) Clone() fit.Block { return s }
func (s *simple) Eval(res []float64, jac *mat.Dense, theta []float64) error {
	grad := make([]float64, len(theta))
	for i, x := range s.x {
		clear(grad)
		w := 1.0
		if s.sd != nil {
			w = 1 / s.sd[i]
		}
		res[i] = (s.f(x, theta, grad) - s.y[i]) * w
		if jac != nil {
			for j, g := range grad {
				jac.Set(i, j, g*w)
			}
		}
	}
	return nil
}

// formula returns f(x; θ) and writes ∂f/∂θ.
type formula func(x float64, theta, grad []float64) float64

// hyperbola is V·x/(K + x), θ = V, ln K.
func hyperbola(x float64, p, g []float64) float64 {
	k := math.Exp(p[1])
	u := x / (k + x)
	g[0], g[1] = u, -p[0]*u*(1-u)
	return p[0] * u
}

// hill is V·x^h/(K^h + x^h), θ = V, ln K, ln h.
func hill(x float64, p, g []float64) float64 {
	h := math.Exp(p[2])
	t := math.Log(x) - p[1]
	u := 1 / (1 + math.Exp(-h*t))
	g[0], g[1], g[2] = u, -p[0]*u*(1-u)*h, p[0]*u*(1-u)*h*t
	return p[0] * u
}

// pair is the two-site Adair velocity V·(k1·x + 2·k1·k2·x²)/(2·(1 + k1·x + k1·k2·x²)),
// θ = V, ln k1, ln k2.
func pair(x float64, p, g []float64) float64 {
	a := math.Exp(p[1]) * x
	b := a * math.Exp(p[2]) * x
	z := 1 + a + b
	s := (a + 2*b) / (2 * z)
	m := (a + 2*b) / z
	g[0] = s
	g[1] = p[0] * ((a+2*b)/z - m*(a+b)/z) / 2
	g[2] = p[0] * (2*b/z - m*b/z) / 2
	return p[0] * s
}

// rows reads two columns of a table of the project where a third holds a word.
func rows(tb testing.TB, name string, x, y, key int, word string) (xs, ys []float64) {
	tb.Helper()
	f, err := os.Open("../testdata/" + name)
	if err != nil {
		tb.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	all, err := r.ReadAll()
	if err != nil {
		tb.Fatal(err)
	}
	for _, row := range all[1:] {
		if row[key] != word {
			continue
		}
		a, err1 := strconv.ParseFloat(row[x], 64)
		b, err2 := strconv.ParseFloat(row[y], 64)
		if err1 != nil || err2 != nil {
			tb.Fatal(err1, err2)
		}
		xs, ys = append(xs, a), append(ys, b)
	}
	return xs, ys
}

// membranes is one half of that table under a formula of so many constants.
func membranes(tb testing.TB, state string, constants int, f formula) *fit.Problem {
	x, y := rows(tb, "galactosyltransferase_puromycin_treloar_1974.csv", 0, 1, 2, state)
	p := []fit.Parameter{
		{Name: "V", Low: 0, High: 1e6, StartLow: 50, StartHigh: 500, Linear: true},
		{Name: "ln K", Low: -20, High: 20, StartLow: -6, StartHigh: 1},
		{Name: "ln h", Low: -4, High: 4, StartLow: -1, StartHigh: 1},
	}
	return &fit.Problem{Parameters: p[:constants], Blocks: []fit.Block{&simple{x: x, y: y, f: f}}}
}

// Source: R 4.2.2 nls and SciPy 1.10.1, which agree to the digits given, on the
// table of Treloar 1974 as carried by R's datasets. nls stops at a relative
// offset of 1e-5, hence the tolerances.
func TestGalactosyltransferase(t *testing.T) {
	for _, c := range []struct {
		state        string
		constants    int
		f            formula
		v, k, h, rss float64
		seV, seK     float64 // of V and K (not ln K)
	}{
		{"treated", 2, hyperbola, 212.68358, 0.06412103, 0, 1195.4488, 6.94715, 0.00828092},
		{"untreated", 2, hyperbola, 160.28007, 0.04770823, 0, 859.6043, 6.48025, 0.00778188},
		{"treated", 3, hill, 237.9474, 0.0858824, 0.739395, 809.8615, 0, 0},
		{"untreated", 3, hill, 195.1284, 0.0824148, 0.620699, 434.0385, 0, 0},
	} {
		r := solve(t, membranes(t, c.state, c.constants, c.f), fit.Settings{})
		near(t, c.state+" V", r.Theta[0], c.v, 1e-5)
		near(t, c.state+" K", math.Exp(r.Theta[1]), c.k, 1e-5)
		near(t, c.state+" RSS", r.SS[0], c.rss, 1e-7)
		if c.h != 0 {
			near(t, c.state+" h", math.Exp(r.Theta[2]), c.h, 1e-5)
			continue
		}
		near(t, c.state+" se V", math.Sqrt(r.Cov.At(0, 0)), c.seV, 1e-5)
		near(t, c.state+" se K", math.Sqrt(r.Cov.At(1, 1))*c.k, c.seK, 1e-5)
	}
	for state, rss := range map[string]float64{"treated": 810.267, "untreated": 443.157} {
		p := membranes(t, state, 3, pair)
		p.Parameters[1] = fit.Parameter{Name: "ln k1", Low: -20, High: 20, StartLow: -2, StartHigh: 6}
		p.Parameters[2] = fit.Parameter{Name: "ln k2", Low: -20, High: 20, StartLow: -2, StartHigh: 6}
		near(t, state+" two-site RSS", solve(t, p, fit.Settings{}).SS[0], rss, 2e-6)
	}
}

// Source: R 4.2.2 and SciPy 1.10.1 on run 1 of Davidian & Giltinan's table.
func TestELISA(t *testing.T) {
	x, y := rows(t, "dnase_elisa_davidian_1995.csv", 1, 2, 0, "1")
	p := &fit.Problem{
		Blocks: []fit.Block{&simple{x: x, y: y, f: hill}},
		Parameters: []fit.Parameter{
			{Name: "plateau", Low: 0, High: math.Inf(1), Linear: true},
			{Name: "ln K", Low: -20, High: 20, StartLow: -3, StartHigh: 5},
			{Name: "ln h", Low: -4, High: 4, StartLow: -1, StartHigh: 1},
		},
	}
	r := solve(t, p, fit.Settings{})
	near(t, "plateau", r.Theta[0], 2.34518, 3e-6)
	near(t, "K", math.Exp(r.Theta[1]), 4.40654, 3e-6)
	near(t, "h", math.Exp(r.Theta[2]), 0.960195, 1e-6)
	near(t, "RSS", r.SS[0], 4.789569e-3, 1e-6)
	near(t, "se plateau", math.Sqrt(r.Cov.At(0, 0)), 0.07815, 1e-4)
	near(t, "se K", math.Sqrt(r.Cov.At(1, 1))*math.Exp(r.Theta[1]), 0.35849, 1e-4)
	near(t, "se h", math.Sqrt(r.Cov.At(2, 2))*math.Exp(r.Theta[2]), 0.029753, 1e-4)
}

func near(tb testing.TB, what string, got, want, relative float64) {
	tb.Helper()
	if !(math.Abs(got-want) <= relative*math.Abs(want)) {
		tb.Errorf("%s = %.12g, want %.12g", what, got, want)
	}
}
