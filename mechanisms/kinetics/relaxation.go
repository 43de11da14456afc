package kinetics

import (
	"errors"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
)

// Relaxations returns the relaxation times at a clamped free ligand, the slowest
// first.
//
// With detailed balance D^{−1/2} Q D^{1/2}, D the shares at rest, is −B Bᵀ: column e
// of B has √(rate up) at the state a step leaves and −√(rate down) at the one it
// enters. The rates of relaxation are the squares of the singular values of B, so
// that the slow ones keep twice the digits that eigenvalues of Q would. At x = 0 this
// is the limit: every state empties, none fills.
func (b *Bound) Relaxations(x float64) ([]float64, error) {
	net := b.m.net
	index := make([]int, len(net.States))
	n := 0
	blocks := map[int]bool{}
	for s := range index {
		if b.live[s] {
			index[s] = n
			blocks[net.States[s].Block] = true
			n++
		} else {
			index[s] = -1
		}
	}
	moving := n - len(blocks)
	if moving <= 0 {
		return nil, nil
	}
	m := mat.NewDense(n, max(n, len(net.Steps)), nil)
	for e, s := range net.Steps {
		if index[s.From] < 0 || index[s.To] < 0 {
			continue
		}
		m.Set(index[s.From], e, math.Sqrt(b.carried(e, x)))
		m.Set(index[s.To], e, -math.Sqrt(b.down[e]))
	}
	var svd mat.SVD
	if !svd.Factorize(m, mat.SVDNone) {
		return nil, errors.New("the relaxation times cannot be found: the singular values do not converge")
	}
	values := svd.Values(nil)
	slices.SortFunc(values, func(a, b float64) int {
		switch {
		case a > b:
			return -1
		case a < b:
			return 1
		}
		return 0
	})
	times := make([]float64, moving)
	for i, v := range values[:moving] {
		times[moving-1-i] = 1 / (v * v)
	}
	return times, nil
}
