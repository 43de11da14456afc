package mechanisms_test

import (
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/mechanisms"
	"ligancy/mechanisms/mechtest"
)

// twentyFour is 24 points over the transition of a curve with its half at 1.
func twentyFour() []float64 {
	lnx := make([]float64, 24)
	for i := range lnx {
		lnx[i] = -4.6 + 0.4*float64(i)
	}
	return lnx
}

// BenchmarkCurve binds a mechanism and evaluates one curve with its gradient at
// 24 points, the same ones each time, as a fit does.
func BenchmarkCurve(b *testing.B) {
	two := []mechanisms.Conformation{{Name: "R", Sites: 4, K: "K_R"}, {Name: "T", Sites: 4, K: "K_T", Weight: "L"}}
	for _, c := range []struct {
		name  string
		c     mechtest.Case
		theta []float64
	}{
		{"mwc4/closed", mechtest.Case{Family: "mwc", Definition: def{Sites: 4}}, []float64{7, -4, -2}},
		{"mwc4/merged", mechtest.Case{Family: "conformations", Definition: def{Conformations: two}}, []float64{-2, 7, 2}},
		{"mwc4/effectors", every["mwc 4, effectors"], []float64{7, -4, -2, 0, 1, 2}},
		{"mwc2+2", every["mwc 2 + 2"], []float64{7, -4, -2, -3, -1}},
		{"hill", every["hill"], []float64{0, 1}},
		{"adair4", every["adair 4"], []float64{0.1, 0.5, 0.1, 1}},
		{"independent2+2", mechtest.Case{Family: "independent", Definition: def{Classes: chains}}, []float64{0, 2}},
		{"square", every["square"], []float64{2, 2}},
		{"ring16", mechtest.Case{Family: "sequential", Definition: def{Contacts: "ring", Sites: 16}}, []float64{2, 2}},
		{"mixture", every["simple parts"], []float64{-1, 2, 0}},
		{"assembly", every["dimer, tetramer"], []float64{1, 0, 0.1, 0.5, 0.1, 1}},
	} {
		b.Run(c.name, func(b *testing.B) {
			m := c.c.Build()
			curve, lnx := m.Curve(), twentyFour()
			env := mechanisms.Environment{Effectors: make([]float64, len(m.Effectors())), Protomers: 1}
			for i := range env.Effectors {
				env.Effectors[i] = 1
			}
			dst, grad := make([]float64, len(lnx)), mat.NewDense(len(lnx), len(c.theta), nil)
			b.ReportAllocs()
			for b.Loop() {
				curve.Bind(c.theta, env)
				curve.Saturation(dst, lnx, grad)
			}
		})
	}
}

// BenchmarkFreshPoints is the closed form at points that it has not seen.
func BenchmarkFreshPoints(b *testing.B) {
	m := mechtest.Case{Family: "mwc", Definition: def{Sites: 4}}.Build()
	curve, lnx, theta := m.Curve(), twentyFour(), []float64{7, -4, -2}
	dst, grad := make([]float64, len(lnx)), mat.NewDense(len(lnx), 3, nil)
	b.ReportAllocs()
	for b.Loop() {
		lnx[0] += 1e-9
		curve.Bind(theta, mechanisms.Environment{})
		curve.Saturation(dst, lnx, grad)
	}
}

// BenchmarkMeasures is each number derived from a bound curve, Bind included.
func BenchmarkMeasures(b *testing.B) {
	curve := bound(b, "mwc", def{Sites: 4}, 9054, 0.014, 1)
	theta := []float64{9.11, -4.27, 0}
	for name, f := range measures {
		b.Run(name, func(b *testing.B) {
			for b.Loop() {
				curve.Bind(theta, mechanisms.Environment{})
				f(curve)
			}
		})
	}
	b.Run("factor", func(b *testing.B) {
		for b.Loop() {
			mechanisms.Factor(curve)
		}
	})
}
