// Package figure draws the results of a study: points and curves, steepness,
// standings, constants, populations and the Hill plot, in one style, as SVG
// for the report page and as SVG and PDF files at publication size.
//
// A figure is a plain struct of numbers and names (Curves, Standing, …) whose
// Draw lays it out for a Style; the Drawing that comes back is written by
// WriteSVG, inline or as a file, or by WritePDF. Nothing here knows where the
// numbers come from.
package figure

// Drawing is a figure that was laid out, in units of 1/96 inch (a CSS pixel).
type Drawing struct {
	Width, Height float64
	Title         string // what the figure is
	Description   string // what a reader who cannot see it should know

	items []item
}

// item is one thing to draw; order is from back to front.
type item interface{ isItem() }

func (*stroke) isItem()    {}
func (*lettering) isItem() {}
func (*group) isItem()     {}
func (endGroup) isItem()   {}

// stroke is a path with what it is drawn in.
type stroke struct {
	path    Path
	ink     Ink // of the line; None leaves it undrawn
	fill    Ink // of the area; None leaves it open
	width   float64
	dash    []float64
	opacity float64 // 0 means 1
	round   bool    // round ends: dots where dashes have no length
}

// lettering is one line of text.
type lettering struct {
	x, y   float64 // of the baseline
	anchor Anchor
	size   float64
	ink    Ink
	runs   Label
	halo   bool // set off by the ground's colour from what lies behind it
}

// Anchor says which part of a text stands at its place.
type Anchor uint8

const (
	Start Anchor = iota
	Middle
	End
)

// group holds what is shown, hidden or found together. Only SVG knows groups;
// PDF leaves out what is hidden.
type group struct {
	class  string
	data   [][2]string // data-… attributes
	axis   *frame      // of a field that the page reads
	hidden bool
}

type endGroup struct{}

func (d *Drawing) add(i item) { d.items = append(d.items, i) }

// line draws a straight line.
func (d *Drawing) line(x0, y0, x1, y1 float64, ink Ink, width float64) {
	var p Path
	p.MoveTo(x0, y0)
	p.LineTo(x1, y1)
	d.add(&stroke{path: p, ink: ink, width: width})
}

// text writes a label at a baseline.
func (d *Drawing) text(x, y float64, anchor Anchor, size float64, ink Ink, l Label) {
	if len(l) > 0 {
		d.add(&lettering{x: x, y: y, anchor: anchor, size: size, ink: ink, runs: l})
	}
}

// within draws what f draws inside a group.
func (d *Drawing) within(g group, f func()) {
	d.add(&g)
	f()
	d.add(endGroup{})
}

// Path is a line of straight and curved pieces.
type Path struct{ pieces []piece }

// piece is one step of a path: 'M' and 'L' use the last point alone, 'C' is a
// cubic Bézier piece with its two handles, 'Z' closes.
type piece struct {
	op                     byte
	x1, y1, x2, y2, x3, y3 float64
}

// MoveTo begins a line.
func (p *Path) MoveTo(x, y float64) { p.pieces = append(p.pieces, piece{op: 'M', x3: x, y3: y}) }

// LineTo goes on straight.
func (p *Path) LineTo(x, y float64) { p.pieces = append(p.pieces, piece{op: 'L', x3: x, y3: y}) }

// CurveTo goes on along a cubic Bézier piece.
func (p *Path) CurveTo(x1, y1, x2, y2, x, y float64) {
	p.pieces = append(p.pieces, piece{'C', x1, y1, x2, y2, x, y})
}

// Close goes back to where the line began.
func (p *Path) Close() { p.pieces = append(p.pieces, piece{op: 'Z'}) }

// Rectangle adds a closed rectangle.
func (p *Path) Rectangle(x0, y0, x1, y1 float64) {
	p.MoveTo(x0, y0)
	p.LineTo(x1, y0)
	p.LineTo(x1, y1)
	p.LineTo(x0, y1)
	p.Close()
}

// empty says whether nothing would be drawn.
func (p *Path) empty() bool { return len(p.pieces) == 0 }
