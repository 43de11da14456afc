package ode

import (
	"math"
	"math/bits"
)

// pattern is a square matrix of bits: which entries of a Jacobian can be other
// than zero.
type pattern struct {
	n, words int
	bits     []uint64 // row by row
}

func (p *pattern) resize(n int) {
	p.n, p.words = n, (n+63)/64
	p.bits = grown(p.bits, n*p.words)
	clear(p.bits)
}

func (p *pattern) row(i int) []uint64 { return p.bits[i*p.words : (i+1)*p.words] }

func (p *pattern) has(i, j int) bool { return p.bits[i*p.words+j>>6]>>(j&63)&1 != 0 }

func (p *pattern) set(i, j int) { p.bits[i*p.words+j>>6] |= 1 << (j & 63) }

// include adds the entries of a row-major matrix that are not zero, and reports
// whether any was new.
func (p *pattern) include(a []float64) bool {
	n, fresh := p.n, false
	for i := range n {
		row := p.row(i)
		for j, v := range a[i*n : i*n+n] {
			if v != 0 && row[j>>6]>>(j&63)&1 == 0 {
				row[j>>6] |= 1 << (j & 63)
				fresh = true
			}
		}
	}
	return fresh
}

// plan is the elimination of d·I − J for one pattern of J, worked out once:
// which row and column when, where every number goes.
//
// Pivots are taken from the diagonal, where d stands, by Markowitz's rule: the
// least (entries in the row − 1)(entries in the column − 1) among those left.
// H. M. Markowitz, Management Science 3 (1957) 255-269.
type plan struct {
	n     int
	order []int32 // order[k]: the row and column eliminated k-th
	row   []int32 // row k of the factors is vals[row[k]:row[k+1]], by column
	diag  []int32 // position of the pivot of row k
	col   []int32 // column of each entry, in the new order
	from  []int32 // entries of J, row-major …
	to    []int32 // … and where they go
	elims []elimination
	until []int32 // elims[:until[k]] are those of the rows up to k
	dest  []int32
}

// elimination takes a multiple of row m off the row at hand.
type elimination struct {
	low      int32 // position of the multiplier, left of the pivot
	pivot    int32 // position of the pivot of row m
	from, to int32 // the part of row m right of its pivot
	dest     int32 // dest[dest:] are their positions in the row at hand
}

// work is the number of multiplications of one factorisation.
func (q *plan) work() int { return len(q.dest) + len(q.elims) }

// newPlan works out the elimination. It costs about n² steps on words.
func newPlan(p *pattern) *plan {
	g := newFilling(p)
	q := &plan{n: p.n}
	for range p.n {
		k := g.cheapest()
		q.order = append(q.order, int32(k))
		g.eliminate(k)
	}
	q.lay(&g.rows)
	q.load(p)
	q.schedule()
	return q
}

// filling is a pattern that fills up as rows and columns are eliminated, with its
// transpose.
type filling struct {
	rows, cols pattern
	left       []uint64 // not yet eliminated
}

func newFilling(p *pattern) *filling {
	g := &filling{left: make([]uint64, p.words)}
	g.rows.resize(p.n)
	g.cols.resize(p.n)
	copy(g.rows.bits, p.bits)
	for i := range p.n {
		g.rows.set(i, i)
		g.left[i>>6] |= 1 << (i & 63)
		for j := range p.n {
			if g.rows.has(i, j) {
				g.cols.set(j, i)
			}
		}
	}
	return g
}

func (g *filling) has(k int) bool { return g.left[k>>6]>>(k&63)&1 != 0 }

// cheapest is the row left with the least Markowitz count; the first of equals.
func (g *filling) cheapest() int {
	best, at := math.MaxInt, -1
	for k := range g.rows.n {
		if !g.has(k) {
			continue
		}
		r, c := -1, -1
		row, col := g.rows.row(k), g.cols.row(k)
		for o, v := range g.left {
			r += bits.OnesCount64(row[o] & v)
			c += bits.OnesCount64(col[o] & v)
		}
		if r*c < best {
			best, at = r*c, k
		}
	}
	return at
}

// eliminate adds what eliminating k makes of the rows and columns left.
func (g *filling) eliminate(k int) {
	g.left[k>>6] &^= 1 << (k & 63)
	for i := range g.rows.n {
		if !g.has(i) {
			continue
		}
		if g.rows.has(i, k) {
			join(g.rows.row(i), g.rows.row(k), g.left)
		}
		if g.cols.has(i, k) {
			join(g.cols.row(i), g.cols.row(k), g.left)
		}
	}
}

// join adds to a the members of b that are left.
func join(a, b, left []uint64) {
	for o, v := range b {
		a[o] |= v & left[o]
	}
}

// lay gives every entry of the filled matrix its position.
func (q *plan) lay(rows *pattern) {
	q.row, q.diag = make([]int32, q.n+1), make([]int32, q.n)
	for k, i := range q.order {
		for m, j := range q.order {
			if !rows.has(int(i), int(j)) {
				continue
			}
			if m == k {
				q.diag[k] = int32(len(q.col))
			}
			q.col = append(q.col, int32(m))
		}
		q.row[k+1] = int32(len(q.col))
	}
}

// load notes where the entries of J go.
func (q *plan) load(p *pattern) {
	for k, i := range q.order {
		for at := q.row[k]; at < q.row[k+1]; at++ {
			if j := q.order[q.col[at]]; p.has(int(i), int(j)) {
				q.from = append(q.from, i*int32(q.n)+j)
				q.to = append(q.to, at)
			}
		}
	}
}

// schedule lists the eliminations row by row.
func (q *plan) schedule() {
	at := make([]int32, q.n) // positions in the row at hand, by column
	for k := range q.order {
		for o := q.row[k]; o < q.row[k+1]; o++ {
			at[q.col[o]] = o
		}
		for o := q.row[k]; o < q.diag[k]; o++ {
			m := q.col[o]
			e := elimination{
				low: o, pivot: q.diag[m], from: q.diag[m] + 1, to: q.row[m+1], dest: int32(len(q.dest)),
			}
			for u := e.from; u < e.to; u++ {
				q.dest = append(q.dest, at[q.col[u]])
			}
			q.elims = append(q.elims, e)
		}
		q.until = append(q.until, int32(len(q.elims)))
	}
}

// sparseLU is a factorisation by a plan, without exchange of rows.
type sparseLU[T number] struct {
	q *plan
	a []T
	x []T // right-hand sides in the order of elimination
}

func (f *sparseLU[T]) use(q *plan) {
	f.q, f.a, f.x = q, grown(f.a, len(q.col)), grown(f.x, q.n)
}

// largestMultiplier is where an elimination without exchanges is given up.
const largestMultiplier = 1e4

// factor overwrites the matrix; false where a pivot is zero or too small.
func (f *sparseLU[T]) factor() bool {
	q, a := f.q, f.a
	var worst float64
	next := int32(0)
	for k, until := range q.until {
		for ; next < until; next++ {
			e := &q.elims[next]
			l := a[e.low] * a[e.pivot]
			a[e.low] = l
			worst = max(worst, size(l))
			right := a[e.from:e.to]
			dest := q.dest[e.dest:][:len(right)]
			for o, u := range right {
				a[dest[o]] -= l * u
			}
		}
		d := q.diag[k]
		a[d] = 1 / a[d]
	}
	// A zero pivot has made a multiplier or the last pivot infinite.
	return worst <= largestMultiplier && size(a[q.diag[q.n-1]]) <= math.MaxFloat64
}

// solve overwrites b with A⁻¹b.
func (f *sparseLU[T]) solve(b []T) {
	q, a, x := f.q, f.a, f.x[:f.q.n]
	for k, i := range q.order {
		v := b[i]
		lo := q.row[k]
		for o, l := range a[lo:q.diag[k]] {
			v -= l * x[q.col[int(lo)+o]]
		}
		x[k] = v
	}
	for k := len(x) - 1; k >= 0; k-- {
		v := x[k]
		d := q.diag[k]
		lo := d + 1
		for o, u := range a[lo:q.row[k+1]] {
			v -= u * x[q.col[int(lo)+o]]
		}
		v *= a[d]
		x[k] = v
		b[q.order[k]] = v
	}
}

// solveMany overwrites B (n×p, row-major) with A⁻¹B.
func (f *sparseLU[T]) solveMany(b []T, p int) {
	q, a := f.q, f.a
	f.x = grown(f.x, q.n*p)
	x := f.x
	for k, i := range q.order {
		v := x[k*p : k*p+p]
		copy(v, b[int(i)*p:])
		for o := q.row[k]; o < q.diag[k]; o++ {
			m := int(q.col[o]) * p
			minus(v, a[o], x[m:m+p])
		}
	}
	for k := q.n - 1; k >= 0; k-- {
		v := x[k*p : k*p+p]
		d := q.diag[k]
		for o := d + 1; o < q.row[k+1]; o++ {
			m := int(q.col[o]) * p
			minus(v, a[o], x[m:m+p])
		}
		for j := range v {
			v[j] *= a[d]
		}
		copy(b[int(q.order[k])*p:][:p], v)
	}
}
