package mechanisms

import (
	"math"
	"math/cmplx"
	"slices"
)

// Factors are the roots of a binding polynomial P(x) = Σ B_i xⁱ. If all of them
// are real and negative, and only then, the curve is that of n independent
// sites, with dissociation constants K = −root.
type Factors struct {
	// Roots, in the ligand's unit, by size of their absolute value.
	Roots []complex128
	// Independent says that the roots are real and negative: that some Π(1 + x/K)
	// has every coefficient of P to within one part in a million, which no data
	// can see. (Equal sites make a multiple root, and rounding alone scatters the
	// sixteen roots of sixteen equal sites by a fifth.)
	Independent bool
	// LnKd are the logarithms of the dissociation constants of those independent
	// sites, ascending; nil where there are none.
	LnKd []float64
	// Why says why there is no polynomial; the rest is then empty.
	Why string
}

// Factor finds the roots of the polynomial of a bound curve. A fitted curve's
// own roots do not decide whether sites interact: sites nearly alike make a
// double root, which scatter splits into a complex pair half of the time.
func Factor(c Curve) Factors {
	f, ok := c.(factored)
	if w, isWatch := c.(*watch); isWatch {
		f, ok = w.factored, true
	}
	if !ok {
		return Factors{Why: "this curve has no binding polynomial"}
	}
	p := f.polynomial()
	lnB := p.lnB[:p.highest()+1]
	out := Factors{Roots: roots(lnB)}
	if lnK, ok := independentSites(lnB, out.Roots); ok {
		out.Independent, out.LnKd = true, lnK
		for i, l := range lnK {
			out.Roots[i] = complex(-math.Exp(l), 0)
		}
	}
	return out
}

// roots finds all roots at once (Ehrlich 1967, Aberth 1973) from starts on the
// circles of the Newton polygon (Bini 1996). Terms are taken relative to the
// largest, so that coefficients over hundreds of decades do no harm.
func roots(lnB []float64) []complex128 {
	n := len(lnB) - 1
	z := polygonStarts(lnB)
	t := make([]float64, n+1)
	for range 60 {
		worst := 0.0
		for k := range z {
			u := relativeNewton(lnB, t, z[k])
			var pull complex128
			for j := range z {
				if j != k && z[j] != z[k] {
					pull += 1 / (1 - z[j]/z[k])
				}
			}
			w := u / (1 - u*pull)
			if cmplx.IsNaN(w) || cmplx.IsInf(w) {
				continue
			}
			if size := cmplx.Abs(w); size > 0.9 {
				w *= complex(0.9/size, 0)
			}
			z[k] *= 1 - w
			worst = math.Max(worst, cmplx.Abs(w))
		}
		if worst < 1e-15 {
			break
		}
	}
	slices.SortFunc(z, func(a, b complex128) int {
		switch x, y := cmplx.Abs(a), cmplx.Abs(b); {
		case x < y:
			return -1
		case x > y:
			return 1
		case imag(a) < imag(b):
			return -1
		}
		return 1
	})
	return z
}

// relativeNewton is P(z)/(z P′(z)).
func relativeNewton(lnB, t []float64, z complex128) complex128 {
	r, phi := cmplx.Polar(z)
	lnR, top := math.Log(r), math.Inf(-1)
	for i, l := range lnB {
		t[i] = l + float64(i)*lnR
		top = math.Max(top, t[i])
	}
	var p, zp complex128
	for i, l := range t {
		sin, cos := math.Sincos(float64(i) * phi)
		w := math.Exp(l - top)
		term := complex(w*cos, w*sin)
		p += term
		zp += complex(float64(i), 0) * term
	}
	return p / zp
}

// polygonStarts puts as many starts on a circle as the edge of the upper hull of
// (i, ln B_i) is long, at the radius that is its slope.
func polygonStarts(lnB []float64) (z []complex128) {
	n := len(lnB) - 1
	for i := 0; i < n; {
		next, steepest := i+1, math.Inf(-1)
		for j := i + 1; j <= n; j++ {
			if s := (lnB[j] - lnB[i]) / float64(j-i); s >= steepest {
				next, steepest = j, s
			}
		}
		for k := range next - i {
			phi := 2*math.Pi*float64(k)/float64(next-i) + 2*math.Pi*float64(i)/float64(n) + 0.7
			z = append(z, cmplx.Rect(math.Exp(-steepest), phi))
		}
		i = next
	}
	return z
}
