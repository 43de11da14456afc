package figure

import (
	"bytes"
	"compress/zlib"
	"encoding/xml"
	"io"
	"math"
	"os/exec"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

// sample is a figure of two invented curves.
func sample() *Curves {
	c := &Curves{Name: "Points & curves", Description: "two <curves>", Response: Words(SerifItalic, "fraction of sites filled"), Fraction: true,
		Ligand: Ligand{Title: Words(SerifItalic, "oxygen pressure / torr"), Low: 0.1, High: 100, Tested: []float64{0.5, 1, 5, 10, 50}},
		Leader: Prose(Sans, "concerted, K_R differs"), Preparations: []string{"A", "B"}, Rulers: true, Residuals: true, Places: []int{0, 1}}
	for i, half := range []float64{5, 9} {
		l := Line{Name: "pH " + strconv.Itoa(7+i), Short: strconv.Itoa(7 + i), From: 0.5, To: 50,
			Ruler: Ruler{X01: half / 99, X10: half / 9, Half: half, X90: half * 9, X99: half * 99}}
		for k := range 121 {
			x := math.Pow(10, -1+3*float64(k)/120)
			l.At = append(l.At, XY{x, x / (x + half)})
		}
		c.Lines = append(c.Lines, l)
		for _, x := range c.Ligand.Tested {
			for p := range 2 {
				c.Points = append(c.Points, Point{Line: i, Preparation: p, X: x, Y: x/(x+half) + 0.01, Residual: 1})
			}
		}
	}
	c.Rivals = []Rival{{Name: "shown", ID: "1", Shown: true, Lines: [][]XY{c.Lines[0].At}}, {Name: "kept back", ID: "2", Dash: 1, Lines: [][]XY{c.Lines[1].At}}}
	return c
}

func TestSVGFile(t *testing.T) {
	var b bytes.Buffer
	if err := sample().Draw(SingleColumn).WriteSVGFile(&b); err != nil {
		t.Fatal(err)
	}
	text := b.String()
	for _, want := range []string{`width="85mm"`, "<title>Points &amp; curves</title>", "two &lt;curves&gt;", "@font-face", "font/ttf;base64,", ">pH 7<"} {
		if !strings.Contains(text, want) {
			t.Errorf("no %q in the file", want)
		}
	}
	d := xml.NewDecoder(&b)
	for {
		if _, err := d.Token(); err == io.EOF {
			break
		} else if err != nil {
			t.Fatal(err)
		}
	}
}

// Coordinates are written as differences of rounded places: the end of a long
// path is where it was meant to be.
func TestPathsDoNotDrift(t *testing.T) {
	var p Path
	p.MoveTo(0.04, 0.04)
	for i := range 1000 {
		p.LineTo(float64(i)*0.333, float64(i)*0.777)
	}
	s := &svgWriter{places: 1}
	s.path(&p)
	x, y := 0.0, 0.0
	for _, m := range regexp.MustCompile(`[Ml ]?(-?[0-9.]+) ?(-?[0-9.]+)`).FindAllStringSubmatch(s.b.String(), -1) {
		dx, _ := strconv.ParseFloat(m[1], 64)
		dy, _ := strconv.ParseFloat(m[2], 64)
		x, y = x+dx, y+dy
	}
	if math.Abs(x-999*0.333) > 0.06 || math.Abs(y-999*0.777) > 0.06 {
		t.Errorf("the path ends at %v, %v", x, y)
	}
}

func TestNumbersAreShort(t *testing.T) {
	s := &svgWriter{places: 1}
	for v, want := range map[float64]string{0: "0", 0.04: "0", -0.04: "0", 0.5: ".5", -0.5: "-.5", 12: "12", 12.34: "12.3", math.NaN(): "0"} {
		if got := s.num(v); got != want {
			t.Errorf("%v is %q, want %q", v, got, want)
		}
	}
}

// The document has its objects where its table says (ISO 32000-1, 7.5.4),
// streams of the length they state, a page of the size asked for, and embeds
// every typeface.
func TestPDFFile(t *testing.T) {
	var b bytes.Buffer
	if err := sample().Draw(DoubleColumn).WritePDF(&b); err != nil {
		t.Fatal(err)
	}
	file := b.Bytes()
	at, err := strconv.Atoi(string(regexp.MustCompile(`startxref\n(\d+)\n%%EOF\n$`).FindSubmatch(file)[1]))
	if err != nil || !bytes.HasPrefix(file[at:], []byte("xref\n")) {
		t.Fatalf("no table at %d", at)
	}
	for i, m := range regexp.MustCompile(`(\d{10}) 00000 n \n`).FindAllSubmatch(file[at:], -1) {
		offset, _ := strconv.Atoi(string(m[1]))
		if !bytes.HasPrefix(file[offset:], []byte(strconv.Itoa(i+1)+" 0 obj\n")) {
			t.Errorf("object %d is not at %d", i+1, offset)
		}
	}
	streams := regexp.MustCompile(`/Length (\d+)>>stream\n`).FindAllSubmatchIndex(file, -1)
	for _, m := range streams {
		n, _ := strconv.Atoi(string(file[m[2]:m[3]]))
		if !bytes.HasPrefix(file[m[1]+n:], []byte("\nendstream")) {
			t.Errorf("the stream at %d is not %d long", m[1], n)
		}
		z, err := zlib.NewReader(bytes.NewReader(file[m[1] : m[1]+n]))
		if err != nil {
			t.Fatal(err)
		}
		if _, err := io.ReadAll(z); err != nil {
			t.Error(err)
		}
	}
	text := string(file)
	if fonts, embedded := strings.Count(text, "/Subtype/CIDFontType2"), strings.Count(text, "/FontFile2 "); fonts < 3 || fonts != embedded {
		t.Errorf("%d typefaces, %d embedded", fonts, embedded)
	}
	box := regexp.MustCompile(`/MediaBox\[0 0 ([0-9.]+) `).FindStringSubmatch(text)
	if w, _ := strconv.ParseFloat(box[1], 64); math.Abs(w-174/25.4*72) > 0.01 {
		t.Errorf("the page is %v points wide", w)
	}
}

// A general-purpose reader finds the words, where there is one.
func TestPDFTextCanBeCopied(t *testing.T) {
	path, err := exec.LookPath("pdftotext")
	if err != nil {
		t.Skip("no pdftotext here")
	}
	var b, out bytes.Buffer
	if err := sample().Draw(SingleColumn).WritePDF(&b); err != nil {
		t.Fatal(err)
	}
	cmd := exec.Command(path, "-", "-")
	cmd.Stdin, cmd.Stdout = &b, &out
	if err := cmd.Run(); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"fraction of sites filled", "oxygen pressure / torr", "pH 7", "decades", "shown"} {
		if !strings.Contains(out.String(), want) {
			t.Errorf("%q is not in %q", want, out.String())
		}
	}
	if strings.Contains(out.String(), "kept back") {
		t.Error("what is hidden was written")
	}
}

func TestNumbersOfPDF(t *testing.T) {
	for v, want := range map[float64]string{0: "0", -0.5: "-0.5", -0.0001: "0", 1.25: "1.25", math.Inf(1): "0"} {
		if got := real(v); got != want {
			t.Errorf("%v is %q, want %q", v, got, want)
		}
	}
}

// Every figure draws in every format, and stays inside it.
func TestFiguresFitTheirFormats(t *testing.T) {
	c := sample()
	slope := &Slope{Ligand: c.Ligand, Leader: c.Leader, Places: []int{0, 1}}
	hill := &HillPlot{Ligand: c.Ligand, Points: c.Points, Marks: 2, Remark: "a remark"}
	pop := &Populations{Ligand: c.Ligand, Remark: "a remark"}
	for i, l := range c.Lines {
		slope.Lines = append(slope.Lines, SlopeLine{Name: l.Name, Short: l.Short, At: l.At, From: l.From, To: l.To, Half: XY{5, 0.5}, Max: XY{9, 0.9}, HillFit: 0.7})
		hill.Lines = append(hill.Lines, HillLine{Name: l.Name, Short: l.Short, At: l.At, From: l.From, To: l.To, Half: l.Ruler.Half, First: 20, Last: 2, Distance: "−5 kJ/mol"})
		pop.Fields = append(pop.Fields, Population{Name: l.Name, Ink: i, Curve: i, From: l.From, To: l.To, States: []State{{Name: "1 bound", At: l.At}}})
	}
	strips := &Strips{Rows: []Strip{
		{Label: Symbol("K_R"), Value: "0.90 torr, a factor 1.13", Low: 0.9, High: 1.1, Ink: Text, Ridge: []XY{{0.9, 0.15}, {1, 1}, {1.1, 0.15}}},
		{Label: Symbol("L, pH 7.6"), Value: "1.5e3, its low end only", Low: 0.5, High: math.Inf(1), Ink: CurveInk(0)},
		{Label: Symbol("c"), Value: "neither end", High: math.Inf(1), Ink: CurveInk(1)},
	}, Ties: []Tie{{0, 1, "K_R and L move together"}}}
	standing := &Standing{Rows: []StandingRow{{Name: "leads", Leads: true, Word: "leads"}, {Name: "ties", Behind: 1.2, Word: "ties"},
		{Name: "out", Behind: 382, Word: "out", Out: true}, {Name: "no answer", Behind: math.NaN(), Word: "no answer"}}, Remark: "and 3 more"}
	multiples := &Multiples{Fields: []Figure{c, c, c, slope}, Remark: "and 4 more curves"}
	for name, f := range map[string]Figure{"curves": c, "slope": slope, "hill": hill, "populations": pop, "strips": strips, "standing": standing, "multiples": multiples} {
		for _, s := range []Style{Wide, Narrow, SingleColumn, DoubleColumn} {
			d := f.Draw(s)
			if d.Width != s.Width || d.Height < 60 || d.Height > 3000 {
				t.Errorf("%s at %v: %v × %v", name, s.Width, d.Width, d.Height)
			}
			for _, i := range d.items {
				if l, ok := i.(*lettering); ok {
					inside(t, name, d, l)
				}
			}
		}
	}
}

// inside checks that a text stays within the drawing.
func inside(t *testing.T, name string, d *Drawing, l *lettering) {
	t.Helper()
	w := l.runs.Width(l.size)
	x := l.x - w*[]float64{0, 0.5, 1}[l.anchor]
	if x < -1.5 || x+w > d.Width+5 || l.y < 0.5*l.size || l.y > d.Height+1 {
		t.Errorf("%s at %v: %q stands at %v … %v, %v of %v", name, d.Width, l.runs.Plain(), x, x+w, l.y, d.Height)
	}
}
