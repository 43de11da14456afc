package specs

import (
	"fmt"
	"math"
	"strings"

	"gopkg.in/yaml.v3"

	"ligancy/specs/diag"
	"ligancy/specs/units"
)

// shape is one form that a value in a study may have. The same shape reads the
// value and describes it to the JSON Schema, so that the two cannot disagree.
type shape[V any] interface {
	// read fills in v, or complains and returns false.
	read(r *reader, n *yaml.Node, path string, v *V) bool
	// schema describes the form in JSON Schema.
	schema(s *schemata) object
}

// object is a JSON object.
type object = map[string]any

// textShape is any text on one line or more.
type textShape struct{ form string }

// scalar is the written text of a node that is not a list or mapping.
func (r *reader) scalar(n *yaml.Node, path, form string) (string, bool) {
	if n.Kind != yaml.ScalarNode || isNull(n) {
		r.wrong(n, path, form)
		return "", false
	}
	if r.isMuted(r.at(n)) {
		return "", false // it stands for something that was named
	}
	if strings.TrimSpace(n.Value) == "" {
		r.complain(diag.Diagnostic{Code: "empty-text", Position: r.at(n),
			Problem: lastName(path) + " is empty", Remedies: r.exampleRemedy()})
		return "", false
	}
	return n.Value, true
}

func (t textShape) read(r *reader, n *yaml.Node, path string, v *string) bool {
	form := t.form
	if form == "" {
		form = "a text"
	}
	s, ok := r.scalar(n, path, form)
	*v = strings.TrimSpace(s)
	return ok
}

// schema takes numbers and truth values too: the text as written is what counts.
func (t textShape) schema(*schemata) object {
	return object{"type": []string{"string", "number", "boolean"}}
}

// wordShape is one of a few words.
type wordShape []string

func (w wordShape) read(r *reader, n *yaml.Node, path string, v *string) bool {
	s, ok := r.scalar(n, path, "one of "+orList(w))
	if !ok {
		return false
	}
	for _, word := range w {
		if s == word {
			*v = word
			return true
		}
	}
	d := diag.Diagnostic{Code: "unknown-word", Position: r.at(n),
		Problem: fmt.Sprintf("%s cannot be %q", lastName(path), s),
		Notes:   []string{"It is one of: " + strings.Join(w, ", ") + "."}}
	if near := diag.Nearest(s, w); near != "" {
		d.Remedies = []diag.Remedy{{Write: lastName(path) + ": " + near}}
	}
	r.complain(d)
	return false
}

func (w wordShape) schema(*schemata) object { return object{"enum": []string(w)} }

// orList writes "a, b or c".
func orList(words []string) string {
	if len(words) < 2 {
		return strings.Join(words, "")
	}
	return strings.Join(words[:len(words)-1], ", ") + " or " + words[len(words)-1]
}

// flagShape is true or false.
type flagShape struct{}

func (flagShape) read(r *reader, n *yaml.Node, path string, v *bool) bool {
	s, ok := r.scalar(n, path, "true or false")
	if !ok {
		return false
	}
	switch s {
	case "true", "false":
		*v = s == "true"
		return true
	}
	write := map[bool]string{true: "true", false: "false"}[strings.EqualFold(s, "yes") ||
		strings.EqualFold(s, "on") || strings.EqualFold(s, "true")]
	r.complain(diag.Diagnostic{Code: "wrong-form", Position: r.at(n),
		Problem:  fmt.Sprintf("%s: true or false belongs here, not %q", lastName(path), s),
		Remedies: []diag.Remedy{{Write: lastName(path) + ": " + write}}})
	return false
}

func (flagShape) schema(*schemata) object { return object{"type": "boolean"} }

// numberShape is a number within bounds.
type numberShape struct {
	low, high float64 // both included; high 0 means no bound
	above     bool    // low itself is excluded
	whole     bool
}

func (s numberShape) form() string {
	if s.whole {
		return "a whole number"
	}
	return "a number"
}

func (s numberShape) read(r *reader, n *yaml.Node, path string, v *float64) bool {
	text, ok := r.scalar(n, path, s.form())
	if !ok {
		return false
	}
	x, err := units.ParseNumber(text)
	if err != nil {
		r.badNumber(n, path, s.form(), err.(*units.SyntaxError))
		return false
	}
	*v = x
	return s.check(r, n, path, x)
}

// badNumber complains of a text that is no number.
func (r *reader) badNumber(n *yaml.Node, path, form string, e *units.SyntaxError) {
	if e.Write == "" {
		r.wrong(n, path, form)
		return
	}
	r.complain(diag.Diagnostic{Code: "not-a-number", Position: r.at(n),
		Problem:  lastName(path) + ": " + e.Problem,
		Remedies: []diag.Remedy{{Write: e.Write}}})
}

// check holds a number against the bounds.
func (s numberShape) check(r *reader, n *yaml.Node, path string, x float64) bool {
	problem := ""
	switch {
	case s.whole && x != math.Trunc(x):
		problem = fmt.Sprintf("%s: a whole number belongs here, not %v", lastName(path), x)
	case s.above && x <= s.low:
		problem = fmt.Sprintf("%s must be above %v, not %v", lastName(path), s.low, x)
	case x < s.low:
		problem = fmt.Sprintf("%s must be at least %v, not %v", lastName(path), s.low, x)
	case s.high != 0 && x > s.high:
		problem = fmt.Sprintf("%s may be at most %v, not %v", lastName(path), s.high, x)
	default:
		return true
	}
	d := diag.Diagnostic{Code: "out-of-bounds", Position: r.at(n), Problem: problem}
	if r.example != "" {
		d.Remedies = []diag.Remedy{{Say: "Write for example", Write: r.example}}
	}
	r.complain(d)
	return false
}

func (s numberShape) schema(*schemata) object {
	o := object{"type": "number"}
	if s.whole {
		o["type"] = "integer"
	}
	if s.above {
		o["exclusiveMinimum"] = s.low
	} else if s.low > math.Inf(-1) {
		o["minimum"] = s.low
	}
	if s.high != 0 {
		o["maximum"] = s.high
	}
	return o
}

// anyNumber has no bounds.
func anyNumber() numberShape { return numberShape{low: math.Inf(-1)} }

// countShape is a whole number as an int.
type countShape struct{ low, high int }

func (s countShape) numbers() numberShape {
	return numberShape{low: float64(s.low), high: float64(s.high), whole: true}
}

func (s countShape) read(r *reader, n *yaml.Node, path string, v *int) bool {
	var x float64
	ok := s.numbers().read(r, n, path, &x)
	if ok {
		*v = int(x)
	}
	return ok
}

func (s countShape) schema(c *schemata) object { return s.numbers().schema(c) }

// quantityShape is a number, with or without a unit: 5, 5 mM.
type quantityShape struct{}

func (quantityShape) read(r *reader, n *yaml.Node, path string, v *units.Quantity) bool {
	text, ok := r.scalar(n, path, "a number with its unit")
	if !ok {
		return false
	}
	q, err := units.ParseQuantity(text)
	if err != nil {
		r.badQuantity(n, path, err.(*units.SyntaxError))
		return false
	}
	*v = q
	return true
}

// badQuantity complains of the part of a quantity that cannot be read.
func (r *reader) badQuantity(n *yaml.Node, path string, e *units.SyntaxError) {
	d := diag.Diagnostic{Code: "bad-quantity", Position: r.within(n, e.Start, e.End),
		Problem: lastName(path) + ": " + e.Problem}
	switch {
	case e.Write != "":
		d.Remedies = []diag.Remedy{{Write: lastName(path) + ": " + e.Write}}
	case r.example != "":
		d.Remedies = []diag.Remedy{{Say: "Write for example", Write: r.example}}
	}
	r.complain(d)
}

// within is the place of bytes start to end of a text.
func (r *reader) within(n *yaml.Node, start, end int) diag.Position {
	p := r.at(n)
	if isQuoted(n) {
		p.Column++
		p.End--
	}
	if p.Column+end > p.End || end <= start {
		return r.at(n)
	}
	p.Column, p.End = p.Column+start, p.Column+end
	return p
}

func (quantityShape) schema(*schemata) object {
	return object{"type": []string{"number",
		"string"}}
}

// unitShape is a unit; a text in quotation marks that is none is a label.
type unitShape struct{}

func (unitShape) read(r *reader, n *yaml.Node, path string, v *units.Unit) bool {
	text, ok := r.scalar(n, path, "a unit")
	if !ok {
		return false
	}
	u, err := units.Parse(text)
	if err == nil {
		*v = u
		return true
	}
	e := err.(*units.SyntaxError)
	if isQuoted(n) && len(text) <= 80 {
		*v = units.Label(text)
		return true
	}
	d := diag.Diagnostic{Code: "unknown-unit", Position: r.within(n, e.Start, e.End),
		Problem: lastName(path) + ": " + e.Problem}
	if e.Write != "" {
		d.Remedies = append(d.Remedies, diag.Remedy{Write: lastName(path) + ": " + e.Write})
	}
	d.Remedies = append(d.Remedies,
		diag.Remedy{Say: "A unit of your own is put in quotation marks:",
			Write: lastName(path) + ": " + quoteText(text)})
	r.complain(d)
	return false
}

func (unitShape) schema(*schemata) object { return object{"type": []string{"string", "integer"}} }

// settingShape is a number, or free.
type settingShape struct{ more []string } // further words: "sites"

// Setting is a number, or a word: free.
type Setting struct {
	Free  bool
	Word  string // another word that this number may be, "sites"
	Value float64
	Said  bool
}

func (s settingShape) read(r *reader, n *yaml.Node, path string, v *Setting) bool {
	words := append([]string{"free"}, s.more...)
	text, ok := r.scalar(n, path, "a number or "+orList(words))
	if !ok {
		return false
	}
	*v = Setting{Said: true}
	for _, w := range words {
		if text == w {
			v.Free, v.Word = w == "free", w
			return true
		}
	}
	x, err := units.ParseNumber(text)
	if err != nil {
		if near := diag.Nearest(text, words); near != "" {
			r.complain(diag.Diagnostic{Code: "unknown-word", Position: r.at(n),
				Problem:  fmt.Sprintf("%s cannot be %q", lastName(path), text),
				Remedies: []diag.Remedy{{Write: lastName(path) + ": " + near}}})
			return false
		}
		r.badNumber(n, path, "a number or "+orList(words), err.(*units.SyntaxError))
		return false
	}
	v.Value = x
	return true
}

func (s settingShape) schema(*schemata) object {
	return object{"anyOf": []object{{"type": "number"}, {"enum": append([]string{"free"},
		s.more...)}}}
}

func isNumber(s string) bool {
	_, err := units.ParseNumber(s)
	return err == nil
}
