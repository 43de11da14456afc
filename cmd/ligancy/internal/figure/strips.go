package figure

import (
	"math"
	"strconv"
)

// Strips is the figure of how firmly each constant is held: a strip from end to
// end of its interval, as factors of its best value, so that all share one
// axis; the profile of the likelihood rides on it as a ridge; constants that
// move together are joined by a bracket.
type Strips struct {
	Name, Description string

	Rows   []Strip
	Ties   []Tie
	Remark string
}

// Strip is one constant.
type Strip struct {
	Label     Label
	Value     string // "0.90 torr, within a factor 1.13"
	Low, High float64
	// ends as factors of the best value; 0 and +Inf where an end does not exist
	Ridge []XY // factor, relative likelihood from 0 to 1
	Ink   Ink  // of its curve; Text where it holds for all
}

// Tie joins two rows.
type Tie struct {
	A, B int
	Text string
}

// mostTies bounds the brackets beside the strips.
const mostTies = 4

// Draw lays the figure out.
func (f *Strips) Draw(s Style) *Drawing {
	d := &Drawing{Width: s.Width, Title: f.Name, Description: f.Description}
	reach := f.reach()
	x := logAxis{low: -math.Log10(reach), high: math.Log10(reach), zero: math.NaN()}
	brackets := float64(min(len(f.Ties), mostTies))*0.9*s.Size + 1.2*s.Size
	labels, values := 0.0, 0.0
	if s.narrow() {
		x.x0, x.x1 = 0.3*s.Size, s.Width-brackets-2
	} else {
		for _, r := range f.Rows {
			labels, values = max(labels, r.Label.Width(s.title())), max(values, Prose(Sans, r.Value).Width(s.Size))
		}
		labels, values = min(labels, 0.3*s.Width), min(values, 0.36*s.Width)
		x.x0, x.x1 = labels+1.2*s.Size, s.Width-values-brackets-1.2*s.Size
	}
	top := 0.6 * s.Size
	y, middles := top, make([]float64, len(f.Rows))
	for i := range f.Rows {
		if s.narrow() {
			middles[i] = y + 3.3*s.Size
			y += 3.9 * s.Size
		} else {
			middles[i] = y + 1.9*s.Size
			y += 2.5 * s.Size
		}
	}
	f.scale(d, s, x, top, y)
	for i, r := range f.Rows {
		f.strip(d, s, x, r, middles[i])
		if s.narrow() {
			base := middles[i] - 1.75*s.Size
			value := Prose(Sans, r.Value).Cut(s.Size, 0.68*x.x1)
			d.add(&lettering{y: base, size: s.title(), ink: Text, halo: true,
				runs: r.Label.Cut(s.title(), x.x1-value.Width(s.Size)-s.Size)})
			d.add(&lettering{x: x.x1, y: base, anchor: End, size: s.Size, ink: Text, runs: value, halo: true})
			continue
		}
		d.text(0, middles[i]+0.2*s.Size, Start, s.title(), Text, r.Label.Cut(s.title(), labels))
		d.text(x.x1+1.2*s.Size, middles[i]+0.2*s.Size, Start, s.Size, Text, Prose(Sans, r.Value).Cut(s.Size, values))
	}
	f.brackets(d, s, middles, s.Width-brackets+1.2*s.Size)
	y = f.foot(d, s, x, y)
	d.Height = math.Ceil(y)
	return d
}

// reach is the factor at the ends of the axis.
func (f *Strips) reach() float64 {
	reach, open := 1.15, false
	for _, r := range f.Rows {
		if r.Low > 0 {
			reach = max(reach, 1/r.Low)
		} else {
			open = true
		}
		if !math.IsInf(r.High, 1) {
			reach = max(reach, r.High)
		} else {
			open = true
		}
		for _, q := range r.Ridge {
			if q.X > 0 && q.X < 30 && q.X > 1./30 {
				reach = max(reach, q.X, 1/q.X)
			}
		}
	}
	if open {
		reach = max(reach*1.5, 3)
	}
	return min(reach*1.12, 1000)
}

// scale draws uprights at round factors, with their numbers below.
func (f *Strips) scale(d *Drawing, s Style, x logAxis, top, bottom float64) {
	end := math.Inf(-1)
	for _, v := range factors(math.Pow(10, x.high)) {
		at := x.at(v)
		ink, width := Hair, 1.0
		if v == 1 {
			ink = Hatch
		}
		d.line(at, top, at, bottom, ink, width)
		l := Words(Sans, factorWord(v))
		if w := l.Width(s.Size) / 2; at-w > end+0.6*s.Size || v == 1 {
			d.text(at, bottom+1.2*s.Size, Middle, s.Size, Text, l)
			end = at + w
		}
	}
}

// factors are round factors up to a reach, either way.
func factors(reach float64) []float64 {
	steps := []float64{10, 100, 1000}
	switch {
	case reach < 1.25:
		steps = []float64{1.1, 1.2}
	case reach < 2.2:
		steps = []float64{1.2, 1.5, 2}
	case reach < 12:
		steps = []float64{2, 5, 10}
	}
	out := []float64{}
	for i := len(steps) - 1; i >= 0; i-- {
		if steps[i] <= reach {
			out = append(out, 1/steps[i])
		}
	}
	out = append(out, 1)
	for _, v := range steps {
		if v <= reach {
			out = append(out, v)
		}
	}
	return out
}

// factorWord writes ÷2, 1, ×2.
func factorWord(v float64) string {
	switch {
	case v == 1:
		return "1"
	case v < 1:
		return "÷" + strconv.FormatFloat(1/v, 'g', 3, 64)
	}
	return "×" + strconv.FormatFloat(v, 'g', 3, 64)
}

// strip draws one interval; an end that does not exist fades out.
func (f *Strips) strip(d *Drawing, s Style, x logAxis, r Strip, y float64) {
	lo, hi := x.x0, x.x1
	if r.Low > 0 {
		lo = max(x.at(r.Low), x.x0)
	}
	if !math.IsInf(r.High, 1) {
		hi = min(x.at(r.High), x.x1)
	}
	thick := 0.42 * s.Size
	solid := [2]float64{lo, hi}
	best := x.at(1)
	if !(r.Low > 0) {
		solid[0] = best - 0.3*(best-x.x0)
		d.fade(solid[0], x.x0, y, thick, r.Ink)
	}
	if math.IsInf(r.High, 1) {
		solid[1] = best + 0.3*(x.x1-best)
		d.fade(solid[1], x.x1, y, thick, r.Ink)
	}
	d.line(solid[0], y, solid[1], y, r.Ink, thick)
	if len(r.Ridge) > 1 {
		var pts []XY
		for _, q := range r.Ridge {
			if at := x.at(q.X); q.X > 0 && at >= x.x0 && at <= x.x1 {
				pts = append(pts, XY{at, y - thick/2 - 1.25*s.Size*min(max(q.Y, 0), 1)})
			}
		}
		var ridge Path
		ridge.smooth(pts)
		d.add(&stroke{path: ridge, ink: Text, width: 1, round: true})
	}
	d.line(best, y-0.5*s.Size, best, y+0.5*s.Size, Text, 2)
}

// fade draws a strip that pales from one place to another.
func (d *Drawing) fade(from, to, y, thick float64, ink Ink) {
	const steps = 12
	for k := range steps {
		a := from + (to-from)*float64(k)/steps
		b := from + (to-from)*float64(k+1)/steps
		var p Path
		p.MoveTo(a, y)
		p.LineTo(b, y)
		d.add(&stroke{path: p, ink: ink, width: thick, opacity: 0.9 * (1 - float64(k+1)/(steps+1))})
	}
}

// brackets join rows that move together.
func (f *Strips) brackets(d *Drawing, s Style, middles []float64, x float64) {
	for i, t := range f.Ties[:min(len(f.Ties), mostTies)] {
		at := x + 0.9*s.Size*float64(i)
		var p Path
		p.MoveTo(at-0.45*s.Size, middles[t.A])
		p.LineTo(at, middles[t.A])
		p.LineTo(at, middles[t.B])
		p.LineTo(at-0.45*s.Size, middles[t.B])
		d.add(&stroke{path: p, ink: Text, width: 1.2})
	}
}

// foot writes the axis's title and what the brackets say.
func (f *Strips) foot(d *Drawing, s Style, x logAxis, y float64) float64 {
	y += 2.7 * s.Size
	title := Words(SerifItalic, "times the best value")
	d.text(max(x.x1, x.x0+title.Width(s.title())), y, End, s.title(), Text, title)
	for _, t := range f.Ties[:min(len(f.Ties), mostTies)] {
		y += s.lead()
		var p Path
		p.MoveTo(0, y-0.8*s.Size)
		p.LineTo(0.45*s.Size, y-0.8*s.Size)
		p.LineTo(0.45*s.Size, y)
		p.LineTo(0, y)
		d.add(&stroke{path: p, ink: Text, width: 1.2})
		d.text(s.Size, y, Start, s.Size, Muted, Prose(Sans, t.Text).Cut(s.Size, s.Width-s.Size))
	}
	if f.Remark != "" {
		y += s.lead()
		d.text(0, y, Start, s.Size, Muted, Words(Sans, f.Remark).Cut(s.Size, s.Width))
	}
	return y + 0.4*s.Size
}
