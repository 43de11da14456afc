package mechanisms_test

import (
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"ligancy/mechanisms"
	"ligancy/mechanisms/mechtest"
)

// bound is a curve of a family at given constants, on their own scale.
func bound(t testing.TB, family string, d mechanisms.Definition, v ...float64) mechanisms.Curve {
	t.Helper()
	m := mechtest.Case{Family: family, Definition: d}.Build()
	theta := make([]float64, len(v))
	for i, c := range m.Constants() {
		switch c.Scale {
		case mechanisms.Log:
			theta[i] = math.Log(v[i])
		case mechanisms.Linear:
			theta[i] = v[i]
		case mechanisms.Logit:
			theta[i] = math.Log(v[i] / (1 - v[i]))
		}
	}
	c := m.Curve()
	c.Bind(theta, mechanisms.Environment{})
	return c
}

// close holds a figure to a relative tolerance.
func closeTo(t *testing.T, what string, got, want, relative float64) {
	t.Helper()
	if !(math.Abs(got-want) <= relative*math.Abs(want)) {
		t.Errorf("%s is %.12g, not %.12g", what, got, want)
	}
}

// at is saturation and n_H at x.
func at(c mechanisms.Curve, x float64) mechanisms.Point {
	var p mechanisms.Point
	c.At(math.Log(x), &p)
	return p
}

func half(c mechanisms.Curve) float64 { return math.Exp(mechanisms.XAt(c, 0.5).Value) }

// ratio is x_90/x_10.
func ratio(c mechanisms.Curve) float64 {
	return math.Exp(mechanisms.XAt(c, 0.9).Value - mechanisms.XAt(c, 0.1).Value)
}

// pairOf is two sites of intrinsic association constants k1 and k2.
func pairOf(t testing.TB, k1, k2 float64) mechanisms.Curve {
	return bound(t, "adair", mechanisms.Definition{Sites: 2}, 2*k1, k1*k2)
}

// Exact mathematics: two sites, n_H = 2/(1 + √(k1/k2)) at half saturation.
func TestTwoSites(t *testing.T) {
	for _, c := range []struct{ r, n, span float64 }{
		{0.01, 1.8181818, 11.741239}, {0.25, 1.3333333, 0}, {4, 0.6666667, 273.70406}, {100, 0.1818182, 6417.9874}} {
		curve := pairOf(t, c.r, 1)
		n := mechanisms.HillAtHalf(curve).Value
		closeTo(t, "n_H at half saturation", n, 2/(1+math.Sqrt(c.r)), 1e-13)
		closeTo(t, "n_H at half saturation", n, c.n, 2e-7)
		if c.span > 0 {
			closeTo(t, "x_90/x_10", ratio(curve), c.span, 4e-8)
		}
	}
}

// Exact mathematics: two equal classes of ratio r, n_H = 4√r/(1+√r)².
func TestTwoEqualClasses(t *testing.T) {
	for _, c := range []struct{ r, n float64 }{{10, 0.7301261}, {100, 0.3305785}, {1000, 0.1188552}} {
		for _, sites := range []int{1, 2, 4} {
			curve := bound(t, "independent", mechanisms.Definition{Classes: []mechanisms.Count{{Name: "a", Sites: sites}, {Name: "b", Sites: sites}}}, 3, c.r)
			n := mechanisms.HillAtHalf(curve).Value
			closeTo(t, "n_H", n, 4*math.Sqrt(c.r)/math.Pow(1+math.Sqrt(c.r), 2), 1e-13)
			closeTo(t, "n_H", n, c.n, 1e-7)
		}
	}
}

// Exact mathematics: a Hill curve has x_90/x_10 = 81^(1/h).
func TestHillRatio(t *testing.T) {
	for _, c := range []struct{ h, ratio float64 }{{0.5, 6561}, {1, 81}, {2, 9}, {2.7, 5.0915065}, {2.8, 4.8039867}, {4, 3}} {
		curve := bound(t, "hill", mechanisms.Definition{}, 7, c.h)
		closeTo(t, "x_90/x_10", ratio(curve), c.ratio, 1e-8)
		closeTo(t, "slope from the ratio", mechanisms.Hill1090(curve).Value, c.h, 1e-13)
	}
}

// Monod, Wyman & Changeux 1965 and later sets, as later works quote them (second-hand
// and from memory); the derived figures are exact mathematics of those constants.
func TestConcertedSets(t *testing.T) {
	for _, c := range []struct {
		name                         string
		l, c, half, nHalf, nMax, yAt float64
		within                       float64
	}{
		{"haemoglobin", 9054, 0.014, 9.89680, 2.85323066, 2.85588463, 0.534132, 1e-6},
		{"theoretical set (memory)", 1000, 0.01, 5.34063, 2.845483, 2.88027, 0, 2e-6},
		{"phosphofructokinase (memory)", 4e6, 5e-4, 44.7214, 3.743278, 0, 0, 2e-6},
		{"ridge", 1e4, 0.01, 10, 3.00826446281, 3.00826446281, 0.5, 1e-11},
	} {
		curve := bound(t, "mwc", mechanisms.Definition{Sites: 4}, c.l, c.c, 1)
		closeTo(t, c.name+": x_half", half(curve), c.half, c.within)
		closeTo(t, c.name+": n_H at half", mechanisms.HillAtHalf(curve).Value, c.nHalf, c.within)
		n, where := mechanisms.HillMax(curve)
		if c.nMax > 0 {
			closeTo(t, c.name+": largest n_H", n.Value, c.nMax, c.within)
		}
		if c.yAt > 0 {
			closeTo(t, c.name+": where", where.Value, c.yAt, 1e-6)
		}
	}
	exclusive := bound(t, "mwc", mechanisms.Definition{Sites: 4, Constants: fixed("c", 0)}, 1000, 1)
	n, where := mechanisms.HillMax(exclusive)
	closeTo(t, "exclusive: n_H at half", mechanisms.HillAtHalf(exclusive).Value, 3.03204679, 1e-8)
	closeTo(t, "exclusive: largest n_H", n.Value, 3.13970308, 1e-8)
	closeTo(t, "exclusive: where", where.Value, 0.25, 1e-9)
}

// Exact mathematics: n_H = 1 + (n−1) R̄T̄(Ȳ_R−Ȳ_T)²/[Ȳ(1−Ȳ)] at any x.
func TestConcertedSlope(t *testing.T) {
	const l, c = 9054.0, 0.014
	curve := bound(t, "mwc", mechanisms.Definition{Sites: 4}, l, c, 1)
	for _, alpha := range []float64{1e-6, 0.1, 3, half(curve), 40, 1e5} {
		r := math.Pow(1+alpha, 4)
		w := l * math.Pow(1+c*alpha, 4)
		rBar := r / (r + w)
		p := at(curve, alpha)
		d := alpha/(1+alpha) - c*alpha/(1+c*alpha)
		closeTo(t, "n_H", p.NH, 1+3*rBar*(1-rBar)*d*d/(p.Y*p.Empty), 1e-12)
		if alpha == half(curve) {
			closeTo(t, "R̄", rBar, 0.4809775, 1e-7)
		}
	}
}

// Exact mathematics: MWC as Adair, k_i K_R = (1 + L cⁱ)/(1 + L c^{i−1}).
func TestConcertedAsAdair(t *testing.T) {
	mwc := bound(t, "mwc", mechanisms.Definition{Sites: 4}, 9054, 0.014, 1)
	k := []float64{0.0141088901, 0.0217178371, 0.3693685886, 0.9760974809}
	pop := mwc.(mechanisms.Populated)
	p := pop.Populations(nil, 0)
	byLigation := make([]float64, 5)
	for i, name := range pop.StateNames() {
		byLigation[name[3]-'0'] += p[i] // "R, 2 bound"
	}
	beta := make([]float64, 4)
	sum := 1.0
	for i := range k {
		closeTo(t, fmt.Sprintf("k%d K_R", i+1), byLigation[i+1]/byLigation[i]*float64(i+1)/float64(4-i), k[i], 1e-8)
		sum *= byLigation[i+1] / byLigation[i]
		beta[i] = sum
	}
	adair := bound(t, "adair", mechanisms.Definition{Sites: 4}, beta...)
	for _, x := range []float64{0.01, 1, 9, 100} {
		closeTo(t, "Ȳ", at(adair, x).Y, at(mwc, x).Y, 1e-12)
		closeTo(t, "n_H", at(adair, x).NH, at(mwc, x).NH, 1e-12)
	}
}

// Pauling 1935, square and tetrahedral contacts; closed forms are exact mathematics.
func TestPauling(t *testing.T) {
	const a, k = 12.0, 0.3
	square := bound(t, "sequential", mechanisms.Definition{Contacts: "square"}, 1/k, a)
	closeTo(t, "square: x_half", half(square), 1/(a*k), 1e-13)
	closeTo(t, "square: n_H", mechanisms.HillAtHalf(square).Value, (8+8/a)/(2+8/a+(4*a+2)/(a*a)), 1e-13)
	closeTo(t, "square: n_H", mechanisms.HillAtHalf(square).Value, 2.8755760, 1e-7)
	tetra := bound(t, "sequential", mechanisms.Definition{Contacts: "tetrahedral"}, 1/k, a)
	b := math.Pow(a, -1.5)
	closeTo(t, "tetrahedral: x_half", half(tetra), b/k, 1e-13)
	closeTo(t, "tetrahedral: n_H", mechanisms.HillAtHalf(tetra).Value, (8+8*b)/(2+8*b+6/(a*a)), 1e-13)
	closeTo(t, "tetrahedral: n_H", mechanisms.HillAtHalf(tetra).Value, 3.6669749, 1e-7)
}

// Wyman 1964: the area under Ȳ below ln x_m is that over Ȳ above it; integrals
// by Gauss–Legendre quadrature of gonum.
func TestMedian(t *testing.T) {
	for name, c := range every {
		m := c.Build()
		if name == "hill" || len(m.Effectors()) > 0 {
			continue
		}
		theta := make([]float64, len(m.Constants()))
		for i, k := range m.Constants() {
			theta[i] = 0.4 + 0.3*float64(i)
			if k.High == 1 {
				theta[i] = -theta[i]
			}
		}
		curve := m.Curve()
		curve.Bind(theta, mechanisms.Environment{Protomers: 0.7})
		x := mechanisms.Median(curve)
		if x.Why != "" {
			t.Errorf("%s: %s", name, x.Why)
		}
		var p mechanisms.Point
		piece := func(f func(p *mechanisms.Point) float64, a float64) (sum float64) {
			for i := range 45 {
				l := a + float64(i)
				sum += quad.Fixed(func(l float64) float64 { curve.At(l, &p); return f(&p) }, l, l+1, 12, quad.Legendre{}, 0)
			}
			return sum
		}
		below := piece(func(p *mechanisms.Point) float64 { return p.Y }, x.Value-45)
		above := piece(func(p *mechanisms.Point) float64 { return p.Empty }, x.Value)
		closeTo(t, name+": area below the median", below, above, 1e-8)
	}
}

// Adair constants of human blood, Roughton, DeLand, Kernohan & Severinghaus 1972
// (second-hand; attribution from memory): macroscopic stepwise dissociation
// constants in mmHg. Derived figures computed with general-purpose tools.
func TestBlood(t *testing.T) {
	beta, b := make([]float64, 4), 1.0
	for i, k := range []float64{45.9, 23.9, 243.1, 1.52} {
		b /= k
		beta[i] = b
	}
	c := bound(t, "adair", mechanisms.Definition{Sites: 4}, beta...)
	closeTo(t, "P50", half(c), 26.7079, 2e-6)
	closeTo(t, "n_H at half", mechanisms.HillAtHalf(c).Value, 2.71841, 2e-6)
	n, where := mechanisms.HillMax(c)
	closeTo(t, "largest n_H", n.Value, 2.77102, 2e-6)
	closeTo(t, "where", where.Value, 0.6659, 1e-4)
	closeTo(t, "its pressure", math.Exp(mechanisms.XAt(c, where.Value).Value), 34.31, 1e-4)
	closeTo(t, "median", math.Exp(mechanisms.Median(c).Value), 25.2325, 2e-6)
	for p, y := range map[float64]float64{10: 9.535, 20: 31.840, 40: 75.288, 100: 96.906} {
		closeTo(t, "Ȳ", 100*at(c, p).Y, y, 6e-5)
	}
}

// Least-squares fits of published tables, computed with R and SciPy: what the
// fitted constants imply. Severinghaus 1979 (blood, torr) and Mills, Johnson &
// Ackers 1976 (haemoglobin, µM).
func TestFittedCurves(t *testing.T) {
	for _, c := range []struct {
		name           string
		curve          mechanisms.Curve
		half, n, most  float64
		withinConstant float64
	}{
		{"blood, Adair", bound(t, "adair", mechanisms.Definition{Sites: 4}, 0.0246600, 9.20562e-4, 0, 2.567613e-6), 26.8317, 2.7317, 2.8169, 3e-5},
		{"blood, MWC", bound(t, "mwc", mechanisms.Definition{Sites: 4}, 6.503e6, 0.48995/111.393, 0.48995), 26.916, 2.7668, 0, 1e-4},
		{"blood, Hill", bound(t, "hill", mechanisms.Definition{}, 26.3842, 2.64661), 26.3842, 2.64661, 2.64661, 1e-12},
		{"haemoglobin, Adair", bound(t, "adair", mechanisms.Definition{Sites: 4}, 0.0285459, 0.00432459, 0, 1.92264e-4), 8.74582, 3.23405, 3.2561, 2e-5},
		{"haemoglobin, MWC", bound(t, "mwc", mechanisms.Definition{Sites: 4}, 8.741e5, 0.27698/81.069, 0.27698), 8.7532, 3.2671, 0, 1e-4},
	} {
		closeTo(t, c.name+": x_half", half(c.curve), c.half, c.withinConstant)
		closeTo(t, c.name+": n_H at half", mechanisms.HillAtHalf(c.curve).Value, c.n, c.withinConstant)
		if n, _ := mechanisms.HillMax(c.curve); c.most > 0 {
			closeTo(t, c.name+": largest n_H", n.Value, c.most, c.withinConstant)
		}
	}
}

// Negative cooperativity, GAPDH and NAD⁺, Conway & Koshland 1968 (memory).
func TestNegativeCooperativity(t *testing.T) {
	beta, b := make([]float64, 4), 1.0
	for i, k := range []float64{1e-11, 1e-9, 3e-7, 2.6e-5} {
		b /= k
		beta[i] = b
	}
	c := bound(t, "adair", mechanisms.Definition{Sites: 4}, beta...)
	closeTo(t, "x_half", half(c), 1.732e-8, 1e-4)
	closeTo(t, "n_H at half", mechanisms.HillAtHalf(c).Value, 0.10377, 3e-5)
}

// Two positive dimers a hundredfold apart: n_H of 0.18, 0.11 and 0.09 at the middle for a
// cooperativity of 10, 100 and 1000 within the dimer (computed), and complex roots.
func TestTwoPositiveDimers(t *testing.T) {
	for _, c := range []struct{ a, n float64 }{{10, 0.18}, {100, 0.11}, {1000, 0.09}} {
		// (1 + 2x + a x²)(1 + 2y + a y²) with y = x/100.
		p, q := []float64{1, 2, c.a}, []float64{1, 2e-2, c.a * 1e-4}
		b := make([]float64, 5)
		for i := range p {
			for j := range q {
				b[i+j] += p[i] * q[j]
			}
		}
		curve := bound(t, "adair", mechanisms.Definition{Sites: 4}, b[1:]...)
		if n := mechanisms.HillAtHalf(curve).Value; math.Abs(n-c.n) > 0.006 {
			t.Errorf("cooperativity %g: n_H is %.4f, not about %g", c.a, n, c.n)
		}
		if mechanisms.Factor(curve).Independent {
			t.Errorf("cooperativity %g: the curve is said to be that of independent sites", c.a)
		}
	}
}

// table reads one of the computed tables; each names its source in its head.
func table(t *testing.T, name string) [][]string {
	t.Helper()
	f, err := os.Open("testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return rows[1:]
}

func numbers(t *testing.T, row []string) []float64 {
	t.Helper()
	v := make([]float64, len(row))
	for i, s := range row {
		f, err := strconv.ParseFloat(s, 64)
		if err != nil {
			t.Fatal(err)
		}
		v[i] = f
	}
	return v
}

func TestConcertedTable(t *testing.T) {
	for _, row := range table(t, "mwc_slopes_n4_computed.csv") {
		v := numbers(t, row)
		at := fmt.Sprintf("L %g, c %g: ", v[0], v[1])
		curve := bound(t, "mwc", mechanisms.Definition{Sites: 4}, v[0], v[1], 1)
		closeTo(t, at+"x_half", half(curve), v[2], 5e-8)
		closeTo(t, at+"n_H at half", mechanisms.HillAtHalf(curve).Value, v[3], 5e-7)
		n, where := mechanisms.HillMax(curve)
		closeTo(t, at+"largest n_H", n.Value, v[4], 1e-5)
		closeTo(t, at+"where", where.Value, v[5], 2e-3)
	}
}

func TestSequentialTable(t *testing.T) {
	for _, row := range table(t, "sequential_polynomials_computed.csv") {
		v := numbers(t, row[1:])
		at := fmt.Sprintf("%s, K_AB %g, K_BB %g: ", row[0], v[0], v[1])
		d := mechanisms.Definition{Contacts: row[0], Sites: 4, Constants: fixed("K_AB", v[0])}
		curve := bound(t, "sequential", d, 1, v[1], v[0])
		p := curve.(mechanisms.Populated).Populations(nil, 0)
		for i := range p {
			closeTo(t, fmt.Sprintf("%sb%d", at, i), p[i]/p[0], v[2+i], 1e-12)
		}
		closeTo(t, at+"x_half", half(curve), v[7], 1e-7)
		closeTo(t, at+"n_H at half", mechanisms.HillAtHalf(curve).Value, v[8], 1e-7)
	}
}
