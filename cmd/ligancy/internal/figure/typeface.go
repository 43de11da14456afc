package figure

import (
	_ "embed"
	"sync"
	"unicode"

	"golang.org/x/image/font"
	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"
)

// Face is one of the typefaces of the report.
type Face uint8

const (
	Sans        Face = iota // numerals and labels in figures; its digits are tabular
	SansBold                // names of curves
	Serif                   // text
	SerifItalic             // quantities and axis titles
	SerifBold               // headings
	faces
)

//go:embed fonts/sans.ttf
var sansTTF []byte

//go:embed fonts/sans-bold.ttf
var sansBoldTTF []byte

//go:embed fonts/serif.ttf
var serifTTF []byte

//go:embed fonts/serif-italic.ttf
var serifItalicTTF []byte

//go:embed fonts/serif-bold.ttf
var serifBoldTTF []byte

//go:embed fonts/sans.woff2
var sansWOFF2 []byte

//go:embed fonts/sans-bold.woff2
var sansBoldWOFF2 []byte

//go:embed fonts/serif.woff2
var serifWOFF2 []byte

//go:embed fonts/serif-italic.woff2
var serifItalicWOFF2 []byte

//go:embed fonts/serif-bold.woff2
var serifBoldWOFF2 []byte

// typeface is what a face is called and where its outlines are.
type typeface struct {
	family string // of CSS
	weight string
	style  string
	ttf    []byte
	woff2  []byte
}

var typefaces = [faces]typeface{
	Sans:        {"Inter", "400", "normal", sansTTF, sansWOFF2},
	SansBold:    {"Inter", "600", "normal", sansBoldTTF, sansBoldWOFF2},
	Serif:       {"STIX Two Text", "400", "normal", serifTTF, serifWOFF2},
	SerifItalic: {"STIX Two Text", "400", "italic", serifItalicTTF, serifItalicWOFF2},
	SerifBold:   {"STIX Two Text", "600", "normal", serifBoldTTF, serifBoldWOFF2},
}

// metrics holds the glyphs of a face's letters and their advance widths, in
// thousandths of its size.
type metrics struct {
	once    sync.Once
	advance map[rune]float64
	glyph   map[rune]int
}

var measured [faces]metrics

// unknownWidth guesses the advance of a letter that the face lacks, which a
// browser takes from another typeface: full for the scripts of East Asia.
func unknownWidth(r rune) float64 {
	if r >= 0x1100 {
		return 1020
	}
	return 640
}

// load reads the advance widths of every letter of the face, once.
func (f Face) load() *metrics {
	m := &measured[f]
	m.once.Do(func() {
		m.advance, m.glyph = map[rune]float64{}, map[rune]int{}
		parsed, err := sfnt.Parse(typefaces[f].ttf)
		if err != nil {
			panic("figure: an embedded typeface cannot be read")
		}
		var b sfnt.Buffer
		for r := rune(0x20); r < 0x2800; r++ {
			g, err := parsed.GlyphIndex(&b, r)
			if err != nil || g == 0 {
				continue
			}
			a, err := parsed.GlyphAdvance(&b, g, fixed.I(1000), font.HintingNone)
			if err == nil {
				m.advance[r], m.glyph[r] = float64(a)/64, int(g)
			}
		}
	})
	return m
}

// Has says whether the face holds a letter.
func (f Face) Has(r rune) bool {
	_, ok := f.load().advance[r]
	return ok
}

// glyph is the number of a letter's glyph; 0 where the face lacks it.
func (f Face) glyph(r rune) int { return f.load().glyph[r] }

// Width is the length of a text set in the face at a size.
func (f Face) Width(s string, size float64) float64 {
	m := f.load()
	w := 0.0
	for _, r := range s {
		switch a, ok := m.advance[r]; {
		case ok:
			w += a
		case unicode.In(r, unicode.Mn, unicode.Me, unicode.Cf):
		default:
			w += unknownWidth(r)
		}
	}
	return w * size / 1000
}
