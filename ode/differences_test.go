package ode

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// band is y′ᵢ = yᵢ₋₁² − 3 yᵢ yᵢ₊₁ + sin t/1000, with its pattern.
type band struct{ n int }

func (b band) Dim() int { return b.n }

func (b band) Derivs(dst []float64, t float64, y []float64) error {
	for i := range dst {
		dst[i] = 1e-3 * math.Sin(t)
		if i > 0 {
			dst[i] += y[i-1] * y[i-1]
		}
		if i < b.n-1 {
			dst[i] -= 3 * y[i] * y[i+1]
		}
	}
	return nil
}

func (b band) Pattern() [][]int {
	rows := make([][]int, b.n)
	for i := range rows {
		for j := max(0, i-1); j <= min(b.n-1, i+1); j++ {
			rows[i] = append(rows[i], j)
		}
	}
	return rows
}

func (b band) exact(i, j int, y []float64) float64 {
	switch {
	case j == i-1:
		return 2 * y[j]
	case j == i && i < b.n-1:
		return -3 * y[i+1]
	case j == i+1:
		return -3 * y[i]
	}
	return 0
}

// hidden is a band without its pattern.
type hidden struct{ System }

func TestDifferences(t *testing.T) {
	b := band{9}
	y, fy, iw := make([]float64, 9), make([]float64, 9), make([]float64, 9)
	for i := range y {
		y[i] = math.Pow(10, float64(i)/2-2) * (1 + float64(i%3))
		if i%2 == 1 {
			y[i] = -y[i]
		}
		iw[i] = 1 / (1e-8 * (math.Abs(y[i]) + 1e-7))
	}
	if err := b.Derivs(fy, 0.3, y); err != nil {
		t.Fatal(err)
	}
	for _, sys := range []System{b, hidden{b}} {
		var fl flow
		fl.bind(sys, false, new(Stats))
		fl.rtol = 1e-8
		jac := make([]float64, 81)
		if err := fl.jacobian(jac, place{0.3, y, fy, iw, 1e-3}); err != nil {
			t.Fatal(err)
		}
		compareBand(t, b, jac, y, iw, 2e-6)
		forward := fl.stats.Differences
		if err := fl.exactJacobian(jac, place{0.3, y, fy, iw, 1e-3}); err != nil {
			t.Fatal(err)
		}
		compareBand(t, b, jac, y, iw, 1e-8)
		groups := 9
		if _, ok := sys.(Patterner); ok {
			groups = 3
		}
		if forward != groups || fl.stats.Differences != 3*groups {
			t.Errorf("%d and %d evaluations for %d groups", forward, fl.stats.Differences-forward, groups)
		}
	}
}

// compareBand asks for entries right in units of the weights: wᵢ/wⱼ.
func compareBand(t *testing.T, b band, jac, y, iw []float64, tol float64) {
	t.Helper()
	for i := range b.n {
		for j := range b.n {
			want := b.exact(i, j, y)
			if d := math.Abs(jac[i*b.n+j] - want); d > tol*max(math.Abs(want), iw[j]/iw[i]) {
				t.Errorf("∂f%d/∂y%d is %g, not %g", i+1, j+1, jac[i*b.n+j], want)
			}
		}
	}
}

func TestVariational(t *testing.T) {
	const n, p = 3, 2
	fl := flow{n: n, p: p}
	jac := []float64{1, 0, 2, 0, -1, 0, 3, 4, 5}
	s := []float64{1, 2, 3, 4, 5, 6}
	dst := []float64{1, 1, 1, 1, 1, 1}
	fl.variational(dst, jac, s)
	var want mat.Dense
	want.Mul(mat.NewDense(n, n, jac), mat.NewDense(n, p, s))
	for k, v := range want.RawMatrix().Data {
		close1(t, "J S + ∂f/∂θ", dst[k], v+1, 1e-15)
	}
}
