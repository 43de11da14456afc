package report

import (
	"math"
	"slices"

	"ligancy/fit/saturation"
)

// reading is a measurement beside one mechanism, with what the page needs of it.
type reading struct {
	*saturation.PointRow
	line    int     // of the mechanism's curves; −1 where it lies on none
	free    float64 // free ligand: on a total axis what the fit says it was
	level   float64 // free ligand of all that were given the same amount
	blocked bool    // sees no specific binding
	ends    ends    // of the response
}

// read lays every measurement over its mechanism's curves.
func (v *view) read() {
	v.measured = map[string][]reading{}
	type place struct{ mechanism, data, curve, preparation string }
	lines, ends := map[place]int{}, map[place]ends{}
	for i := range v.d.Points {
		r := &v.d.Points[i]
		k := place{r.Mechanism, r.Data, r.Curve, ""}
		if r.Preparation != nil {
			k.preparation = *r.Preparation
		}
		line, ok := lines[k]
		if !ok {
			line = slices.IndexFunc(v.lines[r.Mechanism], func(c *curveLine) bool { return belongs(r, c.name) })
			lines[k], ends[k] = line, v.endsAt(r.Mechanism, r)
		}
		m := reading{PointRow: r, line: line, blocked: v.blocked[r.Data][r.Row], ends: ends[k]}
		m.free = v.free(&m)
		m.level = m.free
		v.measured[r.Mechanism] = append(v.measured[r.Mechanism], m)
	}
	v.level()
}

// level gathers measurements on a total axis that were given the same amount:
// their free ligands differ a little, and share the mean of their logarithms.
func (v *view) level() {
	type amount struct {
		data    string
		x       saturation.Real
		blocked bool
	}
	for _, all := range v.measured {
		sum, n := map[amount]float64{}, map[amount]float64{}
		for i := range all {
			r := &all[i]
			if set := v.sets[r.Data]; set != nil && set.Total && r.free > 0 && finite(r.free) {
				k := amount{r.Data, r.X, r.blocked}
				sum[k] += math.Log(r.free)
				n[k]++
			}
		}
		for i := range all {
			r := &all[i]
			if k := (amount{r.Data, r.X, r.blocked}); n[k] > 0 && r.free > 0 {
				r.level = roundTo(math.Exp(sum[k]/n[k]), 6)
			}
		}
	}
}

// free is the free ligand of a measurement: its own on a free axis, else where
// the fitted curve puts it.
func (v *view) free(m *reading) float64 {
	set := v.sets[m.Data]
	switch {
	case set == nil || !set.Total:
		return float64(m.X)
	case m.line < 0 || !finite(float64(m.Fitted)):
		return math.NaN()
	}
	return freeAt(v.lines[m.Mechanism][m.line], m.ends, float64(m.Fitted), m.blocked)
}
