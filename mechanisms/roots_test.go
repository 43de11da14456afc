package mechanisms_test

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"
	"pgregory.net/rapid"

	"ligancy/mechanisms"
)

// companion is the roots of Σ b_i xⁱ as eigenvalues of the companion matrix, by
// gonum.
func companion(t *testing.T, b []float64) []complex128 {
	n := len(b) - 1
	c := mat.NewDense(n, n, nil)
	for i := range n {
		if i > 0 {
			c.Set(i, i-1, 1)
		}
		c.Set(i, n-1, -b[i]/b[n])
	}
	var e mat.Eigen
	if !e.Factorize(c, mat.EigenNone) {
		t.Fatal("no eigenvalues")
	}
	z := e.Values(nil)
	slices.SortFunc(z, func(a, b complex128) int {
		if d := cmplx.Abs(a) - cmplx.Abs(b); math.Abs(d) > 1e-9*cmplx.Abs(a) {
			return int(math.Copysign(1, d))
		}
		return int(math.Copysign(1, imag(a)-imag(b)))
	})
	return z
}

// Roots against the eigenvalues of the companion matrix (gonum).
func TestRootsAgainstCompanion(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 12))
	for range 200 {
		n := 1 + rng.IntN(8)
		b := []float64{1}
		for range n {
			b = append(b, math.Exp(4*rng.Float64()-2))
		}
		got := mechanisms.Factor(bound(t, "adair", def{Sites: n}, b[1:]...)).Roots
		for _, want := range companion(t, b) {
			nearest := math.Inf(1)
			for _, z := range got {
				nearest = math.Min(nearest, cmplx.Abs(z-want)/cmplx.Abs(want))
			}
			if nearest > 1e-7 {
				t.Errorf("β = %v: no root at %v among %v", b, want, got)
			}
		}
	}
}

// Independent sites are found again, alone and however many are alike.
func TestIndependentSitesFactor(t *testing.T) {
	for _, ratio := range []float64{1, 1 + 1e-9, 1 + 1e-6, 1.0001, 1.01, 1.1, 3, 100, 1e9} {
		for n := 1; n <= 8; n++ {
			classes := []mechanisms.Count{{Name: "a", Sites: n}, {Name: "b", Sites: n}}
			f := mechanisms.Factor(bound(t, "independent", def{Classes: classes}, 20, ratio))
			if !f.Independent || len(f.LnKd) != 2*n {
				t.Errorf("%d + %d sites of ratio %g: %+v", n, n, ratio, f)
				continue
			}
			if n == 1 && ratio >= 1.01 {
				closeTo(t, "Kd", math.Exp(f.LnKd[0]), 20, 1e-6)
				closeTo(t, "Kd", math.Exp(f.LnKd[1]), 20*ratio, 1e-6)
			}
		}
	}
}

// Random independent sites over forty decades give their constants back.
func TestRandomIndependentSites(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		n := rapid.IntRange(1, 8).Draw(rt, "sites")
		var classes []mechanisms.Count
		var v, lnK []float64
		last := rapid.Float64Range(-40, 0).Draw(rt, "ln K")
		for i := range n {
			step := 0.0
			if i > 0 {
				step = rapid.Float64Range(0.5, 12).Draw(rt, "step")
			}
			last += step
			lnK = append(lnK, last)
			classes = append(classes, mechanisms.Count{Name: fmt.Sprint(i), Sites: 1})
			v = append(v, math.Exp(last))
		}
		f := mechanisms.Factor(bound(t, "independent", def{Classes: classes, SiteScale: true}, v...))
		if !f.Independent {
			rt.Fatalf("ln K = %v: not independent", lnK)
		}
		for i, l := range f.LnKd {
			if math.Abs(l-lnK[i]) > 1e-4 {
				rt.Errorf("ln K = %v, found %v", lnK, f.LnKd)
			}
		}
	})
}

// Two sites: real roots where K′_2/K′_1 ≤ 1, and there only.
func TestTwoSitesFactor(t *testing.T) {
	for _, c := range []struct {
		k2   float64
		want bool
	}{{0.01, true}, {0.999, true}, {1, true}, {1.00001, false}, {1.001, false}, {100, false}} {
		if f := mechanisms.Factor(pairOf(t, 1, c.k2)); f.Independent != c.want {
			t.Errorf("K′_2/K′_1 = %g: %+v", c.k2, f)
		}
	}
}

// Positive cooperativity, missing ligations and curves without a polynomial.
func TestFactorOfOthers(t *testing.T) {
	for name, c := range map[string]mechanisms.Curve{
		"mwc":    bound(t, "mwc", def{Sites: 4}, 9054, 0.014, 1),
		"square": bound(t, "sequential", def{Contacts: "square"}, 1, 12),
		"β3 = 0": bound(t, "adair", def{Sites: 4}, 4, 6, 0, 1),
	} {
		if f := mechanisms.Factor(c); f.Independent || len(f.Roots) != 4 || f.Why != "" {
			t.Errorf("%s: %+v", name, f)
		}
	}
	if f := mechanisms.Factor(bound(t, "adair", def{Sites: 3}, 2, 1, 0)); !f.Independent || len(f.Roots) != 2 {
		t.Errorf("a site that never fills: %+v", f)
	}
	if f := mechanisms.Factor(bound(t, "hill", def{}, 1, 2)); f.Why == "" {
		t.Errorf("Hill: %+v", f)
	}
}
