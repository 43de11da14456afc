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

// slopes is the derivative of every residual by θ_j: the entry of the
// extrapolation table that differs least from its neighbours.
func slopes(block fit.Block, theta []float64, j int) ([]float64, error) {
	const (
		rounds = 8
		shrink = 1.6
	)
	n := block.Len()
	best, left := make([]float64, n), make([]float64, n)
	for i := range left {
		left[i] = math.Inf(1)
	}
	h := 1e-2 * math.Abs(theta[j])
	if h == 0 {
		h = 1e-4
	}
	var last [][]float64 // the table's row of the step before
	for k := range rounds {
		first, err := central(block, theta, j, h)
		if err != nil {
			return nil, err
		}
		table := [][]float64{first}
		for m, f := 1, shrink*shrink; m <= k; m, f = m+1, f*shrink*shrink {
			next := make([]float64, n)
			for i := range next {
				a, b := table[m-1][i], last[m-1][i]
				next[i] = (f*a - b) / (f - 1)
				if off := max(math.Abs(next[i]-a), math.Abs(next[i]-b)); off < left[i] {
					left[i], best[i] = off, next[i]
				}
			}
			table = append(table, next)
		}
		last = table
		h /= shrink
	}
	return best, nil
}

// central is (r(θ_j + h) − r(θ_j − h))/2h.
func central(block fit.Block, theta []float64, j int, h float64) ([]float64, error) {
	at := append([]float64(nil), theta...)
	up, down := make([]float64, block.Len()), make([]float64, block.Len())
	at[j] = theta[j] + h
	if err := block.Eval(up, nil, at); err != nil {
		return nil, err
	}
	at[j] = theta[j] - h
	if err := block.Eval(down, nil, at); err != nil {
		return nil, err
	}
	for i := range up {
		up[i] = (up[i] - down[i]) / (2 * h)
	}
	return up, nil
}
