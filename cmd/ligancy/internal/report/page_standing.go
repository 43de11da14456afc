package report

import (
	"fmt"
	"strconv"

	"ligancy/cmd/ligancy/internal/figure"
	"ligancy/fit/saturation"
)

// standingWord says how a mechanism stands, and how its fit ended where that
// matters.
func standingWord(m *saturation.MechanismRow) string {
	word := m.Standing
	switch {
	case m.Status == "converged" || m.Status == "given":
	case word == "":
		word = m.Status
	default:
		word += "; " + m.Status
	}
	return printable(word)
}

// standingFigure draws how the mechanisms stand; nil where there is nothing to compare.
func (v *view) standingFigure() figure.Figure {
	if len(v.ranked) < 2 {
		return nil
	}
	f := &figure.Standing{Name: "AICc of each mechanism behind the leader"}
	for _, m := range v.ranked[:min(len(v.ranked), mostBars)] {
		f.Rows = append(f.Rows, figure.StandingRow{
			Name: printable(m.Name), ID: v.mechanismID(m.Name), Behind: float64(m.AICcBehind), Word: standingWord(m),
			Leads: m.Name == v.leader && m.Standing == "leads", Out: m.Standing == "out",
		})
	}
	if n := len(v.ranked) - mostBars; n > 0 {
		f.Remark = fmt.Sprintf("and %d more, further behind: mechanisms.csv", n)
	}
	f.Description = "The table below the figure holds the same numbers."
	return f
}

// standingTable lists the mechanisms with what decides between them.
func (v *view) standingTable() *table {
	if len(v.ranked) == 0 {
		return nil
	}
	t := &table{Caption: "How the mechanisms stand",
		Head: []string{"mechanism", "constants", "scatter", "AICc behind", "AICc weight", "starts agreeing", "standing"}}
	for _, m := range v.ranked[:min(len(v.ranked), mostListed)] {
		behind := "–"
		if x := float64(m.AICcBehind); finite(x) && x != 0 {
			behind = strconv.FormatFloat(x, 'f', 1, 64)
		}
		scatter := significant(float64(m.Scatter), 3)
		if scatter == "" {
			scatter = "–"
		}
		agreeing := "–"
		if m.Starts > 0 {
			agreeing = fmt.Sprintf("%d of %d", m.StartsAgreeing, m.Starts)
		}
		name := entry{Text: printable(m.Name), Head: true}
		if m.Name != v.leader && len(v.lines[m.Name]) > 0 {
			name.Name = v.mechanismID(m.Name)
		}
		word := entry{Text: standingWord(m)}
		if m.Why != nil {
			word.After = ": " + printable(*m.Why)
		}
		num := func(s string) entry { return entry{Text: s, Number: true} }
		t.Rows = append(t.Rows, []entry{name, num(strconv.Itoa(m.Constants)), num(minus(scatter)), num(minus(behind)),
			num(weight(float64(m.AICcWeight))), num(agreeing), word})
	}
	if n := len(v.ranked) - mostListed; n > 0 {
		t.Foot = fmt.Sprintf("and %d more: mechanisms.csv", n)
	}
	return t
}

// nestedTable compares mechanisms with freer ones that contain them.
func (v *view) nestedTable() *table {
	if len(v.d.Nested) == 0 {
		return nil
	}
	t := &table{Caption: "Mechanisms beside a freer form of themselves: what the freedom gains, and how often studies without it gain as much",
		Head: []string{"", "freer", "2 Δ ln L", "constants more", "in simulated studies", "by the χ² law"}}
	for i := range v.d.Nested[:min(len(v.d.Nested), mostBars)] {
		r := &v.d.Nested[i]
		num := func(x float64, places int) entry { return entry{Text: fixed(x, places), Number: true} }
		draws := entry{Number: true}
		if finite(float64(r.PDraws)) && r.Draws > 0 {
			draws.Text = fmt.Sprintf("%s %% of %d", percentOf(float64(r.PDraws)), r.Draws)
		}
		t.Rows = append(t.Rows, []entry{{Text: printable(r.Special), Head: true}, {Text: printable(r.Freer)}, num(float64(r.Statistic), 1),
			{Text: strconv.Itoa(r.Freedom), Number: true}, draws, num(float64(r.PChiSquare), 3)})
	}
	if n := len(v.d.Nested) - mostBars; n > 0 {
		t.Foot = fmt.Sprintf("and %d more: nested.csv", n)
	}
	return t.dropEmpty()
}
