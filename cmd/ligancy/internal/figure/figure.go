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

// Draw lays the fields out in as many columns as fit.
func (m *Multiples) Draw(s Style) *Drawing {
	d := &Drawing{Width: s.Width, Title: m.Name, Description: m.Description}
	columns := max(1, int(s.Width/(25*s.Size)))
	gap := 1.2 * s.Size
	small := Style{Width: (s.Width - gap*float64(columns-1)) / float64(columns), Size: s.Size}
	y, tallest := 0.0, 0.0
	for i, c := range m.Fields {
		if i%columns == 0 && i > 0 {
			y, tallest = y+tallest+1.2*s.Size, 0
		}
		f := coloured(c, i).Draw(small)
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

// coloured is a figure whose first curve has the i-th colour.
func coloured(f Figure, i int) Figure {
	switch f := f.(type) {
	case *Curves:
		g := *f
		g.lead = i
		return &g
	case *Slope:
		g := *f
		g.lead = i
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
