package figure

import (
	"bytes"
	"encoding/binary"
	"testing"

	"golang.org/x/image/font"
	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"
)

func TestFacesHoldWhatResultsNeed(t *testing.T) {
	for f := range faces {
		for _, r := range "0123456789.,;:()[]/−–±×÷·≤≥≈°%“”‘’…ABCabcÄéøšĀαβχΔΣµȲn" {
			if !f.Has(r) {
				t.Errorf("%s %s lacks %q", typefaces[f].family, typefaces[f].style, r)
			}
		}
		if len(typefaces[f].woff2) == 0 || string(typefaces[f].woff2[:4]) != "wOF2" {
			t.Errorf("%s is no WOFF2", typefaces[f].family)
		}
	}
	for _, f := range []Face{Sans, SansBold} {
		for _, r := range "0123456789" {
			if f.Width(string(r), 10) != f.Width("0", 10) {
				t.Errorf("%q is not as wide as 0: figures are not tabular", r)
			}
		}
	}
}

// A subset reads back with a general-purpose library: its letters have the
// outlines and widths that they had, others are gone.
func TestSubsetsKeepTheirGlyphs(t *testing.T) {
	letters := map[rune]bool{}
	for _, r := range "pH 7.6Ȳéö" {
		letters[r] = true
	}
	for f := range faces {
		file := webFont(f, letters)
		if len(file) > len(typefaces[f].ttf)/2 {
			t.Errorf("%s: %d bytes of %d", pdfName(typefaces[f]), len(file), len(typefaces[f].ttf))
		}
		small, err := sfnt.Parse(file)
		if err != nil {
			t.Fatal(err)
		}
		whole, err := sfnt.Parse(typefaces[f].ttf)
		if err != nil {
			t.Fatal(err)
		}
		for r := range letters {
			if a, b := outline(t, small, r), outline(t, whole, r); a != b || r != ' ' && a == "" {
				t.Errorf("%s: %q changed", pdfName(typefaces[f]), r)
			}
		}
		var buf sfnt.Buffer
		if g, _ := small.GlyphIndex(&buf, 'Q'); g != 0 {
			t.Errorf("%s: Q is still there", pdfName(typefaces[f]))
		}
		checkTables(t, file)
	}
}

// outline of a letter and its advance, as text.
func outline(t *testing.T, f *sfnt.Font, r rune) string {
	t.Helper()
	var buf sfnt.Buffer
	g, err := f.GlyphIndex(&buf, r)
	if err != nil || g == 0 {
		t.Fatalf("no %q: %v", r, err)
	}
	segments, err := f.LoadGlyph(&buf, g, fixed.I(100), nil)
	if err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	for _, s := range segments {
		for _, a := range s.Args {
			binary.Write(&b, binary.BigEndian, []int32{int32(s.Op), int32(a.X), int32(a.Y)})
		}
	}
	w, err := f.GlyphAdvance(&buf, g, fixed.I(100), font.HintingNone)
	if err != nil {
		t.Fatal(err)
	}
	binary.Write(&b, binary.BigEndian, int32(w))
	return b.String()
}

// checkTables checks the sums and places of a TrueType file's directory
// (OpenType, "Organization of an OpenType font").
func checkTables(t *testing.T, file []byte) {
	t.Helper()
	last := ""
	for i := range int(binary.BigEndian.Uint16(file[4:])) {
		r := file[12+16*i:]
		name, sum := string(r[:4]), binary.BigEndian.Uint32(r[4:])
		at, size := binary.BigEndian.Uint32(r[8:]), binary.BigEndian.Uint32(r[12:])
		if at%4 != 0 || name <= last || checksum(file[at:at+size]) != sum {
			t.Errorf("table %q at %d: sum or order is wrong", name, at)
		}
		last = name
	}
}

func TestSymbols(t *testing.T) {
	for name, want := range map[string]string{
		"n_H": "n_H", "K_R of alanine": "K_R of alanine", "Kd1": "K_d1", "Kd of tight": "K_d of tight", "L, pH 7.0": "L, pH 7.0",
		"x_half": "x_half", "Bmax, preparation A": "B_max, preparation A", "share": "share", "K_a_b": "K_a b",
	} {
		if got := Symbol(name).Plain(); got != want {
			t.Errorf("%s: %q, want %q", name, got, want)
		}
	}
	l := Prose(Sans, "concerted, K_R differs by 1.5e-3")
	if got := l.Plain(); got != "concerted, K_R differs by 1.5\u2009·\u200910^−3" {
		t.Errorf("prose is %q", got)
	}
	if l[1].Face != SerifItalic || l[2].Rise != Sub {
		t.Errorf("the quantity is set as %+v", l[1:3])
	}
}

func TestLabelsAreCut(t *testing.T) {
	l := Words(Sans, "a rather long name of a mechanism")
	cut := l.Cut(12, 80)
	if w := cut.Width(12); w > 80 || w < 50 || cut.Plain()[len(cut.Plain())-3:] != "…" {
		t.Errorf("%q is %v wide", cut.Plain(), w)
	}
	if got := Words(Sans, "\u2068שלום שלום שלום\u2069").Cut(12, 40).Plain(); bytes.Count([]byte(got), []byte("\u2069")) != 1 {
		t.Errorf("the isolate of %q is not closed", got)
	}
}
