package figure

import (
	"math"
	"strconv"
)

// Standing is the figure of how the mechanisms stand: AICc behind the leader as
// bars on a scale with marks at 0, 2 and 10, cut at 20.
type Standing struct {
	Name, Description string

	Rows   []StandingRow
	Remark string // below
}

// StandingRow is one mechanism.
type StandingRow struct {
	Name   string
	ID     string  // by which the page finds it
	Behind float64 // AICc behind the leader; NaN where there is none
	Word   string  // its standing
	Leads  bool
	Out    bool
}

// cutAt is where the scale of AICc ends.
const cutAt = 20

// Draw lays the figure out.
func (f *Standing) Draw(s Style) *Drawing {
	d := &Drawing{Width: s.Width, Title: f.Name, Description: f.Description}
	x := f.columns(s)
	y := s.title()
	d.text(x.x0, y, Start, s.title(), Text, Words(SerifItalic, "AICc behind the leader"))
	y += s.lead()
	top := y + 0.5*s.Size
	for _, v := range []float64{0, 2, 10, cutAt} {
		d.text(x.at(v), y, Middle, s.Size, Text, Words(Sans, strconv.Itoa(int(v))))
	}
	var rows []func()
	y = top
	for _, r := range f.Rows {
		row, next := f.row(d, s, x, r, y)
		rows, y = append(rows, row), next
	}
	for _, v := range []float64{0, 2, 10, cutAt} {
		d.line(x.at(v), top, x.at(v), y, Hair, 1)
	}
	for _, r := range rows {
		r()
	}
	if f.Remark != "" {
		y += s.lead()
		d.text(0, y, Start, s.Size, Muted, Words(Sans, f.Remark))
		y += 0.4 * s.Size
	}
	d.Height = math.Ceil(y + 0.3*s.Size)
	return d
}

// scale lays AICc over the middle column.
type scale struct {
	x0, x1     float64
	names, end float64 // widths of the columns of names and of words
}

func (c scale) at(v float64) float64 { return c.x0 + v/cutAt*(c.x1-c.x0) }

// columns settles where names, bars and words stand; on a narrow figure names
// and words stand above their bar.
func (f *Standing) columns(s Style) scale {
	if s.narrow() {
		return scale{x0: 0.4 * s.Size, x1: s.Width - 4*s.Size}
	}
	names, words := 0.0, 0.0
	for _, r := range f.Rows {
		names = max(names, r.name().Width(s.title()))
		words = max(words, Words(Sans, r.Word).Width(s.Size))
	}
	names, words = min(names, 0.36*s.Width), min(words, 0.26*s.Width)
	return scale{x0: names + 1.4*s.Size, x1: s.Width - words - 5*s.Size, names: names, end: words}
}

// name of a mechanism, the leader's set bold.
func (r StandingRow) name() Label {
	if r.Leads {
		return Prose(SerifBold, r.Name)
	}
	return Prose(Serif, r.Name)
}

// row writes one mechanism; its bar is drawn later, over the hairlines.
func (f *Standing) row(d *Drawing, s Style, x scale, r StandingRow, y float64) (bar func(), next float64) {
	middle := y + 0.95*s.Size
	next = y + 1.9*s.Size
	name, ink := r.name(), Text
	word := Words(Sans, r.Word)
	if s.narrow() {
		base := y + 1.3*s.Size
		room := s.Width - word.Width(s.Size) - s.Size
		bar = func() {
			d.within(group{class: "stands", data: [][2]string{{"m", r.ID}}}, func() {
				d.area(0, y, s.Width, y+2.9*s.Size)
				d.add(&lettering{y: base, size: s.title(), ink: ink, runs: name.Cut(s.title(), room), halo: true})
				d.add(&lettering{x: s.Width, y: base, anchor: End, size: s.Size, ink: Muted, runs: word, halo: true})
				f.bar(d, s, x, r, base+0.9*s.Size)
			})
		}
		return bar, y + 2.9*s.Size
	}
	bar = func() {
		d.within(group{class: "stands", data: [][2]string{{"m", r.ID}}}, func() {
			d.area(0, y, s.Width, next)
			d.text(0, middle+0.36*s.Size, Start, s.title(), ink, name.Cut(s.title(), x.names))
			d.text(s.Width, middle+0.36*s.Size, End, s.Size, Muted, word.Cut(s.Size, x.end))
			f.bar(d, s, x, r, middle)
		})
	}
	return bar, next
}

// area is a field that can be pointed at but not seen.
func (d *Drawing) area(x0, y0, x1, y1 float64) {
	var p Path
	p.Rectangle(x0, y0, x1, y1)
	d.add(&stroke{path: p, fill: Ground, opacity: 0.001})
}

// bar draws how far a mechanism lies behind.
func (f *Standing) bar(d *Drawing, s Style, x scale, r StandingRow, y float64) {
	value := func(at float64, text string) {
		d.text(at+0.5*s.Size, y+0.36*s.Size, Start, s.Size, Text, Words(Sans, text))
	}
	switch {
	case r.Leads:
		d.line(x.x0, y-0.55*s.Size, x.x0, y+0.55*s.Size, Text, 3)
		return
	case !finite(r.Behind):
		return
	}
	end := min(max(r.Behind, 0), cutAt)
	thick := 0.5 * s.Size
	opacity := 1.0
	if r.Out {
		opacity = 0.45
	}
	var p Path
	p.Rectangle(x.x0, y-thick/2, max(x.at(end), x.x0+1.5), y+thick/2)
	d.add(&stroke{path: p, fill: Muted, opacity: opacity})
	text := strconv.FormatFloat(r.Behind, 'f', 1, 64)
	if r.Behind > cutAt { // two slashes of ground: the bar goes on
		if r.Behind >= 100 {
			text = strconv.FormatFloat(r.Behind, 'f', 0, 64)
		}
		for _, back := range []float64{1.1, 1.8} {
			at := x.x1 - back*s.Size
			var slash Path
			slash.MoveTo(at-0.2*s.Size, y+0.6*thick)
			slash.LineTo(at+0.2*s.Size, y-0.6*thick)
			d.add(&stroke{path: slash, ink: Ground, width: 2.4})
		}
	}
	value(x.at(end), text)
}
