package saturation

import (
	"context"
	"fmt"
	"math"
)

const definitionSource = "midpoint, fitted and 10–90 % slopes differ: Goldbeter & Koshland 1981 Proc " +
	"Natl Acad Sci 78:6840 for the last"

// definitionsDiffer is the difference of two Hill coefficients of one curve from
// which it matters which is printed.
const definitionsDiffer = 0.1

// asksDefinition asks by how much the numbers called n_H differ here.
func (r *review) asksDefinition(context.Context) {
	if r.lead == nil {
		return
	}
	names := []string{"n_H_half", "n_H_max", "n_H_10_90", "n_H_hill_reading"}
	widest, words := -1.0, ""
	for _, c := range r.lead.m.curveCells() {
		label := r.lead.m.cells[c].label
		low, high, s := math.Inf(1), math.Inf(-1), []string{}
		for k, name := range names {
			q := r.leadRow(name, label)
			if q == nil || math.IsNaN(float64(q.Value)) {
				continue
			}
			v := float64(q.Value)
			low, high = math.Min(low, v), math.Max(high, v)
			s = append(s, figures(v, 3)+[]string{" at half saturation", " where steepest",
				" from 10 to 90 %", " by a Hill fit of these points"}[k])
		}
		if high-low > widest && len(s) > 1 {
			widest, words = high-low, fmt.Sprintf("n_H of %s%s is %s", quoted(r.lead.row.Name),
				onCurve(label), list(s))
		}
	}
	if widest < 0 {
		return
	}
	a := answer{id: "n_H-definition", group: foundGood, source: definitionSource, text: words + "."}
	if widest >= definitionsDiffer {
		a.group = sayInPaper
		a.effect = fmt.Sprintf("They differ by up to %s.", figures(widest, 2))
		a.remedy = "print n_H with its definition"
	}
	r.add(a)
}
