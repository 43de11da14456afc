package figure

import (
	"math"
	"strconv"
	"strings"
)

// Slope is the figure of steepness: the Hill coefficient along each curve, with
// its band, where half of the sites are filled, where it is steepest, and the
// level that a Hill fit of the same points would give.
type Slope struct {
	Name, Description string

	Ligand Ligand
	Leader Label
	Lines  []SlopeLine
	Rivals []Rival
	Places []int // places of the lines among the leader's curves, for the page

	lead  int
	field bool // one of several: named, its key above all of them
}

// SlopeLine is n_H along one curve of the leader. What does not exist is NaN.
type SlopeLine struct {
	Name, Short   string
	At, Low, High []XY
	From, To      float64 // tested range
	Half, Max     XY      // ligand and n_H there
	HillFit       float64 // the exponent of a Hill fit
}

// Draw lays the figure out.
func (f *Slope) Draw(s Style) *Drawing {
	d := &Drawing{Width: s.Width, Title: f.Name, Description: f.Description}
	y := s.Size
	if f.field && len(f.Lines) > 0 {
		d.text(0, y, Start, s.Size, NameInk(f.lead), Words(SansBold, f.Lines[0].Name).Cut(s.Size, s.Width))
	} else {
		y = d.key(f.entries(), 0, s.Size, s.Width, s)
	}
	low, high := f.span()
	at := ticks(low, high, 4)
	left := math.Ceil(max(0.9*s.Size+widest(tickLabels(at), s.Size), 3*s.Size))
	margin := 0.5 * s.Size
	if !s.narrow() {
		margin = Words(Sans, "0.00 decades").Width(s.Size) + s.Size
	}
	p := &panel{d: d, s: s, ligand: f.Ligand, x: newLogAxis(f.Ligand, left, math.Floor(s.Width-margin)), top: y + 2.6*s.Size}
	p.bottom = p.top + max(10*s.Size, 0.26*(p.x.x1-p.x.x0))
	p.y = linear{low: low, high: high, y0: p.bottom, y1: p.top}
	p.hatch()
	p.yAxis(at, Symbol("n_H"))
	below := p.xAxis(true)
	for i, l := range f.Lines {
		p.band(l.Low, l.High, CurveInk(f.lead+i))
	}
	var busy obstacles
	f.hillFits(p, &busy)
	for _, r := range f.Rivals {
		d.within(group{class: "rival", data: [][2]string{{"m", r.ID}}, hidden: !r.Shown}, func() {
			for _, line := range r.Lines {
				p.broken(line, dashes[r.Dash%len(dashes)])
			}
		})
	}
	for i, l := range f.Lines {
		p.curve(l.At, l.From, l.To, CurveInk(f.lead+i))
	}
	f.dots(p)
	f.names(p, &busy)
	p.reading(showsSlope, f.Places...)
	d.Height = math.Ceil(below)
	return d
}

// broken draws a rival's curve.
func (p *panel) broken(pts []XY, dash []float64) {
	var path Path
	path.smooth(between(p.places(pts), p.x.x0, p.x.x1))
	p.d.add(&stroke{path: path, ink: Muted, width: 1.8, dash: dash, round: true})
}

// entries of the key: what the dots and lines are.
func (f *Slope) entries() []keyEntry {
	var entries []keyEntry
	if len(f.Leader) > 0 {
		ink := Text
		if len(f.Lines) == 1 && !f.field {
			ink = CurveInk(f.lead)
		}
		draw, w := lineSample(ink, 2.4, nil)
		entries = append(entries, keyEntry{sample: draw, width: w, label: f.Leader})
	}
	for _, r := range f.Rivals {
		if r.Shown {
			draw, w := lineSample(Muted, 1.8, dashes[r.Dash%len(dashes)])
			entries = append(entries, keyEntry{sample: draw, width: w, label: Prose(Sans, r.Name), rival: r.ID})
		}
	}
	dot := func(fill Ink) func(*Drawing, float64, float64) {
		return func(d *Drawing, x, y float64) {
			var p Path
			circle(&p, x+4, y, 3.4)
			d.add(&stroke{path: p, ink: Text, fill: fill, width: 1.4})
		}
	}
	half, steepest := false, false
	for _, l := range f.Lines {
		half, steepest = half || finite(l.Half.Y), steepest || finite(l.Max.Y)
	}
	if half {
		entries = append(entries, keyEntry{sample: dot(Text), width: 8, label: Words(Sans, "at half saturation")})
	}
	if steepest {
		entries = append(entries, keyEntry{sample: dot(Ground), width: 8, label: Words(Sans, "steepest")})
	}
	return entries
}

// span is the range of n_H: what the leader's curves and bands take where they
// are drawn, and 1.
func (f *Slope) span() (low, high float64) {
	low, high = 1, 1
	see := func(y float64) {
		if finite(y) {
			low, high = min(low, y), max(high, y)
		}
	}
	for _, l := range f.Lines {
		for _, q := range l.At {
			if q.X >= f.Ligand.Low && q.X <= f.Ligand.High {
				see(q.Y)
			}
		}
		see(l.HillFit)
		see(l.Max.Y)
	}
	steep := high - low
	for _, l := range f.Lines { // bands, but not where they run away
		for _, q := range append(append([]XY{}, l.Low...), l.High...) {
			if q.X >= l.From && q.X <= l.To && math.Abs(q.Y-1) < 2*steep+0.5 {
				see(q.Y)
			}
		}
	}
	if high-low < 0.2 {
		low, high = low-0.1, high+0.1
	}
	return max(low-0.03*(high-low), 0), high + 0.05*(high-low)
}

// hillFits draws the level of a Hill fit of each curve over its tested range.
func (f *Slope) hillFits(p *panel, busy *obstacles) {
	var at []float64
	var which []int
	for i, l := range f.Lines {
		if finite(l.HillFit) && l.From > 0 {
			y := p.y.held(l.HillFit)
			var path Path
			path.MoveTo(p.x.at(l.From), y)
			path.LineTo(p.x.at(l.To), y)
			p.d.add(&stroke{path: path, ink: CurveInk(f.lead + i), width: 1.2, dash: []float64{1.2, 3.4}})
			at, which = append(at, y), append(which, i)
		}
	}
	places := spread(at, 1.25*p.s.Size, p.top+0.5*p.s.Size, p.bottom)
	for k, i := range which {
		text := "a Hill fit " + strconv.FormatFloat(f.Lines[i].HillFit, 'f', 2, 64)
		if p.s.narrow() {
			if len(which) > 2 { // no room: the table has the numbers
				text = "a Hill fit"
				if k > 0 {
					continue
				}
			} else if k > 0 {
				text = strings.TrimPrefix(text, "a Hill fit ")
			}
			w := Words(Sans, text).Width(p.s.Size)
			busy.take(XY{p.x.x1 - 2 - w, places[k] + 0.36*p.s.Size}, w, p.s.Size)
			p.d.add(&lettering{x: p.x.x1 - 2, y: places[k] + 0.36*p.s.Size, anchor: End, size: p.s.Size,
				ink: NameInk(f.lead + i), runs: Words(Sans, text), halo: true})
			continue
		}
		p.d.text(p.x.x1+0.6*p.s.Size, places[k]+0.36*p.s.Size, Start, p.s.Size, NameInk(f.lead+i), Words(Sans, text))
	}
}

func (f *Slope) dots(p *panel) {
	for i, l := range f.Lines {
		for k, q := range []XY{l.Max, l.Half} {
			if !finite(q.Y) || !(q.X > 0) || !p.x.inside(q.X) {
				continue
			}
			fill := Ground
			if k == 1 {
				fill = CurveInk(f.lead + i)
			}
			var path Path
			circle(&path, p.x.at(q.X), p.y.held(q.Y), 3.6)
			p.d.add(&stroke{path: path, ink: CurveInk(f.lead + i), fill: fill, width: 1.6})
		}
	}
}

func (f *Slope) names(p *panel, busy *obstacles) {
	if len(f.Lines) < 2 {
		return
	}
	for _, l := range f.Lines {
		busy.polyline(between(p.places(l.At), p.x.x0, p.x.x1))
		if finite(l.HillFit) && l.From > 0 {
			y := p.y.held(l.HillFit)
			busy.polyline([]XY{{p.x.at(l.From), y}, {p.x.at(l.To), y}})
		}
	}
	var curves []named
	for i, l := range f.Lines {
		curves = append(curves, named{l.Name, l.Short, NameInk(f.lead + i), between(p.places(l.At), p.x.x0, p.x.x1)})
	}
	busy.names(p, curves)
}
