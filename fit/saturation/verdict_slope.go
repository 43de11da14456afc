package saturation

import (
	"context"
	"fmt"
	"math"
	"strings"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// slopeLevel is the level of the interval that must exclude 1 before n_H is
// called different from 1 (a 95 % interval rejects one in twenty one-site truths).
const slopeLevel = 0.99

// slopeWide is the factor beyond which an interval of n_H is too wide to say
// that n_H is 1.
const slopeWide = 1.5

// What a verdict may say of n_H at half saturation: Verdict.Slope.
const (
	slopeAbove  = "above 1"
	slopeBelow  = "below 1"
	slopeOne    = "1"
	slopeOpen   = "open"
	slopeDiffer = "differs between curves"
)

// slope is n_H at half saturation of one curve, with its interval at slopeLevel.
type slope struct {
	curve            string
	value, low, high float64
	built            bool // 1 by construction: no constant moves it
}

// slopes finds the intervals of n_H at half saturation that decide whether it
// may be called different from 1.
func (a *Analysis) slopes(ctx context.Context, fits []*fitted, order []int) {
	for _, i := range order {
		f := fits[i]
		if f.row.Standing == "out" || ctx.Err() != nil {
			continue
		}
		pr, err := fit.NewProfiler(f.problem, f.result, slopeLevel)
		if err != nil {
			continue
		}
		for _, c := range f.m.curveCells() {
			f.slopes = append(f.slopes, f.slopeOf(ctx, pr, c))
		}
	}
}

// slopeOf is n_H of one curve; an end that does not exist is infinite.
func (f *fitted) slopeOf(ctx context.Context, pr *fit.Profiler, cell int) slope {
	q := f.m.measured(cell, mechanisms.HillAtHalf)()
	grad := make([]float64, len(f.m.params))
	s := slope{curve: f.m.cells[cell].label, value: q(f.result.Theta, grad)}
	s.built = math.Abs(s.value-1) < 1e-9 && still(grad) && f.row.Sites == 1
	if s.built {
		s.low, s.high = 1, 1
		return s
	}
	iv := pr.Quantity(ctx, q)
	s.low, s.high = iv.Low, iv.High
	if iv.LowOpen || math.IsNaN(s.low) {
		s.low = math.Inf(-1)
	}
	if iv.HighOpen || math.IsNaN(s.high) {
		s.high = math.Inf(1)
	}
	return s
}

// builtOn says whether n_H is 1 by construction on a curve.
func (f *fitted) builtOn(label string) bool {
	for _, s := range f.slopes {
		if s.curve == label && s.built {
			return true
		}
	}
	return false
}

// still says whether a gradient is zero but for rounding.
func still(grad []float64) bool {
	for _, g := range grad {
		if math.Abs(g) > 1e-9 {
			return false
		}
	}
	return true
}

// decidingRows are the intervals of n_H that decide what it is called.
func decidingRows(fits []*fitted) []QuantityRow {
	var rows []QuantityRow
	for _, f := range fits {
		for _, s := range f.slopes {
			row := QuantityRow{Mechanism: f.row.Name, Curve: s.curve, Of: "hill", Name: "n_H_half_99", Unit: "1", Value: finite(s.value),
				Low: finite(s.low), High: finite(s.high), Level: slopeLevel, Interval: "profile",
				Held: held(math.IsInf(s.low, 0), math.IsInf(s.high, 0))}
			if s.built {
				row.Interval, row.Held, row.Why = "none", "fixed", text("1 by construction: one site")
			}
			rows = append(rows, row)
		}
	}
	return rows
}

// slope is what may be said of n_H by all mechanisms that are not out, together.
func (w *verdictWriter) slope() string {
	if w.nothing() != "" {
		return ""
	}
	said := ""
	for _, c := range w.curves() {
		s := w.slopeOn(c)
		if said != "" && s != said {
			return slopeDiffer
		}
		said = s
	}
	return said
}

// curves are the labels of the curves that any mechanism tells apart.
func (w *verdictWriter) curves() []string {
	var labels []string
	seen := map[string]bool{}
	for _, f := range w.kept {
		for _, s := range f.slopes {
			if s.curve != "all" && !seen[s.curve] {
				seen[s.curve] = true
				labels = append(labels, s.curve)
			}
		}
	}
	if len(labels) == 0 {
		return []string{"all"}
	}
	return labels
}

// on lists the mechanisms' n_H on one curve.
func (w *verdictWriter) on(curve string) (fits []*fitted, list []slope) {
	for _, f := range w.kept {
		for _, s := range f.slopes {
			if s.curve == curve || s.curve == "all" {
				fits, list = append(fits, f), append(list, s)
			}
		}
	}
	return fits, list
}

// slopeOn is what may be said of n_H on one curve.
func (w *verdictWriter) slopeOn(curve string) string {
	above, below, tight, free := 0, 0, false, 0
	_, list := w.on(curve)
	for _, s := range list {
		switch {
		case s.low > 1:
			above++
		case s.high < 1:
			below++
		}
		if !s.built {
			free++
			tight = tight || s.low > 1/slopeWide && s.high < slopeWide
		}
	}
	switch {
	case len(list) == 0 || free == 0:
		return ""
	case above == len(list):
		return slopeAbove
	case below == len(list):
		return slopeBelow
	case above > 0 && below > 0 || !tight || w.unfilled() != nil:
		return slopeOpen
	}
	return slopeOne
}

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
	return fmt.Sprintf("What they do hold is %s (read with %s, which has the lowest AICc and need not be right; %s).", list(s), quoted(w.lead.row.Name), w.level())
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
		return fmt.Sprintf("%s, %s lies above 1 (%s): %spositive cooperativity%s.%s", which, where, decidingLevel(), share, w.sitesWords(), w.velocityWords())
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
	for i := range list {
		if !list[i].built {
			row := w.find(fits[i].row.Name, "hill", "n_H_half_99", list[i].curve)
			return fmt.Sprintf("%s: %s gives %s (%s).", s, quoted(fits[i].row.Name), withInterval(row), decidingLevel())
		}
	}
	return s + "."
}
