package specs

import (
	"fmt"
	"strings"

	"gopkg.in/yaml.v3"

	"ligancy/specs/diag"
)

// place is where a key and its value stand.
type place struct{ key, value diag.Position }

// reader reads the tree of one study into values, and keeps where each stands.
type reader struct {
	*document
	places     map[string]place // by path: "data[0].response.kind"
	complaints diag.List
	failed     map[string]bool // paths whose value could not be read
	example    string          // of the key being read: "noise: constant"
}

func (r *reader) complain(d diag.Diagnostic) {
	if r.isMuted(d.Position) || len(r.complaints) >= enough {
		return // named already, in better words; or more than anybody reads
	}
	for _, c := range r.complaints {
		if d.Line > 0 && c.Severity == diag.Error && c.Code != "missing-key" && c.File == d.File &&
			c.Line == d.Line && c.Column <= d.Column && d.End <= c.End {
			return // follows from what was named there
		}
	}
	r.complaints = append(r.complaints, r.text.Quote(d))
}

// isMuted reports a place that a slip was named at.
func (r *reader) isMuted(p diag.Position) bool {
	for _, m := range r.muted {
		if m.Line == p.Line && m.File == p.File && p.Column < m.End && m.Column < max(p.End,
			p.Column+1) {
			return true
		}
	}
	return false
}

// wrong complains of a node of the wrong form: "sites: a whole number belongs here".
func (r *reader) wrong(n *yaml.Node, path, form string, notes ...string) {
	if r.partial && isNull(n) {
		return // what it held was not read
	}
	d := diag.Diagnostic{Code: "wrong-form", Position: r.at(n), Notes: notes,
		Problem: fmt.Sprintf("%s: %s belongs here, not %s", lastName(path), form, r.describe(n))}
	if r.example != "" {
		d.Remedies = []diag.Remedy{{Write: r.example}}
	}
	r.complain(d)
}

// describe says what a node is, for people.
func (r *reader) describe(n *yaml.Node) string {
	switch {
	case n.Kind == yaml.SequenceNode:
		return "a list"
	case n.Kind == yaml.MappingNode:
		return "a mapping"
	case isNull(n):
		return "nothing"
	case len(n.Value) > 40:
		return "a text"
	}
	return fmt.Sprintf("%q", n.Value)
}

// isNull reports a value that was not written, ~ and null.
func isNull(n *yaml.Node) bool {
	return n.Kind == yaml.ScalarNode &&
		n.Style&(yaml.DoubleQuotedStyle|yaml.SingleQuotedStyle|yaml.LiteralStyle|yaml.FoldedStyle) == 0 &&
		(n.Value == "" || n.Value == "~" || n.Value == "null" || n.Value == "Null" ||
			n.Value == "NULL")
}

// isQuoted reports a text in quotation marks.
func isQuoted(n *yaml.Node) bool {
	return n.Style&(yaml.DoubleQuotedStyle|yaml.SingleQuotedStyle) != 0
}

// lastName is the last part of a path, without its index.
func lastName(path string) string {
	if path == "" {
		return "the study"
	}
	path = path[strings.LastIndexByte(path, '.')+1:]
	if i := strings.IndexByte(path, '['); i > 0 {
		path = path[:i]
	}
	return path
}

// join adds a key to a path.
func join(path, name string) string {
	if path == "" {
		return name
	}
	return path + "." + name
}

// entries walks a mapping: one call per key. Repeated keys and keys that are no
// words are left out and complained of, and the answer is false.
func (r *reader) entries(n *yaml.Node, path string, each func(name string, key,
	value *yaml.Node)) bool {
	ok := true
	seen := map[string]*yaml.Node{}
	for i := 0; i+1 < len(n.Content); i += 2 {
		key, value := n.Content[i], n.Content[i+1]
		if key.Kind != yaml.ScalarNode {
			r.complain(diag.Diagnostic{Code: "wrong-form", Position: r.at(key),
				Problem:  "a key is one word before a colon, not " + r.describe(key),
				Remedies: []diag.Remedy{{Write: "key: value"}}})
			ok = false
			continue
		}
		if r.lostComma(n, i) {
			ok = false
			continue
		}
		name := key.Value
		if first, ok := seen[name]; ok {
			r.complain(diag.Diagnostic{Code: "repeated-key", Position: r.at(key),
				Problem:  fmt.Sprintf("%q stands here a second time", name),
				Notes:    []string{fmt.Sprintf("The first is in line %d.", first.Line)},
				Remedies: []diag.Remedy{{Say: "Keep one of the two."}}})
			ok = false
			continue
		}
		seen[name] = key
		r.places[join(path, name)] = place{key: r.at(key), value: r.at(value)}
		each(name, key, value)
	}
	return ok
}

// lostComma names what a comma or a colon without a blank did inside { }: entry
// i has a key and no value.
func (r *reader) lostComma(n *yaml.Node, i int) bool {
	key, value := n.Content[i], n.Content[i+1]
	if n.Style&yaml.FlowStyle == 0 || !isNull(value) || value.Value != "" || isQuoted(key) {
		return false
	}
	at := r.at(key)
	if i >= 2 {
		before := n.Content[i-1]
		from := r.at(before)
		line := r.text.Line(at.Line)
		if before.Kind == yaml.ScalarNode && from.Line == at.Line && from.Column < at.Column &&
			line[from.End-1:at.Column-1] == "," {
			r.commaEndedName(n.Content[i-2].Value, line[from.Column-1:at.End-1], before.Value,
				diag.Position{File: at.File, Line: at.Line, Column: from.Column, End: at.End})
			return true
		}
	}
	if name, rest, ok := strings.Cut(key.Value, ":"); ok && rest != "" {
		r.complain(diag.Diagnostic{Code: "no-blank-after-colon", Position: at,
			Problem:  "a blank is missing after the colon",
			Notes:    []string{fmt.Sprintf("Without it %q is one word.", key.Value)},
			Remedies: []diag.Remedy{{Write: name + ": " + strings.TrimSpace(rest)}}})
		return true
	}
	r.complain(diag.Diagnostic{Code: "no-value", Position: at,
		Problem:  fmt.Sprintf("%q has no value", key.Value),
		Notes:    []string{"Inside { } every entry is   key: value; a text that holds a comma is put in quotation marks."},
		Remedies: []diag.Remedy{{Say: "Write a value after it, as", Write: key.Value + ": …"}}})
	return true
}

// commaEndedName names {name: 2,3-BPG} and {start: 1,5}.
func (r *reader) commaEndedName(key, written, kept string, at diag.Position) {
	if number := strings.Replace(written, ",", ".", 1); isNumber(number) && isNumber(kept) {
		r.complain(diag.Diagnostic{Code: "decimal-comma", Position: at,
			Problem:  "a comma ended this number",
			Notes:    []string{fmt.Sprintf("Inside { } a comma begins the next entry, so the number would be %s.", kept)},
			Remedies: []diag.Remedy{{Write: key + ": " + number}}})
		return
	}
	r.complain(diag.Diagnostic{Code: "comma-ended-name", Position: at,
		Problem:  "a comma ended this name",
		Notes:    []string{fmt.Sprintf("Inside { } a comma begins the next entry, so the %s would be %q.", key, kept)},
		Remedies: []diag.Remedy{{Write: key + ": " + quoteText(written)}}})
}
