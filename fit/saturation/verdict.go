package saturation

import (
	"fmt"
	"math"
	"strings"
)

// slopeLevel is the level of the interval that must exclude 1 before n_H is
// called different from 1 (a 95 % interval rejects one in twenty one-site truths).
const slopeLevel = 0.99

// verdict says in one to three paragraphs what the data support.
func (a *Analysis) verdict(out *Outcome, fits []*fitted, order []int) Verdict {
	v := Verdict{Ties: []string{}, Open: []string{}, Out: []string{}, Twins: [][]string{}}
	if len(order) == 0 {
		v.Text = a.noAnswer(fits)
		return v
	}
	lead := fits[order[0]]
	v.Leads = lead.row.Name
	for _, i := range order[1:] {
		name := fits[i].row.Name
		switch fits[i].row.Standing {
		case "ties":
			v.Ties = append(v.Ties, name)
		case "out":
			v.Out = append(v.Out, name)
		default:
			v.Open = append(v.Open, name)
		}
		if t := fits[i].twinOf; t >= 0 {
			v.Twins = append(v.Twins, []string{fits[t].row.Name, name})
		}
	}
	w := &verdictWriter{a: a, out: out, fits: fits, order: order, lead: lead, v: &v}
	v.Text = w.text()
	return v
}

// noAnswer says why there is nothing to say.
func (a *Analysis) noAnswer(fits []*fitted) string {
	var why []string
	for _, f := range fits {
		if f.row.Why != nil {
			why = append(why, f.row.Name+": "+*f.row.Why)
		}
	}
	s := "No mechanism could be fitted to these data, so nothing can be said of them."
	if len(why) > 0 {
		s += " " + strings.Join(why, ". ") + "."
	}
	return s
}

// verdictWriter writes the verdict's sentences.
type verdictWriter struct {
	a     *Analysis
	out   *Outcome
	fits  []*fitted
	order []int
	lead  *fitted
	v     *Verdict
}

func (w *verdictWriter) text() string {
	paragraphs := []string{
		join(w.leader(), w.ties(), w.refused(), w.open(), w.twins(), w.failed()),
		join(w.steepness(), w.shared()),
		join(w.constants(), w.edges()),
	}
	var kept []string
	for _, p := range paragraphs {
		if p != "" {
			kept = append(kept, p)
		}
	}
	return strings.Join(kept, "\n\n")
}

// join puts sentences in one paragraph.
func join(sentences ...string) string {
	var kept []string
	for _, s := range sentences {
		if s != "" {
			kept = append(kept, s)
		}
	}
	return strings.Join(kept, " ")
}

// leader names the mechanism with the lowest AICc, never as the truth.
func (w *verdictWriter) leader() string {
	f := w.lead
	what := "These data are"
	if n := len(f.m.cells); n > 1 {
		what = "The " + countWord(n) + " curves are"
	}
	s := fmt.Sprintf("%s described best by %s (%s%s)", what, quoted(f.row.Name), familyWords(f), differsWords(f))
	if len(w.order) == 1 {
		s = fmt.Sprintf("%s described by %s (%s%s), the only mechanism that could be compared", what, quoted(f.row.Name), familyWords(f), differsWords(f))
	}
	return s + w.scatterWords() + "."
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
	if len(w.v.Ties) == 0 {
		return ""
	}
	verb := "does"
	if len(w.v.Ties) > 1 {
		verb = "do"
	}
	return fmt.Sprintf("%s %s as well (AICc within %d): this is a tie, and these data do not choose.", capital(quotedList(w.v.Ties)), verb, tieWidth)
}

func (w *verdictWriter) refused() string {
	if len(w.v.Out) == 0 {
		return ""
	}
	verb := "does"
	if len(w.v.Out) > 1 {
		verb = "do"
	}
	return fmt.Sprintf("%s %s not describe them: studies simulated from such a mechanism almost never favour another by as much.", capital(quotedList(w.v.Out)), verb)
}

func (w *verdictWriter) open() string {
	var rivals, freer []string
	for _, i := range w.order[1:] {
		switch f := w.fits[i]; f.row.Standing {
		case "open":
			rivals = append(rivals, fmt.Sprintf("%s (%s, AICc %s behind)", quoted(f.row.Name), constantsWord(f.row.Constants), figures(float64(f.row.AICcBehind), 2)))
		case "open: leader, freer":
			freer = append(freer, f.row.Name)
		}
	}
	s := ""
	if len(rivals) > 0 {
		s = "Still open, since these data cannot refuse it: " + list(rivals) + "."
		if len(rivals) > 1 {
			s = strings.Replace(s, "it:", "them:", 1)
		}
	}
	if len(freer) > 0 {
		s = join(s, fmt.Sprintf("Letting more of the leader's constants differ (%s) brings nothing that pays for them.", quotedList(freer)))
	}
	return s
}

func (w *verdictWriter) twins() string {
	var s []string
	for _, t := range w.v.Twins {
		s = append(s, fmt.Sprintf("%s and %s give the same curve: no equilibrium measurement of this kind separates them.", quoted(t[0]), quoted(t[1])))
	}
	return strings.Join(s, " ")
}

func (w *verdictWriter) failed() string {
	var names []string
	for _, f := range w.fits {
		if !f.answered() {
			names = append(names, f.row.Name)
		}
	}
	if len(names) == 0 {
		return ""
	}
	return "Without an answer, and so not compared: " + quotedList(names) + "."
}

// steepness gives half saturation and n_H of the leader, curve by curve.
func (w *verdictWriter) steepness() string {
	var s []string
	cells := w.lead.m.curveCells()
	for n, c := range cells {
		if n == 4 {
			s = append(s, fmt.Sprintf("The other %s curves are in the table.", countWord(len(cells)-n)))
			break
		}
		label := w.lead.m.cells[c].label
		where := "Half saturation lies at"
		if label != "all" {
			where = "At " + label + ", half saturation lies at"
		}
		x, n := w.find("position", "x_half", label), w.find("hill", "n_H_half", label)
		if x == nil || math.IsNaN(float64(x.Value)) {
			continue
		}
		t := where + " " + w.withInterval(x)
		if n != nil && !math.IsNaN(float64(n.Value)) {
			t += " and n_H there is " + w.withInterval(n)
		}
		s = append(s, t+".")
	}
	if len(s) > 0 {
		s[0] = strings.TrimSuffix(s[0], ".") + fmt.Sprintf(" (%s; %s %% intervals).", quoted(w.lead.row.Name), figures(100*w.a.Settings.Level, 2))
	}
	return strings.Join(s, " ")
}

// find looks up a row of the leader.
func (w *verdictWriter) find(of, name, curve string) *QuantityRow {
	for i := range w.out.Quantities {
		q := &w.out.Quantities[i]
		if q.Mechanism == w.lead.row.Name && q.Of == of && q.Name == name && q.Curve == curve {
			return q
		}
	}
	return nil
}

// withInterval writes "5.44 torr (5.38 to 5.50)"; an end that is not there is said.
func (w *verdictWriter) withInterval(q *QuantityRow) string {
	v, low, high := float64(q.Value), float64(q.Low), float64(q.High)
	l, h := low, high
	if math.IsNaN(l) {
		l = v - (h - v)
	}
	if math.IsNaN(h) {
		h = v + (v - l)
	}
	unit := ""
	if q.Unit != "1" {
		unit = " " + q.Unit
	}
	s := toInterval(v, l, h) + unit
	switch {
	case !math.IsNaN(low) && !math.IsNaN(high):
		s += " (" + toInterval(low, l, h) + " to " + toInterval(high, l, h) + ")"
	case !math.IsNaN(low):
		s += " (" + toInterval(low, l, h) + " or more, without an upper end)"
	case !math.IsNaN(high):
		s += " (" + toInterval(high, l, h) + " or less, without a lower end)"
	}
	return s
}

// shared says what every mechanism that is not out says of the slope.
func (w *verdictWriter) shared() string {
	above, below, around, n := 0, 0, 0, 0
	for _, i := range w.order {
		f := w.fits[i]
		if f.row.Standing == "out" {
			continue
		}
		for _, s := range f.slopes {
			n++
			switch {
			case s.low > 1:
				above++
			case s.high < 1:
				below++
			default:
				around++
			}
		}
	}
	switch {
	case n == 0:
		return ""
	case above == n:
		return "Every mechanism that is not out has n_H above 1 at half saturation (99 % interval): binding is positively cooperative."
	case below == n:
		return "Every mechanism that is not out has n_H below 1 at half saturation (99 % interval). A shallow curve alone does not tell unlike sites or mixed molecules from negative cooperativity, nor any of them from an artefact; dissociation after dilution with and without unlabelled ligand would."
	case around == n:
		return "Nowhere does the 99 % interval of n_H exclude 1: these data show no cooperativity."
	}
	return "The mechanisms that are not out do not agree whether n_H differs from 1."
}

// constants says how firmly the leader's constants are held.
func (w *verdictWriter) constants() string {
	var firm, loose, open []string
	for i := range w.out.Quantities {
		q := &w.out.Quantities[i]
		if q.Mechanism != w.lead.row.Name || q.Of != "constant" && q.Of != "contrast" || q.Value <= 0 || q.Name == "n_H_half" || q.Name == "x_half" {
			continue
		}
		name := q.Name
		if q.Ligand != nil && *q.Ligand != w.a.Ligand.Name {
			name += " of " + *q.Ligand
		}
		if q.Site != nil {
			name += " of " + *q.Site
		}
		if q.Curve != "all" {
			name += " (" + q.Curve + ")"
		}
		if q.Held != "both" || !(q.Low > 0) {
			if q.Held != "fixed" {
				open = append(open, name)
			}
			continue
		}
		k := math.Sqrt(float64(q.High / q.Low))
		s := fmt.Sprintf("%s %s within a factor of %s", name, valueWords(q), figures(k, 3))
		if k < 1.5 {
			firm = append(firm, s)
		} else {
			loose = append(loose, s)
		}
	}
	s := ""
	if len(firm) > 0 {
		s = "The data hold " + list(firm) + "."
	}
	if len(loose) > 0 {
		s = join(s, capital("only loosely held: "+list(loose)+"."))
	}
	if len(open) > 0 {
		s = join(s, "Not bounded on both sides: "+list(open)+".")
	}
	return s
}

// valueWords is a constant with its unit.
func valueWords(q *QuantityRow) string {
	s := toInterval(float64(q.Value), float64(q.Low), float64(q.High))
	if q.Unit != "1" {
		s += " " + q.Unit
	}
	return s
}

func (w *verdictWriter) edges() string {
	if w.lead.row.Edge == nil {
		return ""
	}
	return "The leader lies on an edge, which is its answer and not a failure: " + *w.lead.row.Edge + "."
}

func quoted(name string) string { return "“" + name + "”" }

func quotedList(names []string) string {
	q := make([]string, len(names))
	for i, n := range names {
		q[i] = quoted(n)
	}
	return list(q)
}

// familyWords says what kind of mechanism a candidate is.
func familyWords(f *fitted) string {
	n := countWord(f.row.Sites) + "-site "
	if f.row.Sites == 0 {
		n = ""
	}
	switch f.row.Family {
	case "hill":
		return "the Hill equation, a description rather than a mechanism"
	case "adair":
		return n + "stepwise binding, Adair"
	case "mwc":
		return n + "concerted, MWC"
	case "sequential":
		return n + "sequential, pairwise contacts"
	case "independent":
		return n + "independent sites"
	case "mixture":
		return "a mixture of populations"
	case "assembly":
		return "assembly-linked binding"
	}
	return n + f.row.Family
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
