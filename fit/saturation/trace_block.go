package saturation

import (
	"context"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"

	"ligancy/mechanisms/kinetics"
)

// moment is a place on a trace: the ligand of its column, and the time.
type moment struct{ x, seconds float64 }

// addMoment finds or makes the place of a point on a curve of traces.
func (c *curveAt) addMoment(d *Dataset, p *Point) int {
	key := moment{p.X, p.Seconds}
	at, ok := c.byMoment[key]
	if !ok {
		at = len(c.lnx)
		if c.byMoment == nil {
			c.byMoment = map[moment]int{}
		}
		c.byMoment[key] = at
		c.lnx = append(c.lnx, math.Log(d.traceLigand(p.X)))
		c.moments = append(c.moments, key)
	}
	return at
}

// gatherTraces sorts the places of one curve into traces.
func (b *block) gatherTraces(ci int) {
	c := &b.curves[ci]
	d := &b.m.a.Data[b.data]
	order := make([]int, len(c.moments))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(i, j int) int {
		p, q := c.moments[i], c.moments[j]
		switch {
		case p.x != q.x:
			return compare(p.x, q.x)
		default:
			return compare(p.seconds, q.seconds)
		}
	})
	for k, at := range order {
		if k == 0 || c.moments[at].x != c.moments[order[k-1]].x {
			b.traces = append(b.traces, trace{curve: ci, program: d.program(c.moments[at].x)})
		}
		t := &b.traces[len(b.traces)-1]
		t.times, t.at = append(t.times, c.moments[at].seconds), append(t.at, at)
	}
}

func compare(a, b float64) int {
	if a < b {
		return -1
	}
	return 1
}

// clock is a workspace's share of traces.
type clock struct {
	bound kinetics.Follower
	phi   []float64
	grad  []*mat.Dense // per curve: places × rates
	free  [][]float64  // per curve: free ligand at each place
	fault error
}

// newClock makes a block's workspace for traces; nil for a block without.
func (b *block) newClock() *clock {
	if len(b.traces) == 0 {
		return nil
	}
	t := b.m.timing
	w := &clock{bound: t.follower(), phi: make([]float64, len(t.rates))}
	for _, c := range b.curves {
		w.grad = append(w.grad, mat.NewDense(len(c.lnx), max(1, len(t.rates)), nil))
		w.free = append(w.free, make([]float64, len(c.lnx)))
	}
	return w
}

// follow predicts every trace: what is seen at each place of each curve, and its
// gradient by constants and rates. A trace that cannot be followed is a fault, which
// Eval returns: no number stands in for it.
func (b *block) follow(theta []float64, gradient bool) {
	w := b.work.clock
	w.fault = nil
	for r, j := range b.m.timing.at {
		w.phi[r] = theta[j]
	}
	bound := -1
	for i := range b.traces {
		t := &b.traces[i]
		if t.curve != bound {
			b.settle(theta, b.curves[t.curve].cell)
			if err := w.bound.Bind(b.work.theta, w.phi, b.m.cells[b.curves[t.curve].cell].env); err != nil {
				w.fault = fmt.Errorf("data %q: %w", b.m.a.Data[b.data].Name, err)
				return
			}
			bound = t.curve
		}
		c, err := w.bound.Run(context.Background(), &t.program, t.times, gradient)
		if err != nil {
			w.fault = fmt.Errorf("data %q: %w", b.m.a.Data[b.data].Name, err)
			return
		}
		b.takeTrace(t, c)
	}
}

// takeTrace writes what one trace has shown.
func (b *block) takeTrace(t *trace, c *kinetics.Course) {
	w, k := b.work, len(b.m.consts)
	for i, at := range t.at {
		w.s[t.curve][at] = c.Seen[i]
		w.clock.free[t.curve][at] = c.Free[i]
		if c.Grad == nil {
			continue
		}
		row := c.Grad.RawRowView(i)
		copy(w.grad[t.curve].RawRowView(at), row[:k])
		copy(w.clock.grad[t.curve].RawRowView(at), row[k:])
	}
}

// settle writes the constants of a cell to the workspace.
func (b *block) settle(theta []float64, cell int) {
	c := &b.m.cells[cell]
	for k, j := range c.theta {
		b.work.theta[k] = theta[j]
	}
	if c.shift >= 0 {
		b.m.shiftConstants(b.work.theta, theta[c.shift])
	}
}

// chainRates adds the gradient by the rates to a row of jHat.
func (b *block) chainRates(row []float64, q *row, span float64) {
	for r, j := range b.m.timing.at {
		row[j] += span * b.work.clock.grad[q.curve].At(q.at, r)
	}
}
