package figure

import (
	"math"
	"strconv"
	"strings"
)

// panel is one field of a figure: a ligand axis below, a linear axis at its left.
type panel struct {
	d           *Drawing
	s           Style
	top, bottom float64
	x           logAxis
	y           linear
	ligand      Ligand
}

// hatch fills the field beyond the tested range.
func (p *panel) hatch() {
	from, to, ok := p.ligand.tested()
	if !ok {
		p.d.hatch(p.x.x0, p.top, p.x.x1, p.bottom)
		return
	}
	if a := p.x.at(from); a > p.x.x0+1 {
		p.d.hatch(p.x.x0, p.top, min(a, p.x.x1), p.bottom)
	}
	if b := p.x.at(to); b < p.x.x1-1 {
		p.d.hatch(max(b, p.x.x0), p.top, p.x.x1, p.bottom)
	}
}

// hatch fills a rectangle with thin lines rising to the right.
func (d *Drawing) hatch(x0, y0, x1, y1 float64) {
	const step = 6
	h := y1 - y0
	var p Path
	// Lines x + y = c keep one phase over the whole drawing, so that fields
	// above one another match.
	for c := math.Ceil((x0+y0)/step) * step; c < x1+y1; c += step {
		ax, ay := x0, c-x0
		if ay > y1 {
			ax, ay = c-y1, y1
		}
		bx, by := x1, c-x1
		if by < y0 {
			bx, by = c-y0, y0
		}
		if bx > ax && h > 0 {
			p.MoveTo(ax, ay)
			p.LineTo(bx, by)
		}
	}
	d.add(&stroke{path: p, ink: Hatch, width: 0.8})
}

// yAxis draws hairlines with their numbers, and the title above the field, level.
func (p *panel) yAxis(at []float64, title Label) { p.yAxisAt(0, at, title) }

// yAxisAt is yAxis with the title beginning at a place.
func (p *panel) yAxisAt(x float64, at []float64, title Label) {
	labels := tickLabels(at)
	left := p.x.left()
	for i, v := range at {
		y := p.y.at(v)
		p.d.line(left, y, p.x.x1, y, Hair, 1)
		p.d.text(left-0.6*p.s.Size, y+0.36*p.s.Size, End, p.s.Size, Text, labels[i])
	}
	p.d.text(x, p.top-0.85*p.s.Size, Start, p.s.title(), Text, title)
}

// xAxis draws the axis: a line under the tested range alone, a tick at every
// concentration used, round numbers with hair ticks, and the title.
func (p *panel) xAxis(title bool) (below float64) {
	base := p.bottom + 0.6*p.s.Size
	from, to, ok := p.ligand.tested()
	if ok {
		p.d.line(p.x.at(from), base, p.x.at(to), base, Text, 1.4)
	}
	var ticks, hairs Path
	for _, x := range p.ligand.Tested {
		if at := p.x.at(x); p.x.inside(x) {
			ticks.MoveTo(at, base)
			ticks.LineTo(at, base+0.42*p.s.Size)
		}
	}
	numbers := base + 1.62*p.s.Size
	for _, v := range p.x.numbers(p.s.Size) {
		hairs.MoveTo(p.x.at(v), base)
		hairs.LineTo(p.x.at(v), base+0.55*p.s.Size)
		l := concentration(v)
		at := min(p.x.at(v), p.x.x1+0.5*p.s.Size-l.Width(p.s.Size)/2) // the last may reach over the field's edge
		p.d.text(at, numbers, Middle, p.s.Size, Text, l)
	}
	p.d.add(&stroke{path: hairs, ink: Hatch, width: 1})
	if p.ligand.hasZero() {
		p.d.line(p.x.zero-0.4*p.s.Size, base, p.x.zero+0.4*p.s.Size, base, Text, 1.4)
		p.d.text(p.x.zero, numbers, Middle, p.s.Size, Text, Words(Sans, "0"))
	}
	p.d.add(&stroke{path: ticks, ink: Text, width: 1})
	if !title {
		return numbers + 0.3*p.s.Size
	}
	p.d.text(p.x.x1, numbers+1.45*p.s.Size, End, p.s.title(), Text, p.ligand.Title)
	return numbers + 1.9*p.s.Size
}

// reading marks the panel as one that shares the ligand axis: the page lays its
// hairline through it. What its linear axis shows is named, so that the page
// can find a place on it; curves are the places of its curves among the leader's.
func (p *panel) reading(shows shown, curves ...int) {
	names := make([]string, len(curves))
	for i, c := range curves {
		names[i] = strconv.Itoa(c)
	}
	p.d.add(&group{class: "axis", data: [][2]string{{"c", strings.Join(names, " ")}},
		axis: &frame{x: p.x, y: p.y, top: p.top, bottom: p.bottom, shows: shows}})
	p.d.add(endGroup{})
}

// shown is what the linear axis of a field shows.
type shown string

const (
	showsResponse shown = "response"
	showsSlope    shown = "slope"
	showsResidual shown = "residual"
	showsOther    shown = ""
)

// frame is where a field lies and what its axes say, for the page.
type frame struct {
	x           logAxis
	y           linear
	top, bottom float64
	shows       shown
}

// moved is the frame moved by (x, y).
func (f *frame) moved(x, y float64) *frame {
	if f == nil {
		return nil
	}
	g := *f
	g.x.x0, g.x.x1, g.x.zero = g.x.x0+x, g.x.x1+x, g.x.zero+x
	g.y.y0, g.y.y1 = g.y.y0+y, g.y.y1+y
	g.top, g.bottom = g.top+y, g.bottom+y
	return &g
}

// data are the attributes that say the frame to the page: places x0 and x1 of
// the decadic logarithms l0 and l1, z of no ligand, t and b of the field's top
// and bottom, places y0 and y1 of the values v0 and v1.
func (f *frame) data() [][2]string {
	if f == nil {
		return nil
	}
	n := func(v float64) string { return strconv.FormatFloat(v, 'g', 6, 64) }
	data := [][2]string{
		{"x0", n(f.x.x0)}, {"x1", n(f.x.x1)}, {"l0", n(f.x.low)}, {"l1", n(f.x.high)},
		{"t", n(f.top)}, {"b", n(f.bottom)},
	}
	if !math.IsNaN(f.x.zero) {
		data = append(data, [2]string{"z", n(f.x.zero)})
	}
	if f.shows != showsOther {
		data = append(data, [2]string{"shows", string(f.shows)}, [2]string{"y0", n(f.y.y0)}, [2]string{"y1", n(f.y.y1)},
			[2]string{"v0", n(f.y.low)}, [2]string{"v1", n(f.y.high)})
	}
	return data
}

// curve draws points of a curve: thick where measured, thin beyond.
func (p *panel) curve(pts []XY, from, to float64, ink Ink) {
	at := p.places(pts)
	thin := func(lo, hi float64) {
		var path Path
		path.smooth(between(at, lo, hi))
		p.d.add(&stroke{path: path, ink: ink, width: 1, round: true})
	}
	a, b := p.x.at(from), p.x.at(to)
	if !(from > 0 && to >= from) {
		thin(p.x.x0, p.x.x1)
		return
	}
	thin(p.x.x0, a)
	thin(b, p.x.x1)
	var path Path
	path.smooth(between(at, a, b))
	p.d.add(&stroke{path: path, ink: ink, width: 2.4, round: true})
}

// band fills between two curves.
func (p *panel) band(low, high []XY, ink Ink) {
	lo, hi := between(p.places(low), p.x.x0, p.x.x1), between(p.places(high), p.x.x0, p.x.x1)
	var path Path
	started := false
	for _, q := range lo {
		if !finite(q.Y) {
			continue
		}
		if !started {
			path.MoveTo(q.X, q.Y)
			started = true
		} else {
			path.LineTo(q.X, q.Y)
		}
	}
	for i := len(hi) - 1; i >= 0; i-- {
		if started && finite(hi[i].Y) {
			path.LineTo(hi[i].X, hi[i].Y)
		}
	}
	if started {
		path.Close()
		p.d.add(&stroke{path: path, fill: ink, opacity: 0.16})
	}
}

// places turns values into places, kept inside the field by height.
func (p *panel) places(pts []XY) []XY {
	out := make([]XY, 0, len(pts))
	for _, q := range pts {
		if q.X > 0 {
			out = append(out, XY{p.x.at(q.X), p.y.held(q.Y)})
		}
	}
	return out
}
