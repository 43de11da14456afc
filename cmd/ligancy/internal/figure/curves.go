package figure

import (
	"math"
	"slices"
	"strconv"
)

// Curves is the figure of the points and the curves: every measurement, the
// leader's curves, one rival, the ruler below, and the residuals.
type Curves struct {
	Name        string // of the figure, for those who cannot see it
	Description string

	Ligand       Ligand
	Response     Label // "fraction of sites filled"
	Fraction     bool  // the response runs from 0 to 1
	Percent      bool  // the response runs from 0 to 100
	Leader       Label // its name; empty where nothing leads
	Lines        []Line
	Rivals       []Rival
	Points       []Point
	Preparations []string // names, in order of their marks
	Dense        bool     // too many points for marks of their own
	Residuals    bool     // draw them
	Rulers       bool
	Places       []int // places of the lines among the leader's curves, for the page

	lead  int  // place of the first curve's colour
	field bool // one of several: named, its key above all of them
}

// Line is one curve of the leader.
type Line struct {
	Name      string // the level that sets it apart; "" where there is one curve
	Short     string // the same without what all share, for margins
	At        []XY   // ligand, response
	Low, High []XY   // its band
	From, To  float64
	Ruler     Ruler
}

// Ruler says where a curve lies: ligand at 1, 10, 50, 90 and 99 %. What does
// not exist is NaN.
type Ruler struct {
	X01, X10, Half, X90, X99 float64
}

// Rival is another mechanism's curves.
type Rival struct {
	Name  string
	ID    string // by which the page finds it
	Lines [][]XY
	Shown bool
	Dash  int
}

// Point is one measurement.
type Point struct {
	Line, Preparation int
	X, Y              float64
	Residual          float64 // in units of scatter; NaN where there is none
	LeftOut           bool
	Blocked           bool // sees no specific binding
}

// curvesLayout is a Curves on its way to a drawing.
type curvesLayout struct {
	*Curves
	d      *Drawing
	s      Style
	x      logAxis
	margin float64 // at the right of the field
	main   *panel
}

// Draw lays the figure out.
func (c *Curves) Draw(s Style) *Drawing {
	l := &curvesLayout{Curves: c, s: s, d: &Drawing{Width: s.Width, Title: c.Name, Description: c.Description}}
	y := s.Size
	if c.field {
		l.title()
	} else {
		y = l.keys()
	}
	y = l.draw(y + 2.6*s.Size)
	if c.Rulers {
		y = l.rulers(y)
	}
	if c.Residuals {
		y = l.residuals(y + 0.4*s.Size)
	}
	l.d.Height = math.Ceil(y)
	return l.d
}

// title names a field that is one of several.
func (l *curvesLayout) title() {
	for i, line := range l.Lines[:min(len(l.Lines), 1)] {
		l.d.text(0, l.s.Size, Start, l.s.Size, NameInk(l.lead+i), Words(SansBold, line.Name).Cut(l.s.Size, l.s.Width))
	}
}

// keys writes what lines and marks mean.
func (l *curvesLayout) keys() float64 {
	entries := l.entries()
	if len(entries) == 0 {
		return 0.2 * l.s.Size
	}
	return l.d.key(entries, 0, l.s.Size, l.s.Width, l.s)
}

// entries of the key.
func (l *curvesLayout) entries() []keyEntry {
	var entries []keyEntry
	if len(l.Leader) > 0 && len(l.Lines) > 0 {
		ink := Text
		if len(l.Lines) == 1 && !l.field {
			ink = CurveInk(l.lead)
		}
		f, w := lineSample(ink, 2.4, nil)
		entries = append(entries, keyEntry{sample: f, width: w, label: l.Leader})
	}
	for _, r := range l.Rivals {
		if r.Shown {
			f, w := lineSample(Muted, 1.8, dashes[r.Dash%len(dashes)])
			entries = append(entries, keyEntry{sample: f, width: w, label: Prose(Sans, r.Name), rival: r.ID})
		}
	}
	if !l.Dense && len(l.Preparations) > 1 && len(l.Preparations) <= Shapes {
		for i, name := range l.Preparations {
			f, w := markSample(i, l.radius())
			entries = append(entries, keyEntry{sample: f, width: w, label: Words(Sans, name)})
		}
	}
	if slices.ContainsFunc(l.Points, func(p Point) bool { return p.LeftOut }) {
		entries = append(entries, keyEntry{sample: func(d *Drawing, x, y float64) {
			var p Path
			cross(&p, x+4, y, 3.5)
			d.add(&stroke{path: p, ink: Muted, width: 1.2})
		}, width: 8, label: Words(Sans, "left out")})
	}
	if slices.ContainsFunc(l.Points, func(p Point) bool { return p.Blocked }) {
		entries = append(entries, keyEntry{sample: func(d *Drawing, x, y float64) {
			var p Path
			circle(&p, x+4, y, 2.4)
			d.add(&stroke{path: p, fill: Muted})
		}, width: 8, label: Words(Sans, "blocked")})
	}
	return entries
}

// radius of the marks of preparations.
func (l *curvesLayout) radius() float64 { return 0.27 * l.s.Size }

// margins settles the stretch of the field.
func (l *curvesLayout) margins(numbers []Label) {
	left := 0.9*l.s.Size + widest(numbers, l.s.Size)
	if l.shortRulers() {
		for _, line := range l.Lines {
			left = max(left, Words(Sans, line.Short).Width(l.s.Size)+0.9*l.s.Size)
		}
	}
	left = max(left, 3*l.s.Size)
	l.margin = 0.5 * l.s.Size
	if l.shortRulers() {
		l.margin = Words(Sans, "0.00 decades").Width(l.s.Size) + l.s.Size
	}
	l.x = newLogAxis(l.Ligand, math.Ceil(left), math.Floor(l.s.Width-l.margin))
}

// shortRulers says whether the names of curves fit into the left margin, so
// that a ruler takes one line.
func (l *curvesLayout) shortRulers() bool {
	if l.s.narrow() {
		return false
	}
	for _, line := range l.Lines {
		if Words(Sans, line.Short).Width(l.s.Size) > 5.5*l.s.Size {
			return false
		}
	}
	return true
}

// responseRange is the range of the response axis and its numbers.
func (l *curvesLayout) responseRange() (low, high float64, at []float64) {
	low, high = 0, 1
	switch {
	case l.Percent:
		high = 100
	case !l.Fraction:
		low, high = math.Inf(1), math.Inf(-1)
	}
	if l.Fraction || l.Percent {
		at = []float64{0, high / 4, high / 2, 3 * high / 4, high}
	}
	for _, p := range l.Points {
		if finite(p.Y) && (p.X > 0 || l.Ligand.hasZero()) {
			low, high = min(low, p.Y), max(high, p.Y)
		}
	}
	for _, line := range l.Lines {
		for _, q := range line.At {
			if finite(q.Y) && q.X >= l.Ligand.Low && q.X <= l.Ligand.High {
				low, high = min(low, q.Y), max(high, q.Y)
			}
		}
	}
	if !(low <= high) {
		low, high = 0, 1
	}
	if at == nil {
		if low > 0 && low < 0.5*high {
			low = 0
		}
		if high == low {
			high = low + 1
		}
		at = ticks(low, high+0.02*(high-low), 5)
	}
	pad := 0.0
	if low < at[0] {
		pad = 0.02 * (high - low)
	}
	return low - pad, high, at
}

// draw draws the points and the curves from y downwards.
func (l *curvesLayout) draw(y float64) float64 {
	low, high, at := l.responseRange()
	l.margins(tickLabels(at))
	height := min(max(0.46*(l.x.x1-l.x.x0), 15*l.s.Size), 24*l.s.Size)
	p := &panel{d: l.d, s: l.s, x: l.x, ligand: l.Ligand, top: y, bottom: y + height}
	p.y = linear{low: low, high: high, y0: p.bottom, y1: p.top}
	l.main = p
	p.hatch()
	p.yAxis(at, l.Response)
	below := p.xAxis(true)
	for i, line := range l.Lines {
		p.band(line.Low, line.High, CurveInk(l.lead+i))
	}
	l.rivals()
	for i, line := range l.Lines {
		p.curve(line.At, line.From, line.To, CurveInk(l.lead+i))
	}
	if l.Dense {
		l.cloud(p, func(q Point) float64 { return q.Y })
	} else {
		l.marks()
	}
	l.names()
	p.reading(showsResponse, l.Places...)
	return below
}

func (l *curvesLayout) rivals() {
	for _, r := range l.Rivals {
		l.d.within(group{class: "rival", data: [][2]string{{"m", r.ID}}, hidden: !r.Shown}, func() {
			for _, line := range r.Lines {
				l.main.broken(line, dashes[r.Dash%len(dashes)])
			}
		})
	}
}

// lineInk is the ink of a point's curve.
func (l *curvesLayout) lineInk(line int) Ink {
	if line < 0 || line >= len(l.Lines) && len(l.Lines) > 0 {
		return Muted
	}
	return CurveInk(l.lead + line)
}

// marks draws the scatter of each level as a thin line, then every measurement
// as the open mark of its preparation; left-out ones are crossed.
func (l *curvesLayout) marks() {
	for _, g := range l.levels() {
		if n := len(g.y); n >= 3 {
			mean, sd := meanSD(g.y)
			at := l.x.at(g.x)
			l.d.line(at, l.main.y.held(mean-sd), at, l.main.y.held(mean+sd), l.lineInk(g.line), 1)
			var dot Path
			circle(&dot, at, l.main.y.held(mean), 1.6)
			l.d.add(&stroke{path: dot, fill: l.lineInk(g.line)})
		}
	}
	r := l.radius()
	for line := -1; line < max(len(l.Lines), 1); line++ {
		for prep := -1; prep < max(len(l.Preparations), 1); prep++ {
			var open, blocked, out Path
			for _, q := range l.Points {
				if q.Line != line || q.Preparation != prep || !finite(q.Y) || !l.x.inside(q.X) {
					continue
				}
				x, y := l.x.at(q.X), l.main.y.held(q.Y)
				switch {
				case q.Blocked:
					circle(&blocked, x, y, 0.7*r)
				case q.LeftOut:
					cross(&out, x, y, 1.1*r)
				default:
					shape(&open, max(prep, 0), x, y, r)
				}
			}
			l.d.add(&stroke{path: open, ink: l.lineInk(line), fill: Ground, width: 1.3})
			l.d.add(&stroke{path: blocked, fill: Muted})
			l.d.add(&stroke{path: out, ink: Muted, width: 1.2})
		}
	}
}

// level is what was measured on one curve at one ligand.
type level struct {
	line int
	x    float64
	y    []float64
}

// levels gathers kept measurements, in order of curve and ligand.
func (l *curvesLayout) levels() []level {
	type key struct {
		line int
		x    float64
	}
	at := map[key]int{}
	var all []level
	for _, q := range l.Points {
		if q.LeftOut || q.Blocked || !finite(q.Y) || !l.x.inside(q.X) {
			continue
		}
		k := key{q.Line, q.X}
		i, ok := at[k]
		if !ok {
			i = len(all)
			at[k] = i
			all = append(all, level{line: q.Line, x: q.X})
		}
		all[i].y = append(all[i].y, q.Y)
	}
	return all
}

func meanSD(y []float64) (mean, sd float64) {
	for _, v := range y {
		mean += v / float64(len(y))
	}
	for _, v := range y {
		sd += (v - mean) * (v - mean)
	}
	return mean, math.Sqrt(sd / max(float64(len(y)-1), 1))
}

// cloud draws very many points: one small dot for all that fall on one place,
// places so coarse that there are not too many.
func (l *curvesLayout) cloud(p *panel, value func(Point) float64) {
	var dots []place
	for grain := 1.0; len(dots) == 0 || len(dots) > mostDots; grain *= 1.25 {
		if dots = l.dots(p, value, grain); len(dots) == 0 {
			return
		}
	}
	paths := make([]Path, max(len(l.Lines), 1)+1)
	for _, k := range dots {
		i := min(max(k.line, -1), len(paths)-2) + 1
		paths[i].MoveTo(k.x, k.y)
		paths[i].LineTo(k.x, k.y)
	}
	for i, path := range paths {
		l.d.add(&stroke{path: path, ink: l.lineInk(i - 1), width: 1.6, round: true, opacity: 0.6})
	}
}

// place is where a dot of one curve stands.
type place struct {
	line int
	x, y float64
}

// dots are the places that points take on a grid, in order of the points.
func (l *curvesLayout) dots(p *panel, value func(Point) float64, grain float64) []place {
	snap := func(v float64) float64 { return math.Round(math.Round(v/grain)*grain*10) / 10 }
	seen := map[place]bool{}
	var out []place
	for _, q := range l.Points {
		v := value(q)
		if !finite(v) || q.LeftOut || !l.x.inside(q.X) {
			continue
		}
		k := place{q.Line, snap(l.x.at(q.X)), snap(p.y.held(v))}
		if !seen[k] {
			seen[k] = true
			out = append(out, k)
		}
	}
	return out
}

// mostDots bounds a field of very many points.
const mostDots = 3000

// names writes the name of each curve beside it, where it is clear of the rest.
func (l *curvesLayout) names() {
	if len(l.Lines) < 2 {
		return
	}
	var busy obstacles
	for _, line := range l.Lines {
		busy.polyline(between(l.main.places(line.At), l.x.x0, l.x.x1))
	}
	for _, q := range l.Points {
		if len(busy.at) < mostDots && l.x.inside(q.X) && finite(q.Y) {
			busy.at = append(busy.at, XY{l.x.at(q.X), l.main.y.held(q.Y)})
		}
	}
	var curves []named
	for i, line := range l.Lines {
		curves = append(curves, named{line.Name, line.Short, NameInk(l.lead + i), between(l.main.places(line.At), l.x.x0, l.x.x1)})
	}
	busy.names(l.main, curves)
}

// rulers draws one ruler a curve: thick from 10 to 90 %, thin from 1 to 99 %,
// an upright at half saturation, pale beyond the tested range.
func (l *curvesLayout) rulers(y float64) float64 {
	y += 0.5 * l.s.Size
	single := l.shortRulers()
	if l.field && !single {
		return l.fieldRulers(y)
	}
	for i, line := range l.Lines {
		r := line.Ruler
		if !finite(r.Half) {
			continue
		}
		decades := ""
		if r.X10 > 0 && finite(r.X90) && r.X90 >= r.X10 {
			decades = strconv.FormatFloat(math.Log10(r.X90)-math.Log10(r.X10), 'f', 2, 64) + " decades"
		}
		middle := y + 0.8*l.s.Size
		if single {
			l.d.text(l.x.x0-0.6*l.s.Size, middle+0.36*l.s.Size, End, l.s.Size, NameInk(l.lead+i), Words(Sans, line.Short))
			l.d.text(l.x.x1+0.6*l.s.Size, middle+0.36*l.s.Size, Start, l.s.Size, Text, Words(Sans, decades))
		} else {
			base := y + l.s.Size
			l.d.text(l.x.x1, base, End, l.s.Size, Text, Words(Sans, decades))
			room := l.x.x1 - l.x.x0 - Words(Sans, decades).Width(l.s.Size) - l.s.Size
			l.d.text(l.x.x0, base, Start, l.s.Size, NameInk(l.lead+i), Words(Sans, line.Name).Cut(l.s.Size, room))
			middle = base + 0.95*l.s.Size
		}
		l.ruler(r, line, middle, i)
		y = middle + 0.9*l.s.Size
	}
	return y
}

// fieldRulers are the rulers of a field that carries its curve's name already.
func (l *curvesLayout) fieldRulers(y float64) float64 {
	for i, line := range l.Lines {
		if finite(line.Ruler.Half) {
			l.ruler(line.Ruler, line, y+0.7*l.s.Size, i)
			y += 1.5 * l.s.Size
		}
	}
	return y
}

func (l *curvesLayout) ruler(r Ruler, line Line, y float64, i int) {
	from, to := l.reach(r.X01, l.x.x0), l.reach(r.X99, l.x.x1)
	l.bar(from, to, y, 1.2, line, i)
	if finite(r.X10) || finite(r.X90) {
		l.bar(l.reach(r.X10, l.x.x0), l.reach(r.X90, l.x.x1), y, 0.5*l.s.Size, line, i)
	}
	if at := l.x.at(r.Half); at >= l.x.x0 && at <= l.x.x1 {
		l.d.line(at, y-0.75*l.s.Size, at, y+0.3*l.s.Size, Text, 2)
	}
}

// reach is the place of a ruler's end; where it does not exist or lies beyond
// the axis, the axis's own end.
func (l *curvesLayout) reach(x, end float64) float64 {
	if !(x > 0) || !finite(x) {
		return end
	}
	return min(max(l.x.at(x), l.x.x0), l.x.x1)
}

// bar draws a piece of a ruler, pale beyond the tested range.
func (l *curvesLayout) bar(from, to, y, width float64, line Line, i int) {
	a, b := l.x.x0, l.x.x1
	if line.From > 0 {
		a, b = l.x.at(line.From), l.x.at(line.To)
	}
	for _, part := range [][3]float64{{from, min(to, a), 0.4}, {max(from, a), min(to, b), 1}, {max(from, b), to, 0.4}} {
		if part[1] > part[0] {
			var p Path
			p.MoveTo(part[0], y)
			p.LineTo(part[1], y)
			l.d.add(&stroke{path: p, ink: CurveInk(l.lead + i), width: width, opacity: part[2]})
		}
	}
}

// residuals draws what the leader's curves leave, in units of scatter.
func (l *curvesLayout) residuals(y float64) float64 {
	extreme := 2.5
	for _, q := range l.Points {
		if finite(q.Residual) && !q.LeftOut {
			extreme = max(extreme, math.Abs(q.Residual))
		}
	}
	extreme = min(extreme*1.08, 8)
	p := &panel{d: l.d, s: l.s, x: l.x, ligand: l.Ligand, top: y + 1.9*l.s.Size}
	p.bottom = p.top + 6.2*l.s.Size
	p.y = linear{low: -extreme, high: extreme, y0: p.bottom, y1: p.top}
	p.hatch()
	at := []float64{-2, 0, 2}
	if extreme > 5 {
		at = []float64{-4, 0, 4}
	}
	p.yAxis(at, Words(SerifItalic, "residual / scatter"))
	l.d.within(group{class: "residuals"}, func() {
		if l.Dense {
			l.cloud(p, func(q Point) float64 { return q.Residual })
		} else {
			l.residualMarks(p)
		}
	})
	l.d.add(&group{class: "residuals-of"})
	l.d.add(endGroup{})
	p.reading(showsResidual, l.Places...)
	return p.bottom + 0.8*l.s.Size
}

func (l *curvesLayout) residualMarks(p *panel) {
	r := 0.8 * l.radius()
	for line := range max(len(l.Lines), 1) {
		for prep := -1; prep < max(len(l.Preparations), 1); prep++ {
			var open Path
			for _, q := range l.Points {
				if q.Line != line || q.Preparation != prep || q.LeftOut || !finite(q.Residual) || !l.x.inside(q.X) {
					continue
				}
				shape(&open, max(prep, 0), l.x.at(q.X), p.y.held(q.Residual), r)
			}
			l.d.add(&stroke{path: open, ink: l.lineInk(line), fill: Ground, width: 1.1})
		}
	}
}
