package saturation

import (
	"context"
	"fmt"
	"math"
)

const (
	plateauSource = fromPractice + ": highest ligand at least 10 K, 91 % of a hyperbola"
	z95           = 1.96
)

// asksPlateau asks whether every curve was followed to its upper end.
func (r *review) asksPlateau(context.Context) {
	for di := range r.a.Data {
		if !r.binds(di) {
			continue
		}
		list := r.readings(di)
		if len(list) == 0 {
			continue
		}
		worst, least := list[0], math.Inf(1)
		for _, shared := range r.byEnd(list, highEnd) {
			best, top := shared[0], -1.0
			for _, c := range shared {
				if s := r.topSaturation(c); s > top {
					best, top = c, s
				}
			}
			if top < least {
				worst, least = best, top
			}
		}
		r.plateauOf(worst, least)
	}
}

// byEnd gathers curves that share a fitted end: one of them is enough to hold it.
// A curve whose end is set stands alone.
func (r *review) byEnd(list []*reading, pick func(*datum) int) [][]*reading {
	var groups [][]*reading
	at := map[int]int{} // place of the end in Θ → group
	for _, c := range list {
		_, _, end := r.hills[c.data].end(c, pick, highSetting)
		g, ok := at[end]
		if !ok || end < 0 {
			g = len(groups)
			at[end] = g
			groups = append(groups, nil)
		}
		groups[g] = append(groups[g], c)
	}
	return groups
}

// topSaturation is the saturation at the highest ligand of a curve: by the
// leader where there is one, else by the Hill equation.
func (r *review) topSaturation(c *reading) float64 {
	levels := c.levels(&r.a.Data[c.data])
	if len(levels) == 0 {
		return math.NaN()
	}
	return r.saturation(c, levels[len(levels)-1])
}

// saturation of a curve at ln x.
func (r *review) saturation(c *reading, lnx float64) float64 {
	if cell := r.leadCell(c); cell >= 0 {
		p := newPoint(len(r.lead.m.consts))
		curve := r.lead.m.boundCurve(cell, r.lead.result.Theta)
		curve.At(lnx, p)
		if !math.IsNaN(p.Y) {
			return p.Y
		}
	}
	return c.at(lnx)
}

// leadCell is the leader's cell for a curve; −1 without a leader.
func (r *review) leadCell(c *reading) int {
	if r.lead == nil || len(c.points) == 0 {
		return -1
	}
	for _, b := range r.lead.m.blocks {
		if b.data != c.data {
			continue
		}
		for i := range b.pts {
			if b.pts[i].index == c.points[0] {
				return b.pts[i].cell
			}
		}
	}
	return -1
}

func (r *review) plateauOf(c *reading, s float64) {
	d := &r.a.Data[c.data]
	name := endsOf(d.Response.Kind).high
	a := answer{id: "plateau", group: foundGood, source: plateauSource,
		text: fmt.Sprintf("%sThe highest ligand%s reaches %s saturation.", r.where(c.data), r.onCurve(c),
			percent(s))}
	if s >= r.limits.Saturated {
		r.add(a)
		return
	}
	k := math.Exp(c.lnK)
	a.remedy = fmt.Sprintf("measure up to %s",
		withUnit(k*math.Pow(r.limits.Saturated/(1-r.limits.Saturated), 1/c.h), r.a.Ligand.Unit, 2))
	_, _, at := r.hills[c.data].end(c, highEnd, highSetting)
	if at < 0 {
		a.group = sayInPaper
		a.text = fmt.Sprintf("%sThe curve%s stops at %s saturation, and its upper end (%s) was set, not "+
			"measured.",
			r.where(c.data), r.onCurve(c), percent(s), name)
		r.add(a)
		return
	}
	a.group = settleFirst
	a.text = fmt.Sprintf("%sThe upper end was not reached: the highest ligand%s is at %s saturation, "+
		"and %s is an extrapolation",
		r.where(c.data), r.onCurve(c), percent(s), name)
	a.text += r.plateauInterval(c) + "."
	a.effect = r.plateauEffect(c)
	r.add(a)
}

// plateauInterval gives the interval of the upper end by the leader.
func (r *review) plateauInterval(c *reading) string {
	q := r.leadEnd(c)
	switch {
	case q == nil:
		return ""
	case q.Held != "both":
		return " without an interval that ends on both sides"
	}
	low, high := float64(q.Low), float64(q.High)
	return fmt.Sprintf(" (%s to %s)", toInterval(low, low, high), toInterval(high, low, high))
}

// leadEnd is the leader's row of the upper end of a curve; nil where there is none.
func (r *review) leadEnd(c *reading) *QuantityRow {
	if r.lead == nil {
		return nil
	}
	for _, b := range r.lead.m.blocks {
		for i := range b.pts {
			q := &b.pts[i]
			if b.data != c.data || q.index != c.points[0] || q.high < 0 {
				continue
			}
			p := &r.lead.m.params[q.high]
			return r.leadRow(p.Name, p.curve)
		}
	}
	return nil
}

// plateauEffect moves the upper end over its 95 % covariance interval: with V
// the covariance of the Hill fit, d ln h = V(ln h, end)/V(end, end) · d end.
func (r *review) plateauEffect(c *reading) string {
	s := r.hills[c.data]
	_, se, at := s.end(c, highEnd, highSetting)
	cov := s.f.result.Cov
	if cov == nil || !(se > 0) {
		return "n_H is open."
	}
	atH := s.f.m.cells[c.cell].theta[1]
	move := z95 * cov.At(atH, at) / se
	low, high := ordered(c.h*math.Exp(-move), c.h*math.Exp(move))
	if math.Abs(move) > 2 {
		return "n_H is open."
	}
	return fmt.Sprintf("Over the interval of that end, n_H of a Hill fit runs from %s to %s.",
		figures(low, 2), figures(high, 2))
}
