package figure

import "math"

// Figure is what can be laid out.
type Figure interface {
	Draw(s Style) *Drawing
}

// Multiples is several small figures that share their axes, in rows.
type Multiples struct {
	Name, Description string
	Fields            []Figure // Curves or Slope
	Remark            string   // below them
}

// Draw lays the fields out in as many columns as fit, below one key.
func (m *Multiples) Draw(s Style) *Drawing {
	d := &Drawing{Width: s.Width, Title: m.Name, Description: m.Description}
	columns := max(1, int(s.Width/(25*s.Size)))
	gap := 1.2 * s.Size
	small := Style{Width: (s.Width - gap*float64(columns-1)) / float64(columns), Size: s.Size}
	y, tallest := m.key(d, s), 0.0
	for i, c := range m.Fields {
		if i%columns == 0 && i > 0 {
			y, tallest = y+tallest+1.2*s.Size, 0
		}
		f := oneOf(c, i).Draw(small)
		d.place(f, float64(i%columns)*(small.Width+gap), y)
		tallest = max(tallest, f.Height)
	}
	y += tallest
	if m.Remark != "" {
		y += s.lead()
		d.text(0, y, Start, s.Size, Muted, Words(Sans, m.Remark))
		y += 0.4 * s.Size
	}
	d.Height = math.Ceil(y)
	return d
}

// key writes what the lines and marks of all fields mean.
func (m *Multiples) key(d *Drawing, s Style) float64 {
	if len(m.Fields) == 0 {
		return 0
	}
	var entries []keyEntry
	switch f := oneOf(m.Fields[0], 0).(type) {
	case *Curves:
		entries = (&curvesLayout{Curves: f, d: d, s: s}).entries()
	case *Slope:
		entries = f.entries()
	}
	if len(entries) == 0 {
		return 0
	}
	return d.key(entries, 0, s.Size, s.Width, s) + s.Size
}

// oneOf is a figure as the i-th field of several.
func oneOf(f Figure, i int) Figure {
	switch f := f.(type) {
	case *Curves:
		g := *f
		g.lead, g.field = i, true
		return &g
	case *Slope:
		g := *f
		g.lead, g.field = i, true
		return &g
	}
	return f
}

// place draws another drawing at a place.
func (d *Drawing) place(f *Drawing, x, y float64) {
	for _, i := range f.items {
		d.add(moved(i, x, y))
	}
}

// moved is an item moved by (x, y).
func moved(i item, x, y float64) item {
	switch i := i.(type) {
	case *stroke:
		s := *i
		s.path = Path{pieces: make([]piece, len(i.path.pieces))}
		for k, q := range i.path.pieces {
			s.path.pieces[k] = piece{q.op, q.x1 + x, q.y1 + y, q.x2 + x, q.y2 + y, q.x3 + x, q.y3 + y}
		}
		return &s
	case *lettering:
		t := *i
		t.x, t.y = t.x+x, t.y+y
		return &t
	case *group:
		g := *i
		g.axis = g.axis.moved(x, y)
		return &g
	}
	return i
}

// Spare takes out what a small field has no room for: bands, rivals that are
// not shown, every second point of a curve.
func (c *Curves) Spare() {
	c.Rivals = shownOf(c.Rivals)
	for i := range c.Lines {
		l := &c.Lines[i]
		l.At, l.Low, l.High = sparse(l.At), nil, nil
	}
}

// Spare takes out what a small field has no room for.
func (f *Slope) Spare() {
	f.Rivals = shownOf(f.Rivals)
	for i := range f.Lines {
		l := &f.Lines[i]
		l.At, l.Low, l.High = sparse(l.At), nil, nil
	}
}

func shownOf(rivals []Rival) []Rival {
	var out []Rival
	for _, r := range rivals {
		if r.Shown {
			for i := range r.Lines {
				r.Lines[i] = sparse(r.Lines[i])
			}
			out = append(out, r)
		}
	}
	return out
}

// sparse keeps every second point, and the last.
func sparse(pts []XY) []XY {
	if len(pts) < 50 {
		return pts
	}
	var out []XY
	for i := 0; i < len(pts); i += 2 {
		out = append(out, pts[i])
	}
	if len(pts)%2 == 0 {
		out = append(out, pts[len(pts)-1])
	}
	return out
}
