package report

import (
	"bytes"
	"crypto/sha256"
	_ "embed"
	"encoding/base64"
	"encoding/json"
	"fmt"
	"html/template"
	"io"
	"strings"
	"sync"

	"ligancy/cmd/ligancy/internal/figure"
	"ligancy/fit/saturation"
)

//go:embed page/page.html
var pageHTML string

//go:embed page/page.css
var pageCSS string

//go:embed page/page.js
var pageJS string

// Page writes a result as one HTML file that needs nothing beside itself: its
// figures, typefaces, style and script are inside, and its own security policy
// keeps it from loading anything.
func Page(w io.Writer, d *Document) error {
	v := newView(d)
	s, err := v.sheet()
	if err != nil {
		return err
	}
	var b bytes.Buffer
	if err := pageTemplate().Execute(&b, s); err != nil {
		return fmt.Errorf("report page: %w", err)
	}
	_, err = w.Write(b.Bytes())
	return err
}

var pageTemplate = sync.OnceValue(func() *template.Template {
	return template.Must(template.New("page").Funcs(template.FuncMap{
		"prose":    func(s string) template.HTML { return typed(s, nil) },
		"quantity": quantityHTML,
	}).Parse(pageHTML))
})

// sheet is everything that the template of the page places.
type sheet struct {
	Policy  string
	Style   template.CSS
	Script  template.JS
	Data    template.JS
	Title   string
	Kind    string
	Facts   []string
	Origin  string
	Program string

	Interrupted bool
	Sections    []section
}

// section answers one question of the reader.
type section struct {
	ID, Title string
	Lead      string // the reader's question, for the list of sections
	Blocks    []block
}

// block is a piece of a section: exactly one of its fields is set, except
// that a figure may have buttons and a table under it.
type block struct {
	Paragraph template.HTML
	Heading   string
	Figure    *drawn
	Table     *table
	List      []template.HTML
	Terms     []term
	Equations []template.HTML
	Code      string
	Remark    template.HTML
}

// term is one thing that is asked, with the number by which values refer to it
// (0 for none) and what to write to answer it.
type term struct {
	Number int
	Text   template.HTML
	Code   string
}

// drawn is a figure in both formats of the page.
type drawn struct {
	ID           string
	Wide, Narrow template.HTML
	Reads        bool // the ligand axis can be read from it
	Keys         bool // arrow keys step through it
	Buttons      []button
	Table        *table // the same as numbers
	Caption      template.HTML
}

// button shows or hides a rival.
type button struct {
	ID, Name string
	Shown    bool
	Dash     string
}

func (v *view) sheet() (*sheet, error) {
	d := v.d
	data, err := json.Marshal(v.data())
	if err != nil {
		return nil, fmt.Errorf("report page: %w", err)
	}
	s := &sheet{
		Policy: policy(), Style: template.CSS(style()), Script: template.JS(pageJS), Data: template.JS(data),
		Title: printable(d.Study.Title), Kind: "Saturation study", Facts: printables(d.counts()), Origin: printable(d.Study.Origin),
		Program: "ligancy " + printable(d.Program.Version), Interrupted: d.Interrupted,
	}
	if s.Title == "" {
		s.Title = printable(d.Study.File)
	}
	s.Facts = append(s.Facts, printable(d.Study.File))
	sections := []func() (section, error){
		v.sayingSection, v.curvesSection, v.steepSection, v.standSection, v.twinsSection, v.heldSection, v.statesSection,
		v.hillSection, v.reviewerSection, v.nextSection, v.preparationsSection, v.howSection, v.conditionsSection,
		v.pointsSection, v.repeatSection,
	}
	for _, f := range sections {
		sec, err := f()
		if err != nil {
			return nil, err
		}
		if len(sec.Blocks) > 0 {
			s.Sections = append(s.Sections, sec)
		}
	}
	return s, nil
}

// style is the page's style sheet: white ground, the dark one where the reader
// asks for it on a screen, typefaces embedded.
var style = sync.OnceValue(func() string {
	return figure.FontFaces() + figure.StyleSheet(":root", false) +
		"@media screen and (prefers-color-scheme:dark){" + figure.StyleSheet(":root", true) + "}" + pageCSS
})

// policy lets the page run its own script and load nothing.
var policy = sync.OnceValue(func() string {
	sum := sha256.Sum256([]byte(pageJS))
	return "default-src 'none'; style-src 'unsafe-inline'; font-src data:; img-src data:; base-uri 'none'; form-action 'none'; " +
		"script-src 'sha256-" + base64.StdEncoding.EncodeToString(sum[:]) + "'"
})

// draw lays a figure out in both formats.
func draw(id string, f figure.Figure) (*drawn, error) {
	out := &drawn{ID: id}
	for _, format := range []struct {
		style figure.Style
		name  string
		to    *template.HTML
	}{{figure.Wide, "wide", &out.Wide}, {figure.Narrow, "narrow", &out.Narrow}} {
		var b bytes.Buffer
		if err := f.Draw(format.style).WriteSVG(&b, id+"-"+format.name, "fig "+format.name); err != nil {
			return nil, fmt.Errorf("figure %s: %w", id, err)
		}
		*format.to = template.HTML(b.String())
	}
	return out, nil
}

// buttons are the mechanisms that can be laid over the leader.
func (v *view) buttons() []button {
	var out []button
	for _, r := range v.rivalFrames(all(len(v.lines[v.leader]))) {
		out = append(out, button{ID: r.ID, Name: r.Name, Shown: r.Shown, Dash: figure.DashPattern(r.Dash)})
	}
	return out
}

// symbols are the single letters that are constants of the leader.
func (v *view) symbols() map[string]bool {
	out := map[string]bool{}
	for _, q := range v.d.numbers(v.leader) {
		if q.Of == "constant" && len([]rune(q.Name)) == 1 {
			out[q.Name] = true
		}
	}
	return out
}

// paragraphs typesets a text; blank lines part paragraphs.
func (v *view) paragraphs(text string) []block {
	var out []block
	symbols := v.symbols()
	for _, p := range strings.Split(text, "\n") {
		if p = strings.TrimSpace(p); p != "" {
			out = append(out, block{Paragraph: prose(p, symbols)})
		}
	}
	return out
}

// row of a quantity for the tables that are keyed by curve.
func (v *view) row(curve, of, name string) *saturation.QuantityRow {
	return v.rows[key{v.leader, curve, of, name}]
}
