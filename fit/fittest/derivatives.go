package fittest

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
)

// Difference is where derivatives of a block differ most from differences of
// its residuals.
type Difference struct {
	Worst    float64 // relative to the largest derivative of the same parameter
	Row      int
	Column   int
	Got      float64 // what the block says
	Expected float64
}

// Derivatives compares the Jacobian of a block at theta with central differences
// of its residuals, extrapolated to zero step by Ridders' scheme.
//
// Ridders CJF (1982) Adv Eng Softw 4, 75–76.
func Derivatives(block fit.Block, theta []float64) (Difference, error) {
	n, p := block.Len(), len(theta)
	res, jac := make([]float64, n), mat.NewDense(n, p, nil)
	if err := block.Eval(res, jac, theta); err != nil {
		return Difference{}, err
	}
	var d Difference
	for j := range p {
		column, err := slopes(block, theta, j)
		if err != nil {
			return Difference{}, err
		}
		var largest float64
		for _, v := range column {
			largest = max(largest, math.Abs(v))
		}
		for i, want := range column {
			got := jac.At(i, j)
			off := math.Abs(got - want)
			if largest > 0 {
				off /= largest
			}
			if !(off <= d.Worst) {
				d = Difference{off, i, j, got, want}
			}
		}
	}
	return d, nil
}

// slopes is the derivative of every residual by θ_j.
func slopes(block fit.Block, theta []float64, j int) ([]float64, error) {
	const (
		rounds = 8
		shrink = 1.6
	)
	n := block.Len()
	at := append([]float64(nil), theta...)
	up, down := make([]float64, n), make([]float64, n)
	best, left := make([]float64, n), make([]float64, n)
	for i := range left {
		left[i] = math.Inf(1)
	}
	h := 1e-2 * max(math.Abs(theta[j]), 1e-2)
	if theta[j] != 0 {
		h = 1e-2 * math.Abs(theta[j])
	}
	var last, table [][]float64 // of the previous and the present step
	for k := range rounds {
		at[j] = theta[j] + h
		if err := block.Eval(up, nil, at); err != nil {
			return nil, err
		}
		at[j] = theta[j] - h
		if err := block.Eval(down, nil, at); err != nil {
			return nil, err
		}
		table = nil
		first := make([]float64, n)
		for i := range first {
			first[i] = (up[i] - down[i]) / (2 * h)
		}
		table = append(table, first)
		f := shrink * shrink
		for m := 1; m <= k; m++ {
			next := make([]float64, n)
			for i := range next {
				next[i] = (f*table[m-1][i] - last[m-1][i]) / (f - 1)
				err := max(math.Abs(next[i]-table[m-1][i]), math.Abs(next[i]-last[m-1][i]))
				if err < left[i] {
					left[i], best[i] = err, next[i]
				}
			}
			f *= shrink * shrink
			table = append(table, next)
		}
		last = table
		h /= shrink
	}
	return best, nil
}
