package fit_test

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
)

// The invented studies of testdata and their formulas, written out here so that
// the engine is tested and timed without any other package. Their best sums of
// squares, on which GSL 2.7.1, Ceres 2.1.0, SciPy 1.10.1 and R 4.2.2 agree to
// 1e-8, stand beside each.

// table reads the numbers of a CSV file of testdata, column by column.
func table(tb testing.TB, name string) [][]float64 {
	tb.Helper()
	f, err := os.Open("testdata/" + name)
	if err != nil {
		tb.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	rows, err := r.ReadAll()
	if err != nil {
		tb.Fatal(err)
	}
	columns := make([][]float64, len(rows[0]))
	for _, row := range rows[1:] {
		for j, cell := range row {
			v, err := strconv.ParseFloat(cell, 64)
			if err != nil {
				tb.Fatal(err)
			}
			columns[j] = append(columns[j], v)
		}
	}
	return columns
}

// curve is y = f(x; θ) + scatter, replicates at one x collapsed to their mean.
type curve struct {
	x, y, root []float64 // root: √(number of replicates)
	ss         float64   // within replicates
	more       int
	model      func(f []float64, jac *mat.Dense, x, theta []float64)
}

// collapsed groups neighbouring rows of equal x.
func collapsed(x, y []float64) *curve {
	c := &curve{}
	for i := 0; i < len(x); {
		k, sum := i, 0.0
		for ; k < len(x) && x[k] == x[i]; k++ {
			sum += y[k]
		}
		n := float64(k - i)
		for _, v := range y[i:k] {
			c.ss += (v - sum/n) * (v - sum/n)
		}
		c.x, c.y, c.root = append(c.x, x[i]), append(c.y, sum/n), append(c.root, math.Sqrt(n))
		c.more += k - i - 1
		i = k
	}
	return c
}

// single leaves replicates as they are.
func single(x, y []float64) *curve {
	c := &curve{x: x, y: y, root: make([]float64, len(x))}
	for i := range c.root {
		c.root[i] = 1
	}
	return c
}

func (c *curve) Len() int               { return len(c.x) }
func (c *curve) Clone() fit.Block       { return c }
func (c *curve) Pooled() (float64, int) { return c.ss, c.more }
func (c *curve) Eval(res []float64, jac *mat.Dense, theta []float64) error {
	c.model(res, jac, c.x, theta)
	if jac != nil {
		raw := jac.RawMatrix()
		for i, w := range c.root {
			row := raw.Data[i*raw.Stride : i*raw.Stride+raw.Cols]
			for j := range row {
				row[j] *= w
			}
		}
	}
	for i, w := range c.root {
		res[i] = (res[i] - c.y[i]) * w
	}
	return nil
}

// saturation of the four-site concerted protein and its derivatives by ln K_R,
// ln L and ln c (Monod, Wyman & Changeux 1965):
//
//	Ȳ = R̄·Y_R + T̄·Y_T ,  Y_R = α/(1+α) ,  Y_T = cα/(1+cα) ,  T̄/R̄ = L·((1+cα)/(1+α))⁴
func saturation(x, kR, l, c float64) (y, dK, dL, dc float64) {
	a := x / kR
	r, t := 1/(1+a), 1/(1+c*a)
	yR, yT, s := a*r, c*a*t, r/t
	q := l * (s * s) * (s * s)
	pR := 1 / (1 + q)
	pT := 1 - pR
	rt := pR * pT
	d := yT - yR
	v := yT * t
	dL = rt * d
	dK = -(4*rt*d*d + pR*yR*r + pT*v)
	dc = 4*rt*d*yT + pT*v
	return pR*yR + pT*yT, dK, dL, dc
}

// concerted fills a curve of saturation; θ = ln K_R, ln L, ln c.
func concerted(f []float64, jac *mat.Dense, x, theta []float64) {
	k, l, c := math.Exp(theta[0]), math.Exp(theta[1]), math.Exp(theta[2])
	if jac == nil {
		for i, x := range x {
			f[i], _, _, _ = saturation(x, k, l, c)
		}
		return
	}
	raw := jac.RawMatrix().Data
	for i, x := range x {
		g := raw[3*i : 3*i+3]
		f[i], g[0], g[1], g[2] = saturation(x, k, l, c)
	}
}

// stepwise fills a curve of the four-site Adair equation; θ = ln of the four
// intrinsic dissociation constants. ∂Ȳ/∂ln K_k = −Cov(i/4, [i ≥ k]).
func stepwise(f []float64, jac *mat.Dense, x, theta []float64) {
	b1 := 4 * math.Exp(-theta[0])
	b2 := 6 * math.Exp(-theta[0]-theta[1])
	b3 := 4 * math.Exp(-theta[0]-theta[1]-theta[2])
	b4 := math.Exp(-theta[0] - theta[1] - theta[2] - theta[3])
	for i, x := range x {
		w1, w2, w3, w4 := b1*x, b2*x*x, b3*x*x*x, b4*x*x*x*x
		z := 1 / (1 + w1 + w2 + w3 + w4)
		m := (w1 + 2*w2 + 3*w3 + 4*w4) * z
		f[i] = m / 4
		if jac == nil {
			continue
		}
		t4 := w4 * z
		t3 := t4 + w3*z
		t2 := t3 + w2*z
		t1 := t2 + w1*z
		e4 := 4 * w4 * z
		e3 := e4 + 3*w3*z
		e2 := e3 + 2*w2*z
		e1 := e2 + w1*z
		g := jac.RawRowView(i)
		g[0], g[1], g[2], g[3] = -(e1-m*t1)/4, -(e2-m*t2)/4, -(e3-m*t3)/4, -(e4-m*t4)/4
	}
}

// twoClasses is B1·x/(K1+x) + B2·x/(K2+x) + S·x; θ = ln K1, ln K2, ln B1, ln B2, ln S.
func twoClasses(f []float64, jac *mat.Dense, x, theta []float64) {
	k1, k2 := math.Exp(theta[0]), math.Exp(theta[1])
	b1, b2, s := math.Exp(theta[2]), math.Exp(theta[3]), math.Exp(theta[4])
	for i, x := range x {
		u, v := x/(k1+x), x/(k2+x)
		f[i] = b1*u + b2*v + s*x
		if jac != nil {
			g := jac.RawRowView(i)
			g[0], g[1], g[2], g[3], g[4] = -b1*u*(1-u), -b2*v*(1-v), b1*u, b2*v, s*x
		}
	}
}

// surface is the concerted protein at six levels of an effector that binds T
// better than R, each curve with a scale and an offset.
type surface struct {
	curve    []int
	effector []float64
	x, y     []float64
}

func (s *surface) Len() int         { return len(s.x) }
func (s *surface) Clone() fit.Block { return s }
func (s *surface) Eval(res []float64, jac *mat.Dense, theta []float64) error {
	k, l, c := math.Exp(theta[0]), math.Exp(theta[1]), math.Exp(theta[2])
	kT, kR := math.Exp(theta[3]), math.Exp(theta[4])
	for i, x := range s.x {
		j, e := s.curve[i], s.effector[i]
		r := (1 + e/kT) / (1 + e/kR)
		y, dK, dL, dc := saturation(x, k, l*(r*r)*(r*r), c)
		scale := theta[5+j]
		res[i] = theta[11+j] + scale*y - s.y[i]
		if jac != nil {
			g := jac.RawRowView(i)
			g[0], g[1], g[2] = scale*dK, scale*dL, scale*dc
			g[3], g[4] = -scale*dL*4*(e/(kT+e)), scale*dL*4*(e/(kR+e))
			g[5+j], g[11+j] = y, 1
		}
	}
	return nil
}

// boxes are name, bounds and start box, one line a parameter.
func boxes(text string) []fit.Parameter {
	var all []fit.Parameter
	for line := range strings.Lines(strings.TrimSpace(text)) {
		w := strings.Fields(line)
		var v [4]float64
		for i := range v {
			v[i], _ = strconv.ParseFloat(w[i+1], 64)
		}
		all = append(all, fit.Parameter{Name: w[0], Low: v[0], High: v[1], StartLow: v[2], StartHigh: v[3]})
	}
	return all
}

const boxHill4 = `
lnKR -9.21034037 11.5129255 -4.60517019 6.90775528
lnL  -6.90775528 34.5387764 0 18.4206807
lnc  -18.4206807 0 -9.21034037 -0.105360516`

const bestHill4 = 0.00681979052501

func hill4(tb testing.TB, collapse bool) *fit.Problem {
	t := table(tb, "hill4.csv")
	c := single(t[0], t[1])
	if collapse {
		c = collapsed(t[0], t[1])
	}
	c.model = concerted
	return &fit.Problem{Parameters: boxes(boxHill4), Blocks: []fit.Block{c}}
}

const bestAdair4 = 0.00697509363496

func adair4(tb testing.TB) *fit.Problem {
	t := table(tb, "adair4.csv")
	c := collapsed(t[0], t[1])
	c.model = stepwise
	return &fit.Problem{Blocks: []fit.Block{c}, Parameters: boxes(`
lnK1 -9.21034037 13.8155106 -2.30258509 6.90775528
lnK2 -9.21034037 13.8155106 -2.30258509 6.90775528
lnK3 -9.21034037 13.8155106 -2.30258509 6.90775528
lnK4 -9.21034037 13.8155106 -2.30258509 6.90775528`)}
}

const bestShallow = 0.0210340263104

func shallow(tb testing.TB) *fit.Problem {
	t := table(tb, "shallow.csv")
	c := collapsed(t[0], t[1])
	c.model = twoClasses
	return &fit.Problem{Blocks: []fit.Block{c}, Parameters: boxes(`
lnK1 -9.21034037 11.5129255 -3.5065579 6.90775528
lnK2 -9.21034037 11.5129255 -3.5065579 6.90775528
lnB1 -13.8155106 6.90775528 -1.2039728 1.09861229
lnB2 -13.8155106 6.90775528 -1.2039728 1.09861229
lnNS -20.7232658 0 -11.5129255 -4.60517019`)}
}

const bestGlobal = 0.0108696825382

func global(tb testing.TB) *fit.Problem {
	t := table(tb, "global.csv")
	s := &surface{effector: t[1], x: t[2], y: t[3]}
	for _, c := range t[0] {
		s.curve = append(s.curve, int(c))
	}
	p := boxes(boxHill4 + `
lnKTI -9.21034037 16.1180957 -2.30258509 9.21034037
lnKRI -9.21034037 16.1180957 -2.30258509 9.21034037`)
	for _, name := range []string{"scale", "offset"} {
		for j := range 6 {
			p = append(p, fit.Parameter{Name: name + strconv.Itoa(j), Low: -1000, High: 1000, Linear: true})
		}
	}
	return &fit.Problem{Parameters: p, Blocks: []fit.Block{s}}
}
