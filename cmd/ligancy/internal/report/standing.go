package report

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"ligancy/fit/saturation"
)

// standing writes HOW THE MECHANISMS STAND, the leader first.
func (p *page) standing() {
	if len(p.d.Mechanisms) == 0 {
		return
	}
	p.heading("HOW THE MECHANISMS STAND", "")
	rows := slices.Clone(p.d.Mechanisms)
	slices.SortStableFunc(rows, func(a, b saturation.MechanismRow) int {
		return cmp.Compare(last(float64(a.AICcBehind)), last(float64(b.AICcBehind)))
	})
	shown := rows[:min(len(rows), mostStanding)]
	g := &grid{gap: 2, right: []bool{false, true, true, true, true, false}}
	g.add("", "constants", "scatter", "AICc behind", "AICc weight", "standing")
	for i := range shown {
		cells := standingCells(&shown[i])
		if shown[i].Name == p.d.shown() {
			cells = append(cells, p.edgeMark())
		}
		g.add(cells...)
	}
	for i, l := range g.lines(Width - 2) {
		p.line("  %s", p.paintStanding(shown, i%len(g.rows), l))
	}
	if n := len(rows) - len(shown); n > 0 {
		p.line("  and %d more: mechanisms.csv", n)
	}
	for _, twins := range p.d.Verdict.Twins {
		p.write(hanging("  ", "The same curves, one story each: "+twinNames(twins)+"; counted once.", Width))
	}
	p.line("")
}

// paintStanding brings the leader forward and sets what is out back.
func (p *page) paintStanding(shown []saturation.MechanismRow, row int, l string) string {
	switch {
	case row == 0:
		return l
	case shown[row-1].Standing == "leads":
		return p.ink.bold(l)
	case shown[row-1].Standing == "out":
		return p.ink.dim(l)
	}
	return l
}

// last sorts what does not exist behind everything.
func last(x float64) float64 {
	if math.IsNaN(x) {
		return math.Inf(1)
	}
	return x
}

func standingCells(m *saturation.MechanismRow) []string {
	behind := "–"
	if x := float64(m.AICcBehind); finite(x) && x != 0 {
		behind = strconv.FormatFloat(x, 'f', 1, 64)
	}
	word := m.Standing
	switch {
	case m.Status == "converged" || m.Status == "given":
	case word == "":
		word = m.Status
	default:
		word += "; " + m.Status
	}
	scatter := significant(float64(m.Scatter), 3)
	if scatter == "" {
		scatter = "–"
	}
	return []string{cut(m.Name, 34), strconv.Itoa(m.Constants), scatter, behind, weight(float64(m.AICcWeight)), cut(word, 30)}
}

// weight writes an AICc weight; below 0.001 its digits mean nothing.
func weight(w float64) string {
	switch {
	case !finite(w):
		return "–"
	case w < 0.001:
		return "<0.001"
	case w < 0.0095:
		return strconv.FormatFloat(w, 'f', 3, 64)
	}
	return strconv.FormatFloat(w, 'f', 2, 64)
}

const mostTwins = 8

// twinNames writes "two classes = interacting pair".
func twinNames(names []string) string {
	shown := make([]string, 0, mostTwins)
	for _, n := range names[:min(len(names), mostTwins)] {
		shown = append(shown, cut(n, 40))
	}
	s := strings.Join(shown, " = ")
	if n := len(names) - len(shown); n > 0 {
		s += fmt.Sprintf(" and %d more", n)
	}
	return s
}
