package fit

import "math"

// boxedStep solves min ‖S·t + z‖ within a radius and a box: the trust-region
// step, and where that leaves the box, the first bound it meets is taken as
// reached and the rest solved again.
type boxedStep struct {
	region    *region
	s         []float64 // m × m triangle, columns scaled
	z         []float64
	t         []float64
	low, high []float64 // box of t, zero inside
	stop      []int8    // −1, +1: on that bound after the step
	rest      *columns  // S without the columns that are settled
	index     []int     // columns of rest
	tr        []float64
	gain      float64 // ‖z‖² − ‖S·t + z‖²
	slope     float64 // zᵀS·t
	lambda    float64
}

func newBoxedStep(m int) *boxedStep {
	return &boxedStep{
		region: newRegion(m), s: make([]float64, m*m), z: make([]float64, m), t: make([]float64, m),
		low: make([]float64, m), high: make([]float64, m), stop: make([]int8, m),
		rest: newColumns(m, m), index: make([]int, 0, m), tr: make([]float64, m),
	}
}

// solve finds t for the first m columns within the radius.
func (b *boxedStep) solve(m, stride int, radius float64) {
	clear(b.stop[:m])
	b.lambda = b.region.solve(b.t, b.s, b.z, m, stride, radius)
	if b.leaves(m) >= 0 {
		b.inBox(m, stride, radius)
	}
	b.judge(m, stride)
	if b.gain <= 0 {
		b.descend(m, stride, radius)
		b.judge(m, stride)
	}
}

// leaves returns the column whose bound the step meets first, −1 for none.
func (b *boxedStep) leaves(m int) int { return meets(b.t[:m], b.low, b.high, b.stop) }

func (b *boxedStep) inBox(m, stride int, radius float64) {
	left := radius * radius
	for range m {
		j := b.leaves(m)
		if j < 0 {
			return
		}
		b.clamp(j)
		left -= b.t[j] * b.t[j]
		b.again(m, stride, math.Sqrt(max(left, 1e-4*radius*radius)))
	}
}

// again solves for the columns that are not settled.
func (b *boxedStep) again(m, stride int, radius float64) {
	c := b.rest
	c.reset(m)
	b.index = b.index[:0]
	copy(c.rhs, b.z[:m])
	for j := 0; j < m; j++ {
		if b.stop[j] == 0 {
			continue
		}
		for i := 0; i <= j; i++ {
			c.rhs[i] += b.s[i*stride+j] * b.t[j]
		}
	}
	for j := 0; j < m; j++ {
		if b.stop[j] != 0 {
			continue
		}
		a := c.next()
		clear(a)
		for i := 0; i <= j; i++ {
			a[i] = b.s[i*stride+j]
		}
		c.push()
		b.index = append(b.index, j)
	}
	b.lambda = b.region.solve(b.tr, c.r, c.z, c.m, c.most, radius)
	for k, j := range b.index {
		b.t[j] = b.tr[k]
	}
}

// judge computes the gain and the slope of t.
func (b *boxedStep) judge(m, stride int) {
	b.gain, b.slope = 0, 0
	for i := 0; i < m; i++ {
		v := dot(b.s[i*stride+i:i*stride+m], b.t[i:m])
		b.gain -= v * (v + 2*b.z[i])
		b.slope += v * b.z[i]
	}
}

// descend takes the gradient step instead, as far as radius and box allow.
func (b *boxedStep) descend(m, stride int, radius float64) {
	clear(b.stop[:m])
	for j := 0; j < m; j++ {
		var g float64
		for i := 0; i <= j; i++ {
			g += b.s[i*stride+j] * b.z[i]
		}
		if b.t[j] = -g; (g > 0 && b.low[j] == 0) || (g < 0 && b.high[j] == 0) {
			b.t[j] = 0
		}
	}
	gg := dot(b.t[:m], b.t[:m])
	if gg == 0 {
		return
	}
	var curve float64
	for i := 0; i < m; i++ {
		v := dot(b.s[i*stride+i:i*stride+m], b.t[i:m])
		curve += v * v
	}
	share := radius / math.Sqrt(gg)
	if curve > 0 {
		share = min(share, gg/curve)
	}
	for j, t := range b.t[:m] {
		switch {
		case t < 0 && share*t < b.low[j]:
			share = b.low[j] / t
		case t > 0 && share*t > b.high[j]:
			share = b.high[j] / t
		}
	}
	for j := range b.t[:m] {
		b.t[j] *= share
	}
}
