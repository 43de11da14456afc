package saturation

import (
	"context"
	"fmt"
	"math"
)

const sitesSource = "n_H ≤ n at equilibrium, one macromolecule against free ligand: exact"

// asksSites asks whether n_H can be that of an equilibrium with the sites of
// the mechanisms.
func (r *review) asksSites(context.Context) {
	n := r.mostSites()
	for di := range r.a.Data {
		list := r.readings(di)
		if len(list) == 0 || !r.binds(di) {
			continue
		}
		c := list[0]
		for _, o := range list {
			if o.low > c.low {
				c = o
			}
		}
		a := answer{id: "n_H-above-sites", group: foundGood, source: sitesSource}
		switch {
		case n == 0:
			a.group = forCompleteness
			a.text = fmt.Sprintf("%sNo mechanism with sites is tried: n_H (%s%s) is a steepness, not a "+
				"count of sites.",
				r.where(di), figures(c.h, 3), r.onCurve(c))
		case c.low > float64(n):
			a.group = settleFirst
			a.text = fmt.Sprintf("%sn_H of a Hill fit%s is %s (%s): not an equilibrium mechanism with "+
				"%s, or an artefact.",
				r.where(di), r.onCurve(c), figures(c.h, 3), c.interval(), sitesWords(n))
			a.effect = fmt.Sprintf("At equilibrium n_H cannot exceed %d.", n)
			a.remedy = "look for depletion, too short an incubation, or a response that is not binding"
		default:
			a.text = fmt.Sprintf("%sn_H of a Hill fit%s (%s) does not exceed the number of sites (%d), "+
				"which it does not count.",
				r.where(di), r.onCurve(c), figures(c.h, 3), n)
		}
		r.add(a)
	}
}

// interval writes the interval of h: "99 % interval 0.91 to 1.08".
func (c *reading) interval() string {
	return "99 % interval " + endWords(c.low, c.high)
}

// endWords writes two ends, of which one may be missing.
func endWords(low, high float64) string {
	lowOpen, highOpen := !(low > 0), math.IsInf(high, 1)
	switch {
	case lowOpen && highOpen:
		return "without an end"
	case lowOpen:
		return "up to " + figures(high, 3)
	case highOpen:
		return figures(low, 3) + " and beyond"
	}
	return figures(low, 3) + " to " + figures(high, 3)
}

func sitesWords(n int) string {
	if n == 1 {
		return "one site"
	}
	return countWord(n) + " sites"
}
