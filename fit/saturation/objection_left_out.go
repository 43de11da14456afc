package saturation

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strings"
)

const leftOutSource = "exclusions, normalisation and weighting are declared: " + fromPractice

// asksLeftOut asks what was left out and whether the response was normalised.
func (r *review) asksLeftOut(ctx context.Context) {
	for di := range r.a.Data {
		d := &r.a.Data[di]
		n, reasons := 0, []string(nil)
		for i := range d.Points {
			if why := d.Points[i].LeftOut; why != "" {
				n++
				if !slices.Contains(reasons, why) {
					reasons = append(reasons, why)
				}
			}
		}
		a := answer{id: "left-out", group: foundGood, source: leftOutSource, text: r.where(di) +
			"No point was left out."}
		if n > 0 {
			a.group = sayInPaper
			a.text = fmt.Sprintf("%s%s of %d points left out (%s).", r.where(di), capital(countWord(n)),
				len(d.Points), strings.Join(reasons, "; "))
			a.remedy = "declare them, with the reasons, and the fit with them"
			a.effect = r.withLeftOut(ctx, di)
		}
		r.add(a)
		r.normalised(di)
	}
}

// withLeftOut is what n_H of a Hill fit becomes with the points put back.
func (r *review) withLeftOut(ctx context.Context, di int) string {
	f := r.hills[di].f
	if f == nil {
		return ""
	}
	g := f.refit(ctx, func(b *Analysis, _ *Candidate) {
		for i := range b.Data[0].Points {
			b.Data[0].Points[i].LeftOut = ""
		}
	})
	if g.result == nil {
		return "With them there is no Hill fit."
	}
	return fmt.Sprintf("With them, by a Hill fit, %s.", moveBetween(f, g, nil).inWords())
}

// normalised asks whether a saturation was scaled to its own extremes: then the
// highest or lowest point of every series is exactly an end.
func (r *review) normalised(di int) {
	d := &r.a.Data[di]
	if d.Response.Kind != "saturation" || d.Trace {
		return
	}
	top := 1.0
	if d.Response.Percent {
		top = 100
	}
	type span struct{ low, high float64 }
	by := map[string]span{}
	for i := range d.Points {
		p := &d.Points[i]
		if p.LeftOut != "" {
			continue
		}
		k := r.a.pointLabel(d, p) + "\x00" + p.Preparation
		s, ok := by[k]
		if !ok {
			s = span{math.Inf(1), math.Inf(-1)}
		}
		by[k] = span{math.Min(s.low, p.Y), math.Max(s.high, p.Y)}
	}
	low, high := len(by) > 0, len(by) > 0
	for _, s := range by {
		low, high = low && s.low == 0, high && s.high == top
	}
	a := answer{id: "normalised", group: foundGood, source: leftOutSource, text: r.where(di) +
		"The response was not scaled to its own highest or lowest point."}
	if low || high {
		a.group = sayInPaper
		a.text = r.where(di) +
			"Every series touches an end exactly, as when it is scaled to its own extreme points: their " +
			"scatter became the ends'."
		a.effect = "Scaled to its own highest point, a curve that has not ended reads too steep, and " +
			"its K too low."
		a.remedy = "response: {kind: signal}, with the values as measured"
	}
	r.add(a)
}
