package saturation

import (
	"context"
	"fmt"
	"math"
)

const concentrationsSource = fromPractice +
	": 0.1 to 10 K at least, 8 to 12 levels, evenly in the logarithm; for Adair constants also 1–5 % " +
	"and 95–99 % saturation"

// asksConcentrations asks whether the ligand values can hold what is asked of them.
func (r *review) asksConcentrations(context.Context) {
	for di := range r.a.Data {
		if !r.binds(di) {
			continue
		}
		a := answer{id: "concentrations", group: foundGood, source: concentrationsSource}
		for _, c := range r.readings(di) {
			if b := r.concentrationsOf(c); a.text == "" || b.group != foundGood {
				a = b
			}
			if a.group != foundGood {
				break
			}
		}
		if a.text != "" {
			r.add(a)
		}
		r.adairEnds(di)
	}
}

func (r *review) concentrationsOf(c *reading) answer {
	levels := c.levels(&r.a.Data[c.data])
	a := answer{id: "concentrations", group: foundGood, source: concentrationsSource}
	gap, from, to := r.widestGap(c, levels)
	limit := r.limits.Gap / math.Max(1, c.h)
	switch {
	case len(levels) < r.limits.Levels:
		a.group = sayInPaper
		a.text = fmt.Sprintf("%sOnly %s ligand values%s; %d is the usual least.", r.where(c.data),
			countWord(len(levels)), r.onCurve(c), r.limits.Levels)
		a.remedy = "add ligand values; ligancy plan says which"
	case gap > limit:
		a.group = sayInPaper
		a.text = fmt.Sprintf("%sBetween %s and %s%s, within the transition, nothing was measured over "+
			"%s decades.",
			r.where(c.data), figures(math.Exp(from), 3),
			withUnit(math.Exp(to), r.a.Ligand.Unit, 3), r.onCurve(c), figures(gap, 2))
		a.remedy = "measure at " + withUnit(math.Exp((from+to)/2), r.a.Ligand.Unit, 2)
	default:
		a.text = fmt.Sprintf("%s%s ligand values%s, none further apart than %s decades in the transition.",
			r.where(c.data), capital(countWord(len(levels))), r.onCurve(c), figures(gap, 2))
		return a
	}
	if s := (math.Log(c.high) - math.Log(c.low)) / 2; !math.IsInf(s, 0) && !math.IsNaN(s) {
		a.effect = fmt.Sprintf("n_H of a Hill fit is held to %s to %s (99 %%).", figures(c.low, 3),
			figures(c.high, 3))
	} else {
		a.effect = "n_H of a Hill fit is not held on both sides."
	}
	return a
}

// widestGap between neighbouring ln x of which at least one lies between 10 and
// 90 % saturation, in decades.
func (r *review) widestGap(c *reading, levels []float64) (gap, from, to float64) {
	inside := func(l float64) bool { s := c.at(l); return s > 0.1 && s < 0.9 }
	for i := 1; i < len(levels); i++ {
		a, b := levels[i-1], levels[i]
		if !inside(a) && !inside(b) && !(c.at(a) <= 0.1 && c.at(b) >= 0.9) {
			continue
		}
		if g := (b - a) / math.Ln10; g > gap {
			gap, from, to = g, a, b
		}
	}
	return gap, from, to
}

// adairEnds asks for points near both ends where stepwise constants are sought.
func (r *review) adairEnds(di int) {
	if !r.hasFamily("adair") {
		return
	}
	for _, c := range r.readings(di) {
		lower, upper := 0, 0
		for _, l := range c.levels(&r.a.Data[di]) {
			switch s := r.saturation(c, l); {
			case s >= 0.01 && s <= 0.05:
				lower++
			case s >= 0.95 && s <= 0.99:
				upper++
			}
		}
		a := answer{id: "adair-ends", group: foundGood, source: concentrationsSource,
			text: fmt.Sprintf("%sThe first and last stepwise constants are tested: levels at 1–5 %% and "+
				"95–99 %% saturation%s.",
				r.where(di), r.onCurve(c))}
		if lower == 0 || upper == 0 {
			a.group = forCompleteness
			missing := "1–5 %"
			if lower > 0 {
				missing = "95–99 %"
			} else if upper == 0 {
				missing += " and at 95–99 %"
			}
			a.text = fmt.Sprintf("%sThe outer stepwise constants rest on no ligand value at %s "+
				"saturation%s.",
				r.where(di), missing, r.onCurve(c))
			a.remedy = "add ligand values there"
			r.add(a)
			return
		}
		if c == r.readings(di)[len(r.readings(di))-1] {
			r.add(a)
		}
	}
}

func (r *review) hasFamily(family string) bool {
	for i := range r.a.Candidates {
		if r.a.Candidates[i].Family == family {
			return true
		}
	}
	return false
}
