package saturation

import (
	"fmt"
	"math"
	"slices"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// In displacement the varied ligand is unlabelled and the response counts a
// labelled one, the tracer, which is an effector of the mechanism:
//
//	ŷ = low + (high − low)·⟨m⟩/n + nonspecific·t ,
//
// with t the free tracer. On a total axis both are used up,
//
//	x + S·Ȳ(x, t) = X ,   t·(1+ν) + S·⟨m⟩/n(x, t) = T .

// countedMechanism is the mechanism whose response counts the data set's
// tracer, or the mechanism itself where the data set counts the varied ligand.
func countedMechanism(m mechanisms.Mechanism, d *Dataset) (mechanisms.Mechanism, int, error) {
	tracer := d.Response.Of
	if tracer == "" {
		return m, -1, nil
	}
	if c, ok := m.(mechanisms.Counting); ok {
		if counted, ok := c.Counted(tracer); ok {
			return counted, slices.Index(m.Effectors(), tracer), nil
		}
	}
	return nil, -1, fmt.Errorf("data set %q counts bound %s, which this mechanism does not bind: give it the effector %s (at: ligand site), or leave the mechanism out",
		d.Name, tracer, tracer)
}

// counted is the free concentration of the ligand that a row's response counts,
// on a free axis: what nonspecific binding is proportional to.
func (b *block) counted(q *row) float64 {
	if b.work != nil && b.work.clock != nil {
		return b.work.clock.free[q.curve][q.at]
	}
	if b.tracer < 0 {
		return q.x
	}
	return b.m.cells[q.cell].env.Effectors[b.tracer]
}

// tubes is a tube with both ligands: the unlabelled one's balance, and the tracer's.
type tubes struct {
	balance          // of the varied ligand; ns is 0
	lnTracer float64 // ln T
	nu       float64 // nonspecifically bound tracer per free tracer
}

// displaced is a solved tube.
type displaced struct {
	lnx, lnt float64
	yV, mV   float64    // ∂Ȳ/∂ln t and ∂(⟨m⟩/n)/∂ln t
	j        [4]float64 // Jacobian of both balances by (ln x, ln t)
}

// solveDisplaced finds both free concentrations: the tracer's by Newton's
// method in a bracket, each time with the other's balance solved.
func (b *block) solveDisplaced(t tubes, cell int, d *displaced) {
	if t.blocked {
		d.lnt = t.lnTracer - math.Log1p(t.nu)
		d.lnx = t.lnTotal
		b.bindTracer(cell, d.lnt)
		b.at(d.lnx)
		b.fillDisplaced(t, d)
		return
	}
	high := t.lnTracer - math.Log1p(t.nu)
	low := math.Inf(-1)
	lnt := high
	for range 200 {
		b.bindTracer(cell, lnt)
		lnx := freeLigand(b.work.curve, t.balance, b.work.point)
		b.work.see(lnx)
		d.lnx, d.lnt = lnx, lnt
		b.fillDisplaced(t, d)
		free := math.Exp(lnt) * (1 + t.nu)
		sum := free + t.sites*b.work.seenPoint.Y
		g := math.Log(sum) - t.lnTracer
		if g > 0 {
			high = lnt
		} else {
			low = lnt
		}
		if math.Abs(g) <= 4e-16*math.Max(1, math.Abs(t.lnTracer)) {
			return
		}
		slope := d.j[3]
		if d.j[0] > 0 {
			slope -= d.j[2] * d.j[1] / d.j[0]
		}
		next := lnt - g*sum/slope
		if !(next >= low && next <= high) {
			next = bisected(low, high, lnt)
		}
		if next == lnt || math.Abs(next-lnt) <= 1e-16*math.Abs(lnt) {
			return
		}
		lnt = next
	}
}

// at evaluates curve and response at one ln x of the bound constants.
func (b *block) at(lnx float64) {
	b.work.curve.At(lnx, b.work.point)
	b.work.see(lnx)
}

// bindTracer binds a cell's constants with this much free tracer.
func (b *block) bindTracer(cell int, lnt float64) {
	c := &b.m.cells[cell]
	w := b.work
	w.env.Effectors = append(w.env.Effectors[:0], c.env.Effectors...)
	w.env.Protomers = c.env.Protomers
	w.env.Effectors[b.tracer] = math.Exp(lnt)
	w.curve.Bind(w.theta, w.env)
}

// fillDisplaced writes the derivatives by ln t and the Jacobian of a solved tube.
func (b *block) fillDisplaced(t tubes, d *displaced) {
	w := b.work
	d.yV, d.mV = 0, 0
	for k, c := range b.m.consts {
		if c.Ligand == b.m.c.Mechanism.Effectors()[b.tracer] {
			d.yV -= float64(c.Dimension) * w.point.GradY[k]
			d.mV -= float64(c.Dimension) * w.seenPoint.GradY[k]
		}
	}
	s := t.sites
	if t.blocked {
		s = 0
	}
	d.j = [4]float64{math.Exp(d.lnx) + s*w.point.DY, s * d.yV, s * w.seenPoint.DY, math.Exp(d.lnt)*(1+t.nu) + s*d.mV}
}

// tubesOf is the tube of one row.
func (b *block) tubesOf(q *row, theta []float64) (tubes, float64) {
	bal, f := b.balanceOf(q, theta)
	t := tubes{balance: bal, nu: bal.ns, lnTracer: math.Log(b.m.cells[q.cell].env.Effectors[b.tracer])}
	t.ns = 0
	return t, f
}

// predictDisplaced is predict where both ligands are used up.
func (b *block) predictDisplaced(theta []float64, gradient bool) {
	w, r := b.work, &b.resp
	var d displaced
	for i := range b.rows {
		q := &b.rows[i]
		b.bind(theta, q.cell)
		t, f := b.tubesOf(q, theta)
		b.solveDisplaced(t, q.cell, &d)
		low, span, ns := value(theta, q.low, r.Low), value(theta, q.high, r.High), value(theta, q.ns, r.Nonspecific)
		if !b.ends.span {
			span -= low
		}
		s := w.seenPoint.Y
		if q.blocked {
			s = 0
		}
		w.yHat[i] = low + span*s + ns*math.Exp(d.lnt)
		if gradient {
			b.gradientDisplaced(i, theta, t, &d, displacedAt{f: f, span: span, ns: ns, s: s})
		}
	}
}

// displacedAt is what a solved row's response is made of.
type displacedAt struct{ f, span, ns, s float64 }

// gradientDisplaced fills row i of jHat: ∂ŷ/∂θ at fixed free ligands, and the
// two balances' adjoint for the rest.
func (b *block) gradientDisplaced(i int, theta []float64, t tubes, d *displaced, at displacedAt) {
	w, q := b.work, &b.rows[i]
	out := w.jHat.RawRowView(i)
	clear(out)
	free := math.Exp(d.lnt)
	b.endsGradient(out, q, at.s, free)
	byX, byT := 0.0, at.ns*free
	s := t.sites
	if q.blocked {
		s = 0
	} else {
		byX, byT = at.span*w.seenPoint.DY, byT+at.span*d.mV
		b.m.chain(out, w.seenPoint.GradY, at.span, q.cell, theta)
	}
	// λ solves Jᵀλ = (byX, byT): ∂ŷ = direct − λ·∂(balances)/∂θ.
	l1, l2 := adjoint(d.j, byX, byT, math.IsInf(t.lnTotal, -1))
	if !q.blocked {
		b.m.chain(out, w.point.GradY, -l1*s, q.cell, theta)
		b.m.chain(out, w.seenPoint.GradY, -l2*s, q.cell, theta)
	}
	high := value(theta, q.high, b.resp.High)
	if q.high >= 0 {
		switch {
		case b.m.a.Data[b.data].SitesPresent.FromBmax > 0:
			if !q.blocked {
				out[q.high] -= at.f * (l1*w.point.Y + l2*w.seenPoint.Y)
			}
		case b.resp.Kind == "bound" && high > 0:
			out[q.high] += l2 * free * t.nu / high
		}
	}
	if q.ns >= 0 {
		out[q.ns] -= l2 * free * at.f
	}
}

// adjoint solves Jᵀλ = (a, b); without the unlabelled ligand only the tracer's
// balance is left.
func adjoint(j [4]float64, a, b float64, absent bool) (l1, l2 float64) {
	if absent {
		return 0, b / j[3]
	}
	det := j[0]*j[3] - j[1]*j[2]
	return (a*j[3] - b*j[2]) / det, (b*j[0] - a*j[1]) / det
}

// displacementWanted is the IC50 against added unlabelled ligand: the X at which
// the bound tracer falls to half of what is bound without it.
func (m *model) displacementWanted(cell int) []wanted {
	var out []wanted
	for _, b := range m.blocks {
		if b.tracer < 0 || !m.a.Data[b.data].Total {
			continue
		}
		i := slices.IndexFunc(b.rows, func(q row) bool { return q.cell == cell && !q.blocked })
		if i < 0 {
			continue
		}
		q := b.rows[i]
		out = append(out, wanted{index: -1, back: math.Exp, make: m.halfDisplaced(b, q), quick: true,
			row: QuantityRow{Mechanism: m.c.Name, Curve: m.totalLabel(cell, b, &q), Of: "position", Name: "IC50_total",
				Unit: m.a.Ligand.Unit, Ligand: text(m.a.Ligand.Name)}})
	}
	return out
}

// halfDisplaced is ln IC50 as a function of Θ. Bound tracer falls as X rises, so
// that ln X is bracketed and halved; at the solution the gradient follows from
// both balances and the condition on m.
func (m *model) halfDisplaced(shared *block, q row) func() fit.Quantity {
	return func() fit.Quantity {
		b := shared.Clone().(*block)
		return func(theta, grad []float64) float64 {
			clear(grad)
			b.bind(theta, q.cell)
			t, f := b.tubesOf(&q, theta)
			t.lnTotal = math.Inf(-1)
			var d displaced
			b.solveDisplaced(t, q.cell, &d)
			m0 := b.work.seenPoint.Y
			dm0 := b.boundGradient(theta, &q, t, &d, f)
			low, high := -700.0, 700.0
			for range 200 {
				t.lnTotal = (low + high) / 2
				b.solveDisplaced(t, q.cell, &d)
				if b.work.seenPoint.Y > m0/2 {
					low = t.lnTotal
				} else {
					high = t.lnTotal
				}
				if high-low < 1e-14*math.Max(1, math.Abs(low)) {
					break
				}
			}
			dm := b.boundGradient(theta, &q, t, &d, f)
			l1, _ := adjoint(d.j, b.work.seenPoint.DY, d.mV, false)
			byTotal := l1 * math.Exp(t.lnTotal) // ∂m/∂ln X
			for j := range grad {
				grad[j] = (dm0[j]/2 - dm[j]) / byTotal
			}
			return t.lnTotal
		}
	}
}

// boundGradient is ∂(⟨m⟩/n)/∂Θ of a solved tube at fixed totals.
func (b *block) boundGradient(theta []float64, q *row, t tubes, d *displaced, f float64) []float64 {
	w := b.work
	out := make([]float64, len(theta))
	b.m.chain(out, w.seenPoint.GradY, 1, q.cell, theta)
	l1, l2 := adjoint(d.j, w.seenPoint.DY, d.mV, math.IsInf(t.lnTotal, -1))
	b.m.chain(out, w.point.GradY, -l1*t.sites, q.cell, theta)
	b.m.chain(out, w.seenPoint.GradY, -l2*t.sites, q.cell, theta)
	free := math.Exp(d.lnt)
	if q.high >= 0 && b.m.a.Data[b.data].SitesPresent.FromBmax > 0 {
		out[q.high] -= f * (l1*w.point.Y + l2*w.seenPoint.Y)
	}
	if high := value(theta, q.high, b.resp.High); q.high >= 0 && b.m.a.Data[b.data].SitesPresent.FromBmax == 0 && high > 0 {
		out[q.high] += l2 * free * t.nu / high
	}
	if q.ns >= 0 {
		out[q.ns] -= l2 * free * f
	}
	return out
}
