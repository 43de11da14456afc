package report

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"ligancy/cmd/ligancy/internal/figure"
	"ligancy/fit/saturation"
)

// slopeFigure is n_H along the leader's curves, or nil where there are none.
// More curves than colours go into small multiples.
func (v *view) slopeFigure() figure.Figure {
	lines := v.lines[v.leader]
	if len(lines) == 0 {
		return nil
	}
	if len(lines) <= figure.Colours {
		return v.slopes(all(len(lines)))
	}
	m := &figure.Multiples{Name: "Steepness along each curve"}
	for i := range lines[:min(len(lines), mostFields)] {
		f := v.slopes([]int{i})
		f.Spare()
		m.Fields = append(m.Fields, f)
	}
	if n := len(lines) - mostFields; n > 0 {
		m.Remark = fmt.Sprintf("and %d more curves: curves.csv", n)
	}
	return m
}

// all lists 0 … n−1.
func all(n int) []int {
	out := make([]int, n)
	for i := range out {
		out[i] = i
	}
	return out
}

func (v *view) slopes(lines []int) *figure.Slope {
	f := &figure.Slope{Ligand: v.axis, Leader: words(v.leader), Places: lines}
	var told []string
	short := v.shortCurves(lines)
	for k, i := range lines {
		c := v.lines[v.leader][i]
		from, to := v.testedOn(i)
		l := figure.SlopeLine{Name: printable(curveLabel(c.name)), Short: short[k], At: c.xy(c.slope), From: from, To: to,
			Half: figure.XY{X: math.NaN(), Y: math.NaN()}, HillFit: math.NaN()}
		l.Max = l.Half
		l.Low, l.High = c.xy(c.slopeLow), c.xy(c.slopeTop)
		if x, n := v.value(c.name, "position", "x_half"), v.value(c.name, "hill", "n_H_half"); finite(x) && finite(n) {
			l.Half = figure.XY{X: x, Y: n}
		}
		if n, at := v.value(c.name, "hill", "n_H_max"), v.value(c.name, "position", "n_H_max_at"); finite(n) && finite(at) {
			l.Max = figure.XY{X: c.where(at), Y: n}
		}
		if m := v.d.mechanism(v.leader); m == nil || m.Family != "hill" {
			l.HillFit = v.value(c.name, "hill", "n_H_hill_reading")
		}
		f.Lines = append(f.Lines, l)
		if q := v.rows[key{v.leader, c.name, "hill", "n_H_half"}]; q != nil && finite(float64(q.Value)) {
			n, _, _ := rowFigures(q)
			told = append(told, l.Name+": "+n)
		}
	}
	for _, r := range v.rivalFrames(lines) {
		for _, c := range r.curves {
			r.Lines = append(r.Lines, c.xy(c.slope))
		}
		f.Rivals = append(f.Rivals, r.Rival)
	}
	f.Name = "Hill coefficient along each curve against " + printable(v.d.ligandTitle())
	f.Description = "n_H at half saturation, " + strings.Join(told, "; ") + "."
	if len(told) == 0 {
		f.Description = "n_H at half saturation does not exist here."
	}
	return f
}

// shortCurves are the names of some of the leader's curves without what all
// of them share in front.
func (v *view) shortCurves(lines []int) []string {
	names := make([]string, len(lines))
	for k, i := range lines {
		names[k] = v.lines[v.leader][i].name
	}
	short := shortNames(names)
	for k := range short {
		short[k] = printable(curveLabel(short[k]))
	}
	return short
}

// value of one quantity of the leader; NaN where there is none.
func (v *view) value(curve, of, name string) float64 {
	if q := v.rows[key{v.leader, curve, of, name}]; q != nil {
		return float64(q.Value)
	}
	return math.NaN()
}

// where is the ligand at which the curve reaches a saturation.
func (c *curveLine) where(saturation float64) float64 {
	for i := 1; i < len(c.x); i++ {
		if a, b := c.saturation[i-1]-saturation, c.saturation[i]-saturation; a <= 0 && b >= 0 && a != b {
			return c.x[i-1] * math.Pow(c.x[i]/c.x[i-1], a/(a-b))
		}
	}
	return math.NaN()
}

// rivalFrame is a rival with its curves through some of the leader's points.
type rivalFrame struct {
	figure.Rival
	mechanism string
	curves    []*curveLine
	places    []int // of the curves among the rival's
}

// rivalFrames are the other mechanisms beside some of the leader's curves, each
// with the dash it has in every figure.
func (v *view) rivalFrames(lines []int) []rivalFrame {
	var out []rivalFrame
	first := v.rival()
	dash := 0
	for _, m := range v.rivals() {
		r := rivalFrame{mechanism: m.Name, Rival: figure.Rival{Name: printable(m.Name), ID: v.mechanismID(m.Name), Shown: m.Name == first}}
		if !r.Shown {
			dash++
			r.Dash = dash
		}
		through := v.through(m.Name, lines)
		for i, c := range v.lines[m.Name] {
			if through[i] {
				r.curves, r.places = append(r.curves, c), append(r.places, i)
			}
		}
		out = append(out, r)
	}
	return out
}

// slopeTable is the table of where each curve lies and every Hill coefficient
// that carries a name of its own.
func (v *view) slopeTable() *table {
	curves := v.d.curvesOf(v.leader)
	if len(curves) == 0 {
		return nil
	}
	t := &table{Caption: "Hill coefficients by name: " + v.basis(), Class: "stacked"}
	t.Head = []string{"", v.halfTitle(), "n_H at half saturation", "steepest", "from 10–90 %", "from 1–99 %", "a Hill fit would say"}
	names := []string{"n_H_half", "n_H_max", "n_H_10_90", "n_H_1_99", "n_H_hill_reading"}
	for _, c := range curves[:min(len(curves), mostPanels)] {
		row := []entry{{Text: printable(curveLabel(c)), Head: true}, v.number(v.rows[key{v.leader, c, "position", "x_half"}])}
		for _, n := range names {
			q := v.rows[key{v.leader, c, "hill", n}]
			k := v.number(q)
			if n == "n_H_max" && k.Text != "" && k.Text != "–" {
				k.After = " at an end"
				if at := v.value(c, "position", "n_H_max_at"); finite(at) {
					k.After = fmt.Sprintf(" at %.0f %%", 100*at)
				}
			}
			row = append(row, k)
		}
		t.Rows = append(t.Rows, row)
	}
	if n := len(curves) - mostPanels; n > 0 {
		t.Foot = fmt.Sprintf("and %d more curves: quantities.csv", n)
	}
	return t.dropEmpty()
}

// contrastTable is what the study asked to compare between curves.
func (v *view) contrastTable() *table {
	t := &table{Caption: "Between curves", Head: []string{"", "", "value"}}
	for _, q := range v.d.numbers(v.leader) {
		if q.Of != "contrast" || !slices.Contains(contrastsOfSlope, q.Name) || len(t.Rows) == mostPanels {
			continue
		}
		name := map[string]string{"x_half": "half saturation, ratio", "n_H_half": "n_H at half saturation, difference", "Bohr_coefficient": "Bohr coefficient"}[q.Name]
		t.Rows = append(t.Rows, []entry{{Text: name, Head: true}, {Text: printable(shortContrast(q.Curve))}, v.number(q)})
	}
	if len(t.Rows) == 0 {
		return nil
	}
	return t
}

// halfTitle heads a column of half saturations: "p50 / torr".
func (v *view) halfTitle() string {
	half := v.d.halfSymbol()
	if unit := v.d.analysis.Ligand.Unit; unit != "" && unit != "1" {
		half += " / " + printable(unitAfterSolidus(unit))
	}
	return half
}

// basis says which mechanism numbers come from and how their intervals were made.
func (v *view) basis() string {
	for _, q := range v.d.numbers(v.leader) {
		if q.Interval != "" && q.Interval != "none" && finite(float64(q.Level)) {
			return fmt.Sprintf("%s; %s %% %s intervals", printable(v.leader), percent(float64(q.Level)), q.Interval)
		}
	}
	return printable(v.leader)
}

// number is a value with its interval; pointing at it says what it is.
func (v *view) number(q *saturation.QuantityRow) entry {
	if q == nil {
		return entry{}
	}
	value, lo, hi := rowFigures(q)
	if value == "" {
		c := entry{Text: "–"}
		if q.Why != nil {
			c.Say = v.naming(q) + " does not exist here: " + printable(sentence(*q.Why))
		}
		return c
	}
	c := entry{Text: minus(value), After: ""}
	if interval := intervalWords(lo, hi); interval != "" {
		c.Interval = minus(interval)
	}
	c.Marks = v.marks(q)
	c.Say = v.saying(q, value, lo, hi)
	return c
}

// marks are the numbers of the cautions on a value.
func (v *view) marks(q *saturation.QuantityRow) []int {
	var out []int
	for i, c := range v.cautions[:min(len(v.cautions), mostCautions)] {
		if c.about != nil && c.about(q) {
			out = append(out, i+1)
		}
	}
	return out
}

// naming is what a number is called in full.
func (v *view) naming(q *saturation.QuantityRow) string {
	name := definitions[q.Name].name
	if name == "" {
		name = v.d.constantName(q)
	}
	if q.Curve != "all" && q.Curve != "" {
		name += ", " + q.Curve
	}
	return printable(name)
}

// saying is what pointing at a number says: its name, interval, definition and
// its row among the quantities.
func (v *view) saying(q *saturation.QuantityRow, value, lo, hi string) string {
	s := v.naming(q) + ": " + strings.TrimSpace(minus(value)+" "+unitWord(q.Unit))
	if interval := intervalWords(lo, hi); interval != "" && finite(float64(q.Level)) {
		s += fmt.Sprintf(" %s, %s %% %s interval", minus(interval), percent(float64(q.Level)), q.Interval)
	}
	if d := definitions[q.Name].formula; d != "" {
		s += "; " + d
	}
	return s + fmt.Sprintf("; row %d of quantities.csv", v.place[q])
}

// definition is a number's name in words and what it is.
type definition struct{ name, formula string }

// definitions of the numbers that every mechanism has.
var definitions = map[string]definition{
	"x_half":           {"half saturation", "the ligand at which half of the sites are filled"},
	"n_H_half":         {"n_H at half saturation", "the slope of ln[Y/(1−Y)] against ln x where half of the sites are filled"},
	"n_H_max":          {"steepest n_H", "the largest slope of ln[Y/(1−Y)] against ln x"},
	"n_H_10_90":        {"n_H from the 10–90 % ratio", "log 81 over log(x_90/x_10)"},
	"n_H_1_99":         {"n_H from the 1–99 % span", "2 log 99 over log(x_99/x_01)"},
	"n_H_hill_reading": {"what a Hill fit would say", "the exponent of the Hill equation closest to this curve at the concentrations and weights of these data"},
	"dG_interaction":   {"interaction energy", "−RT ln of the last intrinsic association constant over the first"},
	"Bohr_coefficient": {"Bohr coefficient", "the change of log x_half with pH"},
	"x_median":         {"median ligand activity", "the ligand at which the areas under and over the curve balance"},
	"x_first":          {"first asymptote of the Hill plot", "the intrinsic dissociation constant of the first ligand"},
	"x_last":           {"last asymptote of the Hill plot", "the intrinsic dissociation constant of the last ligand"},
}

// minus turns the sign of negative numbers into a minus, also within a text of numbers.
func minus(s string) string {
	var b strings.Builder
	for i, r := range s {
		if r == '-' && (i == 0 || strings.ContainsRune(" (e", rune(s[i-1]))) && i+1 < len(s) && s[i+1] >= '0' && s[i+1] <= '9' {
			b.WriteString("−")
			continue
		}
		b.WriteRune(r)
	}
	return b.String()
}
