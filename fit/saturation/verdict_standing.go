package saturation

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// leader names the mechanism with the lowest AICc, never as the truth.
func (w *verdictWriter) leader() string {
	f := w.lead
	what := "These data are"
	if n := len(f.m.curveCells()); n > 1 {
		what = "The " + countWord(n) + " curves are"
	}
	if f.m.shift != nil {
		what = "The " + plural(len(f.m.shift.levels), "preparation") + " are"
	}
	kind := familyWords(f) + differsWords(f)
	if len(w.order) == 1 {
		return fmt.Sprintf("%s described by %s (%s), the only mechanism that could be compared%s.",
			what, quoted(f.row.Name), kind, w.scatterWords())
	}
	return fmt.Sprintf("%s described best by %s (%s)%s.", what, quoted(f.row.Name), kind, w.scatterWords())
}

// scatterWords says how large the residual scatter is.
func (w *verdictWriter) scatterWords() string {
	f := w.lead
	if len(f.m.blocks) != 1 || math.IsNaN(f.scatter) {
		return ""
	}
	d := &w.a.Data[0]
	switch d.Noise {
	case Constant, "":
		unit := d.Response.Unit
		switch {
		case d.Response.Kind == "saturation" && !d.Response.Percent:
			unit = "in saturation"
		case unit == "1":
			unit = ""
		}
		return strings.TrimRight(", with a scatter of "+figures(f.scatter, 2)+" "+unit, " ")
	case Proportional:
		return ", with a scatter of " + figures(100*f.scatter, 2) + " % of the response"
	case GivenSigma:
		return ", with a scatter " + figures(f.scatter, 2) + " times the one given"
	}
	return ""
}

func (w *verdictWriter) ties() string {
	var tied []string
	for _, f := range w.kept {
		if f.row.Standing == "ties" {
			tied = append(tied, quoted(f.row.Name)+w.behind(f))
		}
	}
	if len(tied) == 0 {
		return ""
	}
	return fmt.Sprintf("%s %s as well: this is a tie, and these data do not choose.",
		capital(list(tied)), verb(len(tied), "does", "do"))
}

// behind is how far a mechanism lies behind the leader; nothing for its twins.
func (w *verdictWriter) behind(f *fitted) string {
	if f.row.AICcBehind < 0.05 {
		return ""
	}
	return fmt.Sprintf(" (AICc %s behind)", figures(float64(f.row.AICcBehind), 2))
}

func (w *verdictWriter) refused() string {
	n := len(w.v.Out)
	if n == 0 {
		return ""
	}
	why := "of studies simulated from such a mechanism at most one in a hundred lets another win by as much"
	if w.a.Settings.Draws <= 0 {
		why = "they lie so far behind that no study needs to be simulated"
	}
	return fmt.Sprintf("%s %s not describe them: %s.", capital(quotedList(w.v.Out)), verb(n, "does", "do"), why)
}

func (w *verdictWriter) open() string {
	var rivals, holders, freer []string
	for _, f := range w.kept {
		switch {
		case f.row.Standing == "open: leader, freer":
			freer = append(freer, f.row.Name)
		case f.row.Standing != "open":
		case f.holdsLead:
			holders = append(holders, f.row.Name)
		default:
			rivals = append(rivals, fmt.Sprintf("%s (%s, AICc %s behind)",
				quoted(f.row.Name), constantsWord(f.row.Constants), figures(float64(f.row.AICcBehind), 2)))
		}
	}
	s := ""
	if len(rivals) > 0 {
		s = fmt.Sprintf("Still open, since these data cannot refuse %s: %s.",
			verb(len(rivals), "it", "them"), list(rivals))
	}
	if len(holders) > 0 {
		s = join(s, fmt.Sprintf("Open as a matter of course, since %s the leader as a special case: %s.",
			verb(len(holders), "it holds", "they hold"), quotedList(holders)))
	}
	if len(freer) > 0 {
		s = join(s, fmt.Sprintf("Letting more of the leader's constants differ (%s) brings nothing that pays for them.",
			quotedList(freer)))
	}
	return s
}

// twins says which mechanisms no measurement of this kind separates.
func (w *verdictWriter) twins() string {
	var s []string
	for _, group := range w.v.Twins {
		if w.allOut(group) {
			continue
		}
		s = append(s, fmt.Sprintf("%s give the same curve: no equilibrium measurement of this kind separates them.",
			quotedList(group)))
	}
	return strings.Join(s, " ")
}

func (w *verdictWriter) allOut(group []string) bool {
	for _, f := range w.kept {
		for _, name := range group {
			if f.row.Name == name {
				return false
			}
		}
	}
	return true
}

// notToldApart says that concerted and pairwise mechanisms are both left: by
// name, or held by a stepwise one, which leaves open how its sites interact.
func (w *verdictWriter) notToldApart() string {
	if w.v.Slope != slopeAbove {
		return ""
	}
	concerted, pairwise := w.left("mwc", "conformations"), w.left("sequential")
	stepwise := w.left("adair")
	const both = "a concerted change of conformation%s and one site by site%s are not told apart"
	switch {
	case len(concerted) > 0 && len(pairwise) > 0:
		return capital(fmt.Sprintf(both, " ("+quotedList(concerted)+")", " ("+quotedList(pairwise)+")")) + "."
	case len(stepwise) > 0 && w.tried("mwc", "conformations") && w.tried("sequential"):
		return fmt.Sprintf("%s leaves open how its sites interact and is not out: "+both+".",
			capital(quoted(stepwise[0])), "", "")
	}
	return ""
}

// left lists the mechanisms of some families that are not out.
func (w *verdictWriter) left(families ...string) []string {
	var left []string
	for _, f := range w.kept {
		if slices.Contains(families, f.row.Family) {
			left = append(left, f.row.Name)
		}
	}
	return left
}

func (w *verdictWriter) tried(families ...string) bool {
	return slices.ContainsFunc(w.fits, func(f *fitted) bool { return slices.Contains(families, f.row.Family) })
}

func (w *verdictWriter) failed() string {
	var failed []string
	for _, f := range w.fits {
		if !f.answered() {
			failed = append(failed, f.row.Name)
		}
	}
	if len(failed) == 0 {
		return ""
	}
	return "Without an answer, and so not compared: " + quotedList(failed) + "."
}

// verb chooses between one and several.
func verb(n int, one, several string) string {
	if n == 1 {
		return one
	}
	return several
}

// familyWords says what kind of mechanism a candidate is.
func familyWords(f *fitted) string {
	n := countWord(f.row.Sites) + "-site "
	if f.row.Sites == 0 {
		n = ""
	}
	s := n + f.row.Family
	switch f.row.Family {
	case "hill":
		s = "the Hill equation, a description rather than a mechanism"
	case "adair":
		s = n + "stepwise binding, Adair"
	case "mwc":
		s = n + "concerted, MWC"
	case "sequential":
		s = n + "sequential, pairwise contacts"
	case "independent":
		s = countWord(f.row.Sites) + " independent sites"
		if f.row.Sites == 1 {
			s = "one site"
		}
	case "mixture":
		s = "a mixture of populations"
	case "assembly":
		s = "assembly-linked binding"
	}
	if f.m.shift != nil {
		s += ", ln K shifted by preparation"
	}
	return s
}

// differsWords says what the candidate lets differ.
func differsWords(f *fitted) string {
	byKey := map[string][]string{}
	var keys []string
	for k, c := range f.m.consts {
		if key := f.m.differsBy(k); key != "" && len(f.m.a.levels(key)) > 1 {
			if byKey[key] == nil {
				keys = append(keys, key)
			}
			byKey[key] = append(byKey[key], displayName(c))
		}
	}
	var s []string
	for _, key := range keys {
		what := "only " + list(byKey[key])
		if len(byKey[key]) == len(f.m.consts) {
			what = "every constant"
		}
		verb := " differs"
		if len(byKey[key]) > 1 && len(byKey[key]) < len(f.m.consts) {
			verb = " differ"
		}
		s = append(s, what+verb+" by "+key)
	}
	if len(s) == 0 {
		return ""
	}
	return "; " + strings.Join(s, ", ")
}
