package report

import (
	"strings"

	"ligancy/fit/saturation"
)

const (
	mostExplanations = 24
	readingColumns   = 52
)

// explanations writes OTHER READINGS OF THE SLOPE: what else makes a curve
// steeper or shallower than one site, how each reading stands, and for those
// that are not out the measurement that would decide.
func (p *page) explanations() {
	rows := p.d.Explanations
	if len(rows) == 0 {
		return
	}
	p.heading("OTHER READINGS OF THE SLOPE", "")
	shown := rows[:min(len(rows), mostExplanations)]
	widest, standing := 0, 0
	for i := range shown {
		widest = max(widest, width(cut(shown[i].Explanation, readingColumns)))
		standing = max(standing, width(explanationStanding(&shown[i])))
	}
	group := ""
	for i := range shown {
		r := &shown[i]
		if g := r.Slope + ": " + r.Curve; g != group {
			group = g
			p.line("  %s", p.ink.dim(r.Slope+", "+cut(curveLabel(r.Curve), 70)))
		}
		mark := "  " + pad(cut(r.Explanation, readingColumns), widest) + "  " + pad(explanationStanding(r), standing) + "  "
		test := ""
		if r.Standing != "out" && r.Test != nil {
			test = *r.Test
		}
		if test == "" {
			p.line("%s", p.paintExplanation(r, strings.TrimRight(mark, " ")))
			continue
		}
		p.write(hanging(mark, test, Width))
	}
	if n := len(rows) - len(shown); n > 0 {
		p.line("  and %d more: explanations.csv", n)
	}
	p.line("")
}

// paintExplanation sets readings that are out back.
func (p *page) paintExplanation(r *saturation.ExplanationRow, line string) string {
	if r.Standing == "out" {
		return p.ink.dim(line)
	}
	return line
}

// explanationStanding writes "open", "out", or whose twin a reading is.
func explanationStanding(r *saturation.ExplanationRow) string {
	if r.TwinOf != nil && *r.TwinOf != "" {
		return "twin of " + cut(*r.TwinOf, 16)
	}
	return cut(r.Standing, 24)
}
