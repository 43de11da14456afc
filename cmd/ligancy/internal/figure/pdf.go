package figure

import (
	"bytes"
	"compress/zlib"
	"encoding/binary"
	"encoding/hex"
	"fmt"
	"hash/fnv"
	"io"
	"maps"
	"slices"
	"strconv"
	"strings"
	"sync"
	"unicode"
	"unicode/utf16"
)

// pdfWriter writes a drawing as a portable document of one page (ISO 32000-1)
// with its typefaces embedded, reduced to the glyphs in use. It knows strokes,
// areas and text; general-purpose writers were measured too slow for the many
// figures of a study (22 ms a file; this one takes under one).
type pdfWriter struct {
	b       bytes.Buffer
	objects []int // offset of each object, from the first

	page  bytes.Buffer // content stream
	alpha []float64    // opacities in use, one graphics state each
	used  [faces]map[int]rune
}

// pt is the number of points (1/72 inch) in a unit of a drawing.
const pt = 0.75

// WritePDF writes the drawing as a file at its size on paper, on white.
func (d *Drawing) WritePDF(w io.Writer) error {
	p := &pdfWriter{}
	p.content(d)
	p.b.WriteString("%PDF-1.5\n%\xe2\xe3\xcf\xd3\n")
	// 1 catalogue, 2 pages, 3 page, 4 content, 5 information, then typefaces.
	p.object("<</Type/Catalog/Pages 2 0 R/Lang(en)/ViewerPreferences<</DisplayDocTitle true>>>>")
	p.object("<</Type/Pages/Kids[3 0 R]/Count 1>>")
	p.object(fmt.Sprintf("<</Type/Page/Parent 2 0 R/MediaBox[0 0 %s %s]/Contents 4 0 R/Resources<<%s%s>>>>",
		real((d.Width+2*rim)*pt), real((d.Height+2*rim)*pt), p.fontNames(), p.states()))
	p.stream("", p.page.Bytes())
	p.object(fmt.Sprintf("<</Title%s/Subject%s/Producer(ligancy)>>", pdfText(d.Title), pdfText(d.Description)))
	for f := range faces {
		if p.used[f] != nil {
			p.typeface(f)
		}
	}
	p.end()
	_, err := w.Write(p.b.Bytes())
	return err
}

// object writes the next numbered object.
func (p *pdfWriter) object(body string) {
	p.objects = append(p.objects, p.b.Len())
	fmt.Fprintf(&p.b, "%d 0 obj\n%s\nendobj\n", len(p.objects), body)
}

// stream writes the next object as a compressed stream.
func (p *pdfWriter) stream(entries string, content []byte) {
	z := deflate(content)
	p.objects = append(p.objects, p.b.Len())
	fmt.Fprintf(&p.b, "%d 0 obj\n<<%s/Filter/FlateDecode/Length %d>>stream\n", len(p.objects), entries, len(z))
	p.b.Write(z)
	p.b.WriteString("\nendstream\nendobj\n")
}

var compressors = sync.Pool{New: func() any { return zlib.NewWriter(io.Discard) }}

func deflate(content []byte) []byte {
	var b bytes.Buffer
	z := compressors.Get().(*zlib.Writer)
	defer compressors.Put(z)
	z.Reset(&b)
	z.Write(content) // a buffer does not fail
	z.Close()
	return b.Bytes()
}

// end writes the table of objects and the trailer.
func (p *pdfWriter) end() {
	at := p.b.Len()
	fmt.Fprintf(&p.b, "xref\n0 %d\n0000000000 65535 f \n", len(p.objects)+1)
	for _, o := range p.objects {
		fmt.Fprintf(&p.b, "%010d 00000 n \n", o)
	}
	fmt.Fprintf(&p.b, "trailer\n<</Size %d/Root 1 0 R/Info 5 0 R>>\nstartxref\n%d\n%%%%EOF\n", len(p.objects)+1, at)
}

const (
	firstFontObject = 6
	objectsPerFont  = 5
)

// fontNames is the page's list of typefaces.
func (p *pdfWriter) fontNames() string {
	var b strings.Builder
	object := firstFontObject
	for f := range faces {
		if p.used[f] != nil {
			fmt.Fprintf(&b, "/F%d %d 0 R", f, object)
			object += objectsPerFont
		}
	}
	return "/Font<<" + b.String() + ">>"
}

// states is the page's list of opacities.
func (p *pdfWriter) states() string {
	var b strings.Builder
	for i, a := range p.alpha {
		fmt.Fprintf(&b, "/A%d<</ca %[2]s/CA %[2]s>>", i, real(a))
	}
	return "/ExtGState<<" + b.String() + ">>"
}

// typeface writes the five objects of one embedded face.
func (p *pdfWriter) typeface(f Face) {
	glyphs := slices.Sorted(maps.Keys(p.used[f]))
	o := parsedOutlines[f]()
	head, hhea, hmtx := o.tables["head"], o.tables["hhea"], o.tables["hmtx"]
	em := float64(binary.BigEndian.Uint16(head[18:]))
	thousand := func(t []byte, at int) string {
		return real(float64(int16(binary.BigEndian.Uint16(t[at:]))) * 1000 / em)
	}
	long := int(binary.BigEndian.Uint16(hhea[34:]))
	var widths strings.Builder
	for _, g := range glyphs {
		fmt.Fprintf(&widths, "%d[%s]", g, thousand(hmtx, 4*min(g, long-1)))
	}
	name := subsetTag(glyphs) + pdfName(typefaces[f])
	first := len(p.objects) + 1
	p.object(fmt.Sprintf("<</Type/Font/Subtype/Type0/BaseFont/%s/Encoding/Identity-H/DescendantFonts[%d 0 R]/ToUnicode %d 0 R>>",
		name, first+1, first+3))
	p.object(fmt.Sprintf("<</Type/Font/Subtype/CIDFontType2/BaseFont/%s/CIDSystemInfo<</Registry(Adobe)/Ordering(Identity)/Supplement 0>>"+
		"/FontDescriptor %d 0 R/CIDToGIDMap/Identity/DW 0/W[%s]>>", name, first+2, widths.String()))
	flags, angle := 4, 0 // symbolic: glyphs are named by number
	if typefaces[f].style == "italic" {
		flags, angle = flags|64, -12
	}
	if f >= Serif {
		flags |= 2
	}
	p.object(fmt.Sprintf("<</Type/FontDescriptor/FontName/%s/Flags %d/FontBBox[%s %s %s %s]/ItalicAngle %d/Ascent %s/Descent %s/CapHeight 720/StemV 80/FontFile2 %d 0 R>>",
		name, flags, thousand(head, 36), thousand(head, 38), thousand(head, 40), thousand(head, 42), angle,
		thousand(hhea, 4), thousand(hhea, 6), first+4))
	p.stream("", toUnicode(p.used[f], glyphs))
	file := o.subset(glyphs)
	p.stream(fmt.Sprintf("/Length1 %d", len(file)), file)
}

var parsedOutlines = func() (all [faces]func() *outlines) {
	for f := range all {
		all[f] = sync.OnceValue(func() *outlines { return parseOutlines(typefaces[f].ttf) })
	}
	return all
}()

// subsetTag is the six letters that mark an embedded subset, made from its glyphs.
func subsetTag(glyphs []int) string {
	h := fnv.New32a()
	for _, g := range glyphs {
		h.Write([]byte{byte(g >> 8), byte(g)})
	}
	tag, sum := make([]byte, 6), h.Sum32()
	for i := range tag {
		tag[i] = 'A' + byte(sum%26)
		sum /= 26
	}
	return string(tag) + "+"
}

// pdfName is the PostScript name of a typeface.
func pdfName(t typeface) string {
	name := strings.ReplaceAll(t.family, " ", "")
	switch {
	case t.style == "italic":
		return name + "-Italic"
	case t.weight == "600":
		return name + "-SemiBold"
	}
	return name + "-Regular"
}

// toUnicode says which letter each glyph is, so that text can be searched and copied.
func toUnicode(letters map[int]rune, glyphs []int) []byte {
	var b bytes.Buffer
	b.WriteString("/CIDInit/ProcSet findresource begin 12 dict begin begincmap\n" +
		"/CIDSystemInfo<</Registry(Adobe)/Ordering(UCS)/Supplement 0>>def/CMapName/L def/CMapType 2 def\n" +
		"1 begincodespacerange<0000><FFFF>endcodespacerange\n")
	for part := range slices.Chunk(glyphs, 100) {
		fmt.Fprintf(&b, "%d beginbfchar\n", len(part))
		for _, g := range part {
			fmt.Fprintf(&b, "<%04X><%s>\n", g, hexUTF16(string(letters[g])))
		}
		b.WriteString("endbfchar\n")
	}
	b.WriteString("endcmap CMapName currentdict/CMap defineresource pop end end")
	return b.Bytes()
}

func hexUTF16(s string) string {
	var raw []byte
	for _, u := range utf16.Encode([]rune(s)) {
		raw = binary.BigEndian.AppendUint16(raw, u)
	}
	return strings.ToUpper(hex.EncodeToString(raw))
}

// pdfText writes a text string in any script.
func pdfText(s string) string { return "<FEFF" + hexUTF16(strings.ToValidUTF8(s, "\uFFFD")) + ">" }

// content writes the drawing's operators, its y axis turned to point downwards.
func (p *pdfWriter) content(d *Drawing) {
	fmt.Fprintf(&p.page, "%s 0 0 -%s %s %s cm\n", real(pt), real(pt), real(rim*pt), real((d.Height+rim)*pt))
	depth, hiddenFrom := 0, -1
	for _, i := range d.items {
		switch i := i.(type) {
		case *group:
			if i.hidden && hiddenFrom < 0 {
				hiddenFrom = depth
			}
			depth++
		case endGroup:
			if depth--; depth == hiddenFrom {
				hiddenFrom = -1
			}
		case *stroke:
			if hiddenFrom < 0 {
				p.stroke(i)
			}
		case *lettering:
			if hiddenFrom < 0 {
				p.lettering(i)
			}
		}
	}
}

func (p *pdfWriter) stroke(s *stroke) {
	if s.path.empty() || s.ink == None && s.fill == None {
		return
	}
	p.page.WriteString("q ")
	p.opacity(s.opacity)
	if s.ink != None {
		fmt.Fprintf(&p.page, "%s RG %s w ", colour(s.ink), real(s.width))
	}
	if s.fill != None {
		fmt.Fprintf(&p.page, "%s rg ", colour(s.fill))
	}
	if len(s.dash) > 0 {
		p.page.WriteString("[")
		for _, x := range s.dash {
			p.page.WriteString(real(x) + " ")
		}
		p.page.WriteString("] 0 d ")
	}
	if s.round {
		p.page.WriteString("1 J 1 j ")
	}
	for _, q := range s.path.pieces {
		switch q.op {
		case 'M':
			fmt.Fprintf(&p.page, "%s %s m ", real(q.x3), real(q.y3))
		case 'L':
			fmt.Fprintf(&p.page, "%s %s l ", real(q.x3), real(q.y3))
		case 'C':
			fmt.Fprintf(&p.page, "%s %s %s %s %s %s c ", real(q.x1), real(q.y1), real(q.x2), real(q.y2), real(q.x3), real(q.y3))
		case 'Z':
			p.page.WriteString("h ")
		}
	}
	switch {
	case s.ink != None && s.fill != None:
		p.page.WriteString("B Q\n")
	case s.fill != None:
		p.page.WriteString("f Q\n")
	default:
		p.page.WriteString("S Q\n")
	}
}

func (p *pdfWriter) opacity(a float64) {
	if a == 0 || a == 1 {
		return
	}
	i := slices.Index(p.alpha, a)
	if i < 0 {
		i, p.alpha = len(p.alpha), append(p.alpha, a)
	}
	fmt.Fprintf(&p.page, "/A%d gs ", i)
}

func (p *pdfWriter) lettering(t *lettering) {
	x := t.x
	switch t.anchor {
	case Middle:
		x -= t.runs.Width(t.size) / 2
	case End:
		x -= t.runs.Width(t.size)
	}
	if t.halo {
		fmt.Fprintf(&p.page, "q %s RG 4 w 1 j 1 Tr ", colour(Ground))
		p.runs(t, x)
		p.page.WriteString("Q\n")
	}
	fmt.Fprintf(&p.page, "q %s rg ", colour(t.ink))
	p.runs(t, x)
	p.page.WriteString("Q\n")
}

func (p *pdfWriter) runs(t *lettering, x float64) {
	for _, r := range t.runs {
		size, y := t.size, t.y
		switch r.Rise {
		case Sub:
			size, y = t.size*small, t.y+t.size*subBy
		case Super:
			size, y = t.size*small, t.y-t.size*supBy
		}
		fmt.Fprintf(&p.page, "BT /F%d %s Tf 1 0 0 -1 %s %s Tm <%s> Tj ET ", r.Face, real(size), real(x), real(y), p.glyphs(r.Face, r.Text))
		x += r.Face.Width(r.Text, size)
	}
}

// glyphs turns a text into the numbers of its glyphs and notes that they are
// in use. A letter that the face lacks becomes its empty box.
func (p *pdfWriter) glyphs(f Face, s string) string {
	if p.used[f] == nil {
		p.used[f] = map[int]rune{}
	}
	var b strings.Builder
	for _, r := range s {
		g := f.glyph(r)
		if g == 0 {
			if unicode.In(r, unicode.Mn, unicode.Me, unicode.Cf) {
				continue
			}
			r = unicode.ReplacementChar
		}
		p.used[f][g] = r
		fmt.Fprintf(&b, "%04X", g)
	}
	return b.String()
}

// colour is an ink on white as three numbers from 0 to 1.
func colour(i Ink) string {
	v, err := strconv.ParseUint(strings.TrimPrefix(light[i], "#"), 16, 32)
	if err != nil {
		panic("figure: an ink has no colour")
	}
	part := func(shift uint) string { return real(float64(v>>shift&255) / 255) }
	return part(16) + " " + part(8) + " " + part(0)
}

// real writes a number as PDF reads it.
func real(v float64) string {
	if !finite(v) {
		v = 0
	}
	s := strconv.FormatFloat(v, 'f', 3, 64)
	s = strings.TrimRight(strings.TrimRight(s, "0"), ".")
	if s == "-0" {
		return "0"
	}
	return s
}
