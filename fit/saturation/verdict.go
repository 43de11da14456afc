package saturation

import (
	"context"
	"fmt"
	"strings"
)

// verdictWriter writes the verdict's sentences. Every number that it writes
// stands in a row of the outcome.
type verdictWriter struct {
	a     *Analysis
	out   *Outcome
	fits  []*fitted
	order []int
	lead  *fitted
	kept  []*fitted // in order, all that are not out
	v     *Verdict
}

// verdict says in one to three paragraphs what the data support. It never says
// that the leader is the mechanism: it says what all that are not out share, what
// stays open, and what would part them.
func (a *Analysis) verdict(out *Outcome, fits []*fitted, order []int) Verdict {
	v := Verdict{Ties: []string{}, Open: []string{}, Out: []string{}, Twins: [][]string{}}
	if len(order) == 0 {
		v.Text = a.noAnswer(fits)
		return v
	}
	v.Leads = fits[order[0]].row.Name
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
	}
	v.Twins = twinGroups(fits, order)
	w := &verdictWriter{a: a, out: out, fits: fits, order: order, lead: fits[order[0]], kept: keptOf(fits, order), v: &v}
	v.Slope = w.slope()
	v.Text = w.text()
	return v
}

// verdictRows are the numbers that the verdict rests on beside those of the fits.
func (a *Analysis) verdictRows(ctx context.Context, rows []QuantityRow, fits []*fitted, order []int) []QuantityRow {
	out := append(decidingRows(fits), spreadRows(rows, fits)...)
	kept := keptOf(fits, order)
	for i, f := range kept {
		if i == 0 || f == plainest(kept) {
			out = append(out, f.filledRows(ctx)...)
		}
	}
	return out
}

// keptOf lists the mechanisms that are not out, the leader first.
func keptOf(fits []*fitted, order []int) []*fitted {
	var kept []*fitted
	for _, i := range order {
		if fits[i].row.Standing != "out" {
			kept = append(kept, fits[i])
		}
	}
	return kept
}

// twinGroups lists the names of mechanisms that give the same curves, group by group.
func twinGroups(fits []*fitted, order []int) [][]string {
	groups := [][]string{}
	for _, i := range order {
		group := []string{fits[i].row.Name}
		for _, j := range order {
			if fits[j].twinOf == i {
				group = append(group, fits[j].row.Name)
			}
		}
		if len(group) > 1 {
			groups = append(groups, group)
		}
	}
	return groups
}

// noAnswer says why there is nothing to say.
func (a *Analysis) noAnswer(fits []*fitted) string {
	var why []string
	for _, f := range fits {
		if f.row.Why != nil {
			why = append(why, quoted(f.row.Name)+": "+*f.row.Why)
		}
	}
	s := "No mechanism could be fitted to these data, so nothing can be said of them."
	if len(why) > 0 {
		s += " " + strings.Join(why, ". ") + "."
	}
	return s
}

func (w *verdictWriter) text() string {
	if why := w.nothing(); why != "" {
		return paragraphs(join(why, w.position(), w.failed()), join(w.limits(), w.next()))
	}
	return paragraphs(
		join(w.leader(), w.ties(), w.refused(), w.open(), w.twins(), w.notToldApart(), w.failed()),
		join(w.steepness(), w.contrasts(), w.slopeWords(), w.readings(), w.ends(), w.shifts(), w.explained()),
		join(w.constants(), w.tiedWords(), w.edges(), w.limits(), w.next()))
}

// paragraphs sets non-empty paragraphs apart by a blank line.
func paragraphs(list ...string) string {
	return strings.Join(nonEmpty(list), "\n\n")
}

// join puts sentences in one paragraph.
func join(sentences ...string) string {
	return strings.Join(nonEmpty(sentences), " ")
}

func nonEmpty(list []string) []string {
	var kept []string
	for _, s := range list {
		if s != "" {
			kept = append(kept, s)
		}
	}
	return kept
}

func quoted(name string) string { return "“" + name + "”" }

func quotedList(names []string) string {
	q := make([]string, len(names))
	for i, n := range names {
		q[i] = quoted(n)
	}
	return list(q)
}

// find looks up a row of a mechanism; nil where there is none.
func (w *verdictWriter) find(mechanism, of, name, curve string) *QuantityRow {
	for i := range w.out.Quantities {
		q := &w.out.Quantities[i]
		if q.Mechanism == mechanism && q.Of == of && q.Name == name && q.Curve == curve && q.Interval != "bootstrap" {
			return q
		}
	}
	return nil
}

// plural puts a noun after a small number in words.
func plural(n int, noun string) string {
	if n == 1 {
		return "one " + noun
	}
	return fmt.Sprintf("%s %ss", countWord(n), noun)
}
