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

// moves chooses how far each component is moved: ε^power of its size, which is
// |yⱼ| and the absolute tolerance over the relative one, but no less than what
// keeps the rounding of f over a step h far below the tolerance.
func (d *differencer) moves(fl *flow, y, fy, iw []float64, h, share, guard float64) {
	var noise float64
	for i, v := range fy[:d.n] {
		noise = max(noise, math.Abs(v)*iw[i])
	}
	noise *= guard * ulp * math.Abs(h)
	for j, v := range y {
		m := max(share/fl.rtol, noise) / iw[j]
		d.move[j] = y[j] + math.Copysign(m, v) - y[j]
	}
}

// forward uses one evaluation a group.
func (d *differencer) forward(fl *flow, dst []float64, t float64, y, fy, iw []float64, h float64) (int, error) {
	d.moves(fl, y, fy, iw, h, math.Sqrt(ulp), 1e3)
	for c := range d.groups {
		d.shift(y, c, 1)
		if err := fl.sys.Derivs(d.f, t, d.y); err != nil {
			return c + 1, err
		}
		for j, cj := range d.colour {
			for i := 0; cj == c && i < d.n; i++ {
				if !d.known || d.pat.has(i, j) {
					dst[i*d.n+j] = (d.f[i] - fy[i]) / d.move[j]
				}
			}
		}
	}
	return d.groups, nil
}

// central uses two evaluations a group.
func (d *differencer) central(fl *flow, dst []float64, t float64, y, fy, iw []float64, h float64) (int, error) {
	d.moves(fl, y, fy, iw, h, math.Cbrt(ulp), 1e5)
	for c := range d.groups {
		d.shift(y, c, 1)
		if err := fl.sys.Derivs(d.f, t, d.y); err != nil {
			return 2*c + 1, err
		}
		d.shift(y, c, -1)
		if err := fl.sys.Derivs(d.back, t, d.y); err != nil {
			return 2*c + 2, err
		}
		for j, cj := range d.colour {
			for i := 0; cj == c && i < d.n; i++ {
				if !d.known || d.pat.has(i, j) {
					dst[i*d.n+j] = (d.f[i] - d.back[i]) / (2 * d.move[j])
				}
			}
		}
	}
	return 2 * d.groups, nil
}

// shift sets d.y to y with the components of one colour moved.
func (d *differencer) shift(y []float64, colour int, by float64) {
	copy(d.y, y)
	for j, c := range d.colour {
		if c == colour {
			d.y[j] += by * d.move[j]
		}
	}
}
