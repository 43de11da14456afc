package report

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"

	"gonum.org/v1/gonum/stat/distuv"

	"ligancy/cmd/ligancy/internal/figure"
	"ligancy/fit/saturation"
)

// strips draws how firmly the leader's constants are held; nil without any
// constant that has an interval.
func (v *view) strips() figure.Figure {
	f := &figure.Strips{Name: "How firmly each constant is held"}
	at := map[string]int{}
	var told []string
	rows := v.constantRows()
	for _, q := range rows {
		s, ok := v.strip(q)
		if !ok {
			continue
		}
		if len(f.Rows) == mostConstants {
			f.Remark = fmt.Sprintf("and %d more: quantities.csv", len(rows)-mostConstants)
			break
		}
		at[v.d.stripKey(q)] = len(f.Rows)
		f.Rows = append(f.Rows, s)
		told = append(told, s.Label.Plain()+" "+s.Value)
	}
	if len(f.Rows) == 0 {
		return nil
	}
	for _, c := range v.d.Correlations {
		a, okA := at[c.A]
		b, okB := at[c.B]
		if c.Mechanism == v.leader && okA && okB && a != b && math.Abs(float64(c.R)) >= tied {
			f.Ties = append(f.Ties, figure.Tie{A: a, B: b,
				Text: fmt.Sprintf("%s and %s move together, r = %s", printable(c.A), printable(c.B), minus(correlation(float64(c.R))))})
		}
	}
	f.Description = strings.Join(told, "; ")
	if len(v.d.Profiles) > 0 && f.Remark == "" {
		f.Remark = "The ridge is the profile of the likelihood, 1 at the best value."
	}
	return f
}

// stripKey is the name by which correlations call a fitted constant.
func (d *Document) stripKey(q *saturation.QuantityRow) string {
	if q.Curve == "all" || q.Curve == "" {
		return d.constantName(q)
	}
	return d.constantName(q) + ", " + q.Curve
}

// strip is one constant, if it has a place on an axis of factors.
func (v *view) strip(q *saturation.QuantityRow) (figure.Strip, bool) {
	value, low, high := float64(q.Value), float64(q.Low), float64(q.High)
	if q.Held == "fixed" || !(value > 0) || !finite(value) || q.Interval == "none" || q.Of == "contrast" && strings.Contains(q.Curve, " − ") {
		return figure.Strip{}, false
	}
	s := figure.Strip{Label: v.quantity(q), Low: 0, High: math.Inf(1), Ink: figure.Text}
	if lines := v.lines[v.leader]; len(lines) <= figure.Colours {
		for i, c := range lines {
			if c.name == q.Curve && len(lines) > 1 {
				s.Ink = figure.CurveInk(i)
			}
		}
	}
	if low > 0 {
		s.Low = low / value
	}
	if finite(high) {
		s.High = high / value
	}
	s.Ridge = v.ridge(q)
	text, _, _ := rowFigures(q)
	s.Value = strings.TrimSpace(minus(text) + " " + printable(unitWord(q.Unit)))
	if h := held(q); h != "" {
		s.Value += ", " + h
	}
	return s, true
}

// ridge is the profile of a constant as a ridge over its best value: at each
// end of an interval the relative likelihood exp(−z²/2), z the normal quantile
// of the interval's level. Nothing where no profile was sampled.
func (v *view) ridge(q *saturation.QuantityRow) []figure.XY {
	value := float64(q.Value)
	same := func(a, b *string) bool { return a == b || a != nil && b != nil && *a == *b }
	height := func(level float64) float64 {
		z := distuv.UnitNormal.Quantile(0.5 + level/2)
		return math.Exp(-z * z / 2)
	}
	var out []figure.XY
	for i := range v.d.Profiles {
		r := &v.d.Profiles[i]
		if q.Of == "constant" && r.Mechanism == q.Mechanism && r.Curve == q.Curve && r.Name == q.Name && same(r.Ligand, q.Ligand) && same(r.Site, q.Site) && r.Value > 0 {
			out = append(out, figure.XY{X: float64(r.Value) / value, Y: height(float64(r.Level))})
		}
	}
	if len(out) == 0 {
		return nil
	}
	out = append(out, figure.XY{X: 1, Y: 1})
	for _, end := range []saturation.Real{q.Low, q.High} {
		if q.Interval == "profile" && end > 0 && finite(float64(end)) {
			out = append(out, figure.XY{X: float64(end) / value, Y: height(float64(q.Level))})
		}
	}
	slices.SortFunc(out, func(a, b figure.XY) int { return cmp.Compare(a.X, b.X) })
	return out
}

// quantity is a constant's symbol with the levels it holds for.
func (v *view) quantity(q *saturation.QuantityRow) figure.Label {
	l := figure.Symbol(printable(v.d.constantName(q)))
	switch {
	case q.Curve == "all" || q.Curve == "":
		return l
	case q.Of == "contrast":
		return l.And(figure.Words(figure.Serif, ", "+printable(shortContrast(q.Curve))))
	}
	return l.And(figure.Words(figure.Serif, ", "+printable(q.Curve)))
}

// constantRows are the leader's constants, fitted ends, combinations and ratios.
func (v *view) constantRows() []*saturation.QuantityRow {
	p := &page{d: v.d}
	return p.constantRows(v.leader)
}

// constantTable lists the constants with their intervals.
func (v *view) constantTable() *table {
	rows := v.constantRows()
	if len(rows) == 0 {
		return nil
	}
	t := &table{Caption: "Constants of " + v.basis(), Head: []string{"", "value", "unit", "from", "to", "held within", "by bootstrap"}}
	for _, q := range rows[:min(len(rows), mostConstants)] {
		t.Rows = append(t.Rows, v.constantCells(q))
	}
	if n := len(rows) - mostConstants; n > 0 {
		t.Foot = fmt.Sprintf("and %d more: quantities.csv", n)
	}
	return t.dropEmpty()
}

func (v *view) constantCells(q *saturation.QuantityRow) []entry {
	name := v.d.constantName(q)
	switch {
	case q.Curve == "all" || q.Curve == "":
	case q.Of == "contrast":
		name += ", " + shortContrast(q.Curve)
	default:
		name += ", " + q.Curve
	}
	p := &page{d: v.d}
	c := p.constantCells(q)
	head := entry{Text: printable(name), Head: true, Quantity: true}
	value := entry{Text: minus(c[1]), Marks: v.marks(q), Number: true}
	if text, lo, hi := rowFigures(q); text != "" {
		value.Say = v.saying(q, text, lo, hi)
	}
	row := []entry{head, value, {Text: c[2]}, {Text: minus(c[3]), Number: true}, {Text: minus(c[4]), Number: true}, {Text: minus(c[5])}}
	if b := v.bootstrapped(q); b != nil {
		_, lo, hi := rowFigures(b)
		row = append(row, entry{Text: strings.Trim(minus(intervalWords(lo, hi)), "()")})
	}
	return row
}

// bootstrapped is the row of the same number with an interval by bootstrap.
func (v *view) bootstrapped(q *saturation.QuantityRow) *saturation.QuantityRow {
	if q.Interval == "bootstrap" {
		return nil
	}
	same := func(a, b *string) bool { return a == b || a != nil && b != nil && *a == *b }
	for _, b := range v.boots[key{q.Mechanism, q.Curve, q.Of, q.Name}] {
		if same(b.Ligand, q.Ligand) && same(b.Site, q.Site) {
			return b
		}
	}
	return nil
}

// energyOf writes the interaction energy of a curve, with its interval.
func (v *view) energyOf(curve string) string {
	q := v.rows[key{v.leader, curve, "energy", "dG_interaction"}]
	if q == nil || !finite(float64(q.Value)) {
		return ""
	}
	value, _, _ := rowFigures(q)
	return minus(value) + " " + q.Unit
}

// hillPlot is the classical picture of the leader's curves; nil where there
// are none, or too many for colours.
func (v *view) hillPlot() figure.Figure {
	lines := v.lines[v.leader]
	if len(lines) == 0 {
		return nil
	}
	f := &figure.HillPlot{Ligand: v.axis, Marks: max(1, min(len(v.preps), figure.Shapes))}
	short := v.shortCurves(all(min(len(lines), figure.Colours)))
	for i, c := range lines[:min(len(lines), figure.Colours)] {
		logits := make([]float64, len(c.x))
		for k, s := range c.saturation {
			logits[k] = math.Log10(s / (1 - s))
		}
		from, to := v.testedOn(i)
		f.Lines = append(f.Lines, figure.HillLine{Name: printable(curveLabel(c.name)), Short: short[i], At: c.xy(logits), From: from, To: to,
			Half: v.value(c.name, "position", "x_half"), First: v.value(c.name, "position", "x_first"),
			Last: v.value(c.name, "position", "x_last"), Distance: v.energyOf(c.name)})
	}
	beyond := 0
	for _, g := range v.groups() {
		scaled := &responseGroup{sets: g.sets, scaled: true}
		for _, p := range v.points(scaled, all(len(f.Lines))) {
			if !p.LeftOut && !(p.Y > 0 && p.Y < 1) {
				beyond++
			}
			f.Points = append(f.Points, p)
		}
	}
	if len(f.Points) > mostMarks {
		f.Points = nil
	}
	switch {
	case beyond == 1:
		f.Remark = "1 point at or beyond 0 or 1 has no place here"
	case beyond > 1:
		f.Remark = fmt.Sprintf("%d points at or beyond 0 or 1 have no place here", beyond)
	}
	f.Name = "Hill plot of the fitted curves, for display only, not fitted"
	f.Description = "log of the ratio of filled to empty sites against the logarithm of the ligand, with both asymptotes of slope 1."
	return f
}

// populations draws which states are filled; nil where the mechanism has none.
func (v *view) populations() figure.Figure {
	f := &figure.Populations{Ligand: v.axis}
	f.Name = "Shares of the states of " + printable(v.leader)
	names := make([]string, 0, 8)
	for _, c := range v.lines[v.leader] {
		names = append(names, c.name)
	}
	index, states := map[string]int{}, map[[2]string]int{}
	for i := range v.d.Populations {
		r := &v.d.Populations[i]
		if r.Mechanism != v.leader {
			continue
		}
		k, ok := index[r.Curve]
		if !ok {
			if len(f.Fields) == mostPanels/2 {
				f.Remark = "more curves: populations.csv"
				continue
			}
			k = len(f.Fields)
			index[r.Curve] = k
			line := slices.Index(names, r.Curve)
			field := figure.Population{Name: printable(curveLabel(r.Curve)), Curve: line}
			if line >= 0 {
				field.From, field.To = v.testedOn(line)
			}
			if len(names) <= figure.Colours && line >= 0 {
				field.Ink = line
			}
			f.Fields = append(f.Fields, field)
		}
		s, ok := states[[2]string{r.Curve, r.State}]
		if !ok {
			s = len(f.Fields[k].States)
			states[[2]string{r.Curve, r.State}] = s
			f.Fields[k].States = append(f.Fields[k].States, figure.State{Name: printable(r.State)})
		}
		st := &f.Fields[k].States[s]
		st.At = append(st.At, figure.XY{X: float64(r.X), Y: float64(r.Share)})
	}
	if len(f.Fields) == 0 {
		return nil
	}
	if f.Remark == "" {
		f.Remark = "States that never reach 2 % are left out."
	}
	f.Description = "populations.csv holds the same numbers."
	return f
}
