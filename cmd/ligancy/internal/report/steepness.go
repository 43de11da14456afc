package report

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"ligancy/fit/saturation"
)

// Bounds of what one section prints; the tables hold the rest.
const (
	mostCurves    = 12
	mostConstants = 30
	mostStanding  = 20
	labelColumns  = 22
)

// steepness writes HOW STEEP, AND WHERE for one mechanism: the ruler of each
// curve, then half saturation and the Hill coefficients, each by its own name.
func (p *page) steepness(mechanism string) {
	curves := p.d.curvesOf(mechanism)
	if len(curves) == 0 {
		return
	}
	p.heading("HOW STEEP, AND WHERE", p.basis(mechanism))
	shown := curves[:min(len(curves), mostCurves)]
	p.ruler(mechanism, shown)
	p.line("")
	p.slopes(mechanism, shown)
	if n := len(curves) - len(shown); n > 0 {
		p.line("  and %d more curves: quantities.csv", n)
	}
	p.line("")
}

// basis says which mechanism the numbers come from and how their intervals were made.
func (p *page) basis(mechanism string) string {
	for _, q := range p.d.numbers(mechanism) {
		if q.Interval != "" && q.Interval != "none" && finite(float64(q.Level)) {
			return fmt.Sprintf("%s; %s %% %s intervals", cut(mechanism, 36), percent(float64(q.Level)), q.Interval)
		}
	}
	return cut(mechanism, 60)
}

func percent(share float64) string { return strconv.FormatFloat(100*share, 'g', 4, 64) }

// ruler draws the tested points and the reach of each curve on one axis.
func (p *page) ruler(mechanism string, curves []string) {
	tested := p.testedPoints(mechanism, curves)
	reaches := make([]reach, len(curves))
	var all, ends []float64
	label := max(width("tested"), width(cut(p.d.analysis.Ligand.Unit, 14)))
	for i, c := range curves {
		reaches[i] = p.reach(mechanism, c, tested[c])
		ends = append(ends, reaches[i].x01, reaches[i].x99, reaches[i].half)
		all = append(all, tested[c]...)
		label = max(label, width(cut(curveLabel(c), labelColumns)))
	}
	a, ok := newAxis(all, ends, Width-2-label-2-14)
	if !ok {
		return
	}
	p.line("  %s  %s", pad(cut(p.d.analysis.Ligand.Unit, label), label), a.scale())
	if len(all) > 0 {
		zero := ""
		if slices.Contains(all, 0) {
			zero = "and 0"
		}
		p.line("  %s  %s", pad("tested", label), strings.TrimRight(pad(a.marks(distinct(all)), a.columns+2)+zero, " "))
	}
	for i, c := range curves {
		if !finite(reaches[i].half) {
			continue
		}
		decades := ""
		if r := reaches[i]; finite(r.x10) && finite(r.x90) && r.x10 > 0 {
			decades = strconv.FormatFloat(math.Log10(r.x90)-math.Log10(r.x10), 'f', 2, 64) + " decades"
		}
		bar := pad(a.bar(reaches[i]), a.columns)
		p.line("  %s  %s  %s", pad(cut(curveLabel(c), labelColumns), label), p.ink.curve(i, bar), decades)
	}
	p.legend(a, reaches, label)
}

// legend names the strokes that were used.
func (p *page) legend(a axis, reaches []reach, label int) {
	of := "%"
	if kind := p.kind(); kind == "saturation" || kind == "bound" {
		of = "% bound"
	}
	text := fmt.Sprintf("%c 10 to 90 %s   %c 1 to 99 %%   %c half", thick, of, thin, upright)
	for _, r := range reaches {
		drawn := a.bar(r)
		if strings.ContainsRune(drawn, thinBeyond) || strings.ContainsRune(drawn, thickBeyond) {
			text += fmt.Sprintf("   %c %c beyond the tested points", thinBeyond, thickBeyond)
			break
		}
	}
	p.line("  %s  %s", pad("", label), p.ink.dim(text))
}

// kind of the first response.
func (p *page) kind() string {
	if len(p.d.analysis.Data) == 0 {
		return ""
	}
	return p.d.analysis.Data[0].Response.Kind
}

// testedPoints collects the ligand values of kept points by curve.
func (p *page) testedPoints(mechanism string, curves []string) map[string][]float64 {
	tested := map[string][]float64{}
	for i := range p.d.Points {
		r := &p.d.Points[i]
		if r.Mechanism != mechanism || r.LeftOut != nil {
			continue
		}
		for _, c := range curves {
			if belongs(r, c) {
				tested[c] = append(tested[c], float64(r.X))
			}
		}
	}
	return tested
}

// reach reads where a curve lies.
func (p *page) reach(mechanism, curve string, tested []float64) reach {
	at := func(name string) float64 {
		if q := p.rows[key{mechanism, curve, "position", name}]; q != nil {
			return float64(q.Value)
		}
		return math.NaN()
	}
	r := reach{x01: at("x_01"), x10: at("x_10"), half: at("x_half"), x90: at("x_90"), x99: at("x_99")}
	low, high := span(tested)
	r.from, r.to = math.Pow(10, low), math.Pow(10, high)
	return r
}

// curveLabel is what stands in front of a curve's row.
func curveLabel(curve string) string {
	if curve == "all" {
		return "curve"
	}
	return curve
}

// slopes writes the table of half saturation and Hill coefficients.
func (p *page) slopes(mechanism string, curves []string) {
	half := p.d.halfSymbol()
	if unit := p.d.analysis.Ligand.Unit; unit != "" {
		half += " / " + cut(unit, 26)
	}
	rows := p.slopeRows(mechanism, curves)
	one, two := &grid{gap: 2}, &grid{gap: 2}
	one.add("", half, "n_H at half saturation", "steepest n_H", "a Hill fit would say")
	two.add("", half, "n_H at half", "steepest", "a Hill fit")
	two.add("", "", "saturation", "n_H", "would say")
	r := p.readings(mechanism)
	for i, g := range []*grid{one, two} {
		g.rows = append(g.rows, rows...)
		if !r.steepest {
			g.without("steepest")
		}
		if !r.hill {
			g.without("a Hill fit")
		}
		if lines := g.lines(Width - 2); len(lines) == len(g.rows) || i == 1 {
			for _, l := range lines {
				p.line("  %s", l)
			}
			break
		}
	}
	p.differences(mechanism)
}

// slopeRows are the table's rows: curves, then ratios of half saturation.
func (p *page) slopeRows(mechanism string, curves []string) [][]string {
	var halves, slopes []*saturation.QuantityRow
	for _, c := range curves {
		halves = append(halves, p.rows[key{mechanism, c, "position", "x_half"}])
		slopes = append(slopes, p.rows[key{mechanism, c, "hill", "n_H_half"}])
	}
	totals, totalSlopes := p.d.againstTotal(mechanism)
	halves, slopes = append(halves, totals...), append(slopes, totalSlopes...)
	ratios := p.d.contrastsOf(mechanism, "x_half")
	ratios = ratios[:min(len(ratios), mostCurves)]
	halfCells, slopeCells := stacked(append(halves, ratios...)), stacked(slopes)
	var rows [][]string
	for i, c := range curves {
		rows = append(rows, []string{cut(curveLabel(c), labelColumns), halfCells[i], slopeCells[i],
			p.steepest(mechanism, c), p.hillReading(mechanism, c)})
	}
	for i, q := range totals {
		at := len(curves) + i
		rows = append(rows, []string{cut(totalLabel(q), labelColumns), halfCells[at], slopeCells[at]})
	}
	for i, q := range ratios {
		rows = append(rows, []string{cut(shortContrast(q.Curve), labelColumns), halfCells[len(halves)+i]})
	}
	return rows
}

// againstTotal is half saturation and n_H against total ligand, or the IC50
// against added ligand, where the axis is total; a slope that is not given is nil.
func (d *Document) againstTotal(mechanism string) (halves, slopes []*saturation.QuantityRow) {
	for i := range d.Quantities {
		q := &d.Quantities[i]
		if q.Mechanism != mechanism || q.Interval == "bootstrap" || q.Name != "x_half_total" && q.Name != "IC50_total" {
			continue
		}
		halves = append(halves, q)
		var slope *saturation.QuantityRow
		for j := range d.Quantities {
			if n := &d.Quantities[j]; n.Name == "n_H_half_total" && n.Mechanism == mechanism && n.Curve == q.Curve && n.Interval != "bootstrap" {
				slope = n
			}
		}
		slopes = append(slopes, slope)
	}
	return halves[:min(len(halves), mostCurves)], slopes[:min(len(slopes), mostCurves)]
}

// totalLabel says that a row speaks of total ligand, and of which curve.
func totalLabel(q *saturation.QuantityRow) string {
	switch {
	case q.Name == "IC50_total" && q.Curve == "all":
		return "IC50, added"
	case q.Name == "IC50_total":
		return "IC50, " + q.Curve
	case q.Curve == "all":
		return "against total"
	}
	return "total, " + q.Curve
}

// differences writes what else was asked for between curves, one line a number.
func (p *page) differences(mechanism string) {
	rows := p.d.contrastsOf(mechanism, "Bohr_coefficient")
	rows = append(rows, p.d.contrastsOf(mechanism, "n_H_half")...)
	rows = rows[:min(len(rows), mostCurves)]
	cells := stacked(rows)
	g := &grid{gap: 2}
	for i, q := range rows {
		name := "n_H at half saturation"
		if q.Name == "Bohr_coefficient" {
			name = "Bohr coefficient"
		}
		g.add(name, cut(shortContrast(q.Curve), labelColumns), cells[i])
	}
	for _, l := range g.lines(Width - 2) {
		p.line("  %s", l)
	}
}

// readings says which further Hill coefficients tell the reader anything.
type readings struct{ steepest, hill bool }

// readings leaves out columns without numbers, the steepest slope where the
// slope is the same everywhere, and both columns for a Hill equation.
func (p *page) readings(mechanism string) readings {
	var r readings
	if m := p.d.mechanism(mechanism); m != nil && m.Family == "hill" {
		return r
	}
	for _, q := range p.d.numbers(mechanism) {
		if q.Of != "hill" || !finite(float64(q.Value)) {
			continue
		}
		half := p.rows[key{mechanism, q.Curve, "hill", "n_H_half"}]
		r.steepest = r.steepest || q.Name == "n_H_max" && half != nil && math.Abs(float64(q.Value-half.Value)) > 1e-6
		r.hill = r.hill || q.Name == "n_H_hill_reading"
	}
	return r
}

// steepest writes "2.88 at 41 %".
func (p *page) steepest(mechanism, curve string) string {
	q := p.rows[key{mechanism, curve, "hill", "n_H_max"}]
	if q == nil || !finite(float64(q.Value)) {
		return "–"
	}
	v, _, _ := rowFigures(q)
	at := p.rows[key{mechanism, curve, "position", "n_H_max_at"}]
	if at == nil || !finite(float64(at.Value)) {
		return v + " at an end"
	}
	return v + " at " + strconv.FormatFloat(100*float64(at.Value), 'f', 0, 64) + " %"
}

// hillReading writes what a Hill fit of these data would say, and the number
// of its caution.
func (p *page) hillReading(mechanism, curve string) string {
	q := p.rows[key{mechanism, curve, "hill", "n_H_hill_reading"}]
	if q == nil || !finite(float64(q.Value)) {
		return "–"
	}
	v, _, _ := rowFigures(q)
	return strings.TrimRight(v+"  "+p.marks(q), " ")
}

// stacked writes values with their intervals so that the intervals begin in
// one column: "5.44   (5.38 to 5.50)". A missing row is an empty cell.
func stacked(rows []*saturation.QuantityRow) []string {
	values, intervals := make([]string, len(rows)), make([]string, len(rows))
	widest := 0
	for i, q := range rows {
		if q == nil {
			continue
		}
		v, lo, hi := rowFigures(q)
		values[i] = v
		if v == "" {
			values[i] = "does not exist"
			continue
		}
		intervals[i] = intervalWords(lo, hi)
		widest = max(widest, width(v))
	}
	cells := make([]string, len(rows))
	for i := range rows {
		cells[i] = values[i]
		if intervals[i] != "" {
			cells[i] = pad(values[i], widest) + "  " + intervals[i]
		}
	}
	return cells
}

// intervalWords writes "(5.38 to 5.50)", or what there is of it.
func intervalWords(low, high string) string {
	switch {
	case low == "" && high == "":
		return ""
	case low == "":
		return "(up to " + high + ")"
	case high == "":
		return "(" + low + " and beyond)"
	}
	return "(" + low + " to " + high + ")"
}
