package saturation

import (
	"context"
	"fmt"
	"math"
)

// group is a set of measurements that differ by scatter alone.
type group struct {
	lnx, mean, variance, freedom float64
}

// replicateGroups gathers measurements of one curve, ligand value and
// preparation; where no preparation was measured twice, of all preparations.
func (r *review) replicateGroups(di int) []group {
	d := &r.a.Data[di]
	if list := groupsBy(d, func(p *Point) string { return p.Preparation }, r.a); freedom(list) >= 10 {
		return list
	}
	for _, key := range d.Response.Differs {
		if key == byPreparation { // then preparations do not see one prediction
			return groupsBy(d, func(p *Point) string { return p.Preparation }, r.a)
		}
	}
	return groupsBy(d, func(*Point) string { return "" }, r.a)
}

func freedom(list []group) (nu float64) {
	for _, g := range list {
		nu += g.freedom
	}
	return nu
}

func groupsBy(d *Dataset, also func(*Point) string, a *Analysis) []group {
	type key struct {
		curve, also string
		x           float64
		blocked     bool
	}
	at := map[key]int{}
	var n []float64
	var list []group
	for i := range d.Points {
		p := &d.Points[i]
		if p.LeftOut != "" {
			continue
		}
		k := key{a.pointLabel(d, p), also(p), p.X, p.Blocked}
		g, ok := at[k]
		if !ok {
			g = len(list)
			at[k] = g
			list, n = append(list, group{lnx: math.Log(p.X)}), append(n, 0)
		}
		n[g]++ // Welford
		e := p.Y - list[g].mean
		list[g].mean += e / n[g]
		list[g].variance += e * (p.Y - list[g].mean)
	}
	var kept []group
	for g := range list {
		if n[g] > 1 {
			list[g].freedom = n[g] - 1
			list[g].variance /= n[g] - 1
			kept = append(kept, list[g])
		}
	}
	return kept
}

// asksReplicates asks whether there are any.
func (r *review) asksReplicates(context.Context) {
	for di := range r.a.Data {
		if r.a.Data[di].Trace {
			continue
		}
		nu := freedom(r.replicateGroups(di))
		a := answer{id: "replicates", group: foundGood, source: fromPractice,
			text: fmt.Sprintf("%sReplicates measure the scatter (%.0f degrees of freedom).", r.where(di),
				nu)}
		switch {
		case nu == 0:
			a.group = sayInPaper
			a.text = r.where(di) +
				"There are no replicates: scatter is told from misfit by the mechanisms alone, and " +
				"whether it is even cannot be asked."
			a.remedy = "repeat some of the points"
		case nu < 10:
			a.group = forCompleteness
			a.text = fmt.Sprintf("%sReplicates give the scatter only %.0f degrees of freedom: whether "+
				"it is even can hardly be asked.",
				r.where(di), nu)
			a.remedy = "repeat some of the points"
		}
		r.add(a)
	}
}
