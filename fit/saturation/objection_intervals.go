package saturation

import (
	"context"
	"fmt"
	"math"
)

const intervalsSource = "profile or bootstrap intervals need not be symmetric: JCGM 101; Raue et al. " +
	"2009 Bioinformatics 25:1923, from memory"

// asksIntervals compares profile intervals of the leader's constants with the
// symmetric ones, value ± t·se.
func (r *review) asksIntervals(context.Context) {
	if r.lead == nil {
		return
	}
	a := answer{id: "symmetric-intervals", group: foundGood, source: intervalsSource}
	if r.a.Settings.Method == "covariance" {
		a.group = sayInPaper
		a.text = "Intervals are from the covariance, symmetric on the fitted scale, and never without " +
			"an end."
		a.remedy = "fit: {interval: {method: profile}}"
		r.add(a)
		return
	}
	worst, skew, open := (*QuantityRow)(nil), 0.0, []string(nil)
	for i := range r.out.Quantities {
		q := &r.out.Quantities[i]
		if q.Mechanism != r.lead.row.Name || q.Of != "constant" || q.Held == "fixed" ||
			math.IsNaN(float64(q.Value)) {
			continue
		}
		name := q.Name
		if q.Curve != "all" {
			name += " (" + q.Curve + ")"
		}
		if q.Held != "both" {
			open = append(open, name)
			continue
		}
		if up, down := float64(q.High-q.Value), float64(q.Value-q.Low); up > 0 && down > 0 {
			if s := math.Max(up/down, down/up); s > skew {
				worst, skew = q, s
			}
		}
	}
	a.text = "Intervals are profiles"
	if worst != nil {
		a.text += fmt.Sprintf("; the most lopsided, of %s, reaches %s times as far on one side", worst.Name,
			figures(skew, 2))
	}
	if len(open) > 0 {
		a.group = sayInPaper
		a.text += "; not ended on both sides: " + list(open)
		a.remedy = "print such a constant as a limit, not as a value with an error"
	}
	a.text += "."
	r.add(a)
}
