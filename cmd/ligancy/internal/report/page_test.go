package report

import (
	"bytes"
	"encoding/json"
	"encoding/xml"
	"fmt"
	"io"
	"math"
	"regexp"
	"slices"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"ligancy/fit/saturation"
)

// The sections stand in the order of a reader's questions (the design's table).
func TestSectionsInTheReadersOrder(t *testing.T) {
	want := []string{
		"What the data say", "The points and the curves", "Steepness along the curve", "How the mechanisms stand",
		"Same curve, other story", "How firmly each constant is held", "Which states are filled", "Hill plot",
		"What a reviewer will ask", "The next measurement", "Preparation by preparation", "How this was calculated",
		"Conditions", "Every point", "To repeat this",
	}
	html := string(pageOf(t, galleryDocument(t, "clam")))
	var got []string
	for _, m := range regexp.MustCompile(`<h2 id="[a-z]+-h">([^<]*)</h2>`).FindAllStringSubmatch(html, -1) {
		got = append(got, m[1])
	}
	if !slices.Equal(got, want) {
		t.Errorf("sections are %q", got)
	}
}

// mostBytes is what a page may weigh.
const mostBytes = 1_000_000

func TestPagesAreSelfContainedAndSmall(t *testing.T) {
	for _, name := range []string{"clam", "oyster", "crab"} {
		html := pageOf(t, galleryDocument(t, name))
		if len(html) > mostBytes {
			t.Errorf("%s: %d bytes", name, len(html))
		}
		checkPage(t, name, html)
		if again := pageOf(t, galleryDocument(t, name)); !bytes.Equal(html, again) {
			t.Errorf("%s: two pages of one result differ", name)
		}
		for _, want := range []string{`<html lang="en">`, "Origin: <bdi>invented data", "Research use only"} {
			if !strings.Contains(string(html), want) {
				t.Errorf("%s: %q is missing", name, want)
			}
		}
	}
}

// checkPage finds what no page may hold.
func checkPage(t testing.TB, name string, html []byte) {
	t.Helper()
	text := regexp.MustCompile(`base64,[A-Za-z0-9+/=]+`).ReplaceAllString(strings.Replace(string(html), pageJS, "", 1), "")
	for _, bad := range []string{"NaN", "+Inf", "-Inf", "ZgotmplZ", "%!", "&lt;nil&gt;", "http://", "https://", "src=", "@import"} {
		at := strings.Index(text, bad)
		if bad == "src=" { // no element loads anything
			at = strings.Index(strings.ReplaceAll(text, "src:url(data:", ""), " src=")
		}
		if at >= 0 {
			t.Errorf("%s: the page holds %q: …%s…", name, bad, text[max(0, at-60):min(len(text), at+60)])
		}
	}
	if n := strings.Count(text, "<script"); n != 2 {
		t.Errorf("%s: %d scripts", name, n)
	}
	for _, m := range regexp.MustCompile(`(?s)<svg class="fig.*?</svg>`).FindAllString(text, -1) {
		wellFormed(t, name, []byte(m))
	}
	data := regexp.MustCompile(`(?s)<script type="application/json" id="data">(.*?)</script>`).FindStringSubmatch(text)
	if data == nil || !json.Valid([]byte(data[1])) {
		t.Errorf("%s: the script's data are not JSON", name)
	}
}

// wellFormed reads XML to its end.
func wellFormed(t testing.TB, name string, content []byte) {
	t.Helper()
	d := xml.NewDecoder(bytes.NewReader(content))
	for {
		if _, err := d.Token(); err == io.EOF {
			return
		} else if err != nil {
			t.Errorf("%s: not well-formed: %v", name, err)
			return
		}
	}
}

// invented describes a study that is made up without fitting: Hill curves with
// points on them.
type invented struct {
	curves, levels, replicates, mechanisms, preparations int
	zero, leftOut, blocked                               bool
	name                                                 func(kind string, n int) string
}

func plainName(kind string, n int) string { return fmt.Sprintf("%s %d", kind, n) }

// document makes the result of an invented study.
func (s invented) document() *Document {
	if s.name == nil {
		s.name = plainName
	}
	a := &saturation.Analysis{Title: s.name("title", 0), Origin: s.name("origin", 0), Kelvin: math.NaN(),
		Ligand:     saturation.Substance{Name: s.name("ligand", 0), Unit: "uM"},
		Conditions: map[string]string{s.name("condition", 0): s.name("stated", 0)}}
	set := saturation.Dataset{Name: s.name("data", 0), File: "data.csv", Factors: []string{"state"}, Noise: saturation.Constant,
		Incubation: math.NaN(), Response: saturation.Response{Kind: "saturation", Unit: "fraction", High: saturation.Setting{Value: 1}}}
	o := &saturation.Outcome{Defaults: map[string]string{s.name("default", 0): s.name("value", 0)}}
	for k := range s.mechanisms {
		o.Mechanisms = append(o.Mechanisms, saturation.MechanismRow{Name: s.name("mechanism", k), Family: "hill", Status: "converged",
			Constants: 2, AICcBehind: saturation.Real(k) * 3, AICcWeight: 0.1, Scatter: 0.01, Starts: 50, StartsAgreeing: 50,
			Standing: map[bool]string{true: "leads", false: "open"}[k == 0]})
	}
	if s.mechanisms > 0 {
		o.Verdict.Leads = s.name("mechanism", 0)
		o.Verdict.Text = s.name("verdict", 0)
	}
	row := 2
	for c := range s.curves {
		s.addCurve(a, &set, o, c, &row)
	}
	a.Data = []saturation.Dataset{set}
	return New(a, o, Source{Version: "0.1.0", File: s.name("file", 0)})
}

// addCurve adds one curve with its points to an invented study.
func (s invented) addCurve(a *saturation.Analysis, set *saturation.Dataset, o *saturation.Outcome, c int, row *int) {
	label := "state " + s.name("curve", c)
	if s.curves == 1 {
		label = "all"
	}
	half := math.Pow(10, 0.3*float64(c%9))
	at := func(x float64) float64 { return x / (x + half) }
	for i := range s.levels {
		x := math.Pow(10, -2+4*float64(i)/max(float64(s.levels-1), 1))
		if s.zero && i == 0 {
			x = 0
		}
		for r := range s.replicates {
			p := saturation.Point{X: x, Y: at(x) + 0.01*math.Sin(float64(*row)), Levels: []string{s.name("curve", c)}, Row: *row}
			if s.preparations > 0 {
				p.Preparation = s.name("preparation", r%s.preparations)
			}
			if s.leftOut && *row%7 == 0 {
				p.LeftOut = s.name("reason", 0)
			}
			p.Blocked = s.blocked && *row%5 == 0
			set.Points = append(set.Points, p)
			*row++
			for k := range min(s.mechanisms, 1+s.mechanisms*3/100) {
				pr := saturation.PointRow{Data: set.Name, Row: p.Row, Curve: label, X: saturation.Real(x), Y: saturation.Real(p.Y),
					Mechanism: s.name("mechanism", k), Fitted: saturation.Real(at(x)), Residual: saturation.Real(100 * (p.Y - at(x)))}
				if p.Preparation != "" {
					pr.Preparation = &p.Preparation
				}
				if p.LeftOut != "" {
					pr.LeftOut, pr.Fitted, pr.Residual = &p.LeftOut, saturation.Real(math.NaN()), saturation.Real(math.NaN())
				}
				o.Points = append(o.Points, pr)
			}
		}
	}
	for k := range s.mechanisms {
		name := s.name("mechanism", k)
		for i := range 121 {
			x := math.Pow(10, -3+6*float64(i)/120)
			o.Curves = append(o.Curves, saturation.CurveRow{Mechanism: name, Curve: label, X: saturation.Real(x), Saturation: saturation.Real(at(x)),
				Response: saturation.Real(at(x)), NH: 1, Low: saturation.Real(at(x) * 0.98), High: saturation.Real(at(x)*0.98 + 0.02), NHLow: 0.9, NHHigh: 1.1})
		}
		add := func(of, q string, v float64) {
			o.Quantities = append(o.Quantities, saturation.QuantityRow{Mechanism: name, Curve: label, Of: of, Name: q, Unit: "uM",
				Value: saturation.Real(v), Low: saturation.Real(v * 0.9), High: saturation.Real(v * 1.1), Level: 0.95, Interval: "profile", Held: "both"})
		}
		add("constant", "K_half", half)
		add("hill", "n_H_half", 1)
		for _, p := range []struct {
			name  string
			ratio float64
		}{{"x_01", 1. / 99}, {"x_10", 1. / 9}, {"x_half", 1}, {"x_90", 9}, {"x_99", 99}} {
			add("position", p.name, half*p.ratio)
		}
	}
}

// everything writes all that is made of a document and returns the page.
func everything(t testing.TB, name string, d *Document) []byte {
	t.Helper()
	html := pageOf(t, d)
	checkPage(t, name, html)
	files, err := Figures(d)
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range files {
		switch {
		case strings.HasSuffix(f.Name, ".svg"):
			wellFormed(t, f.Name, f.Content)
			if bytes.Contains(f.Content, []byte("NaN")) || bytes.Contains(f.Content, []byte("Inf\"")) {
				t.Errorf("%s: %s holds a number that is none", name, f.Name)
			}
		case !bytes.HasPrefix(f.Content, []byte("%PDF-1.5")) || !bytes.HasSuffix(f.Content, []byte("%%EOF\n")):
			t.Errorf("%s: %s is no PDF", name, f.Name)
		}
	}
	var md bytes.Buffer
	if err := Markdown(&md, d); err != nil {
		t.Fatal(err)
	}
	return html
}

func TestOddStudies(t *testing.T) {
	base := invented{curves: 2, levels: 8, replicates: 3, mechanisms: 3, preparations: 3}
	for name, change := range map[string]func(*invented){
		"one of each":          func(s *invented) { *s = invented{curves: 1, levels: 5, replicates: 1, mechanisms: 1} },
		"nothing at all":       func(s *invented) { *s = invented{} },
		"no points":            func(s *invented) { s.levels = 0 },
		"no curves":            func(s *invented) { s.curves = 0 },
		"no mechanism":         func(s *invented) { s.mechanisms = 0 },
		"one point":            func(s *invented) { s.curves, s.levels, s.replicates = 1, 1, 1 },
		"without ligand":       func(s *invented) { s.zero = true },
		"only without ligand":  func(s *invented) { s.zero, s.levels = true, 1 },
		"left out and blocked": func(s *invented) { s.leftOut, s.blocked = true, true },
		"five curves":          func(s *invented) { s.curves = 5 },
		"six curves":           func(s *invented) { s.curves = 6 },
		"forty curves":         func(s *invented) { s.curves = 40 },
		"twenty preparations":  func(s *invented) { s.preparations, s.replicates = 20, 20 },
	} {
		t.Run(name, func(t *testing.T) {
			s := base
			change(&s)
			if html := everything(t, name, s.document()); len(html) > mostBytes {
				t.Errorf("%d bytes", len(html))
			}
		})
	}
}

// 300 mechanisms and 50 000 points stay within the bounds of a page, and say
// what they leave out.
func TestLargeStudies(t *testing.T) {
	for name, s := range map[string]invented{
		"300 mechanisms": {curves: 2, levels: 12, replicates: 3, mechanisms: 300, preparations: 3},
		"50,000 points":  {curves: 2, levels: 500, replicates: 50, mechanisms: 5, preparations: 5},
	} {
		d := s.document()
		start := time.Now()
		html := everything(t, name, d)
		t.Logf("%s: %d bytes, all in %v", name, len(html), time.Since(start).Round(time.Millisecond))
		if len(html) > mostBytes {
			t.Errorf("%s: %d bytes", name, len(html))
		}
		want := map[string]string{"300 mechanisms": "and 200 more: mechanisms.csv", "50,000 points": "and 49600 more: points.csv"}[name]
		if !strings.Contains(string(html), want) {
			t.Errorf("%s: the page does not say %q", name, want)
		}
	}
}

// Names from a study are text, whatever they look like.
func TestNamesAreText(t *testing.T) {
	nasty := []string{
		`<script>alert(1)</script>`, `</title></svg><img src=x onerror=alert(1)>`, `"' onmouseover="alert(1)`, `]]>&amp;&lt;`,
		`{{.}} %s %d %!`, "\x00\x1b[31m\u202egnp.exe", "</script><script>alert(2)</script>", "שלום עולם", "مرحبا", "日本語の名前",
		`javascript:alert(1)`, strings.Repeat("long ", 400), "a_b_c^(d)e5", "\u2028\u2029", "e\u0301\u0304\u0304",
	}
	for i := range nasty {
		s := invented{curves: 3, levels: 6, replicates: 2, mechanisms: 3, preparations: 2,
			name: func(kind string, n int) string { return nasty[(i+n)%len(nasty)] + fmt.Sprint(kind, n) }}
		html := string(pageOfNames(t, s.document()))
		for _, bad := range []string{"<script>alert", "<img", "onerror=alert(1)>", `" onmouseover="`, "\x00", "\x1b", "\u202e", "href=\"javascript:"} {
			if strings.Contains(html, bad) {
				t.Errorf("name %d: the page holds %q", i, bad)
			}
		}
	}
}

func pageOfNames(t testing.TB, d *Document) []byte {
	t.Helper()
	html := pageOf(t, d)
	if n := bytes.Count(html, []byte("<script")); n != 2 {
		t.Errorf("%d scripts", n)
	}
	files, err := Figures(d)
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range files {
		if strings.HasSuffix(f.Name, ".svg") {
			wellFormed(t, f.Name, f.Content)
		}
	}
	return html
}

// Whatever rows a result holds, the page is written.
func TestAnyRowsMakeAPage(t *testing.T) {
	numbers := []float64{math.NaN(), math.Inf(1), math.Inf(-1), 0, -1, 1e-300, 1e300, 0.5, 1, 3}
	rapid.Check(t, func(r *rapid.T) {
		s := invented{curves: rapid.IntRange(0, 7).Draw(r, "curves"), levels: rapid.IntRange(0, 4).Draw(r, "levels"),
			replicates: rapid.IntRange(0, 2).Draw(r, "replicates"), mechanisms: rapid.IntRange(0, 3).Draw(r, "mechanisms"),
			preparations: rapid.IntRange(0, 2).Draw(r, "preparations"), zero: rapid.Bool().Draw(r, "zero"),
			leftOut: rapid.Bool().Draw(r, "left out"), blocked: rapid.Bool().Draw(r, "blocked")}
		d := s.document()
		real := func() saturation.Real {
			return saturation.Real(rapid.SampledFrom(numbers).Draw(r, "number"))
		}
		for range rapid.IntRange(0, 30).Draw(r, "changes") {
			if n := len(d.Quantities); n > 0 {
				q := &d.Quantities[rapid.IntRange(0, n-1).Draw(r, "quantity")]
				q.Value, q.Low, q.High = real(), real(), real()
			}
			if n := len(d.Curves); n > 0 {
				c := &d.Curves[rapid.IntRange(0, n-1).Draw(r, "curve")]
				c.Saturation, c.Response, c.NH, c.Low, c.NHHigh = real(), real(), real(), real(), real()
			}
			if n := len(d.Points); n > 0 {
				p := &d.Points[rapid.IntRange(0, n-1).Draw(r, "point")]
				p.X, p.Y, p.Fitted, p.Residual = real(), real(), real(), real()
			}
			if n := len(d.Mechanisms); n > 0 {
				m := &d.Mechanisms[rapid.IntRange(0, n-1).Draw(r, "mechanism")]
				m.AICcBehind, m.Scatter, m.AICcWeight = real(), real(), real()
			}
		}
		if rapid.Bool().Draw(r, "total") && len(d.analysis.Data) > 0 {
			d.analysis.Data[0].Total = true
		}
		everything(t, "drawn", d)
	})
}

// Points on a total axis stand at the free ligand that the fit finds: the crab
// study's receptor takes up part of what is added.
func TestTotalAxisIsReadAsFree(t *testing.T) {
	v := newView(galleryDocument(t, "crab"))
	for _, r := range v.measured[v.leader] {
		if r.blocked || r.LeftOut != nil {
			continue
		}
		if !(r.free < float64(r.X)) {
			t.Fatalf("row %d: %v free of %v in all", r.Row, r.free, float64(r.X))
		}
		c := v.lines[v.leader][r.line]
		fitted := r.ends.low + r.ends.span*c.at(c.saturation, r.free) + r.ends.slope*r.free
		if math.Abs(fitted-float64(r.Fitted)) > 0.005*math.Abs(float64(r.Fitted)) {
			t.Errorf("row %d: the curve gives %v at %v, the fit %v", r.Row, fitted, r.free, float64(r.Fitted))
		}
	}
}

// A Hill exponent h below 1 is a spread of ln K with SD (π/√3)√(1/h² − 1)
// (Sips 1948; h 0.5 gives π, as the theory has it).
func TestShallowSlopeAsSpread(t *testing.T) {
	d := invented{curves: 1, levels: 5, replicates: 1, mechanisms: 1}.document()
	d.Quantities = append(d.Quantities, saturation.QuantityRow{Mechanism: "mechanism 0", Curve: "all", Of: "hill", Name: "n_H_hill_reading", Value: 0.5})
	if got := newView(d).shallowText(); !strings.Contains(got, "by a factor of 23 either way") { // e^π = 23.14
		t.Error(got)
	}
}

func TestTypesetting(t *testing.T) {
	for plain, want := range map[string]string{
		"n_H at half":     "<i>n</i><sub>H</sub> at half",
		"K_0.5 / mM":      "<i>K</i><sub>0.5</sub> / mM",
		"Kd1 and Kd":      "<i>K</i><sub>d1</sub> and <i>K</i><sub>d</sub>",
		"p50 / torr":      "<i>p</i><sub>50</sub> / torr",
		"L 1.5e3 to -2":   "<i>L</i> 1.5\u2009·\u200910<sup>3</sup> to −2",
		"a_long_name <b>": "<i>a</i><sub>long</sub>_name &lt;b&gt;",
		"K_R·L^(1/4)":     "<i>K</i><sub>R</sub>·<i>L</i><sup>1/4</sup>",
		"L^0.15 · c^-0.2": "<i>L</i><sup>0.15</sup> · c<sup>−0.2</sup>",
		"5e: plain":       "5e: plain",
	} {
		got := string(prose(plain, map[string]bool{"L": true}))
		if got != want {
			t.Errorf("%q: %s, want %s", plain, got, want)
		}
	}
	formula := string(formulaHTML("n_H = 1 + (n − 1) R̄T̄ (Ȳ_R − Ȳ_T)²/[Ȳ(1 − Ȳ)]"))
	for _, want := range []string{`<i class="bar">R</i><i class="bar">T</i>`, "<i>Ȳ</i><sub>R</sub>", "<sup>2</sup>"} {
		if !strings.Contains(formula, want) {
			t.Errorf("%s does not hold %s", formula, want)
		}
	}
}

// The summary for pull requests: tables, and names that Markdown leaves alone.
func TestMarkdownSummary(t *testing.T) {
	var b bytes.Buffer
	if err := Markdown(&b, galleryDocument(t, "clam")); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{
		"# Oxygen binding by ark-clam haemoglobin at two pH\n", "origin: invented data", "| pH 7.6 | 5.44 (5.38 to 5.50) | 2.87 (2.81 to 2.92) |",
		"| concerted, L differs | 4 | 0.0105 | – |", "concerted, K\\_R differs", "Research use only",
	} {
		if !strings.Contains(b.String(), want) {
			t.Errorf("the summary does not hold %q", want)
		}
	}
	if got := markdownText("a|b_c<d>`e`\n*f*"); got != "a\\|b\\_c\\<d\\>\\`e\\` \\*f\\*" {
		t.Errorf("escaped: %s", got)
	}
}

// Files for print come in two widths and two formats.
func TestFigureFiles(t *testing.T) {
	files, err := Figures(galleryDocument(t, "clam"))
	if err != nil {
		t.Fatal(err)
	}
	var names []string
	for _, f := range files {
		names = append(names, f.Name)
		if len(f.Content) > 200_000 {
			t.Errorf("%s: %d bytes", f.Name, len(f.Content))
		}
	}
	for _, name := range []string{"curves", "steepness", "standing", "constants", "states", "hill-plot"} {
		for _, end := range []string{"-85mm.svg", "-85mm.pdf", "-174mm.svg", "-174mm.pdf"} {
			if !slices.Contains(names, name+end) {
				t.Errorf("no %s among %q", name+end, names)
			}
		}
	}
	again, err := Figures(galleryDocument(t, "clam"))
	if err != nil {
		t.Fatal(err)
	}
	for i := range files {
		if !bytes.Equal(files[i].Content, again[i].Content) {
			t.Errorf("%s: two drawings of one result differ", files[i].Name)
		}
	}
}

// Report and figures of a study: the client's bound is 300 ms beyond the fit.
func BenchmarkReport(b *testing.B) {
	d := galleryDocument(b, "clam")
	b.Run("page", func(b *testing.B) {
		for b.Loop() {
			if err := Page(io.Discard, d); err != nil {
				b.Fatal(err)
			}
		}
	})
	b.Run("figures", func(b *testing.B) {
		for b.Loop() {
			if _, err := Figures(d); err != nil {
				b.Fatal(err)
			}
		}
	})
}
