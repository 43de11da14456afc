package figure

import (
	"math"
)

// HillPlot is the classical picture: log10[Ȳ/(1−Ȳ)] against the logarithm of
// the ligand, with both asymptotes of slope 1 and their distance. For display
// only: nothing is fitted to it.
type HillPlot struct {
	Name, Description string

	Ligand Ligand
	Lines  []HillLine
	Points []Point // Y is the saturation
	Marks  int     // kinds of marks in use
	Remark string
}

// HillLine is one curve. What does not exist is NaN.
type HillLine struct {
	Name, Short string
	At          []XY // ligand, log10[Ȳ/(1−Ȳ)]
	From, To    float64
	Half        float64
	First, Last float64 // ligand at which the lower and the upper asymptote cross zero
	Distance    string  // "−7.2 kJ/mol"
}

// hillReach bounds the axis of a Hill plot: beyond it saturation is read to a
// thousandth of its span.
const hillReach = 3

// Draw lays the figure out.
func (f *HillPlot) Draw(s Style) *Drawing {
	d := &Drawing{Width: s.Width, Title: f.Name, Description: f.Description}
	low, high := f.span()
	left := 3 * s.Size
	right := s.Width - 0.6*s.Size
	if !s.narrow() {
		right = min(right, 46*s.Size)
	}
	p := &panel{d: d, s: s, ligand: f.Ligand, x: newLogAxis(f.Ligand, left, right), top: 2.6 * s.Size}
	p.bottom = p.top + min(0.8*(right-left), 26*s.Size)
	p.y = linear{low: low, high: high, y0: p.bottom, y1: p.top}
	p.hatch()
	at := ticks(low, high, 6)
	p.yAxis(at, Label{{Text: "log", Face: Serif}, {Text: "10", Face: Serif, Rise: Sub},
		{Text: " [", Face: Serif}, {Text: "Ȳ", Face: SerifItalic}, {Text: "/(1 − ", Face: Serif}, {Text: "Ȳ", Face: SerifItalic}, {Text: ")]", Face: Serif}})
	below := p.xAxis(true)
	d.line(p.x.x0, p.y.at(0), p.x.x1, p.y.at(0), Hatch, 1)
	for i, l := range f.Lines {
		f.asymptote(p, l.First, i)
		f.asymptote(p, l.Last, i)
	}
	for i, l := range f.Lines {
		p.clipped(l, i)
	}
	f.marks(p)
	f.distances(p)
	p.reading(showsOther, all(len(f.Lines))...)
	if f.Remark != "" {
		below += s.lead()
		d.text(0, below-0.4*s.Size, Start, s.Size, Muted, Words(Sans, f.Remark).Cut(s.Size, s.Width))
	}
	d.Height = math.Ceil(below + 0.2*s.Size)
	return d
}

// span is the range that the curves take on the axis.
func (f *HillPlot) span() (low, high float64) {
	low, high = -1, 1
	for _, l := range f.Lines {
		for _, q := range l.At {
			if q.X >= f.Ligand.Low && q.X <= f.Ligand.High && finite(q.Y) {
				low, high = min(low, q.Y), max(high, q.Y)
			}
		}
	}
	return max(math.Floor(low*2)/2, -hillReach), min(math.Ceil(high*2)/2, hillReach)
}

// asymptote draws a line of slope 1 through zero at a ligand value.
func (f *HillPlot) asymptote(p *panel, at float64, i int) {
	if ends := f.ends(p, at); len(ends) > 0 {
		var path Path
		path.MoveTo(ends[0].X, ends[0].Y)
		path.LineTo(ends[1].X, ends[1].Y)
		p.d.add(&stroke{path: path, ink: CurveInk(i), width: 1, dash: []float64{7, 4}})
	}
}

// ends are those of an asymptote inside the field; none where it does not exist.
func (f *HillPlot) ends(p *panel, at float64) []XY {
	if !(at > 0) || !finite(at) {
		return nil
	}
	lx := math.Log10(at)
	x0, x1 := max(p.x.low, lx+p.y.low), min(p.x.high, lx+p.y.high)
	if x1 <= x0 {
		return nil
	}
	return []XY{{p.x.at(math.Pow(10, x0)), p.y.at(x0 - lx)}, {p.x.at(math.Pow(10, x1)), p.y.at(x1 - lx)}}
}

// clipped draws a line's part inside the field.
func (p *panel) clipped(l HillLine, i int) {
	var in []XY
	for _, q := range l.At {
		if q.Y >= p.y.low && q.Y <= p.y.high {
			in = append(in, q)
		}
	}
	p.curve(in, l.From, l.To, CurveInk(i))
}

func (f *HillPlot) marks(p *panel) {
	r := 0.25 * p.s.Size
	for line := range f.Lines {
		for kind := range max(f.Marks, 1) {
			var open Path
			for _, q := range f.Points {
				if q.Line != line || max(q.Preparation, 0) != kind || q.LeftOut || q.Blocked || !(q.Y > 0 && q.Y < 1) || !p.x.inside(q.X) || q.X <= 0 {
					continue
				}
				if y := math.Log10(q.Y / (1 - q.Y)); y >= p.y.low && y <= p.y.high {
					shape(&open, kind, p.x.at(q.X), p.y.at(y), r)
				}
			}
			p.d.add(&stroke{path: open, ink: CurveInk(line), fill: Ground, width: 1.2})
		}
	}
}

// distances draws the distance of the asymptotes at half saturation, then the
// names of the curves, clear of one another.
func (f *HillPlot) distances(p *panel) {
	var busy obstacles
	uprights := make([][]XY, len(f.Lines))
	for i, l := range f.Lines {
		busy.polyline(between(p.places(l.At), p.x.x0, p.x.x1))
		for _, at := range []float64{l.First, l.Last} {
			busy.polyline(f.ends(p, at))
		}
		if l.Distance == "" || !(l.Half > 0) || !p.x.inside(l.Half) || !finite(l.First) || !finite(l.Last) {
			continue
		}
		a, b := math.Log10(l.Half/l.First), math.Log10(l.Half/l.Last)
		lo, hi := max(min(a, b), p.y.low), min(max(a, b), p.y.high)
		if hi > lo {
			x := p.x.at(l.Half)
			uprights[i] = []XY{{x, p.y.at(lo)}, {x, p.y.at(hi)}}
			busy.polyline(uprights[i])
			p.d.line(x, p.y.at(lo), x, p.y.at(hi), CurveInk(i), 1)
		}
	}
	for i, line := range uprights {
		if len(line) > 0 {
			label := Words(Sans, f.Lines[i].Distance)
			at := busy.along(line, label.Width(p.s.Size), p.s.Size, p)
			p.d.add(&lettering{x: at.X, y: at.Y, size: p.s.Size, ink: NameInk(i), runs: label, halo: true})
		}
	}
	var curves []named
	for i, l := range f.Lines {
		curves = append(curves, named{l.Name, l.Short, NameInk(i), between(p.places(l.At), p.x.x0, p.x.x1)})
	}
	busy.names(p, curves)
}

// all lists 0 … n−1.
func all(n int) []int {
	out := make([]int, n)
	for i := range out {
		out[i] = i
	}
	return out
}
