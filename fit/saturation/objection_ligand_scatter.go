package saturation

import (
	"context"
	"fmt"
	"math"
)

const ligandScatterSource = fromPractice +
	": an error of the ligand value is one of the response, times the slope"

// asksLigandScatter asks whether points scatter more where the curve is steep,
// as they do when it is the ligand value that scatters: σ² ∝ 1 + (σ_x dy/d ln x)².
func (r *review) asksLigandScatter(context.Context) {
	for di := range r.a.Data {
		if !r.binds(di) {
			continue
		}
		for _, c := range r.readings(di) {
			if c.h < steepCurve {
				continue
			}
			r.ligandScatterOn(c)
			break
		}
	}
}

// steepCurve is the n_H above which ligand values are asked about.
const steepCurve = 1.5

func (r *review) ligandScatterOn(c *reading) {
	list := r.slopesAndSquares(c)
	if len(list) < 10 {
		r.add(answer{id: "ligand-scatter", group: forCompleteness, source: ligandScatterSource,
			text: fmt.Sprintf("%sWhether the ligand values scatter cannot be asked of %d points on a "+
				"steep curve.", r.where(c.data), len(list))})
		return
	}
	sx, over := ligandScatter(list)
	a := answer{id: "ligand-scatter", group: foundGood, source: ligandScatterSource,
		text: fmt.Sprintf("%sPoints do not scatter more where the curve%s is steep: ligand values are "+
			"good enough.", r.where(c.data), r.onCurve(c))}
	if over > chi2One99 {
		a.group = sayInPaper
		a.text = fmt.Sprintf("%sPoints scatter more where the curve%s is steep (likelihood ratio %s): "+
			"the ligand values themselves scatter, by about %s.",
			r.where(c.data), r.onCurve(c), figures(over, 2), percent(sx))
		a.effect = fmt.Sprintf("Such scatter takes an n_H of %s to %s.", figures(c.h, 3),
			figures(flattened(c.h, sx), 3))
		a.remedy = "measure the ligand in every sample, or prepare samples from one series"
	}
	r.add(a)
}

// slopesAndSquares is, for every point of a curve, the slope dy/d ln x and the
// squared residual (as mean and variance), both in units of the scatter.
func (r *review) slopesAndSquares(c *reading) []group {
	d := &r.a.Data[c.data]
	y, sd := r.predictions(c.data)
	high, _, _ := r.hills[c.data].end(c, highEnd, highSetting)
	low, _, _ := r.hills[c.data].end(c, lowEnd, lowSetting)
	span := high - low
	if r.hills[c.data].f.m.blocks[0].ends.span {
		span = high
	}
	var list []group
	for _, i := range c.points {
		l := c.lnFree(d, i)
		if math.IsNaN(y[i]) || math.IsInf(l, -1) {
			continue
		}
		s := c.at(l)
		slope := c.h * s * (1 - s) * span / sd[i]
		e := (d.Points[i].Y - y[i]) / sd[i]
		list = append(list, group{mean: slope, variance: e * e, freedom: 1})
	}
	return list
}

// ligandScatter is the standard deviation of ln x under σ² = σ₀²[(1−λ) + λq²], q
// the slope relative to the steepest, and the likelihood ratio against λ = 0.
func ligandScatter(list []group) (sx, over float64) {
	top := 0.0
	for _, g := range list {
		top = math.Max(top, g.mean*g.mean)
	}
	relative := func(g group) float64 { return g.mean*g.mean/top + 1e-6 }
	lambda, over, _ := twoLaws(list, func(group) float64 { return 1 }, relative)
	variance := 0.0
	for _, g := range list {
		variance += g.variance / ((1 - lambda) + lambda*relative(g)) / float64(len(list))
	}
	return math.Sqrt(variance * lambda / top), over
}
