package fit

import "math"

// dependent is the part of a column's length that has to remain, after those
// before it are taken out, for the column to count as independent of them.
const dependent = 1e-13

// columns is an orthogonal factorisation A = Q·R that grows column by column, by
// modified Gram–Schmidt. The right-hand side r is projected along with it, which
// makes the least-squares solution as stable as that by reflections:
//
//	r_before = Q·z + r_after ,   min‖A·s + r_before‖ at R·s = −z
//
// where A is n × m (column j is zero outside its support from[j]:to[j]), R is
// upper triangular and z has length m.
//
// Björck Å (1967) BIT 7, 1–21.
type columns struct {
	n, most  int       // rows, most columns
	m        int       // columns so far
	q        []float64 // column after column
	from, to []int     // support of each column
	r        []float64 // most × most, row after row
	z        []float64
	rhs      []float64
}

func newColumns(n, most int) *columns {
	return &columns{
		n: n, most: most,
		q:    make([]float64, n*most),
		from: make([]int, most), to: make([]int, most),
		r: make([]float64, most*most), z: make([]float64, most),
		rhs: make([]float64, n),
	}
}

// reset empties c for columns of n rows, at most as many as it was made for.
func (c *columns) reset(n int) {
	c.n, c.m, c.rhs = n, 0, c.rhs[:n]
}

// next is the memory of the column that push will take in.
func (c *columns) next() []float64 { return c.q[c.m*c.n : (c.m+1)*c.n] }

// push takes in the column that was written to next, and returns the length
// that it had before and has after those before it were taken out.
func (c *columns) push() (before, after float64) {
	k, a := c.m, c.next()
	lo, hi := support(a)
	before = math.Sqrt(dot(a[lo:hi], a[lo:hi]))
	for j := 0; j < k; j++ {
		c.r[j*c.most+k] = 0
		f, t := max(lo, c.from[j]), min(hi, c.to[j])
		if f >= t {
			continue
		}
		q := c.q[j*c.n : (j+1)*c.n]
		d := dot(q[f:t], a[f:t])
		c.r[j*c.most+k] = d
		if d != 0 {
			axpy(-d, q[c.from[j]:c.to[j]], a[c.from[j]:c.to[j]])
			lo, hi = min(lo, c.from[j]), max(hi, c.to[j])
		}
	}
	after = math.Sqrt(dot(a[lo:hi], a[lo:hi]))
	c.m++
	if !(after > dependent*before) || after == 0 {
		clear(a)
		c.r[k*c.most+k], c.z[k], c.from[k], c.to[k] = 0, 0, 0, 0
		return before, 0
	}
	inv := 1 / after
	for i := lo; i < hi; i++ {
		a[i] *= inv
	}
	c.r[k*c.most+k], c.from[k], c.to[k] = after, lo, hi
	z := dot(a[lo:hi], c.rhs[lo:hi])
	axpy(-z, a[lo:hi], c.rhs[lo:hi])
	c.z[k] = z
	return before, after
}

// solve writes the s of R·s = −b for the first m columns; a dependent column
// gets zero.
func (c *columns) solve(s, b []float64, m int) {
	for i := m - 1; i >= 0; i-- {
		row := c.r[i*c.most : i*c.most+m]
		if row[i] == 0 {
			s[i] = 0
			continue
		}
		v := -b[i]
		for j := i + 1; j < m; j++ {
			v -= row[j] * s[j]
		}
		s[i] = v / row[i]
	}
}

// support returns the range outside which a is zero.
func support(a []float64) (lo, hi int) {
	hi = len(a)
	for lo < hi && a[lo] == 0 {
		lo++
	}
	for hi > lo && a[hi-1] == 0 {
		hi--
	}
	return lo, hi
}

func dot(a, b []float64) float64 {
	b = b[:len(a)]
	var s0, s1, s2, s3 float64
	for len(a) >= 4 {
		s0 += a[0] * b[0]
		s1 += a[1] * b[1]
		s2 += a[2] * b[2]
		s3 += a[3] * b[3]
		a, b = a[4:], b[4:]
	}
	for i, v := range a {
		s0 += v * b[i]
	}
	return (s0 + s1) + (s2 + s3)
}

// axpy adds f·a to b.
func axpy(f float64, a, b []float64) {
	b = b[:len(a)]
	for i, v := range a {
		b[i] += f * v
	}
}
