package kinetics

import (
	"math"

	"ligancy/mechanisms"
)

// clamped is the generator Q(x) of a bound model, and powers of its exponential:
//
//	E_j = exp(2ʲ h Q) ,  E_{j+1} = E_j² ,
//
// with E_0 from the series of the non-negative matrix (Q + μI)h: nothing is
// subtracted, so that no share turns negative, and every column is brought back to
// the sum 1 after each squaring (scaling and squaring: Moler & Van Loan 2003, SIAM
// Rev. 45:3; non-negative, as in uniformisation: Jensen 1953). Derivatives go along:
//
//	∂E_{j+1} = E_j ∂E_j + ∂E_j E_j .
type clamped struct {
	b      *Bound
	x      float64
	n      int
	slots  []int // of the derivatives carried: places in (Θ, ln x)
	mu     float64
	h      float64
	leave  []float64 // n: μ − Σ rates out of a state
	levels []level
	v, w   []float64   // n
	dv, dw [][]float64 // per slot, n

	from, to   []int       // of the steps
	up, down   []float64   // their rates
	dUp, dDown [][]float64 // per slot
}

// level is E_j and its derivatives, row by row.
type level struct {
	e []float64   // n×n
	d [][]float64 // per slot
}

// clamp settles the generator at x, for a usual time between points and with
// derivatives by the given places of (Θ, ln x).
func (b *Bound) clamp(x, usual float64, slots []int) *clamped {
	net := b.m.net
	n, steps := len(net.States), len(net.Steps)
	c := &clamped{b: b, x: x, n: n, slots: slots, leave: make([]float64, n), v: make([]float64, n), w: make([]float64, n),
		up: make([]float64, steps), down: b.down}
	out := make([]float64, n)
	for e, s := range net.Steps {
		c.from, c.to = append(c.from, s.From), append(c.to, s.To)
		c.up[e] = b.carried(e, x)
		out[s.From] += c.up[e]
		out[s.To] += b.down[e]
	}
	for _, q := range out {
		c.mu = math.Max(c.mu, q)
	}
	for s, q := range out {
		c.leave[s] = c.mu - q
	}
	c.derive()
	c.unit(usual)
	return c
}

// derive writes the derivatives of the rates by every slot.
func (c *clamped) derive() {
	all := c.b.m.Size()
	for _, k := range c.slots {
		up, down := make([]float64, len(c.up)), make([]float64, len(c.up))
		for e, s := range c.b.m.net.Steps {
			switch {
			case k < all:
				up[e], down[e] = c.up[e]*c.b.dUp.At(e, k), c.down[e]*c.b.dDown.At(e, k)
			case s.Kind == mechanisms.Binding:
				up[e] = c.up[e]
			}
		}
		c.dUp, c.dDown = append(c.dUp, up), append(c.dDown, down)
		c.dv, c.dw = append(c.dv, make([]float64, c.n)), append(c.dw, make([]float64, c.n))
	}
}

// half bounds μh: the series of E_0 then has few terms.
const half = 0.5

// unit chooses h so that the usual time is a power of two of it.
func (c *clamped) unit(usual float64) {
	c.h = half / c.mu
	if c.mu == 0 {
		c.h = math.Max(usual, 1)
		return
	}
	if usual > 0 {
		c.h = usual
		for c.h*c.mu > half {
			c.h /= 2
		}
	}
}

// push is w = (Q + μI) t v / k for the shares, and the same for derivatives.
func (c *clamped) push(w, v []float64, t float64) {
	for s, l := range c.leave {
		w[s] = l * t * v[s]
	}
	for e, i := range c.from {
		j := c.to[e]
		w[j] += c.up[e] * t * v[i]
		w[i] += c.down[e] * t * v[j]
	}
}

// lean adds ∂Q t v by one slot to w.
func (c *clamped) lean(w, v []float64, slot int, t float64) {
	up, down := c.dUp[slot], c.dDown[slot]
	for e, i := range c.from {
		j := c.to[e]
		f := (up[e]*v[i] - down[e]*v[j]) * t
		w[j] += f
		w[i] -= f
	}
}

// terms of the series: with μt ≤ 1/2 what is left out is below 1e-18 of the whole.
const terms = 16

// series advances v and dv by a time t no longer than h.
func (c *clamped) series(v []float64, dv [][]float64, t float64) {
	scale := math.Exp(-c.mu * t)
	term, next := append([]float64(nil), v...), c.w
	dTerm := make([][]float64, len(dv))
	for k := range dv {
		dTerm[k] = append([]float64(nil), dv[k]...)
	}
	left := 1.0 // bound of the term, by the norm μt of (Q + μI)t
	for j := 1; j <= terms && left > 1e-19; j++ {
		step := t / float64(j)
		left *= c.mu * step
		for k := range dv {
			c.push(c.dw[k], dTerm[k], step)
			c.lean(c.dw[k], term, k, step)
		}
		c.push(next, term, step)
		copy(term, next)
		for s, q := range term {
			v[s] += q
		}
		for k := range dv {
			copy(dTerm[k], c.dw[k])
			for s, q := range dTerm[k] {
				dv[k][s] += q
			}
		}
	}
	for s := range v {
		v[s] *= scale
	}
	for k := range dv {
		for s := range dv[k] {
			dv[k][s] *= scale
		}
	}
}

// power is E_j, made when it is first asked for.
func (c *clamped) power(j int) *level {
	for len(c.levels) <= j {
		if len(c.levels) == 0 {
			c.levels = append(c.levels, c.first())
			continue
		}
		c.levels = append(c.levels, c.squared(&c.levels[len(c.levels)-1]))
	}
	return &c.levels[j]
}

func (c *clamped) room() level {
	l := level{e: make([]float64, c.n*c.n)}
	for range c.slots {
		l.d = append(l.d, make([]float64, c.n*c.n))
	}
	return l
}

// first is E_0, column by column.
func (c *clamped) first() level {
	l, n := c.room(), c.n
	v, dv := make([]float64, n), make([][]float64, len(c.slots))
	for k := range dv {
		dv[k] = make([]float64, n)
	}
	for s := range n {
		clear(v)
		v[s] = 1
		for k := range dv {
			clear(dv[k])
		}
		c.series(v, dv, c.h)
		for r := range n {
			l.e[r*n+s] = v[r]
			for k := range dv {
				l.d[k][r*n+s] = dv[k][r]
			}
		}
	}
	c.normalise(&l)
	return l
}

func (c *clamped) squared(a *level) level {
	l, n := c.room(), c.n
	multiply(l.e, a.e, a.e, n)
	for k, d := range l.d {
		multiply(d, a.e, a.d[k], n)
		multiply(d, a.d[k], a.e, n)
	}
	c.normalise(&l)
	return l
}

// multiply adds a·b to dst.
func multiply(dst, a, b []float64, n int) {
	for i := range n {
		row := dst[i*n : i*n+n]
		for k, f := range a[i*n : i*n+n] {
			if f == 0 {
				continue
			}
			for j, v := range b[k*n : k*n+n] {
				row[j] += f * v
			}
		}
	}
}

// normalise brings every column back to its sum, 1, and that of its derivatives to 0.
func (c *clamped) normalise(l *level) {
	n := c.n
	for s := range n {
		sum := 0.0
		for r := range n {
			sum += l.e[r*n+s]
		}
		for r := range n {
			l.e[r*n+s] /= sum
		}
		for _, d := range l.d {
			off := 0.0
			for r := range n {
				off += d[r*n+s]
			}
			for r := range n {
				d[r*n+s] = d[r*n+s]/sum - l.e[r*n+s]*off/sum
			}
		}
	}
}

// apply advances shares and their derivatives by E_j.
func (c *clamped) apply(l *level, v []float64, dv [][]float64) {
	n := c.n
	for k := range dv {
		w := c.dw[k]
		for r := range n {
			var sum float64
			e, d := l.e[r*n:r*n+n], l.d[k][r*n:r*n+n]
			own := dv[k]
			for s, q := range v {
				sum += e[s]*own[s] + d[s]*q
			}
			w[r] = sum
		}
		copy(dv[k], w)
	}
	for r := range n {
		var sum float64
		for s, q := range l.e[r*n : r*n+n] {
			sum += q * v[s]
		}
		c.w[r] = sum
	}
	copy(v, c.w)
}

// advance moves shares and derivatives on by a time t, within the rounding of the
// times that it is the difference of.
func (c *clamped) advance(v []float64, dv [][]float64, t, rounding float64) {
	if c.mu == 0 || t <= 0 {
		return
	}
	top := 0
	for c.h*math.Ldexp(1, top+1) <= t+rounding {
		top++
	}
	for j := top; j >= 0 && t > rounding; j-- {
		if unit := c.h * math.Ldexp(1, j); unit <= t+rounding {
			c.apply(c.power(j), v, dv)
			t -= unit
		}
	}
	if t > rounding {
		c.series(v, dv, t)
	}
}
