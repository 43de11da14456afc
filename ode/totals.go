package ode

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// totals keeps watch on linear forms c·y that the exact solution keeps.
type totals struct {
	c      *mat.Dense
	hold   bool
	start  []float64 // c·y at the start
	slopes []float64 // c·S at the start, m×p
	m, n   int
	p      int

	gram denseLU[float64]
	off  []float64
	var2 []float64 // squared weights
}

// leastKept is how far c·f may be from zero, relative to its terms.
const leastKept = 1e-9

func (t *totals) begin(o *Options, p *point, n, params int) error {
	t.c, t.hold = o.Totals, o.HoldTotals
	if t.c == nil {
		return nil
	}
	t.m, _ = t.c.Dims()
	t.n, t.p = n, params
	t.start, t.off = grown(t.start, t.m), grown(t.off, t.m)
	t.slopes = grown(t.slopes, t.m*params)
	t.var2 = grown(t.var2, n)
	if t.hold && !independent(t.c) {
		return errors.New("totals cannot be held: one follows from the others")
	}
	for i := range t.m {
		row := t.c.RawRowView(i)
		if sum, size := dot(row, p.f); math.Abs(sum) > leastKept*size {
			return fmt.Errorf("total %d is not kept: it changes at %.3g at the start", i+1, sum)
		}
		t.start[i], _ = dot(row, p.y)
		for j := range params {
			t.slopes[i*params+j] = t.slope(row, p.y, j)
		}
	}
	return nil
}

// independent reports whether no row of c follows from the others.
func independent(c *mat.Dense) bool {
	var svd mat.SVD
	if !svd.Factorize(c, mat.SVDNone) {
		return false
	}
	v := svd.Values(nil)
	return v[len(v)-1] > 1e-10*v[0]
}

// dot is c·y and Σ|cᵢyᵢ|, summed with the rounding errors carried along.
func dot(c, y []float64) (sum, size float64) {
	var low float64
	for i, v := range c {
		x := v * y[i]
		size += math.Abs(x)
		d := math.FMA(v, y[i], -x)
		s := sum + x
		b := s - sum
		low += (sum - (s - b)) + (x - b) + d
		sum = s
	}
	return sum + low, size
}

// slope is column j of c·S; S follows the state in y.
func (t *totals) slope(row, y []float64, j int) float64 {
	var sum float64
	for i, v := range row {
		sum += v * y[t.n+i*t.p+j]
	}
	return sum
}

// step measures the drift at a new state and, where asked to, removes it by the
// change of the state that is smallest in units of the weights:
// y − V Cᵀ(C V Cᵀ)⁻¹(C y − C y₀), V = diag(w²). Sensitivities follow.
func (t *totals) step(p *point, drift *float64) bool {
	if t.c == nil {
		return true
	}
	for i := range t.m {
		sum, size := dot(t.c.RawRowView(i), p.y)
		t.off[i] = sum - t.start[i]
		if size > 0 {
			*drift = max(*drift, math.Abs(t.off[i])/size)
		}
	}
	if !t.hold {
		return true
	}
	if !t.factor(p) {
		return false
	}
	t.gram.solve(t.off)
	t.shift(p.y, 1, 0)
	for j := range t.p {
		for i := range t.m {
			t.off[i] = t.slope(t.c.RawRowView(i), p.y, j) - t.slopes[i*t.p+j]
		}
		t.gram.solve(t.off)
		t.shift(p.y[t.n:], t.p, j)
	}
	return true
}

// factor prepares C V Cᵀ, with V relative to its largest entry.
func (t *totals) factor(p *point) bool {
	least := math.Inf(1)
	for _, w := range p.iw[:t.n] {
		least = min(least, w)
	}
	for i, w := range p.iw[:t.n] {
		t.var2[i] = (least / w) * (least / w)
	}
	t.gram.resize(t.m)
	for i := range t.m {
		for j := range t.m {
			var sum float64
			a, b := t.c.RawRowView(i), t.c.RawRowView(j)
			for k, v := range t.var2 {
				sum += a[k] * b[k] * v
			}
			t.gram.a[j*t.m+i] = sum
		}
	}
	return t.gram.factor()
}

// shift takes V Cᵀ·off from every stride-th entry of y.
func (t *totals) shift(y []float64, stride, from int) {
	for i := range t.m {
		for k, c := range t.c.RawRowView(i) {
			y[from+k*stride] -= t.var2[k] * c * t.off[i]
		}
	}
}
