package fit

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// filled returns columns with the given matrix and right-hand side.
func filledColumns(a *mat.Dense, rhs []float64) *columns {
	n, m := a.Dims()
	c := newColumns(n, m)
	copy(c.rhs, rhs)
	for j := range m {
		mat.Col(c.next(), j, a)
		c.push()
	}
	return c
}

func randomMatrix(rng *rand.Rand, n, m int) *mat.Dense {
	a := mat.NewDense(n, m, nil)
	for i := range n {
		for j := range m {
			a.Set(i, j, rng.NormFloat64())
		}
	}
	return a
}

func randomVector(rng *rand.Rand, n int) []float64 {
	v := make([]float64, n)
	for i := range v {
		v[i] = rng.NormFloat64()
	}
	return v
}

// Outside reference: the QR least squares of gonum.
func TestColumnsSolveAsQR(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for range 50 {
		m := 1 + rng.IntN(8)
		n := m + rng.IntN(20)
		a, b := randomMatrix(rng, n, m), randomVector(rng, n)
		c := filledColumns(a, b)
		s := make([]float64, m)
		c.solve(s, c.z, m)

		var qr mat.QR
		qr.Factorize(a)
		var want mat.VecDense
		if err := qr.SolveVecTo(&want, false, mat.NewVecDense(n, b)); err != nil {
			t.Fatal(err)
		}
		for j := range m {
			if d := math.Abs(s[j] + want.AtVec(j)); d > 1e-10*(1+math.Abs(s[j])) {
				t.Fatalf("%d × %d: s[%d] = %v, want %v", n, m, j, s[j], -want.AtVec(j))
			}
		}
		// Q·z + r is what was given; Qᵀr is zero.
		var left float64
		for i := range b {
			left += b[i] * b[i]
		}
		if d := left - dot(c.z, c.z) - dot(c.rhs, c.rhs); math.Abs(d) > 1e-12*left {
			t.Errorf("‖b‖² differs from ‖z‖² + ‖r‖² by %g", d)
		}
	}
}

// Hilbert-like columns: the solution has to be as good as that by reflections.
func TestColumnsIllConditioned(t *testing.T) {
	const n, m = 12, 8
	a := mat.NewDense(n, m, nil)
	x := make([]float64, m)
	b := make([]float64, n)
	for i := range n {
		for j := range m {
			a.Set(i, j, 1/float64(i+j+1))
			x[j] = 1
			b[i] += a.At(i, j)
		}
	}
	c := filledColumns(a, b)
	s := make([]float64, m)
	c.solve(s, c.z, m)
	var qr mat.QR
	qr.Factorize(a)
	var want mat.VecDense
	if err := qr.SolveVecTo(&want, false, mat.NewVecDense(n, b)); err != nil {
		if _, ok := err.(mat.Condition); !ok {
			t.Fatal(err)
		}
	}
	var ours, theirs float64
	for j := range m {
		ours = max(ours, math.Abs(-s[j]-1))
		theirs = max(theirs, math.Abs(want.AtVec(j)-1))
	}
	if ours > 100*theirs+1e-9 {
		t.Errorf("error %g, by reflections %g", ours, theirs)
	}
}

func TestColumnsDependent(t *testing.T) {
	a := mat.NewDense(4, 3, []float64{
		1, 2, 0,
		1, 2, 1,
		1, 2, 2,
		1, 2, 3,
	})
	c := filledColumns(a, []float64{1, 2, 3, 4})
	if d := c.r[1*3+1]; d != 0 {
		t.Errorf("the second column counts as independent: %g", d)
	}
	s := make([]float64, 3)
	c.solve(s, c.z, 3)
	want := []float64{-1, 0, -1} // 1 + x fits exactly; the dependent column gets zero
	for j := range want {
		if math.Abs(s[j]-want[j]) > 1e-12 {
			t.Errorf("s = %v, want %v", s, want)
		}
	}
	zero := filledColumns(mat.NewDense(3, 1, nil), []float64{1, 2, 3})
	if zero.r[0] != 0 || zero.z[0] != 0 {
		t.Errorf("a column of zeros: r %g, z %g", zero.r[0], zero.z[0])
	}
}

// Columns that live on different rows stay there, and the answer is the same.
func TestColumnsSupport(t *testing.T) {
	rng := rand.New(rand.NewPCG(2, 1))
	const n = 12
	a := mat.NewDense(n, 5, nil)
	for i := range n {
		a.Set(i, i/4, 1)
		a.Set(i, 3, rng.NormFloat64())
		a.Set(i, 4, rng.NormFloat64())
	}
	b := randomVector(rng, n)
	c := filledColumns(a, b)
	for j := range 3 {
		if c.from[j] != 4*j || c.to[j] != 4*j+4 {
			t.Errorf("column %d lives on rows %d to %d", j, c.from[j], c.to[j])
		}
	}
	var q mat.Dense
	q.Mul(mat.NewDense(5, n, c.q).T(), mat.NewDense(5, 5, c.r))
	if !mat.EqualApprox(&q, a, 1e-13) {
		t.Error("Q·R is not A")
	}
}

func TestSupport(t *testing.T) {
	for _, c := range []struct {
		a      []float64
		lo, hi int
	}{
		{nil, 0, 0},
		{[]float64{0, 0}, 2, 2},
		{[]float64{0, 1, 0, 2, 0}, 1, 4},
		{[]float64{3}, 0, 1},
	} {
		if lo, hi := support(c.a); lo != c.lo || hi != c.hi {
			t.Errorf("support(%v) = %d, %d, want %d, %d", c.a, lo, hi, c.lo, c.hi)
		}
	}
}

func TestDot(t *testing.T) {
	for n := range 13 {
		var want float64
		a, b := make([]float64, n), make([]float64, n)
		for i := range n {
			a[i], b[i] = float64(i+1), float64(2*i-3)
			want += a[i] * b[i]
		}
		if got := dot(a, b); got != want {
			t.Errorf("dot of %d = %v, want %v", n, got, want)
		}
	}
}
