package saturation

import (
	"fmt"
	"math"
	"strings"
)

// steepness gives half saturation and n_H of the leader, curve by curve.
func (w *verdictWriter) steepness() string {
	const most = 4
	var s []string
	cells := w.lead.m.curveCells()
	for n, c := range cells {
		if n == most {
			s = append(s, fmt.Sprintf("The other %s are in the table.", plural(len(cells)-n, "curve")))
			break
		}
		if t := w.steepnessOf(w.lead.m.cells[c].label); t != "" {
			s = append(s, t)
		}
	}
	if len(s) > 0 {
		s[0] = strings.TrimSuffix(s[0], ".") + fmt.Sprintf(" (%s; %s).", quoted(w.lead.row.Name), w.level())
	}
	return strings.Join(s, " ")
}

// level is "95 % intervals".
func (w *verdictWriter) level() string {
	return figures(100*w.a.Settings.Level, 2) + " % intervals"
}

// steepnessOf gives half saturation and n_H of the leader on one curve.
func (w *verdictWriter) steepnessOf(label string) string {
	name := w.lead.row.Name
	x, n := w.find(name, "position", "x_half", label), w.find(name, "hill", "n_H_half", label)
	if x == nil || math.IsNaN(float64(x.Value)) {
		return ""
	}
	s := "Half saturation lies at "
	if label != "all" {
		s = "At " + label + ", half saturation lies at "
	}
	s += withInterval(x)
	switch {
	case n == nil || math.IsNaN(float64(n.Value)):
	case w.lead.builtOn(label):
		s += " and n_H there is 1 by construction"
	default:
		s += " and n_H there is " + withInterval(n)
	}
	return s + "."
}

// position is where half saturation lies, for data that say no more.
func (w *verdictWriter) position() string {
	var s []string
	for _, c := range w.lead.m.curveCells() {
		label := w.lead.m.cells[c].label
		x := w.find(w.lead.row.Name, "position", "x_half", label)
		if x == nil || math.IsNaN(float64(x.Value)) || len(s) == 2 {
			continue
		}
		s = append(s, "half saturation"+onCurve(label)+" near "+withInterval(x))
	}
	if len(s) == 0 {
		return ""
	}
	return fmt.Sprintf("What they do hold is %s (read with %s, which has the lowest AICc and need not be right; %s).",
		list(s), quoted(w.lead.row.Name), w.level())
}

// onCurve is " at pH 7.0", or nothing where there is one curve.
func onCurve(label string) string {
	if label == "all" {
		return ""
	}
	return " at " + label
}

// slopeWords says what all mechanisms that are not out share of the slope.
func (w *verdictWriter) slopeWords() string {
	if w.v.Slope != slopeDiffer {
		return w.slopeSentence("all", w.v.Slope)
	}
	var s []string
	for _, c := range w.curves() {
		s = append(s, w.slopeSentence(c, w.slopeOn(c)))
	}
	return join(s...)
}

// slopeSentence is the sentence on n_H of one curve, or of all where none is set apart.
func (w *verdictWriter) slopeSentence(curve, said string) string {
	where := "n_H at half saturation" + onCurve(curve)
	which, share := "In every mechanism that is not out", "what they share is "
	if len(w.kept) == 1 {
		which, share = "In the one mechanism tried that is not out", ""
	}
	switch said {
	case slopeAbove:
		return fmt.Sprintf("%s, %s lies above 1 (%s): %spositive cooperativity%s.%s",
			which, where, decidingLevel(), share, w.sitesWords(), w.velocityWords())
	case slopeBelow:
		return fmt.Sprintf("%s, %s lies below 1 (%s).%s", which, where, decidingLevel(), w.velocityWords())
	case slopeOne:
		return w.oneWords(curve, where)
	case slopeOpen:
		return w.openWords(curve, where)
	}
	return ""
}

// velocityWords says that velocities are not binding (Storer & Cornish-Bowden
// 1976 Biochem J 159:7: glucokinase, one site, h 1.2 to 1.5).
func (w *verdictWriter) velocityWords() string {
	for i := range w.a.Data {
		if w.a.Data[i].Response.Kind == "velocity" {
			return " These are velocities: one catalytic site can give such a slope by its kinetics alone."
		}
	}
	return ""
}

func decidingLevel() string { return figures(100*slopeLevel, 2) + " % intervals" }

// sitesWords is the number of sites that all mechanisms with sites share, if
// nothing without sites is left. Where no other number was tried, it is said.
func (w *verdictWriter) sitesWords() string {
	n := w.kept[0].row.Sites
	for _, f := range w.kept {
		if f.row.Sites != n || n < 2 {
			return ""
		}
	}
	for _, f := range w.fits {
		if f.row.Sites > 1 && f.row.Sites != n {
			return " of " + countWord(n) + " sites"
		}
	}
	return " of " + countWord(n) + " sites, a number that was given, not found"
}

// oneWords says that n_H is not called different from 1, and who holds 1.
func (w *verdictWriter) oneWords(curve, where string) string {
	fits, list := w.on(curve)
	var holds, excludes []string
	for i, s := range list {
		switch name := fits[i].row.Name; {
		case s.low > 1 || s.high < 1:
			row := w.find(name, "hill", "n_H_half_99", s.curve)
			excludes = append(excludes, quoted(name)+" would have it at "+withInterval(row))
		case !s.built && len(holds) == 0:
			row := w.find(name, "hill", "n_H_half_99", s.curve)
			holds = append(holds, fmt.Sprintf("%s gives %s", quoted(name), withInterval(row)))
		}
	}
	s := where + " is not different from 1: "
	switch {
	case w.built(list) && len(holds) > 0:
		s += fmt.Sprintf("one site is not out, and %s (%s).", holds[0], decidingLevel())
	case w.built(list):
		s += "one site is not out."
	default:
		s += fmt.Sprintf("%s (%s).", holds[0], decidingLevel())
	}
	if len(excludes) > 0 {
		s += fmt.Sprintf(" Only %s, which is not enough to call it so.", list2(excludes))
	}
	return s + " These data show no cooperativity."
}

// built says whether one of the mechanisms has n_H 1 by construction.
func (w *verdictWriter) built(list []slope) bool {
	for _, s := range list {
		if s.built {
			return true
		}
	}
	return false
}

// list2 lists at most two items.
func list2(items []string) string { return list(items[:min(len(items), 2)]) }

// openWords says why n_H is left open.
func (w *verdictWriter) openWords(curve, where string) string {
	fits, list := w.on(curve)
	s := strings.Replace(where, "n_H", "n_H is left open", 1)
	s = strings.Replace(s, "n_H is left open at half saturation", "n_H is left open", 1)
	if w.unfilled() != nil {
		return s + ": it hangs on the upper end, which is extrapolated."
	}
	var each []string
	for _, holds := range []bool{true, false} {
		for i, l := range list {
			if holds != (l.low <= 1 && l.high >= 1) || l.built {
				continue
			}
			row := w.find(fits[i].row.Name, "hill", "n_H_half_99", l.curve)
			each = append(each, quoted(fits[i].row.Name)+" gives "+withInterval(row))
			break
		}
	}
	return fmt.Sprintf("%s: %s (%s).", s, strings.Join(each, ", "), decidingLevel())
}
