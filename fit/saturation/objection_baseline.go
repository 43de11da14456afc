package saturation

import (
	"context"
	"fmt"
	"math"
	"slices"
)

const (
	baselineSource = fromPractice + ": measure without ligand, or fit the lower end and say so"
	z999           = 3.29
)

// asksBaseline asks what the lower end of every curve rests on.
func (r *review) asksBaseline(context.Context) {
	for di := range r.a.Data {
		list := r.readings(di)
		if !r.binds(di) || len(list) == 0 {
			continue
		}
		var a answer
		for _, shared := range r.byEnd(list, lowEnd) {
			best := slices.MaxFunc(shared, func(a, b *reading) int {
				return len(r.pointsBelow(a)) - len(r.pointsBelow(b))
			})
			if a = r.baselineOf(best); a.group != foundGood {
				break
			}
		}
		r.add(a)
	}
}

// baselineOf answers for one curve.
func (r *review) baselineOf(c *reading) answer {
	d := &r.a.Data[c.data]
	below := r.pointsBelow(c)
	low, _, at := r.hills[c.data].end(c, lowEnd, lowSetting)
	end := fmt.Sprintf("%sThe lower end%s", r.where(c.data), r.onCurve(c))
	a := answer{id: "baseline", group: foundGood, source: baselineSource}
	switch {
	case len(below) == 0 && at < 0:
		a.group = sayInPaper
		a.text = fmt.Sprintf("%s was set to %s, and no point below %s saturation tests it.", end,
			number(low), percent(r.limits.Empty))
	case len(below) == 0:
		a.group = settleFirst
		a.text = fmt.Sprintf("%s is an extrapolation: no point lies below %s saturation.", end,
			percent(r.limits.Empty))
	case at < 0:
		return r.baselineTested(c, below, low)
	default:
		a.text = fmt.Sprintf("%s is fitted, with %d points below %s saturation.", end, len(below),
			percent(r.limits.Empty))
		return a
	}
	a.effect = "Set too low it makes the curve shallower, set too high steeper."
	x := math.Exp(c.lnK + math.Log(r.limits.Empty/(1-r.limits.Empty))/c.h)
	a.remedy = "measure without ligand, or below " + withUnit(x, r.a.Ligand.Unit, 2)
	if d.Response.Low.Free {
		a.effect = "Too low an end makes the curve shallower, too high an end steeper."
	}
	return a
}

// pointsBelow lists the points of a curve near its lower end.
func (r *review) pointsBelow(c *reading) []int {
	var below []int
	for _, i := range c.points {
		l := c.lnFree(&r.a.Data[c.data], i)
		if math.IsInf(l, -1) || r.saturation(c, l) <= r.limits.Empty {
			below = append(below, i)
		}
	}
	return below
}

// baselineTested compares the points near a lower end that was set with what
// the leader expects there; without a leader, points without ligand alone.
func (r *review) baselineTested(c *reading, below []int, low float64) answer {
	residual := r.residuals(c.data)
	sum, n := 0.0, 0.0
	for _, i := range below {
		if r.lead != nil || r.a.Data[c.data].Points[i].X == 0 {
			sum += residual[i]
			n++
		}
	}
	end := fmt.Sprintf("%sThe lower end%s was set to %s", r.where(c.data), r.onCurve(c), number(low))
	a := answer{id: "baseline", group: foundGood, source: baselineSource,
		text: fmt.Sprintf("%s; %d points below %s saturation agree with it.", end, len(below),
			percent(r.limits.Empty))}
	switch z := sum / math.Sqrt(n); {
	case n == 0:
		a.text = fmt.Sprintf("%s; %d points lie below %s saturation, to be judged by the fits.", end,
			len(below), percent(r.limits.Empty))
	case math.Abs(z) > z999:
		a.group = settleFirst
		a.text = fmt.Sprintf("%s, but %d points near it lie off by %s standard deviations on average.", end,
			int(n), figures(sum/n, 2))
		a.effect = "Set too low it makes the curve shallower, set too high steeper."
		a.remedy = "response: {low: free}"
	}
	return a
}
