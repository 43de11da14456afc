package saturation

import (
	"fmt"
	"math"
)

// constants says how firmly the leader's constants are held.
func (w *verdictWriter) constants() string {
	var firm, loose, open []string
	for i := range w.out.Quantities {
		q := &w.out.Quantities[i]
		if !w.quotes(q) {
			continue
		}
		name := w.constantName(q)
		switch k := math.Sqrt(float64(q.High / q.Low)); {
		case q.Held == "fixed":
		case q.Held != "both" || !(q.Low > 0) || k > farOff:
			open = append(open, name)
		case k < looseFactor:
			firm = append(firm, name+" at "+withInterval(q))
		default:
			loose = append(loose, name+" at "+withInterval(q))
		}
	}
	s := ""
	if len(firm) > 0 {
		s = "The data hold " + list(firm) + "."
	}
	if len(loose) > 0 {
		s = join(s, "Only loosely held: "+list(loose)+".")
	}
	if len(open) > 0 {
		s = join(s, "Not bounded on both sides: "+list(open)+".")
	}
	return s
}

// looseFactor is the factor either way beyond which a constant is loosely held.
const looseFactor = 1.5

// quotes says whether a row is a constant or contrast of the leader that the
// text gives.
func (w *verdictWriter) quotes(q *QuantityRow) bool {
	if q.Mechanism != w.lead.row.Name || q.Interval == "bootstrap" || !(q.Value > 0) {
		return false
	}
	return q.Of == "constant" || q.Of == "contrast" && !curveContrasts[q.Name]
}

// curveContrasts are contrasts of curves, not of constants.
var curveContrasts = map[string]bool{"x_half": true, "n_H_half": true, bohrName: true}

// bohrName is the row of the Bohr coefficient.
const bohrName = "Bohr_coefficient"

// contrasts gives the leader's contrasts of half saturation and of n_H.
func (w *verdictWriter) contrasts() string {
	const most = 2
	var s []string
	for i := range w.out.Quantities {
		q := &w.out.Quantities[i]
		mine := q.Mechanism == w.lead.row.Name && q.Of == "contrast" && q.Interval != "bootstrap"
		if !mine || math.IsNaN(float64(q.Value)) || len(s) == 2*most {
			continue
		}
		switch q.Name {
		case "x_half":
			t := fmt.Sprintf("The ratio of half saturation at %s is %s", q.Curve, withInterval(q))
			if b := w.find(q.Mechanism, "contrast", bohrName, q.Curve); b != nil && !math.IsNaN(float64(b.Value)) {
				t += ", a Bohr coefficient of " + withInterval(b)
			}
			s = append(s, t+".")
		case "n_H_half":
			s = append(s, fmt.Sprintf("The difference of n_H there (%s) is %s.", q.Curve, withInterval(q)))
		}
	}
	return join(s...)
}

// constantName is how the text calls a constant: "K_T of alanine (pH 7.0)".
func (w *verdictWriter) constantName(q *QuantityRow) string {
	name := q.Name
	if q.Ligand != nil && *q.Ligand != w.a.Ligand.Name {
		name += " of " + *q.Ligand
	}
	if q.Site != nil && *q.Site != "only" {
		name += " of " + *q.Site
	}
	if q.Curve != "all" {
		name += " (" + q.Curve + ")"
	}
	return name
}

func (w *verdictWriter) edges() string {
	if w.lead.row.Edge == nil {
		return ""
	}
	return "The leader lies on an edge, which is its answer and not a failure: " + *w.lead.row.Edge + "."
}

// withInterval writes "5.44 torr (5.38 to 5.50)"; an end that is not there is said.
func withInterval(q *QuantityRow) string {
	v, low, high := float64(q.Value), float64(q.Low), float64(q.High)
	l, h := low, high
	if math.IsNaN(l) {
		l = v - (h - v)
	}
	if math.IsNaN(h) {
		h = v + (v - l)
	}
	unit := ""
	if q.Unit != "1" && q.Unit != "" {
		unit = " " + q.Unit
	}
	s := toInterval(v, l, h) + unit
	switch {
	case !math.IsNaN(low) && !math.IsNaN(high):
		s += " (" + intervalEnd(low, v, l, h) + " to " + intervalEnd(high, v, l, h) + ")"
	case !math.IsNaN(low):
		s += " (" + intervalEnd(low, v, l, h) + " or more, without an upper end)"
	case !math.IsNaN(high):
		s += " (" + intervalEnd(high, v, l, h) + " or less, without a lower end)"
	}
	return s
}
