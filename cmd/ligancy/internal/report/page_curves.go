package report

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"ligancy/cmd/ligancy/internal/figure"
	"ligancy/fit/saturation"
)

// responseGroup is the data sets that share one response axis.
type responseGroup struct {
	sets   []*saturation.Dataset
	scaled bool // drawn as saturation, because the response's ends differ along a curve
}

// groups parts the data sets by what they measured.
func (v *view) groups() []*responseGroup {
	if v.parted == nil {
		v.parted = v.part()
	}
	return v.parted
}

func (v *view) part() []*responseGroup {
	all := []*responseGroup{}
	for i := range v.d.analysis.Data {
		set := &v.d.analysis.Data[i]
		at := slices.IndexFunc(all, func(g *responseGroup) bool {
			a, b := &g.sets[0].Response, &set.Response
			return a.Kind == b.Kind && a.Unit == b.Unit && a.Percent == b.Percent && a.Of == b.Of
		})
		if at < 0 {
			at, all = len(all), append(all, &responseGroup{})
		}
		all[at].sets = append(all[at].sets, set)
	}
	for _, g := range all {
		g.scaled = v.mustScale(g)
	}
	return all
}

// mustScale says whether one response curve cannot be drawn through the
// group's points: the ends differ between them, or the sampled response is
// another data set's.
func (v *view) mustScale(g *responseGroup) bool {
	size, off := 0.0, 0.0
	for _, r := range v.measured[v.leader] {
		if !g.has(r.Data) || !finite(float64(r.Fitted)) || r.blocked {
			continue
		}
		size = max(size, math.Abs(float64(r.Fitted)))
		if r.line < 0 || !(r.free > 0) || !finite(r.free) {
			continue
		}
		c := v.lines[v.leader][r.line]
		if r.free < c.x[0] || r.free > c.x[len(c.x)-1] {
			continue
		}
		y := c.at(c.response, r.free)
		if !finite(y) {
			return true
		}
		off = max(off, math.Abs(y-float64(r.Fitted)))
	}
	return off > 0.02*size
}

func (g *responseGroup) has(data string) bool {
	return slices.ContainsFunc(g.sets, func(s *saturation.Dataset) bool { return s.Name == data })
}

// title of the group's response axis.
func (g *responseGroup) title() string {
	if !g.scaled {
		return responseTitle(g.sets[0])
	}
	switch g.sets[0].Response.Kind {
	case "velocity":
		return "share of the limiting rate of its preparation"
	case "bound":
		return "share of its own maximal specific binding"
	}
	return "share of its own span"
}

// values are what the group's axis shows of a curve.
func (g *responseGroup) values(c *curveLine) []float64 {
	if g.scaled {
		return c.saturation
	}
	return c.response
}

// curvesFigures are the figures of the points and the curves: one a response,
// and small multiples where colours cannot tell the curves apart.
func (v *view) curvesFigures() []figure.Figure {
	var out []figure.Figure
	for _, g := range v.groups() {
		lines := v.linesOf(g)
		if len(lines) <= figure.Colours {
			if len(lines) > 0 || len(v.lines[v.leader]) == 0 {
				out = append(out, v.curves(g, lines))
			}
			continue
		}
		m := &figure.Multiples{Name: "Points and curves, one field a curve"}
		for _, i := range lines[:min(len(lines), mostFields)] {
			c := v.curves(g, []int{i})
			c.Spare()
			m.Fields = append(m.Fields, c)
		}
		if n := len(lines) - mostFields; n > 0 {
			m.Remark = fmt.Sprintf("and %d more curves: points.csv, curves.csv", n)
		}
		out = append(out, m)
	}
	return out
}

// linesOf lists the leader's curves on which a group has points, or all where
// there are no points.
func (v *view) linesOf(g *responseGroup) []int {
	seen := make([]bool, len(v.lines[v.leader]))
	for _, r := range v.measured[v.leader] {
		if r.line >= 0 && g.has(r.Data) {
			seen[r.line] = true
		}
	}
	var out []int
	for i, s := range seen {
		if s || len(v.measured[v.leader]) == 0 {
			out = append(out, i)
		}
	}
	return out
}

// curves is the figure of some of the leader's curves.
func (v *view) curves(g *responseGroup, lines []int) *figure.Curves {
	c := &figure.Curves{
		Ligand: v.axis, Response: figure.Words(figure.SerifItalic, printable(g.title())), Rulers: true, Places: lines,
		Leader: words(v.leader), Preparations: printables(v.preps),
	}
	kind := g.sets[0].Response
	c.Fraction = g.scaled || kind.Kind == "saturation" && !kind.Percent
	c.Percent = !g.scaled && kind.Kind == "saturation" && kind.Percent
	names := make([]string, 0, len(lines))
	for _, i := range lines {
		names = append(names, v.lines[v.leader][i].name)
	}
	short := v.shortCurves(lines)
	for k, i := range lines {
		c.Lines = append(c.Lines, v.line(g, i, short[k]))
	}
	c.Rivals = v.rivalLines(g, lines)
	c.Points = v.points(g, lines)
	c.Dense = len(c.Points) > mostMarks
	c.Residuals = slices.ContainsFunc(c.Points, func(p figure.Point) bool { return finite(p.Residual) })
	c.Name, c.Description = v.describeCurves(g, c, names)
	return c
}

func printables(all []string) []string {
	out := make([]string, len(all))
	for i, s := range all {
		out[i] = printable(s)
	}
	return out
}

// line is one curve of the leader, ready to draw.
func (v *view) line(g *responseGroup, i int, short string) figure.Line {
	c := v.lines[v.leader][i]
	l := figure.Line{Name: printable(curveLabel(c.name)), Short: short,
		At: c.xy(g.values(c)), Ruler: v.reach(c.name)}
	if g.scaled || g.sets[0].Response.Kind == "saturation" && !g.sets[0].Response.Percent {
		l.Low, l.High = c.xy(c.low), c.xy(c.high)
	}
	l.From, l.To = v.testedOn(i)
	return l
}

// testedOn is the range of ligand tested on one of the leader's curves; zeros
// where nothing was.
func (v *view) testedOn(line int) (from, to float64) {
	for _, r := range v.measured[v.leader] {
		if r.LeftOut == nil && r.free > 0 && r.line == line {
			if from == 0 || r.free < from {
				from = r.free
			}
			to = max(to, r.free)
		}
	}
	return from, to
}

// rivalLines are the curves of the other mechanisms that run through the same
// points as some of the leader's curves.
func (v *view) rivalLines(g *responseGroup, lines []int) []figure.Rival {
	var out []figure.Rival
	for _, r := range v.rivalFrames(lines) {
		for i, c := range r.curves {
			r.Lines = append(r.Lines, c.xy(v.overlaid(g, r.mechanism, r.places[i])))
		}
		out = append(out, r.Rival)
	}
	return out
}

// overlaid is a mechanism's curve on the group's axis. Where points are drawn
// as the leader reads them, the curve of a rival, whose ends of the response
// are its own, is put on the leader's scale: the mean over its points of
// [low + span·s + slope·x]_rival as the leader reads it.
func (v *view) overlaid(g *responseGroup, mechanism string, line int) []float64 {
	c := v.lines[mechanism][line]
	if !g.scaled || mechanism == v.leader {
		return g.values(c)
	}
	k := overlay{g, mechanism, line}
	if v.overlays[k] == nil {
		v.overlays[k] = v.overlay(g, mechanism, line)
	}
	return v.overlays[k]
}

// overlay is one curve of a rival on one axis.
type overlay struct {
	group     *responseGroup
	mechanism string
	line      int
}

func (v *view) overlay(g *responseGroup, mechanism string, line int) []float64 {
	own := map[pointOf]ends{}
	for _, r := range v.measured[v.leader] {
		own[pointOf{r.Data, r.Row}] = r.ends
	}
	var low, span, slope, n float64
	for _, r := range v.measured[mechanism] {
		if l := own[pointOf{r.Data, r.Row}]; r.line == line && r.LeftOut == nil && !r.blocked && l.span != 0 && g.has(r.Data) {
			low += (r.ends.low - l.low) / l.span
			span += r.ends.span / l.span
			slope += (r.ends.slope - l.slope) / l.span
			n++
		}
	}
	c := v.lines[mechanism][line]
	out := make([]float64, len(c.x))
	for i := range out {
		out[i] = (low + span*c.saturation[i] + slope*c.x[i]) / n
	}
	return out
}

// through says which curves of a mechanism run through points of some of the
// leader's curves.
func (v *view) through(mechanism string, lines []int) []bool {
	out := make([]bool, len(v.lines[mechanism]))
	if len(lines) == len(v.lines[v.leader]) {
		for i := range out {
			out[i] = true
		}
		return out
	}
	for pair := range v.crossings(mechanism) {
		if slices.Contains(lines, pair[0]) {
			out[pair[1]] = true
		}
	}
	return out
}

// pointOf finds one measurement, whatever the mechanism beside it.
type pointOf struct {
	data string
	row  int
}

// crossings are the pairs of a leader's curve and a mechanism's curve that
// share a measurement.
func (v *view) crossings(mechanism string) map[[2]int]bool {
	if pairs, ok := v.crossed[mechanism]; ok {
		return pairs
	}
	own := make(map[pointOf]int, len(v.measured[v.leader]))
	for _, r := range v.measured[v.leader] {
		if r.line >= 0 {
			own[pointOf{r.Data, r.Row}] = r.line
		}
	}
	pairs := map[[2]int]bool{}
	for _, r := range v.measured[mechanism] {
		if line, ok := own[pointOf{r.Data, r.Row}]; ok && r.line >= 0 {
			pairs[[2]int{line, r.line}] = true
		}
	}
	v.crossed[mechanism] = pairs
	return pairs
}

// points are the measurements of a group on some of the leader's curves.
func (v *view) points(g *responseGroup, lines []int) []figure.Point {
	var out []figure.Point
	for _, r := range v.measured[v.leader] {
		line := slices.Index(lines, r.line)
		if line < 0 || !g.has(r.Data) || g.scaled && r.blocked {
			continue
		}
		p := figure.Point{Line: line, Preparation: -1, X: r.free, Y: r.drawn(g),
			Residual: float64(r.Residual), LeftOut: r.LeftOut != nil, Blocked: r.blocked}
		if p.LeftOut {
			p.X = float64(r.X)
		}
		if r.Preparation != nil && len(v.preps) <= figure.Shapes {
			p.Preparation = slices.Index(v.preps, *r.Preparation)
		}
		out = append(out, p)
	}
	return out
}

// drawn is a measurement on the group's axis: itself, or the saturation that
// the mechanism reads in it.
func (r *reading) drawn(g *responseGroup) float64 {
	if !g.scaled {
		return float64(r.Y)
	}
	return (float64(r.Y) - r.ends.low - r.ends.slope*r.free) / r.ends.span
}

// describeCurves says in words what the figure shows.
func (v *view) describeCurves(g *responseGroup, c *figure.Curves, names []string) (name, text string) {
	name = "Points and curves: " + printable(g.title()) + " against " + printable(v.d.ligandTitle())
	var b strings.Builder
	for i, l := range c.Lines {
		if q := v.rows[key{v.leader, names[i], "position", "x_half"}]; q != nil && finite(float64(q.Value)) {
			value, _, _ := rowFigures(q)
			fmt.Fprintf(&b, "%s: half saturation at %s %s. ", l.Name, value, printable(unitWord(q.Unit)))
		}
	}
	if from, to := span(v.axis.Tested); from <= to {
		fmt.Fprintf(&b, "Tested from %s to %s %s. ", axisNumber(roundTo(math.Pow(10, from), 3)), axisNumber(roundTo(math.Pow(10, to), 3)), printable(unitWord(v.d.analysis.Ligand.Unit)))
	}
	b.WriteString("The table below the figure holds the same numbers.")
	return name, b.String()
}

// roundTo keeps so many significant digits.
func roundTo(x float64, digits int) float64 {
	if x == 0 || !finite(x) {
		return x
	}
	scale := math.Pow(10, float64(digits-1)-math.Floor(math.Log10(math.Abs(x))))
	return math.Round(x*scale) / scale
}
