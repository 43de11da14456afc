package fit_test

import (
	"bytes"
	"context"
	"math"
	"math/rand/v2"
	"os"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
)

// A screen: many curves of ten points, each with four parameters, fitted one by
// one. Block and starts are those of one curve; the curves are its replicates.

// plateaus is the curve low·(1−u) + high·u, u = 1/(1 + e^{−h(ln x − ln x50)});
// θ = low, high, ln x50, ln h.
type plateaus struct{ lnx []float64 }

func (s *plateaus) Len() int         { return len(s.lnx) }
func (s *plateaus) Clone() fit.Block { return s }
func (s *plateaus) Eval(res []float64, jac *mat.Dense, p []float64) error {
	h, span := exponential(p[3]), p[1]-p[0]
	raw := jac.RawMatrix().Data
	for i, lnx := range s.lnx {
		t := lnx - p[2]
		u := 1 / (1 + exponential(-h*t))
		v := 1 - u
		w := span * u * v * h
		res[i] = p[0] + span*u
		g := raw[4*i : 4*i+4]
		g[0], g[1], g[2], g[3] = v, u, -w, w*t
	}
	return nil
}

// exponential is e^x for |x| < 700 to 2e-10: 2^k·e^r, e^r by its series to r⁸.
func exponential(x float64) float64 {
	const shift = 6755399441055744.0 // 3·2⁵¹: adding it rounds to a whole number
	k := x*(1/math.Ln2) + shift
	power := math.Float64bits(k) << 52
	k -= shift
	r := (x - k*6.93147180369123816490e-01) - k*1.90821492927058770002e-10
	r2 := r * r
	r4 := r2 * r2
	low := (1 + r) + r2*(0.5+r*(1./6))
	high := (1./24 + r*(1./120)) + r2*((1./720+r*(1./5040))+r2*(1./40320))
	return math.Float64frombits(math.Float64bits(low+r4*high) + power)
}

// screen holds the curves, one row each.
type screen struct {
	lnx      []float64
	y        []float64
	best     []float64 // best sum of squares of each curve
	count    int
	thorough bool // several starts a curve
}

func (s *screen) curve(i int) []float64 { return s.y[i*len(s.lnx) : (i+1)*len(s.lnx)] }

func (s *screen) Draw(i int, rep *fit.Replicate) {
	for k, y := range s.curve(i) {
		rep.Shift[k] = -y
	}
}

// Start reads one curve: its ends, where it crosses half height, h = 1. A
// thorough screen tries flatter and steeper ones too, and other middles.
func (s *screen) Start(i, k int, theta []float64) bool {
	others := [][2]float64{{0, 0}, {0, -1}, {0, 1}}
	if k >= len(others) || k > 0 && !s.thorough {
		return false
	}
	y := s.curve(i)
	low, high := y[0], y[0]
	for _, v := range y {
		low, high = min(low, v), max(high, v)
	}
	mid, n := (low+high)/2, len(y)
	c := (s.lnx[0] + s.lnx[n-1]) / 2
	for j := 1; j < n; j++ {
		if (y[j-1] < mid) != (y[j] < mid) {
			c = s.lnx[j-1] + (mid-y[j-1])/(y[j]-y[j-1])*(s.lnx[j]-s.lnx[j-1])
			break
		}
	}
	theta[0], theta[1], theta[2], theta[3] = low, high, c+others[k][0], others[k][1]
	return true
}

func (s *screen) problem() *fit.Problem {
	n := len(s.lnx)
	return &fit.Problem{
		Blocks: []fit.Block{&plateaus{s.lnx}},
		Parameters: []fit.Parameter{
			{Name: "low", Low: -1e6, High: 1e6, Linear: true},
			{Name: "high", Low: -1e6, High: 1e6, Linear: true},
			{Name: "ln x50", Low: s.lnx[0] - math.Log(100), High: s.lnx[n-1] + math.Log(100)},
			{Name: "ln h", Low: math.Log(0.1), High: math.Log(10)},
		},
	}
}

// invented makes a screen of invented curves.
func invented(count int) *screen {
	s := &screen{count: count}
	for k := range 10 {
		s.lnx = append(s.lnx, math.Ln10*(-3+0.5*float64(k)))
	}
	rng := rand.New(rand.NewPCG(7, 0))
	for range count {
		low, high := 5*rng.NormFloat64(), 100+12*rng.NormFloat64()
		x50 := math.Log(3e-3) + rng.Float64()*math.Log(20/3e-3)
		h := math.Exp(min(max(0.4*rng.NormFloat64(), math.Log(0.4)), math.Log(3)))
		for _, x := range s.lnx {
			s.y = append(s.y, low+(high-low)/(1+math.Exp(-h*(x-x50)))+5*rng.NormFloat64())
		}
	}
	return s
}

// given reads screen.csv and best_screen.csv from a folder.
func given(tb testing.TB, folder string) *screen {
	rows := func(name string) [][]float64 {
		b, err := os.ReadFile(folder + "/" + name)
		if err != nil {
			tb.Fatal(err)
		}
		var all [][]float64
		for _, l := range bytes.Split(bytes.TrimSpace(b), []byte("\n")) {
			var row []float64
			for _, f := range bytes.Split(l, []byte(","))[1:] {
				v, _ := strconv.ParseFloat(string(f), 64)
				row = append(row, v)
			}
			all = append(all, row)
		}
		return all
	}
	s := &screen{}
	for i, row := range rows("screen.csv") {
		for _, v := range row {
			if i == 0 {
				s.lnx = append(s.lnx, math.Log(v))
			} else {
				s.y = append(s.y, v)
			}
		}
	}
	for _, row := range rows("best_screen.csv")[1:] {
		s.best = append(s.best, row[4])
	}
	s.count = len(s.best)
	return s
}

// screenOf is the screen of SCREEN_FOLDER (screen.csv and best_screen.csv), or
// an invented one without known optima.
func screenOf(tb testing.TB) *screen {
	if folder := os.Getenv("SCREEN_FOLDER"); folder != "" {
		return given(tb, folder)
	}
	return invented(20000)
}

func (s *screen) fit(tb testing.TB, p *fit.Problem) *fit.Refitted {
	tb.Helper()
	d, err := fit.Refit(context.Background(), p, nil, s, fit.RefitSettings{Draws: s.count, Workers: 1, Offset: 3e-4})
	if err != nil {
		tb.Fatal(err)
	}
	return d
}

// missed counts the curves whose sum of squares is above the best by 1e-6.
func (s *screen) missed(d *fit.Refitted) (n int) {
	for i := range s.best {
		if d.Objective[i] > s.best[i]*(1+1e-6) {
			n++
		}
	}
	return n
}

// A thorough screen reaches the best of every curve that any of many starts
// reaches; a plain one misses few.
func TestScreen(t *testing.T) {
	s := invented(400)
	p := s.problem()
	careful := make([]float64, s.count)
	for i := range careful {
		q := *p
		b := &plateaus{s.lnx}
		q.Blocks = []fit.Block{&shifted{b, s.curve(i)}}
		q.Parameters = append([]fit.Parameter(nil), p.Parameters...)
		q.Parameters[2].StartLow, q.Parameters[2].StartHigh = q.Parameters[2].Low, q.Parameters[2].High
		q.Parameters[3].StartLow, q.Parameters[3].StartHigh = -2, 2
		careful[i] = solve(t, &q, fit.Settings{Starts: 12, Workers: 1}).Objective
	}
	s.best = careful
	if n := s.missed(s.fit(t, p)); n > 2 {
		t.Errorf("one start misses %d of 400", n)
	}
	s.thorough = true
	if n := s.missed(s.fit(t, p)); n > 0 {
		t.Errorf("three starts miss %d of 400", n)
	}
}

// shifted is a block less what was measured.
type shifted struct {
	*plateaus
	y []float64
}

func (s *shifted) Clone() fit.Block { return s }
func (s *shifted) Eval(res []float64, jac *mat.Dense, p []float64) error {
	if jac == nil {
		jac = mat.NewDense(len(res), len(p), nil)
	}
	err := s.plateaus.Eval(res, jac, p)
	for i := range res {
		res[i] -= s.y[i]
	}
	return err
}

func benchScreen(b *testing.B, thorough bool) {
	s := screenOf(b)
	s.thorough = thorough
	p := s.problem()
	var d *fit.Refitted
	b.ReportAllocs()
	b.ResetTimer()
	for range b.N {
		d = s.fit(b, p)
	}
	b.ReportMetric(float64(d.Evals)/float64(s.count), "evals/curve")
	b.ReportMetric(float64(s.missed(d)), "missed")
	b.ReportMetric(float64(unreached(d)), "stopped")
}

func BenchmarkScreen(b *testing.B)         { benchScreen(b, false) }
func BenchmarkScreenThorough(b *testing.B) { benchScreen(b, true) }
