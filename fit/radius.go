package fit

import "math"

// region solves the trust-region subproblem of Gauss–Newton
//
//	min ‖S·t + z‖   subject to ‖t‖ ≤ Δ ,
//
// where S is m × m upper triangular (a zero on its diagonal marks a dependent
// column), by Newton's iteration on 1/Δ − 1/‖t(λ)‖ with
// (SᵀS + λI)·t(λ) = −Sᵀz, factored by rotations so that SᵀS is never formed.
//
// Moré JJ (1978), in Numerical Analysis, Dundee 1977 (Springer), 105–116.
type region struct {
	most    int
	u, v, w []float64 // rotated triangle, right-hand side, row being rotated in
}

func newRegion(most int) *region {
	return &region{
		most: most, u: make([]float64, most*most), v: make([]float64, most), w: make([]float64, most),
	}
}

// solve writes t and returns λ. The rows of s are stride apart.
func (g *region) solve(t, s, z []float64, m, stride int, radius float64) (lambda float64) {
	full := backSolve(t, s, z, m, stride)
	length := norm(t[:m])
	if length <= radius {
		return 0
	}
	// Bounds of λ: Newton's step from zero where S has full rank, ‖Sᵀz‖/Δ.
	low, high := 0.0, 0.0
	for j := 0; j < m; j++ {
		var g float64
		for i := 0; i <= j; i++ {
			g += s[i*stride+j] * z[i]
		}
		high += g * g
	}
	high = math.Sqrt(high) / radius
	if full {
		low = (length - radius) / radius * g.stretch(t, s, m, stride)
	}
	lambda = low
	if !full {
		lambda = 1e-3 * high
	}
	for range 30 {
		if lambda <= 0 || lambda < low || lambda > high {
			lambda = max(1e-3*high, math.Sqrt(max(low, 0)*high))
		}
		g.rotate(s, z, m, stride, lambda)
		backSolve(t, g.u, g.v, m, g.most)
		length = norm(t[:m])
		off := length - radius
		if math.Abs(off) <= 1e-3*radius || high-low <= 1e-12*high {
			break
		}
		if off > 0 {
			low = max(low, lambda)
		} else {
			high = min(high, lambda)
		}
		lambda += off / radius * g.stretch(t, g.u, m, g.most)
	}
	return lambda
}

// stretch is ‖t‖²/‖U⁻ᵀt‖², the Newton step of λ per relative excess of ‖t‖.
func (g *region) stretch(t, u []float64, m, stride int) float64 {
	var tt, ww float64
	for i := 0; i < m; i++ {
		v := t[i]
		tt += v * v
		for j := 0; j < i; j++ {
			v -= u[j*stride+i] * g.w[j]
		}
		if d := u[i*stride+i]; d != 0 {
			v /= d
		}
		g.w[i] = v
		ww += v * v
	}
	return tt / ww
}

// rotate turns [S; √λ·I | −z] into the triangle u with right-hand side v.
func (g *region) rotate(s, z []float64, m, stride int, lambda float64) {
	for i := 0; i < m; i++ {
		copy(g.u[i*g.most+i:i*g.most+m], s[i*stride+i:i*stride+m])
		g.v[i] = z[i]
	}
	root := math.Sqrt(lambda)
	for k := 0; k < m; k++ {
		for j := k; j < m; j++ {
			g.w[j] = 0
		}
		g.w[k] = root
		var b float64
		for i := k; i < m; i++ {
			if g.w[i] == 0 {
				continue
			}
			row := g.u[i*g.most : i*g.most+m]
			h := math.Sqrt(row[i]*row[i] + g.w[i]*g.w[i])
			c, d := row[i]/h, g.w[i]/h
			row[i] = h
			for j := i + 1; j < m; j++ {
				row[j], g.w[j] = c*row[j]+d*g.w[j], c*g.w[j]-d*row[j]
			}
			g.v[i], b = c*g.v[i]+d*b, c*b-d*g.v[i]
		}
	}
}

// backSolve writes the t of S·t = −z, zero where S has a zero on its diagonal,
// and says whether S has full rank.
func backSolve(t, s, z []float64, m, stride int) (full bool) {
	full = true
	for i := m - 1; i >= 0; i-- {
		row := s[i*stride : i*stride+m]
		if row[i] == 0 {
			t[i], full = 0, false
			continue
		}
		v := -z[i]
		for j := i + 1; j < m; j++ {
			v -= row[j] * t[j]
		}
		t[i] = v / row[i]
	}
	return full
}

func norm(a []float64) float64 { return math.Sqrt(dot(a, a)) }
