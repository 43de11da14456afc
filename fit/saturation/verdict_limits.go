package saturation

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// fewestPoints is the least number of points from which anything is concluded
// about a mechanism (8 to 12 ligand levels are common practice; no source).
const fewestPoints = 8

// nothing says why nothing can be concluded about the mechanism; "" where
// something can.
func (w *verdictWriter) nothing() string {
	n, k := w.lead.row.Points, w.lead.k
	if n >= fewestPoints && n >= 2*k+2 {
		return ""
	}
	why := fmt.Sprintf("with so few, mechanisms of %s pass or fail by chance", constantsRange(w.fits))
	return fmt.Sprintf("Nothing can be concluded about the mechanism from %s: %s, and n_H is not judged.",
		plural(n, "point"), why)
}

// constantsRange is "one to four constants" over the mechanisms tried.
func constantsRange(fits []*fitted) string {
	least, most := fits[0].row.Constants, fits[0].row.Constants
	for _, f := range fits {
		least, most = min(least, f.row.Constants), max(most, f.row.Constants)
	}
	if least == most {
		return plural(most, "constant")
	}
	return countWord(least) + " to " + plural(most, "constant")
}

// limits says what the data cannot support, and why.
func (w *verdictWriter) limits() string {
	var s []string
	if w.out.Interrupted {
		s = append(s, "The run was stopped: not all that is called open was asked.")
	}
	if !w.replicated() {
		s = append(s, "No point was measured twice: scatter and misfit are not told apart, "+
			"and the scatter is that about the curves themselves.")
	}
	switch preparations := w.a.levels(byPreparation); {
	case len(preparations) == 1 && preparations[0] != "":
		s = append(s, "There is one preparation: the intervals speak of it, not of the next.")
	case len(preparations) < 2:
		s = append(s, "No preparation is named: the intervals speak of these readings, not of the next preparation.")
	}
	if missing := w.a.unstated(); len(missing) > 0 && missing[0] == "temperature" {
		s = append(s, fmt.Sprintf("Not stated: %s. The constants hold for no known conditions.", list(missing)))
	}
	return strings.Join(s, " ")
}

// unstated lists the conditions without which constants mean little that
// neither the study nor a table or factor of it states.
func (a *Analysis) unstated() []string {
	var missing []string
	for _, key := range []string{"temperature", "buffer", "pH"} {
		_, said := a.Conditions[key]
		said = said || key == "temperature" && !math.IsNaN(a.Kelvin)
		for i := range a.Data {
			_, here := a.Data[i].Conditions[key]
			said = said || here || slices.Contains(a.Data[i].Factors, key)
		}
		if !said {
			missing = append(missing, key)
		}
	}
	return missing
}

// replicated says whether any two points see the same prediction.
func (w *verdictWriter) replicated() bool {
	for _, b := range w.lead.m.blocks {
		if len(b.rows) < len(b.pts) {
			return true
		}
	}
	return false
}

// next says which measurements would settle what is open, the most telling first.
func (w *verdictWriter) next() string {
	var s []string
	add := func(ask bool, what string) {
		if ask && len(s) < 3 {
			s = append(s, what)
		}
	}
	shallow := w.v.Slope == slopeBelow
	add(w.nothing() != "", "eight to twelve ligand values over the whole curve, each measured twice or more")
	add(w.unfilled() != nil, "ligand values at which more than nine tenths of the sites are filled")
	add(shallow, "dissociation after dilution with and without unlabelled ligand "+
		"(interacting sites change each other's off-rates, unlike sites do not)")
	add(shallow, "a signal, an effector or a mutation that acts on one kind of site")
	steep := w.v.Slope == slopeAbove
	add(w.undecided() && steep, "the ends of the curve "+
		"(below one twentieth and above nineteen twentieths of saturation), where the mechanisms left differ most")
	add(len(w.left("mwc", "conformations")) > 0 && steep,
		"a signal of the conformation, or the curve with an effector that prefers one")
	add(w.nothing() == "" && !w.replicated(), "replicates")
	if len(s) == 0 {
		return ""
	}
	return "What would tell: " + strings.Join(s, "; ") + "."
}

// undecided says whether more than one mechanism is left.
func (w *verdictWriter) undecided() bool { return len(w.kept) > 1 }
