package saturation

import (
	"context"
	"fmt"
	"math"
	"slices"
)

const preparationsSource = "n counts independent preparations, at least 5 for inference: Br J Pharmacol " +
	"2018;175:2709"

// asksPreparations asks how many independent preparations there are.
func (r *review) asksPreparations(context.Context) {
	for di := range r.a.Data {
		d := &r.a.Data[di]
		names, without := r.preparationsIn(di)
		a := answer{id: "preparations", group: sayInPaper, source: preparationsSource}
		switch {
		case len(names) == 0:
			a.text = r.where(di) +
				"No preparation is named: whether these are repeats of one or several, and whether " +
				"preparations differ, cannot be asked."
			a.remedy = "columns: {preparation: prep}"
		case without > 0:
			a.text = fmt.Sprintf("%s%d points name no preparation.", r.where(di), without)
			a.remedy = "fill the preparation column"
		case len(names) == 1:
			a.text = r.where(di) +
				"One preparation: its repeats are technical, and the intervals speak of it alone."
			a.remedy = fmt.Sprintf("repeat with %d preparations", r.limits.Preparations)
		case len(names) < r.limits.Preparations:
			a.text = fmt.Sprintf("%s%s preparations; %d is the usual least for a conclusion.", r.where(di),
				capital(countWord(len(names))), r.limits.Preparations)
			a.remedy = "print n as the number of preparations"
		default:
			a.group = foundGood
			a.text = fmt.Sprintf("%s%s preparations.", r.where(di), capital(countWord(len(names))))
		}
		if len(names) > 1 && !d.Trace {
			a.effect = r.technicalReplicates(di)
		}
		r.add(a)
	}
}

// preparationsIn lists the preparations of a data set, and counts kept points without.
func (r *review) preparationsIn(di int) (names []string, without int) {
	for i := range r.a.Data[di].Points {
		p := &r.a.Data[di].Points[i]
		switch {
		case p.LeftOut != "":
		case p.Preparation == "":
			without++
		case !slices.Contains(names, p.Preparation):
			names = append(names, p.Preparation)
		}
	}
	return names, without
}

// technicalReplicates compares the standard error of n_H with points counted as
// independent and with preparations.
func (r *review) technicalReplicates(di int) string {
	widest, curve := 0.0, ""
	for _, c := range r.readings(di) {
		mean := r.meanRow(c)
		se := (math.Log(c.high) - math.Log(c.low)) / 2 / z99 * c.h
		if mean == nil || mean.N < 3 || !(se > 0) || math.IsInf(se, 0) {
			continue
		}
		if k := float64(mean.SDNH) / math.Sqrt(float64(mean.N)) / se; k > widest {
			widest, curve = k, r.onCurve(c)
		}
	}
	if widest == 0 {
		return ""
	}
	return fmt.Sprintf("The standard error of n_H%s between preparations is %s times that between points.",
		curve, figures(widest, 2))
}

// meanRow is the row of means over the preparations of a curve; nil without.
func (r *review) meanRow(c *reading) *PreparationRow {
	for i := range r.alone[c.data] {
		if row := &r.alone[c.data][i]; row.Curve == c.curve && row.Preparation == "mean" {
			return row
		}
	}
	return nil
}
