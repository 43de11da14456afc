package mechanisms

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
)

func TestQuick(t *testing.T) {
	for _, tc := range []struct {
		fam string
		d   Definition
	}{
		{"hill", Definition{}}, {"adair", Definition{Sites: 4}}, {"adair", Definition{Sites: 4, SiteScale: true}},
		{"mwc", Definition{Sites: 4}}, {"mwc", Definition{Sites: 4, Effectors: []Effector{{"ala", "both", true}, {"b", "T", false}}}},
		{"mwc", Definition{SiteClasses: []Count{{"a", 2}, {"b", 2}}, Turnover: []Weight{{"R", 1, false}, {"T", 0, true}}}},
		{"mwc", Definition{Sites: 4, Sees: []Weight{{"R", 1, false}}}},
		{"sequential", Definition{Contacts: "square"}}, {"sequential", Definition{Contacts: "ring", Sites: 16}},
		{"independent", Definition{Classes: []Count{{"a", 2}, {"b", 3}}}},
		{"mixture", Definition{Parts: []Part{{Name: "a", Sites: 1}, {Name: "b", Sites: 1}}}},
		{"mixture", Definition{Parts: []Part{{Name: "a", Sites: 1}, {Name: "b", Family: "mwc", Definition: &Definition{Sites: 4, Effectors: []Effector{{"x", "T", false}}}}, {Name: "h", Family: "hill"}, {Name: "c", Sites: 2}}}},
		{"assembly", Definition{Small: &Part{Sites: 2}, Large: &Part{Family: "adair", Definition: &Definition{Sites: 4}}}},
		{"assembly", Definition{Small: &Part{Sites: 1}, Large: &Part{Family: "mwc", Definition: &Definition{Sites: 3, Effectors: []Effector{{"x", "T", false}}}}}},
		{"states", Definition{States: []State{{Name: "E"}, {Name: "ES", Ligands: 1, Ways: 2, Constants: map[string]float64{"K": -1}}, {Name: "EI", Effectors: map[string]int{"I": 1}, Constants: map[string]float64{"KI": -1}}, {Name: "ES2", Ligands: 2, Constants: map[string]float64{"K": -2, "a": 1}}},
			Turnover: []Weight{{"ES", 1, false}, {"ES2", 0, true}}}},
		{"conformations", Definition{Conformations: []Conformation{{Name: "A", Sites: 2, K: "KA", Ligands: map[string]string{"I": "KI"}}, {Name: "B", Sites: 3, K: "KB", Weight: "L"}, {Name: "h", Like: "A", Weight: "r"}, {Name: "n", Weight: "q"}}, Sees: []Weight{{"A", 1, false}, {"B", .5, false}, {"h", 0, true}}}},
	} {
		f, _ := Lookup(tc.fam)
		m, err := f.Build(tc.d)
		if err != nil {
			t.Fatal(err)
		}
		k := len(m.Constants())
		th := make([]float64, k)
		for i, c := range m.Constants() {
			th[i] = 0.3 + 0.37*float64(i)
			if c.High == 1 {
				th[i] = -1.3
			}
		}
		env := Environment{Effectors: []float64{0.7, 0.3}[:len(m.Effectors())], Protomers: 2}
		lnx := []float64{-3, -1, 0.2, 1, 3}
		check := func(c Curve) {
			y := make([]float64, 5)
			g := mat.NewDense(5, k, nil)
			c.Bind(th, env)
			c.Saturation(y, lnx, g)
			for j := range th {
				h := 1e-5
				a, b := make([]float64, 5), make([]float64, 5)
				t2 := append([]float64(nil), th...)
				t2[j] += h
				c.Bind(t2, env)
				c.Saturation(a, lnx, nil)
				var pa, pb Point
				c.At(lnx[1], &pa)
				t2[j] -= 2 * h
				c.Bind(t2, env)
				c.Saturation(b, lnx, nil)
				c.At(lnx[1], &pb)
				for r := range y {
					if d := (a[r]-b[r])/2/h - g.At(r, j); !(math.Abs(d) < 1e-9) {
						t.Errorf("%s %v grad %d,%d: %g vs %g", tc.fam, tc.d, r, j, g.At(r, j), (a[r]-b[r])/2/h)
					}
				}
				c.Bind(th, env)
				var p Point
				c.At(lnx[1], &p)
				if d := (pa.NH-pb.NH)/2/h - p.GradNH[j]; !(math.Abs(d) < 1e-7) {
					t.Errorf("%s gradNH %d: %g %g", tc.fam, j, (pa.NH-pb.NH)/2/h, p.GradNH[j])
				}
				if d := (pa.DNH-pb.DNH)/2/h - p.GradDNH[j]; !(math.Abs(d) < 1e-7) {
					t.Errorf("%s gradDNH %d: %g %g", tc.fam, j, (pa.DNH-pb.DNH)/2/h, p.GradDNH[j])
				}
				if _, ok := c.(*watch); !ok && math.Abs(p.Y-y[1]) > 1e-14 {
					t.Errorf("%s Y %g %g", tc.fam, p.Y, y[1])
				}
				c.At(lnx[1]+h, &pa)
				c.At(lnx[1]-h, &pb)
				if d := (pa.DNH-pb.DNH)/2/h - p.D2NH; !(math.Abs(d) < 1e-7) {
					t.Errorf("%s D2NH: %g %g", tc.fam, (pa.DNH-pb.DNH)/2/h, p.D2NH)
				}
				if d := (pa.NH-pb.NH)/2/h - p.DNH; !(math.Abs(d) < 1e-7) {
					t.Errorf("%s DNH: %g %g", tc.fam, (pa.NH-pb.NH)/2/h, p.DNH)
				}
			}
		}
		c := m.Curve()
		check(c)
		if w, ok := c.(Watched); ok {
			check(w.Watch())
		}
	}
}
func BenchmarkMWC4(b *testing.B)   { bench(b, "mwc", Definition{Sites: 4}) }
func BenchmarkRing16(b *testing.B) { bench(b, "sequential", Definition{Contacts: "ring", Sites: 16}) }
func BenchmarkSquare(b *testing.B) { bench(b, "sequential", Definition{Contacts: "square"}) }
func BenchmarkAdair(b *testing.B)  { bench(b, "adair", Definition{Sites: 4}) }
func BenchmarkInd(b *testing.B) {
	bench(b, "independent", Definition{Classes: []Count{{"a", 2}, {"b", 2}}, Differs: true})
}
func BenchmarkMWC22(b *testing.B) {
	bench(b, "mwc", Definition{SiteClasses: []Count{{"a", 2}, {"b", 2}}, Differs: true})
}
func bench(b *testing.B, fam string, d Definition) {
	f, _ := Lookup(fam)
	m, _ := f.Build(d)
	k := len(m.Constants())
	c := m.Curve()
	th := make([]float64, k)
	for i := range th {
		th[i] = 1
	}
	lnx := make([]float64, 24)
	for i := range lnx {
		lnx[i] = -4 + float64(i)/2.5
	}
	dst := make([]float64, 24)
	g := mat.NewDense(24, k, nil)
	b.ReportAllocs()
	for b.Loop() {
		c.Bind(th, Environment{})
		c.Saturation(dst, lnx, g)
	}
}
