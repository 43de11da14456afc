package figure

import (
	"bytes"
	"encoding/base64"
	"fmt"
	"html"
	"io"
	"math"
	"strconv"
	"strings"
	"sync"
	"unicode"
)

// svgWriter writes a drawing as SVG.
type svgWriter struct {
	b      bytes.Buffer
	places int                  // decimals of coordinates
	used   [faces]map[rune]bool // letters in use
}

// WriteSVG writes the drawing as an element to stand inside a page whose style
// sheet holds StyleSheet and FontFaces. id makes its title's name unique; class is
// the element's own.
func (d *Drawing) WriteSVG(w io.Writer, id, class string) error {
	s := &svgWriter{places: 1}
	fmt.Fprintf(&s.b, `<svg class="%s" viewBox="0 0 %s %s" role="img" aria-labelledby="%s-t %s-d" fill="none">`,
		escape(class), s.num(d.Width), s.num(d.Height), escape(id), escape(id))
	fmt.Fprintf(&s.b, `<title id="%s-t">%s</title><desc id="%s-d">%s</desc>`,
		escape(id), escape(d.Title), escape(id), escape(d.Description))
	s.items(d.items)
	s.b.WriteString("</svg>")
	_, err := w.Write(s.b.Bytes())
	return err
}

// WriteSVGFile writes the drawing as a file of its own: always on white, its
// size in millimetres, the typefaces it uses embedded.
func (d *Drawing) WriteSVGFile(w io.Writer) error {
	s := &svgWriter{places: 2}
	s.items(d.items)
	body := s.b.Bytes()
	var b bytes.Buffer
	b.WriteString(`<?xml version="1.0" encoding="UTF-8"?>` + "\n")
	fmt.Fprintf(&b, `<svg xmlns="http://www.w3.org/2000/svg" width="%smm" height="%smm" viewBox="-%[3]d -%[3]d %[4]s %[5]s" fill="none">`+"\n",
		s.num((d.Width+2*rim)/perMM), s.num((d.Height+2*rim)/perMM), rim, s.num(d.Width+2*rim), s.num(d.Height+2*rim))
	fmt.Fprintf(&b, "<title>%s</title><desc>%s</desc>\n<style>", escape(d.Title), escape(d.Description))
	b.WriteString(s.fontFaces())
	b.WriteString(StyleSheet(":root", false))
	b.WriteString("</style>\n")
	fmt.Fprintf(&b, `<rect class="f-gr" x="-%[1]d" y="-%[1]d" width="%[2]s" height="%[3]s"/>`, rim, s.num(d.Width+2*rim), s.num(d.Height+2*rim))
	b.Write(body)
	b.WriteString("</svg>\n")
	_, err := w.Write(b.Bytes())
	return err
}

// perMM is the number of units in a millimetre.
const perMM = 96 / 25.4

// StyleSheet is the style sheet of drawings on the white or the dark ground, below
// an element named by a selector.
func StyleSheet(selector string, onDark bool) string {
	colours := light
	if onDark {
		colours = dark
	}
	var b strings.Builder
	b.WriteString(selector + "{")
	for i := Text; i < inks; i++ {
		fmt.Fprintf(&b, "--%s:%s;", i.class(), colours[i])
	}
	b.WriteString("}")
	if onDark {
		return b.String()
	}
	for i := Text; i < inks; i++ {
		fmt.Fprintf(&b, ".s-%[1]s{stroke:var(--%[1]s)}.f-%[1]s{fill:var(--%[1]s)}", i.class())
	}
	for f := range faces {
		t := typefaces[f]
		generic := "serif"
		if f == Sans || f == SansBold {
			generic = "sans-serif"
		}
		fmt.Fprintf(&b, ".%s{font:%s %s 1em '%s',%s}", f.class(), t.style, t.weight, t.family, generic)
	}
	b.WriteString(".halo{paint-order:stroke;stroke:var(--gr);stroke-width:4px;stroke-linejoin:round}")
	return b.String()
}

// class of a face in style sheets.
func (f Face) class() string { return [faces]string{"sa", "sb", "se", "si", "sx"}[f] }

// FontFaces is the style sheet that embeds every typeface of a page.
var FontFaces = sync.OnceValue(func() string {
	var b strings.Builder
	for _, t := range typefaces {
		b.WriteString(fontFace(t, "woff2", t.woff2))
	}
	return b.String()
})

// fontFaces embeds what a file uses of each face.
func (s *svgWriter) fontFaces() string {
	var b strings.Builder
	for f := range faces {
		if s.used[f] != nil {
			b.WriteString(fontFace(typefaces[f], "truetype", webFont(f, s.used[f])))
		}
	}
	return b.String()
}

func fontFace(t typeface, format string, file []byte) string {
	return fmt.Sprintf("@font-face{font-family:'%s';font-style:%s;font-weight:%s;src:url(data:font/%s;base64,%s) format('%s')}",
		t.family, t.style, t.weight, strings.Replace(format, "truetype", "ttf", 1), base64.StdEncoding.EncodeToString(file), format)
}

func (s *svgWriter) items(items []item) {
	for _, i := range items {
		switch i := i.(type) {
		case *stroke:
			s.stroke(i)
		case *lettering:
			s.lettering(i)
		case *group:
			s.group(i)
		case endGroup:
			s.b.WriteString("</g>")
		}
	}
}

func (s *svgWriter) group(g *group) {
	s.b.WriteString("<g")
	if g.class != "" {
		fmt.Fprintf(&s.b, ` class="%s"`, escape(g.class))
	}
	for _, a := range append(g.axis.data(), g.data...) {
		fmt.Fprintf(&s.b, ` data-%s="%s"`, escape(a[0]), escape(a[1]))
	}
	if g.hidden {
		s.b.WriteString(` visibility="hidden"`)
	}
	s.b.WriteString(">")
}

func (s *svgWriter) stroke(p *stroke) {
	if p.path.empty() {
		return
	}
	var classes []string
	if p.ink != None {
		classes = append(classes, "s-"+p.ink.class())
	}
	if p.fill != None {
		classes = append(classes, "f-"+p.fill.class())
	}
	fmt.Fprintf(&s.b, `<path class="%s"`, strings.Join(classes, " "))
	if p.ink != None && p.width != 1 {
		fmt.Fprintf(&s.b, ` stroke-width="%s"`, s.num(p.width))
	}
	if len(p.dash) > 0 {
		s.b.WriteString(` stroke-dasharray="`)
		for i, x := range p.dash {
			if i > 0 {
				s.b.WriteByte(' ')
			}
			s.b.WriteString(s.num(x))
		}
		s.b.WriteByte('"')
	}
	if p.round {
		s.b.WriteString(` stroke-linecap="round" stroke-linejoin="round"`)
	}
	if p.opacity != 0 && p.opacity != 1 {
		fmt.Fprintf(&s.b, ` opacity="%s"`, strconv.FormatFloat(p.opacity, 'g', 3, 64))
	}
	s.b.WriteString(` d="`)
	s.path(&p.path)
	s.b.WriteString(`"/>`)
}

// path writes pieces with relative coordinates, which are shorter. Each place
// is rounded before the difference is taken, so that errors do not add up.
func (s *svgWriter) path(p *Path) {
	scale := math.Pow(10, float64(s.places))
	round := func(v float64) float64 { return math.Round(v*scale) / scale }
	var x, y, startX, startY float64
	var last byte
	for _, q := range p.pieces {
		op, at := q.op, [][2]float64{{q.x3, q.y3}}
		switch op {
		case 'Z':
			s.b.WriteByte('z')
			x, y, last = startX, startY, 'z'
			continue
		case 'C':
			at = [][2]float64{{q.x1, q.y1}, {q.x2, q.y2}, {q.x3, q.y3}}
		}
		letter := op
		if op != 'M' {
			letter = op + 'a' - 'A'
		}
		if letter != last {
			s.b.WriteByte(letter)
		} else {
			s.b.WriteByte(' ')
		}
		for i, c := range at {
			cx, cy := round(c[0]), round(c[1])
			if i > 0 {
				s.b.WriteByte(' ')
			}
			if op == 'M' {
				s.pair(cx, cy)
			} else {
				s.pair(cx-x, cy-y)
			}
		}
		x, y, last = round(q.x3), round(q.y3), letter
		if op == 'M' {
			startX, startY = x, y
			last = 0
		}
	}
}

// pair writes two coordinates; a minus sign parts them as well as a blank.
func (s *svgWriter) pair(x, y float64) {
	s.b.WriteString(s.num(x))
	if t := s.num(y); t[0] == '-' {
		s.b.WriteString(t)
	} else {
		s.b.WriteByte(' ')
		s.b.WriteString(t)
	}
}

func (s *svgWriter) lettering(t *lettering) {
	class := "f-" + t.ink.class()
	if t.halo {
		class += " halo"
	}
	single := len(t.runs) == 1 && t.runs[0].Rise == Level
	if single {
		class += " " + t.runs[0].Face.class()
	}
	fmt.Fprintf(&s.b, `<text x="%s" y="%s" class="%s" style="font-size:%spx"`, s.num(t.x), s.num(t.y), class, s.num(t.size))
	if t.anchor != Start {
		fmt.Fprintf(&s.b, ` text-anchor="%s"`, [...]string{"start", "middle", "end"}[t.anchor])
	}
	s.b.WriteByte('>')
	if single {
		s.letters(t.runs[0])
		s.b.WriteString(escape(t.runs[0].Text))
	} else {
		s.runs(t)
	}
	s.b.WriteString("</text>")
}

// letters notes the letters of a run.
func (s *svgWriter) letters(r Run) {
	if s.used[r.Face] == nil {
		s.used[r.Face] = map[rune]bool{}
	}
	for _, c := range r.Text {
		s.used[r.Face][c] = true
	}
}

// runs writes the pieces of a label, each put back to the line before the next.
func (s *svgWriter) runs(t *lettering) {
	offset := 0.0
	for _, r := range t.runs {
		size, want := t.size, 0.0
		switch r.Rise {
		case Sub:
			size, want = t.size*small, t.size*subBy
		case Super:
			size, want = t.size*small, -t.size*supBy
		}
		s.letters(r)
		fmt.Fprintf(&s.b, `<tspan class="%s" style="font-size:%spx"`, r.Face.class(), s.num(size))
		if dy := want - offset; math.Abs(dy) > 1e-9 {
			fmt.Fprintf(&s.b, ` dy="%s"`, s.num(dy))
		}
		offset = want
		s.b.WriteString(">" + escape(r.Text) + "</tspan>")
	}
}

// num writes a coordinate with as few signs as it takes.
func (s *svgWriter) num(v float64) string {
	if !finite(v) {
		v = 0
	}
	t := strconv.FormatFloat(v, 'f', s.places, 64)
	if strings.Contains(t, ".") {
		t = strings.TrimRight(strings.TrimRight(t, "0"), ".")
	}
	switch {
	case t == "-0":
		return "0"
	case strings.HasPrefix(t, "0."):
		return t[1:]
	case strings.HasPrefix(t, "-0."):
		return "-" + t[2:]
	}
	return t
}

// escape makes a text safe inside XML and HTML; what XML cannot hold at all
// is dropped.
func escape(s string) string {
	s = strings.Map(func(r rune) rune {
		if r == 0xfffe || r == 0xffff || unicode.IsControl(r) && r != '\n' && r != '\t' {
			return -1
		}
		return r
	}, strings.ToValidUTF8(s, "\uFFFD"))
	return html.EscapeString(s)
}
