package figure

import "math"

// Shapes is the number of marks that tell preparations apart.
const Shapes = 8

// dashes part rivals that are shown together.
var dashes = [][]float64{{0.1, 4}, {6, 4}, {9, 3.5, 0.1, 3.5}, {3, 3}, {12, 4}, {6, 3.5, 0.1, 3.5, 0.1, 3.5}}

// shape draws the outline of the n-th mark around a place; r is the radius of
// the circle among them, and the others look as large.
func shape(p *Path, n int, x, y, r float64) {
	switch n % Shapes {
	case 0:
		circle(p, x, y, r)
	case 1:
		p.Rectangle(x-0.9*r, y-0.9*r, x+0.9*r, y+0.9*r)
	case 2:
		polygon(p, x, y+0.15*r, 1.3*r, 3, -90)
	case 3:
		polygon(p, x, y, 1.25*r, 4, -90)
	case 4:
		polygon(p, x, y-0.15*r, 1.3*r, 3, 90)
	case 5:
		polygon(p, x, y, 1.1*r, 6, 0)
	case 6:
		polygon(p, x, y+0.05*r, 1.15*r, 5, -90)
	case 7:
		star(p, x, y, 1.35*r)
	}
}

// handle is the distance of Bézier handles that makes a quarter of a circle.
const handle = 0.5522847498

func circle(p *Path, x, y, r float64) {
	k := handle * r
	p.MoveTo(x-r, y)
	p.CurveTo(x-r, y-k, x-k, y-r, x, y-r)
	p.CurveTo(x+k, y-r, x+r, y-k, x+r, y)
	p.CurveTo(x+r, y+k, x+k, y+r, x, y+r)
	p.CurveTo(x-k, y+r, x-r, y+k, x-r, y)
	p.Close()
}

func polygon(p *Path, x, y, r float64, corners int, degrees float64) {
	for i := range corners {
		a := (degrees + 360*float64(i)/float64(corners)) * math.Pi / 180
		if i == 0 {
			p.MoveTo(x+r*math.Cos(a), y+r*math.Sin(a))
		} else {
			p.LineTo(x+r*math.Cos(a), y+r*math.Sin(a))
		}
	}
	p.Close()
}

// star is a four-pointed star.
func star(p *Path, x, y, r float64) {
	for i := range 8 {
		a := (-90 + 45*float64(i)) * math.Pi / 180
		q := r
		if i%2 == 1 {
			q = 0.5 * r
		}
		if i == 0 {
			p.MoveTo(x+q*math.Cos(a), y+q*math.Sin(a))
		} else {
			p.LineTo(x+q*math.Cos(a), y+q*math.Sin(a))
		}
	}
	p.Close()
}

// cross strikes out a place.
func cross(p *Path, x, y, r float64) {
	p.MoveTo(x-r, y-r)
	p.LineTo(x+r, y+r)
	p.MoveTo(x-r, y+r)
	p.LineTo(x+r, y-r)
}

// key writes what the lines and marks mean, in the order given, from x on,
// going on below where the width ends; it returns the last baseline.
type keyEntry struct {
	sample func(d *Drawing, x, y float64) // draws within sampleWidth of x
	width  float64
	label  Label
	rival  string // by which the page finds the rival that it is the key of
}

func (d *Drawing) key(entries []keyEntry, x0, y, x1 float64, s Style) float64 {
	x := x0
	for _, e := range entries {
		l := e.label.Cut(s.Size, x1-x0-e.width-4)
		w := e.width + 4 + l.Width(s.Size)
		if x > x0 && x+w > x1 {
			x, y = x0, y+s.lead()
		}
		write := func() {
			e.sample(d, x, y-0.36*s.Size)
			d.text(x+e.width+4, y, Start, s.Size, Muted, l)
		}
		if e.rival != "" {
			d.within(group{class: "rival-key", data: [][2]string{{"m", e.rival}}}, write)
		} else {
			write()
		}
		x += w + 1.3*s.Size
	}
	return y
}

// lineSample is the sample of a line in a key.
func lineSample(ink Ink, width float64, dash []float64) (func(*Drawing, float64, float64), float64) {
	return func(d *Drawing, x, y float64) {
		var p Path
		p.MoveTo(x, y)
		p.LineTo(x+24, y)
		d.add(&stroke{path: p, ink: ink, width: width, dash: dash, round: true})
	}, 24
}

// markSample is the sample of a preparation's mark in a key.
func markSample(n int, r float64) (func(*Drawing, float64, float64), float64) {
	return func(d *Drawing, x, y float64) {
		var p Path
		shape(&p, n, x+1.4*r, y, r)
		d.add(&stroke{path: p, ink: Text, fill: Ground, width: 1.2})
	}, 2.8 * r
}

// DashPattern is the dash of the n-th rival as an attribute of SVG.
func DashPattern(n int) string {
	s := svgWriter{places: 1}
	for i, x := range dashes[n%len(dashes)] {
		if i > 0 {
			s.b.WriteByte(' ')
		}
		s.b.WriteString(s.num(x))
	}
	return s.b.String()
}
