package saturation

import (
	"context"
	"fmt"
	"math"
	"strings"

	"ligancy/mechanisms"
)

// readings says what a shallow curve may mean: every reading that is not out,
// independent sites beside interacting ones, a spread of affinities.
func (w *verdictWriter) readings() string {
	if w.v.Slope != slopeBelow {
		return ""
	}
	return join(w.several(), w.factorWords(), w.spreadWords())
}

// several lists the readings of a shallow curve that are left.
func (w *verdictWriter) several() string {
	var unlike, populations, negative, interacting, spread []string
	for _, f := range w.kept {
		name := quoted(f.row.Name)
		switch f.row.Family {
		case "independent":
			unlike = append(unlike, name)
		case "mixture":
			populations = append(populations, name)
		case "hill":
			spread = append(spread, name)
		default:
			if f.row.Sites == 2 || f.row.Family == "sequential" {
				negative = append(negative, name)
			} else {
				interacting = append(interacting, name) // some of them, it may be, positively
			}
		}
	}
	var all []string
	for _, r := range []struct {
		words string
		names []string
	}{{"unlike sites on each molecule", unlike}, {"separate populations", populations},
		{"negative cooperativity", negative}, {"sites that interact", interacting}, {"a spread of affinities", spread}} {
		if len(r.names) > 0 {
			all = append(all, fmt.Sprintf("%s (%s)", r.words, list(r.names)))
		}
	}
	return fmt.Sprintf("A shallow curve has several readings. Of the mechanisms tried, %s %s left; an artefact of the assay, and unlike sites in other numbers, are more.",
		list(all), verb(len(all), "alone is", "are"))
}

// factorWords says whether independent sites give the same curve as the
// interacting ones that are left.
func (w *verdictWriter) factorWords() string {
	var refused, shared *FactorRow
	built := false
	for i := range w.out.Factors {
		r := &w.out.Factors[i]
		if !w.keeps(r.Mechanism) {
			continue
		}
		switch r.Standing {
		case factorsRefused:
			if refused == nil {
				refused = r
			}
		case factors:
			if shared == nil {
				shared = r
			}
		case factorsBuilt:
			built = true
		}
	}
	switch {
	case shared != nil:
		return w.sharedSites(shared)
	case refused != nil && !built:
		return fmt.Sprintf("For %s sites, no set of independent sites gives this curve: they interact, or belong to molecules of several kinds.",
			countWord(refused.Sites))
	}
	return ""
}

// sharedSites gives the constants of the independent sites that draw the curve
// of an interacting mechanism.
func (w *verdictWriter) sharedSites(r *FactorRow) string {
	var kd []string
	for i := range r.Kd {
		q := QuantityRow{Value: r.Kd[i].Value, Low: r.Kd[i].Low, High: r.Kd[i].High, Unit: r.Kd[i].Unit}
		kd = append(kd, withInterval(&q))
	}
	share := ""
	if r.Draws > 0 {
		share = fmt.Sprintf("; the fitted polynomial factors in %s %% of draws", figures(100*float64(r.Share), 2))
	}
	if len(kd) > 2 {
		return fmt.Sprintf("%s independent sites would give the curve of %s as well%s.",
			capital(countWord(len(kd))), quoted(r.Mechanism), share)
	}
	return fmt.Sprintf("%s independent sites with Kd %s would give the curve of %s as well%s.",
		capital(countWord(len(kd))), list(kd), quoted(r.Mechanism), share)
}

func (w *verdictWriter) keeps(name string) bool {
	for _, f := range w.kept {
		if f.row.Name == name {
			return true
		}
	}
	return false
}

// spreadName is the row of the spread of affinities that a Hill curve implies.
const spreadName = "SD of ln K, spread of affinities"

// spreadRows give, for every Hill exponent below 1, the standard deviation of
// ln K of the population of simple sites that has the same curve,
//
//	σ(ln K) = (π/√3) √(1/h² − 1)
//
// (Sips 1948). It falls as h rises: the ends of its interval are those of h.
func spreadRows(rows []QuantityRow, fits []*fitted) []QuantityRow {
	hill := map[string]bool{}
	for _, f := range fits {
		hill[f.row.Name] = f.row.Family == "hill"
	}
	var out []QuantityRow
	for _, q := range rows {
		if !hill[q.Mechanism] || q.Of != "constant" || q.Name != "n_H" || q.Interval == "bootstrap" || !(q.Value < 1) {
			continue
		}
		r := q
		r.Of, r.Name, r.Ligand = "combination", spreadName, nil
		r.Value, r.Low, r.High = spread(q.Value), spread(q.High), spread(q.Low)
		if q.High >= 1 {
			r.Low = 0
		}
		r.Held = held(math.IsNaN(float64(r.Low)), math.IsNaN(float64(r.High)))
		out = append(out, r)
	}
	return out
}

// spread is σ(ln K) of a Hill exponent.
func spread(h Real) Real {
	return Real(math.Pi / math.Sqrt(3) * math.Sqrt(1/float64(h*h)-1))
}

// spreadWords says what a Hill curve below 1 is the same as.
func (w *verdictWriter) spreadWords() string {
	for _, f := range w.kept {
		if f.row.Family != "hill" {
			continue
		}
		var s []string
		for _, c := range f.m.curveCells() {
			label := f.m.cells[c].label
			if q := w.find(f.row.Name, "combination", spreadName, label); q != nil && len(s) < 2 {
				s = append(s, withInterval(q)+onCurve(label))
			}
		}
		if len(s) > 0 {
			return fmt.Sprintf("Simple sites whose affinities are spread with an SD of ln K of %s are identical to a Hill curve of this exponent (Sips).",
				list(s))
		}
	}
	return ""
}

// filled is the saturation at which an upper end counts as reached (91 % for a
// hyperbola at ten times its constant; common practice).
const filled = 0.9

// filledName is the row of the saturation at the highest ligand value used.
const filledName = "saturation_highest"

// filledRows give the saturation that a mechanism has at the highest ligand
// value of each curve, where the upper end of the response is fitted.
func (f *fitted) filledRows(ctx context.Context) []QuantityRow {
	pr := f.profiler(f.m.a.Settings.Level)
	var rows []QuantityRow
	for _, c := range f.m.curveCells() {
		x := f.m.highestFree(c)
		if !(x > 0) {
			continue
		}
		w := wanted{index: -1, back: same}
		w.row = QuantityRow{Mechanism: f.row.Name, Curve: f.m.cells[c].label, Of: "position", Name: filledName, Unit: "1"}
		w.make = f.m.measured(c, func(curve mechanisms.Curve) mechanisms.Measure {
			p := newPoint(len(f.m.consts))
			curve.At(math.Log(x), p)
			return mechanisms.Measure{Value: p.Y, Grad: p.GradY}
		})
		rows = append(rows, f.withInterval(ctx, w, pr))
	}
	return rows
}

// highestFree is the highest ligand value on a curve whose upper end is fitted;
// 0 where there is none.
func (m *model) highestFree(cell int) float64 {
	x := 0.0
	for _, b := range m.blocks {
		if m.a.Data[b.data].Total {
			continue
		}
		for _, r := range b.rows {
			if r.cell == cell && !r.blocked && r.high >= 0 {
				x = math.Max(x, r.x)
			}
		}
	}
	return x
}

// unfilled is the row of a curve whose fitted upper end is not reached, neither
// by the leader nor by the plainest mechanism that is not out; nil where there is
// none. (A freer mechanism may put some of its sites beyond the data at will.)
func (w *verdictWriter) unfilled() *QuantityRow {
	for i := range w.out.Quantities {
		q := &w.out.Quantities[i]
		if q.Name != filledName || q.Mechanism != w.lead.row.Name || !(q.Value < filled) {
			continue
		}
		p := w.find(plainest(w.kept).row.Name, "position", filledName, q.Curve)
		if p == nil || p.Value < filled {
			return q
		}
	}
	return nil
}

// plainest is the first of the mechanisms with the fewest constants.
func plainest(fits []*fitted) *fitted {
	best := fits[0]
	for _, f := range fits {
		if f.row.Constants < best.row.Constants {
			best = f
		}
	}
	return best
}

// ends says where a fitted upper end is extrapolated.
func (w *verdictWriter) ends() string {
	q := w.unfilled()
	if q == nil {
		return ""
	}
	p := *q
	p.Value, p.Low, p.High, p.Unit = 100*q.Value, 100*q.Low, 100*q.High, "%"
	return fmt.Sprintf("The upper end is not reached%s: by %s, the highest value used fills %s of the sites, and the rest is extrapolation.",
		onCurve(q.Curve), quoted(q.Mechanism), withInterval(&p))
}

// shiftName is the row of the standard deviation between preparations.
const shiftName = "SD of ln K between preparations"

// shifts says what a shift of ln K by preparation explains.
func (w *verdictWriter) shifts() string {
	if w.lead.m.shift == nil {
		return ""
	}
	pooled, left := []string{}, []string{}
	for _, i := range w.order {
		f := w.fits[i]
		if f.m.shift != nil {
			continue
		}
		pooled = append(pooled, f.row.Name)
		if f.row.Standing != "out" {
			left = append(left, f.row.Name)
		}
	}
	s := "The preparations differ by a shift of ln K by preparation"
	if q := w.find(w.lead.row.Name, "noise", shiftName, "all"); q != nil {
		s += fmt.Sprintf(" (%s %s)",
			strings.TrimSuffix(shiftName, " between preparations"), figures(float64(q.Value), 2))
	}
	switch {
	case len(pooled) == 0:
		return s + "; no mechanism was tried without one."
	case len(left) == 0:
		return s + ": it explains what the pooled curve shows, and every mechanism without it is out. n_H here is that within a preparation."
	}
	return fmt.Sprintf("%s; without one, %s %s not out.", s, quotedList(left), verb(len(left), "is", "are"))
}
