package ode

import "math"

// differencer approximates ∂f/∂y by moving components. Components that no
// derivative shares are moved together, where the System gives its pattern.
type differencer struct {
	n      int
	known  bool
	pat    pattern
	colour []int // of each component
	groups int
	y      []float64
	f      []float64
	back   []float64
	move   []float64
}

func (d *differencer) bind(sys System) {
	n := sys.Dim()
	d.n = n
	d.y, d.f, d.back, d.move = grown(d.y, n), grown(d.f, n), grown(d.back, n), grown(d.move, n)
	d.colour = grown(d.colour, n)
	p, ok := sys.(Patterner)
	d.known = ok
	if !ok {
		d.groups = n
		for j := range n {
			d.colour[j] = j
		}
		return
	}
	d.pat.resize(n)
	for i, row := range p.Pattern() {
		for _, j := range row {
			d.pat.set(i, j)
		}
	}
	d.paint()
}

// paint gives each component the first colour that no neighbour has; neighbours
// are components that one derivative depends on. A. R. Curtis, M. J. D. Powell
// and J. K. Reid, J. Inst. Maths Applics 13 (1974) 117-119.
func (d *differencer) paint() {
	w := d.pat.words
	var taken [][]uint64 // rows touched by each colour
	column := make([]uint64, w)
	d.groups = 0
	for j := range d.n {
		clear(column)
		for i := range d.n {
			if d.pat.has(i, j) {
				column[i>>6] |= 1 << (i & 63)
			}
		}
		c := 0
		for c < d.groups && overlap(taken[c], column) {
			c++
		}
		if c == d.groups {
			taken = append(taken, make([]uint64, w))
			d.groups++
		}
		for o, v := range column {
			taken[c][o] |= v
		}
		d.colour[j] = c
	}
}

func overlap(a, b []uint64) bool {
	for o, v := range a {
		if v&b[o] != 0 {
			return true
		}
	}
	return false
}

// moves chooses how far each component is moved: share of its size, which is |yⱼ|
// and the absolute tolerance over the relative one, but no less than guard times
// what the rounding of f over a step h is worth.
func (d *differencer) moves(rtol float64, at place, share, guard float64) {
	var noise float64
	for i, v := range at.f[:d.n] {
		noise = max(noise, math.Abs(v)*at.iw[i])
	}
	noise *= guard * ulp * math.Abs(at.h)
	for j, v := range at.y[:d.n] {
		m := max(share/rtol, noise) / at.iw[j]
		d.move[j] = v + math.Copysign(m, v) - v
	}
}

// forward uses one evaluation a group.
func (d *differencer) forward(fl *flow, dst []float64, at place) error {
	d.moves(fl.rtol, at, math.Sqrt(ulp), 1e3)
	for c := range d.groups {
		if err := d.moved(fl, d.f, at, c, 1); err != nil {
			return err
		}
		d.gather(dst, c, at.f, 1)
	}
	return nil
}

// central uses two evaluations a group.
func (d *differencer) central(fl *flow, dst []float64, at place) error {
	d.moves(fl.rtol, at, math.Cbrt(ulp), 1e5)
	for c := range d.groups {
		if err := d.moved(fl, d.f, at, c, 1); err != nil {
			return err
		}
		if err := d.moved(fl, d.back, at, c, -1); err != nil {
			return err
		}
		d.gather(dst, c, d.back, 2)
	}
	return nil
}

// moved evaluates f with the components of one colour moved.
func (d *differencer) moved(fl *flow, dst []float64, at place, colour int, by float64) error {
	copy(d.y, at.y)
	for j, c := range d.colour {
		if c == colour {
			d.y[j] += by * d.move[j]
		}
	}
	fl.stats.Differences++
	return fl.sys.Derivs(dst, at.t, d.y)
}

// gather fills the columns of one colour with (d.f − from)/(over·move).
func (d *differencer) gather(dst []float64, colour int, from []float64, over float64) {
	for j, c := range d.colour {
		if c != colour {
			continue
		}
		for i := range d.n {
			if !d.known || d.pat.has(i, j) {
				dst[i*d.n+j] = (d.f[i] - from[i]) / (over * d.move[j])
			}
		}
	}
}
