package fit

import "math"

// extreme solves the linearised problem of a profile's end,
//
//	max d·cᵀs   subject to ‖z + R·s‖ ≤ ρ  and  low ≤ s ≤ high ,
//
// with d = ±1. Without bounds it is s = R⁻¹(d·ρ·w/‖w‖ − z), w = R⁻ᵀc; bounds
// are settled one by one.
type extreme struct {
	r         []float64 // m × m triangle
	z, c      []float64
	low, high []float64
	s         []float64
	stop      []int8
	rest      *columns
	index     []int
	w, u, v   []float64
	force     float64 // of the constraint: R_jᵀ(z + R·s) = force·d·c_j where free
	pinned    bool    // nothing that is free changes the quantity
	inside    bool    // the region is not empty
	loose     bool    // the quantity changes where no residual does
}

func newExtreme(m int) *extreme {
	f := func() []float64 { return make([]float64, m) }
	return &extreme{
		r: make([]float64, m*m), z: f(), c: f(), low: f(), high: f(), s: f(),
		stop: make([]int8, m), rest: newColumns(m, m), index: make([]int, 0, m),
		w: f(), u: f(), v: f(),
	}
}

// solve finds s for the first m columns; rho2 is ρ², which may be negative:
// then s leads back towards the region.
func (e *extreme) solve(m int, rho2, d float64) {
	for j := 0; j < m; j++ {
		e.stop[j], e.s[j] = 0, 0
	}
	for range 3*m + 3 {
		e.reduced(m, rho2, d)
		if j := e.first(m); j >= 0 {
			if e.s[j] < e.low[j] {
				e.s[j], e.stop[j] = e.low[j], -1
			} else {
				e.s[j], e.stop[j] = e.high[j], 1
			}
			continue
		}
		j := e.wrong(m, d)
		if j < 0 {
			return
		}
		e.stop[j] = 0
	}
}

// reduced solves for the columns that are not on a bound.
func (e *extreme) reduced(m int, rho2, d float64) {
	e.gather(m)
	c, k := e.rest, e.rest.m
	ww := e.direction()
	rho2 -= dot(c.rhs, c.rhs)
	e.pinned, e.inside = ww == 0, rho2 > 0
	f := 0.0
	if rho2 > 0 && ww > 0 {
		f = d * math.Sqrt(rho2/ww)
	}
	e.force = math.Abs(f)
	for i := 0; i < k; i++ {
		e.u[i] = c.z[i] - f*e.w[i]
	}
	c.solve(e.v, e.u, k)
	for i, j := range e.index {
		e.s[j] = e.v[i]
	}
}

// gather takes the free columns of R apart, and z with what the others change.
func (e *extreme) gather(m int) {
	c := e.rest
	c.reset(m)
	e.index = e.index[:0]
	copy(c.rhs, e.z[:m])
	for j := 0; j < m; j++ {
		if e.stop[j] == 0 {
			continue
		}
		for i := 0; i <= j; i++ {
			c.rhs[i] += e.r[i*m+j] * e.s[j]
		}
	}
	for j := 0; j < m; j++ {
		if e.stop[j] != 0 {
			continue
		}
		a := c.next()
		clear(a)
		for i := 0; i <= j; i++ {
			a[i] = e.r[i*m+j]
		}
		c.push()
		e.index = append(e.index, j)
	}
}

// direction writes w = R⁻ᵀc of the free columns and returns ‖w‖².
func (e *extreme) direction() (ww float64) {
	c := e.rest
	e.loose = false
	for i, j := range e.index {
		v := e.c[j]
		for l := 0; l < i; l++ {
			v -= c.r[l*c.most+i] * e.w[l]
		}
		e.w[i] = 0
		if g := c.r[i*c.most+i]; g != 0 {
			e.w[i] = v / g
		} else if math.Abs(v) > 1e-9*math.Abs(e.c[j]) {
			e.loose = true
		}
		ww += e.w[i] * e.w[i]
	}
	return ww
}

// first returns the free column whose bound s meets first, −1 for none.
func (e *extreme) first(m int) int { return meets(e.s[:m], e.low, e.high, e.stop) }

// wrong returns the settled column whose release takes the quantity further,
// −1 for none.
func (e *extreme) wrong(m int, d float64) int {
	worst, which := 0.0, -1
	for j := 0; j < m; j++ {
		if e.stop[j] == 0 {
			continue
		}
		var g, length float64 // R_jᵀ(z + R·s)
		for i := 0; i <= j; i++ {
			a := e.r[i*m+j]
			g += a * (e.z[i] + dot(e.r[i*m+i:i*m+m], e.s[i:m]))
			length += a * a
		}
		if length == 0 {
			continue
		}
		out := float64(e.stop[j])
		gain := out * (g - e.force*d*e.c[j])
		if e.pinned && e.inside && e.c[j] != 0 {
			gain = -out * d * e.c[j] // bounds alone end the quantity
		}
		gain /= math.Sqrt(length)
		if gain > max(worst, 1e-9*norm(e.z[:m])) {
			worst, which = gain, j
		}
	}
	return which
}

// meets returns the component of s that meets its bound first among those not
// stopped, −1 where none leaves the box.
func meets(s, low, high []float64, stop []int8) int {
	first, least := -1, 1.0
	for j, v := range s {
		if stop[j] != 0 {
			continue
		}
		var share float64
		switch {
		case v < low[j]:
			share = low[j] / v
		case v > high[j]:
			share = high[j] / v
		default:
			continue
		}
		if first < 0 || share < least {
			first, least = j, share
		}
	}
	return first
}
