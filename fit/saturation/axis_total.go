package saturation

import (
	"math"

	"ligancy/mechanisms"
)

// balanceOf is the mass balance of one row on a total axis, with where its
// numbers stand in Θ. The response of a binding assay counts the same ligand:
// f turns a bound response into a concentration, so that S = f·Bmax and ν = f·nonspecific.
func (b *block) balanceOf(q *row, theta []float64) (bal balance, f float64) {
	d := &b.m.a.Data[b.data]
	bal = balance{lnTotal: math.Log(q.x), sites: d.SitesPresent.Value, blocked: q.blocked}
	f = d.SitesPresent.FromBmax
	high := value(theta, q.high, b.resp.High)
	switch {
	case f > 0:
		bal.sites = f * high
	case d.Response.Kind == "bound" && high > 0:
		f = bal.sites / high
	}
	if d.Response.Kind == "bound" {
		bal.ns = f * value(theta, q.ns, b.resp.Nonspecific)
	}
	return bal, f
}

// predictTotal is predict on a total axis: the free ligand of every row is
// solved for, and the chain rule follows it.
func (b *block) predictTotal(theta []float64, gradient bool) {
	w, d := b.work, &b.resp
	for ci := range b.curves {
		b.bind(theta, b.curves[ci].cell)
		for i := range b.rows {
			q := &b.rows[i]
			if q.curve != ci {
				continue
			}
			bal, f := b.balanceOf(q, theta)
			lnx := freeLigand(w.curve, bal, w.point)
			if w.seen != w.curve {
				w.see(lnx)
			}
			low, span, ns := value(theta, q.low, d.Low), value(theta, q.high, d.High), value(theta, q.ns, d.Nonspecific)
			if !b.ends.span {
				span -= low
			}
			s := w.seenPoint.Y
			if q.blocked {
				s = 0
			}
			x := math.Exp(lnx)
			w.yHat[i] = low + span*s + ns*x
			if gradient {
				b.gradientTotal(i, theta, bal, f, totalPoint{lnx: lnx, s: s, span: span, ns: ns})
			}
		}
	}
}

// limited is what a response sees, with its own limits.
type limited interface {
	Limits(gradLow, gradHigh []float64) (low, high float64)
}

// see writes the raw response at one ln x, its slope and its gradient into
// seenPoint: At itself speaks of the share between the response's limits.
func (w *workspace) see(lnx float64) {
	w.seen.At(lnx, w.seenPoint)
	span := 1.0
	if l, ok := w.seen.(limited); ok {
		low, high := l.Limits(w.limitLow, w.limitHigh)
		span = high - low
	}
	w.oneX[0] = lnx
	w.seen.Saturation(w.oneY[:], w.oneX[:], w.oneGrad)
	w.seenPoint.Y = w.oneY[0]
	w.seenPoint.DY *= span
	copy(w.seenPoint.GradY, w.oneGrad.RawRowView(0))
}

// totalPoint is a solved row.
type totalPoint struct{ lnx, s, span, ns float64 }

// gradientTotal fills row i of jHat on a total axis.
func (b *block) gradientTotal(i int, theta []float64, bal balance, f float64, at totalPoint) {
	w, q, d := b.work, &b.rows[i], &b.m.a.Data[b.data]
	out := w.jHat.RawRowView(i)
	clear(out)
	if math.IsInf(at.lnx, -1) {
		b.endsGradient(out, q, 0, 0)
		return
	}
	x, p := math.Exp(at.lnx), w.point
	den := bal.denominator(at.lnx, p)
	slope := at.ns * x // ∂ŷ/∂ln x
	if !q.blocked {
		slope += at.span * w.seenPoint.DY
	}
	chain := -slope / den // ∂ŷ/∂(balance)
	if !q.blocked {
		b.m.chain(out, w.seenPoint.GradY, at.span, q.cell, theta)
		b.m.chain(out, p.GradY, chain*bal.sites, q.cell, theta)
	}
	b.endsGradient(out, q, at.s, x)
	high := value(theta, q.high, b.resp.High)
	if q.high >= 0 {
		switch {
		case d.SitesPresent.FromBmax > 0:
			if !q.blocked {
				out[q.high] += chain * f * p.Y
			}
		case d.Response.Kind == "bound" && high > 0: // ν = S·nonspecific/Bmax
			out[q.high] -= chain * x * bal.ns / high
		}
	}
	if q.ns >= 0 {
		out[q.ns] += chain * x * f
	}
}

// endsGradient adds what the numbers of the response contribute themselves.
func (b *block) endsGradient(out []float64, q *row, s, x float64) {
	if q.high >= 0 {
		out[q.high] += s
	}
	if q.low >= 0 {
		out[q.low]++
		if !b.ends.span {
			out[q.low] -= s
		}
	}
	if q.ns >= 0 {
		out[q.ns] += x
	}
}

// newPoint is a Point with room for the gradients of k constants.
func newPoint(k int) *mechanisms.Point {
	return &mechanisms.Point{GradY: make([]float64, k), GradNH: make([]float64, k)}
}
