package fit

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// triangle is a random upper triangle, row after row.
func triangle(rng *rand.Rand, m int) []float64 {
	s := make([]float64, m*m)
	for i := range m {
		for j := i; j < m; j++ {
			s[i*m+j] = rng.NormFloat64()
		}
	}
	return s
}

// stepOf solves (SᵀS + λI)t = −Sᵀz with gonum.
func stepOf(s, z []float64, m int, lambda float64) []float64 {
	a := mat.NewDense(m, m, append([]float64(nil), s...))
	var n mat.Dense
	n.Mul(a.T(), a)
	for i := range m {
		n.Set(i, i, n.At(i, i)+lambda)
	}
	var g, t mat.VecDense
	g.MulVec(a.T(), mat.NewVecDense(m, z))
	g.ScaleVec(-1, &g)
	if err := t.SolveVec(&n, &g); err != nil {
		if _, ok := err.(mat.Condition); !ok {
			panic(err)
		}
	}
	return t.RawVector().Data
}

// Outside reference: the multiplier by bisection, each step by gonum's solver.
func TestRegionAgainstBisection(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 1))
	for range 100 {
		m := 1 + rng.IntN(6)
		s, z := triangle(rng, m), randomVector(rng, m)
		full := norm(stepOf(s, z, m, 0))
		radius := full * math.Exp(3*rng.NormFloat64())
		g := newRegion(m)
		got := make([]float64, m)
		lambda := g.solve(got, s, z, m, m, radius)
		if full <= radius {
			if lambda != 0 {
				t.Fatalf("the whole step fits, yet λ = %g", lambda)
			}
			continue
		}
		low, high := 0.0, 1e12
		for range 300 {
			mid := (low + high) / 2
			if norm(stepOf(s, z, m, mid)) > radius {
				low = mid
			} else {
				high = mid
			}
		}
		if math.Abs(norm(got)/radius-1) > 2e-3 {
			t.Fatalf("‖t‖ = %g of a radius of %g", norm(got), radius)
		}
		want := stepOf(s, z, m, low)
		for j := range m {
			if math.Abs(got[j]-want[j]) > 5e-3*radius {
				t.Fatalf("t = %v, want %v", got, want)
			}
		}
	}
}

func TestRegionDependentColumn(t *testing.T) {
	// Second column zero: t lies along the first, within any radius.
	s := []float64{2, 0, 0, 0}
	z := []float64{-4, 0}
	g := newRegion(2)
	got := make([]float64, 2)
	if lambda := g.solve(got, s, z, 2, 2, 10); lambda != 0 || got[0] != 2 || got[1] != 0 {
		t.Errorf("t = %v, λ = %g", got, lambda)
	}
	g.solve(got, s, z, 2, 2, 0.5)
	if math.Abs(got[0]-0.5) > 1e-3 || got[1] != 0 {
		t.Errorf("within 0.5: t = %v", got)
	}
}

func TestRegionTinyAndHuge(t *testing.T) {
	for _, scale := range []float64{1e-100, 1e-20, 1, 1e20, 1e100} {
		s := []float64{3, 1, 0, 0.5}
		z := []float64{scale, scale}
		full := norm(stepOf(s, []float64{1, 1}, 2, 0)) * scale
		g := newRegion(2)
		got := make([]float64, 2)
		for _, share := range []float64{1e-6, 0.1, 0.9} {
			g.solve(got, s, z, 2, 2, share*full)
			if r := norm(got) / (share * full); !(math.Abs(r-1) < 2e-3) {
				t.Errorf("scale %g, share %g: length %g of the radius", scale, share, r)
			}
		}
	}
}
