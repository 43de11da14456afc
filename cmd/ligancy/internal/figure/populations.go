package figure

import (
	"cmp"
	"math"
	"slices"
)

// Populations is the figure of which states are filled: one field a curve, a
// line a state.
type Populations struct {
	Name, Description string

	Ligand Ligand
	Fields []Population
	Remark string
}

// Population is the states of one curve.
type Population struct {
	Name     string
	Ink      int // place of the curve's colour
	Curve    int // its place among the leader's curves, for the page
	From, To float64
	States   []State
}

// State is the share of molecules in one state along the ligand.
type State struct {
	Name string
	At   []XY

	place int // among the states of its curve
}

// seldom is the share that a state must reach somewhere on the axis to be drawn.
const seldom = 0.02

// mostStates bounds the lines of one field.
const mostStates = 10

// Draw lays the fields out in as many columns as fit.
func (f *Populations) Draw(s Style) *Drawing {
	d := &Drawing{Width: s.Width, Title: f.Name, Description: f.Description}
	columns := max(1, min(len(f.Fields), int(s.Width/(26*s.Size))))
	gap := 1.4 * s.Size
	width := (s.Width - gap*float64(columns-1)) / float64(columns)
	y := 0.0
	for i := 0; i < len(f.Fields); i += columns {
		bottom := y
		for k, p := range f.Fields[i:min(i+columns, len(f.Fields))] {
			bottom = max(bottom, f.field(d, s, p, float64(k)*(width+gap), y, width))
		}
		y = bottom + 0.9*s.Size
	}
	if f.Remark != "" {
		y += 0.5 * s.Size
		d.text(0, y, Start, s.Size, Muted, Words(Sans, f.Remark).Cut(s.Size, s.Width))
		y += 0.5 * s.Size
	}
	d.Height = math.Ceil(y)
	return d
}

// field draws one curve's states and returns its lower edge.
func (f *Populations) field(d *Drawing, s Style, pop Population, x, y, width float64) float64 {
	p := &panel{d: d, s: s, ligand: f.Ligand, top: y + 3.4*s.Size}
	p.x = newLogAxis(f.Ligand, x+3*s.Size, x+width-0.6*s.Size)
	p.bottom = p.top + min(max(0.55*width, 9*s.Size), 15*s.Size)
	p.y = linear{low: 0, high: 1, y0: p.bottom, y1: p.top}
	p.hatch()
	p.yAxisAt(x, []float64{0, 0.5, 1}, Words(SerifItalic, "share of molecules"))
	d.text(x, y+1.1*s.Size, Start, s.Size, NameInk(pop.Ink), Words(SansBold, pop.Name).Cut(s.Size, width))
	below := p.xAxis(true)
	states := f.drawn(pop)
	var busy obstacles
	for _, st := range states {
		busy.polyline(between(p.places(st.At), p.x.x0, p.x.x1))
	}
	for _, st := range states {
		p.state(st, pop)
	}
	for _, st := range states {
		f.label(p, st, pop.Ink, &busy)
	}
	p.reading(showsOther, pop.Curve)
	return below
}

// label names a state beside the top of its line, with a hairline to it where
// it has to stand apart.
func (f *Populations) label(p *panel, st State, ink int, busy *obstacles) {
	size := p.s.Size
	top := f.top(st)
	tip := XY{p.x.at(top.X), p.y.at(top.Y)}
	label := Words(Sans, st.Name).Cut(size, 0.45*(p.x.x1-p.x.x0))
	w := label.Width(size)
	at := busy.beside(tip, w, size, p)
	near := XY{min(max(tip.X, at.X), at.X+w), min(max(tip.Y, at.Y-0.7*size), at.Y)}
	if math.Hypot(near.X-tip.X, near.Y-tip.Y) > 1.6*size {
		p.d.line(near.X, near.Y, tip.X, tip.Y, Muted, 0.7)
	}
	p.d.add(&lettering{x: at.X, y: at.Y, size: size, ink: NameInk(ink), runs: label, halo: true})
}

// state draws one state's line: thin beyond the tested range, each with a dash of its own.
func (p *panel) state(st State, pop Population) {
	dash := [][]float64{nil, {6, 3}, {2, 2.5}, {9, 3, 2, 3}, {4, 2}, {1, 2}, {12, 3}, {6, 2, 1, 2, 1, 2}}[st.place%8]
	at := p.places(st.At)
	for _, part := range [][3]float64{{p.x.x0, p.x.at(pop.From), 1}, {p.x.at(pop.From), p.x.at(pop.To), 1.9}, {p.x.at(pop.To), p.x.x1, 1}} {
		if !(pop.From > 0) {
			part = [3]float64{p.x.x0, p.x.x1, 1}
		}
		var path Path
		path.smooth(between(at, part[0], part[1]))
		p.d.add(&stroke{path: path, ink: CurveInk(pop.Ink), width: part[2], dash: dash})
		if !(pop.From > 0) {
			return
		}
	}
}

// drawn are the states that reach a visible share, at most so many, in order.
func (f *Populations) drawn(pop Population) []State {
	type ranked struct {
		i   int
		top float64
	}
	var all []ranked
	for i, st := range pop.States {
		if t := f.top(st); t.Y >= seldom {
			all = append(all, ranked{i, t.Y})
		}
	}
	slices.SortStableFunc(all, func(a, b ranked) int { return cmp.Compare(b.top, a.top) })
	all = all[:min(len(all), mostStates)]
	slices.SortFunc(all, func(a, b ranked) int { return cmp.Compare(a.i, b.i) })
	out := make([]State, len(all))
	for k, r := range all {
		out[k] = pop.States[r.i]
		out[k].place = r.i
	}
	return out
}

// top is where a state is most filled on the axis.
func (f *Populations) top(st State) XY {
	best := XY{f.Ligand.Low, math.Inf(-1)}
	for _, q := range st.At {
		if q.X >= f.Ligand.Low && q.X <= f.Ligand.High && q.Y > best.Y {
			best = q
		}
	}
	return best
}

// beside finds a place for a label near the top of its line.
func (o *obstacles) beside(top XY, width, size float64, p *panel) XY {
	best, least := XY{}, math.Inf(1)
	for _, dx := range []float64{0, -1, 1, -2.5, 2.5, -5, 5, -8, 8} {
		for _, dy := range []float64{-0.5, 1.5, -1.8, 2.8, 4, -3} {
			c := XY{top.X + dx*size - width/2, top.Y + dy*size}
			c.X = min(max(c.X, p.x.x0+2), p.x.x1-width-2)
			c.Y = min(max(c.Y, p.top+0.9*size), p.bottom-0.3*size)
			box := [4]float64{c.X - 2, c.Y - 0.8*size, c.X + width + 2, c.Y + 0.2*size}
			cost := math.Abs(dx) + math.Abs(dy)
			if cost < least {
				cost += 1.2 * o.covered(box, (least-cost)/1.2)
			}
			if cost < least {
				best, least = c, cost
			}
		}
	}
	o.boxes = append(o.boxes, [4]float64{best.X - 2, best.Y - 0.8*size, best.X + width + 2, best.Y + 0.2*size})
	return best
}
