package saturation

import (
	"context"
	"fmt"
	"math"
)

const poolingSource = "pooling preparations flattens: Sci Rep 2019;9:19111 (slopes of 3.9 pooled to 2.26)"

// asksPooling compares every preparation alone with all of them on one curve.
func (r *review) asksPooling(context.Context) {
	for di := range r.a.Data {
		if names, _ := r.preparationsIn(di); !r.binds(di) || len(names) < 2 {
			continue
		}
		var worst *reading
		var mean *PreparationRow
		for _, c := range r.readings(di) {
			row := r.meanRow(c)
			if row == nil || row.N < 2 || math.IsNaN(float64(row.NH)) {
				continue
			}
			if worst == nil || float64(row.NH)/c.h > float64(mean.NH)/worst.h {
				worst, mean = c, row
			}
		}
		if worst == nil {
			r.add(answer{id: "pooling", group: forCompleteness, source: poolingSource,
				text: r.where(di) +
					"Whether pooling the preparations flattens the curve cannot be asked: they cannot " +
					"each be read alone."})
			continue
		}
		r.poolingOf(worst, mean)
	}
}

// poolFlattens is the share by which pooling may lower n_H before it is said.
const poolFlattens = 0.05

func (r *review) poolingOf(c *reading, mean *PreparationRow) {
	h, s := float64(mean.NH), float64(mean.SDLnXHalf)
	a := answer{id: "pooling", group: foundGood, source: poolingSource,
		text: fmt.Sprintf("%sPooled%s, a Hill fit has n_H %s; each of %s preparations alone has %s on "+
			"average.",
			r.where(c.data), r.onCurve(c), figures(c.h, 3), countWord(mean.N), figures(h, 3)),
		effect: fmt.Sprintf("K scatters between preparations by a factor of %s (SD of ln K %s), which "+
			"takes %s to about %s.",
			figures(math.Exp(s), 3), figures(s, 2), figures(h, 3), figures(flattened(h, s), 3))}
	if h > c.h*(1+poolFlattens) && flattened(h, s) < h/(1+poolFlattens/2) {
		a.group = settleFirst
		a.text += " Pooling flattens the curve."
		a.remedy = "preparation: shift, under the mechanism; print means of n_H and ln K"
	}
	r.add(a)
}
