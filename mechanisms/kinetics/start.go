package kinetics

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// start is the state at rest with a total of ligand, and its sensitivities.
func (m *massAction) start(total float64, gradient bool) ([]float64, *mat.Dense, error) {
	b, net := m.b, m.b.m.net
	y, all := make([]float64, m.Dim()), b.m.Size()
	x, err := m.freeOf(total)
	if err != nil {
		return nil, nil, err
	}
	grad := mat.NewDense(m.s, all+1, nil)
	p := b.AtRest(nil, grad, x)
	copy(y, p)
	y[m.free()] = x
	var sens *mat.Dense
	if gradient {
		sens = mat.NewDense(m.Dim(), all, nil)
		dBound, dLn := m.boundGradient(grad)
		for k := range all {
			dlnx := 0.0
			if x > 0 {
				dlnx = -m.sites * dBound[k] / (x + m.sites*dLn)
			}
			for s := range m.s {
				sens.Set(s, k, grad.At(s, k)+grad.At(s, all)*dlnx)
			}
			sens.Set(m.free(), k, x*dlnx)
		}
	}
	if m.tagged {
		for t, tag := range net.Tags {
			y[m.s+t] = tag.Number * p[tag.State]
			for k := range all {
				if gradient {
					sens.Set(m.s+t, k, tag.Number*sens.At(tag.State, k))
				}
			}
		}
	}
	return y, sens, nil
}

// boundGradient is ∂Ȳ/∂Θ and ∂Ȳ/∂ln x of shares at rest.
func (m *massAction) boundGradient(grad *mat.Dense) (by []float64, byLn float64) {
	all := m.b.m.Size()
	by = make([]float64, all)
	for s, state := range m.b.m.net.States {
		w := float64(state.Ligands) / float64(state.Sites)
		for k := range all {
			by[k] += w * grad.At(s, k)
		}
		byLn += w * grad.At(s, all)
	}
	return by, byLn
}

// freeOf solves x + [sites] Ȳ(x) = total by halving, then by Newton's method.
func (m *massAction) freeOf(total float64) (float64, error) {
	if m.sites == 0 || total == 0 {
		return total, nil
	}
	b := m.b
	grad := mat.NewDense(m.s, b.m.Size()+1, nil)
	low, high := 0.0, total
	x := total / 2
	for range 200 {
		p := b.AtRest(nil, grad, x)
		g := x + m.sites*b.Saturation(p) - total
		if g > 0 {
			high = x
		} else {
			low = x
		}
		_, dLn := m.boundGradient(grad)
		next := x - g/(1+m.sites*dLn/x)
		if !(next > low && next < high) {
			next = (low + high) / 2
		}
		if math.Abs(next-x) <= 1e-15*x || next == low || next == high {
			return next, nil
		}
		x = next
	}
	return 0, fmt.Errorf("the free ligand at a total of %g cannot be found", total)
}
