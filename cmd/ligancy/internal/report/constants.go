package report

import (
	"math"
	"slices"
	"strconv"
	"strings"

	"ligancy/fit/saturation"
)

// constants writes CONSTANTS, AND HOW FIRMLY THEY ARE HELD for one mechanism:
// its constants, the ends of the response that were fitted, combinations that
// are held better than their parts, and ratios between curves.
func (p *page) constants(mechanism string) {
	rows, combinations := apart(p.constantRows(mechanism))
	if len(rows) == 0 {
		return
	}
	p.heading("CONSTANTS, AND HOW FIRMLY THEY ARE HELD", "")
	g := &grid{gap: 2}
	g.add("", "value", "", "from", "to", "held within")
	for _, q := range rows[:min(len(rows), mostConstants)] {
		g.add(p.constantCells(q)...)
	}
	for _, l := range g.lines(Width - 2) {
		p.line("  %s", l)
	}
	if n := len(rows) - mostConstants; n > 0 {
		p.line("  and %d more: quantities.csv", n)
	}
	for _, q := range combinations[:min(len(combinations), mostCombinations)] {
		p.write(hanging("  ", p.combination(q), Width))
	}
	if p.bootstrapped(mechanism) {
		p.line("  Bootstrap intervals of the same numbers are in quantities.csv.")
	}
	p.line("")
}

// bootstrapped says whether a mechanism's numbers have bootstrap intervals
// beside those that are printed.
func (p *page) bootstrapped(mechanism string) bool {
	return slices.ContainsFunc(p.d.Quantities, func(q saturation.QuantityRow) bool {
		return q.Mechanism == mechanism && q.Interval == "bootstrap"
	})
}

// mostCombinations below the table of constants.
const mostCombinations = 6

// combination says how firmly a product of powers of constants is held:
// "Held together: K_R · L^(1/4) = 5.64 torr, a factor 1.01."
func (p *page) combination(q *saturation.QuantityRow) string {
	words, name := "Held together: ", q.Name
	for prefix, w := range map[string]string{"stiffest: ": "Held best: ", "loosest: ": "Held least: "} {
		if rest, ok := strings.CutPrefix(name, prefix); ok {
			words, name = w, rest
		}
	}
	v, _, _ := rowFigures(q)
	if v == "" {
		v = "–"
	}
	text := words + cut(name, 2*Width) + " = " + v
	if unit := unitWord(q.Unit); unit != "" {
		text += " " + unit
	}
	if h := held(q); h != "" {
		text += ", " + h
	}
	return strings.TrimRight(text+"  "+p.marks(q), " ")
}

// apart takes combinations with long names out of the table.
func apart(all []*saturation.QuantityRow) (rows, combinations []*saturation.QuantityRow) {
	const short = 16
	for _, q := range all {
		if q.Of == "combination" && width(q.Name) > short {
			combinations = append(combinations, q)
		} else {
			rows = append(rows, q)
		}
	}
	return rows, combinations
}

// constantRows collects the rows of the table: contrasts of a constant follow
// its last level, those of other numbers come last.
func (p *page) constantRows(mechanism string) []*saturation.QuantityRow {
	var rows, contrasts []*saturation.QuantityRow
	for _, q := range p.d.numbers(mechanism) {
		switch q.Of {
		case "constant", "combination":
			rows = append(rows, q)
		case "response":
			if q.Held != "fixed" {
				rows = append(rows, q)
			}
		case "contrast":
			if !slices.Contains(contrastsOfSlope, q.Name) {
				contrasts = append(contrasts, q)
			}
		}
	}
	rows = byName(rows)
	for _, q := range contrasts {
		at := len(rows)
		for i, r := range rows {
			if r.Name == q.Name {
				at = i + 1
			}
		}
		rows = slices.Insert(rows, at, q)
	}
	return rows
}

// byName brings the levels of one constant together, at the place of its first.
func byName(rows []*saturation.QuantityRow) []*saturation.QuantityRow {
	type name struct{ of, name, site, ligand string }
	first := map[name]int{}
	at := func(q *saturation.QuantityRow) int {
		n := name{of: q.Of, name: q.Name}
		if q.Site != nil {
			n.site = *q.Site
		}
		if q.Ligand != nil {
			n.ligand = *q.Ligand
		}
		if _, ok := first[n]; !ok {
			first[n] = len(first)
		}
		return first[n]
	}
	for _, q := range rows {
		at(q)
	}
	slices.SortStableFunc(rows, func(a, b *saturation.QuantityRow) int { return at(a) - at(b) })
	return rows
}

// contrastsOfSlope stand in the table of slopes, not among the constants.
var contrastsOfSlope = []string{"x_half", "n_H_half", "Bohr_coefficient"}

// constantCells writes one row: name, value, unit, ends, how firmly held.
func (p *page) constantCells(q *saturation.QuantityRow) []string {
	mark := p.marks(q)
	label := p.d.constantLabel(q)
	value := float64(q.Value)
	if q.Held == "fixed" {
		return []string{label, plain(value), unitWord(q.Unit), "", "", "fixed in the study", mark}
	}
	if !finite(value) || value == 0 && q.Held == "neither" {
		return []string{label, "–", unitWord(q.Unit), "", "", "not held alone", mark}
	}
	v, lo, hi := rowFigures(q)
	if lo == "" {
		lo = "and below"
	}
	if hi == "" {
		hi = "and beyond"
	}
	if q.Interval == "none" || q.Interval == "" {
		lo, hi = "", ""
	}
	return []string{label, v, unitWord(q.Unit), lo, hi, held(q), mark}
}

// constantLabel writes "K_R", "L, pH 7.6", "L 7.0 / 7.6", "K_T of alanine", "Kd of tight".
func (d *Document) constantLabel(q *saturation.QuantityRow) string {
	label := d.constantName(q)
	switch {
	case q.Curve == "all" || q.Curve == "":
	case q.Of == "contrast":
		label += " " + shortContrast(q.Curve)
	default:
		label += ", " + q.Curve
	}
	return cut(label, 34)
}

// constantName is a constant's symbol with the effector or the class of site it belongs to.
func (d *Document) constantName(q *saturation.QuantityRow) string {
	switch {
	case q.Ligand != nil && *q.Ligand != d.analysis.Ligand.Name && *q.Ligand != "":
		return q.Name + " of " + *q.Ligand
	case q.Site != nil && *q.Site != q.Name && *q.Site != "":
		return q.Name + " of " + *q.Site
	}
	return q.Name
}

// held says in words how firmly a number is held.
func held(q *saturation.QuantityRow) string {
	low, high := float64(q.Low), float64(q.High)
	hasLow, hasHigh := finite(low), finite(high)
	switch {
	case hasLow && hasHigh && low > 0 && high >= low:
		return "a factor " + factor(low, high)
	case hasLow && hasHigh:
		u := (high - low) / 2
		return "± " + atPlace(u, lastPlace(u, 0), false)
	case hasLow:
		return "its low end only"
	case hasHigh:
		return "its high end only"
	case q.Held == "neither":
		return "neither end"
	}
	return ""
}

// unitWord is the unit as a column shows it; a pure number has none.
func unitWord(unit string) string {
	if unit == "1" {
		return ""
	}
	return cut(unit, 26)
}

// plain writes a number as it was given; twelve digits hide the rounding of
// a way through the logarithm and back.
func plain(x float64) string {
	switch size := math.Abs(x); {
	case !finite(x):
		return "–"
	case size >= 1e-3 && size < 1e6:
		return strconv.FormatFloat(x, 'g', 12, 64)
	}
	return shortExponent(strconv.FormatFloat(x, 'g', 12, 64))
}
