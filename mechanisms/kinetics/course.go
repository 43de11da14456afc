package kinetics

import (
	"context"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
)

// Course is a sample followed in time.
type Course struct {
	Seconds    []float64
	Phase      []int       // in which each time lies, from 0; an end belongs to the phase that it ends
	Shares     [][]float64 // of the states
	Saturation []float64   // Σ p_s i_s/n, labelled and unlabelled ligand together
	Labelled   []float64   // of all sites, those with labelled ligand
	Seen       []float64   // what the response sees
	Free       []float64   // labelled ligand
	Unlabelled []float64   // free
	Grad       *mat.Dense  // of Seen by Θ; nil where not asked for
}

func newCourse(times []float64, states, size int, gradient bool) *Course {
	n := len(times)
	c := &Course{Seconds: slices.Clone(times), Phase: make([]int, n), Saturation: make([]float64, n), Labelled: make([]float64, n),
		Seen: make([]float64, n), Free: make([]float64, n), Unlabelled: make([]float64, n)}
	flat := make([]float64, n*states)
	for i := range n {
		c.Shares = append(c.Shares, flat[i*states:(i+1)*states:(i+1)*states])
	}
	if gradient && n > 0 {
		c.Grad = mat.NewDense(n, size, nil)
	}
	return c
}

// Run follows a sample through a program and shows it at the given times, in
// seconds since the first phase began, and, where gradient is set, the gradient of
// what is seen. An error names the state and the time; nothing is then returned.
func (b *Bound) Run(ctx context.Context, p *Program, times []float64, gradient bool) (*Course, error) {
	if err := p.Check(times); err != nil {
		return nil, err
	}
	if p.Sites > 0 || p.blocks() {
		return b.integrate(ctx, p, times, gradient)
	}
	return b.exact(p, times, gradient)
}

// exact follows a sample whose free ligand is that which is added.
func (b *Bound) exact(p *Program, times []float64, gradient bool) (*Course, error) {
	n, size := len(b.m.net.States), b.m.Size()
	c := newCourse(times, n, size, gradient)
	slots := b.slots(gradient)
	v := make([]float64, n)
	grad := mat.NewDense(n, size+1, nil)
	b.AtRest(v, grad, p.Loaded)
	dv := make([][]float64, len(slots))
	for k, slot := range slots {
		dv[k] = mat.Col(nil, slot, grad)
	}
	x, begin, next := p.Loaded, 0.0, 0
	for i, ph := range p.Phases {
		x = ph.freeAfter(x)
		end := begin + ph.Seconds
		last := next
		for last < len(times) && (times[last] <= end || i == len(p.Phases)-1) {
			last++
		}
		cl := b.clamp(x, usual(times[next:last]), slots)
		t := begin
		for ; next < last; next++ {
			cl.advance(v, dv, times[next]-t, rounding(times[next]))
			t = times[next]
			c.Phase[next], c.Free[next] = i, x
			b.record(c, next, v)
			if gradient {
				b.recordGradient(c, next, v, dv, slots)
			}
			if s := notShare(v); s >= 0 {
				return nil, fmt.Errorf("state %q is %g at %g s, in phase %d", b.m.net.States[s].Name, v[s], t, i+1)
			}
		}
		cl.advance(v, dv, end-t, rounding(end))
		begin = end
	}
	return c, nil
}

// freeAfter is the free ligand, not used up, after what a phase begins with.
func (ph *Phase) freeAfter(x float64) float64 {
	switch ph.Action {
	case Add:
		return ph.Amount
	case Dilute:
		return x / ph.Amount
	case Wash:
		return 0
	}
	return x
}

// slots are the constants that anything in time depends on.
func (b *Bound) slots(gradient bool) []int {
	if !gradient {
		return nil
	}
	var list []int
	for k := range b.m.Size() {
		if k >= b.m.k || column(b.dUp, k) || column(b.dDown, k) || column(b.w.A, k) || column(b.w.AShare, k) {
			list = append(list, k)
		}
	}
	return list
}

// column says whether anything stands in a column.
func column(m *mat.Dense, k int) bool {
	for i := range m.RawMatrix().Rows {
		if m.At(i, k) != 0 {
			return true
		}
	}
	return false
}

// record writes what is seen of shares at one time.
func (b *Bound) record(c *Course, i int, v []float64) {
	copy(c.Shares[i], v)
	c.Saturation[i] = b.Saturation(v)
	c.Labelled[i] = c.Saturation[i]
	c.Seen[i] = b.Seen(v)
}

// recordGradient writes ∂Seen/∂Θ = Σ o ∂p + Σ p ∂o.
func (b *Bound) recordGradient(c *Course, i int, v []float64, dv [][]float64, slots []int) {
	row := c.Grad.RawRowView(i)
	for k, slot := range slots {
		for s, d := range dv[k] {
			row[slot] += b.o[s] * d
		}
	}
	for k := range b.m.k {
		for s, q := range v {
			row[k] += q * b.do.At(s, k)
		}
	}
}

// notShare is a state whose share is no number between 0 and 1; −1 where none is.
func notShare(v []float64) int {
	for s, p := range v {
		if math.IsNaN(p) || p < 0 || p > 1+1e-6 {
			return s
		}
	}
	return -1
}
