package specs

import (
	"errors"
	"fmt"
	"io"
	"regexp"
	"strings"
	"unicode/utf8"

	"gopkg.in/yaml.v3"

	"ligancy/specs/diag"
)

// document is a study's text with the tree that YAML made of it.
type document struct {
	*slips
	root *yaml.Node // nil where there is nothing to read
	// partial: YAML gave up somewhere; the tree holds what stands above, so
	// that nothing can be called missing.
	partial bool
}

// parseDocument makes a tree of a text, and names whatever stands against it.
func parseDocument(text diag.Text, known map[string]bool) *document {
	d := &document{slips: findSlips(text, known)}
	lines := d.mended[:d.end]
	var err error
	if d.fatal {
		lines = lines[:d.muted[len(d.muted)-1].Line-1]
	} else {
		var taken int
		if d.root, taken, err = parseLines(lines); err == nil {
			return d
		}
		lines = lines[:taken]
	}
	d.partial = true
	root, readable := readableLines(lines)
	d.root = root
	if err != nil {
		d.unreadable(readable+1, err)
	}
	return d
}

// unreadable names the line at which YAML gave up.
func (d *document) unreadable(line int, err error) {
	for line < d.end && strings.TrimSpace(d.text.Line(line)) == "" {
		line++
	}
	for _, m := range d.muted {
		if m.Line == line || m.Line == line-1 {
			return // named before, in better words
		}
	}
	l := d.text.Line(line)
	from := len(l) - len(strings.TrimLeft(l, " "))
	problem, notes := inOurWords(err)
	d.complain(d.text.At(line, from+1, len(strings.TrimRight(l, " "))+1), "not-yaml", problem,
		notes,
		diag.Remedy{Say: "Write   key: value   with a blank after the colon, indent what belongs together alike, and quote texts with signs in them."})
}

var yamlPlace = regexp.MustCompile(`^yaml: (line \d+: )?`)

// inOurWords turns what the parser says into a sentence about the line.
func inOurWords(err error) (string, []string) {
	said := yamlPlace.ReplaceAllString(err.Error(), "")
	for _, w := range []struct{ has, problem string }{
		{"mapping values are not allowed", "a key with a colon cannot stand here"},
		{"could not find expected ':'",
			"a colon is missing after this key, or this line belongs to the text above it"},
		{"did not find expected key",
			"this line does not fit the indentation of the lines above it"},
		{"did not find expected '-' indicator", "this line does not fit the list above it"},
		{"block sequence entries are not allowed", "a list cannot begin here"},
		{"did not find expected ',' or", "a comma or a closing bracket is missing before this"},
		{"did not find expected node content", "a value is missing here"},
		{"block collections are not allowed",
			"a list on lines of its own cannot stand inside brackets"},
	} {
		if strings.Contains(said, w.has) {
			return w.problem, nil
		}
	}
	return "this line cannot be read as YAML", []string{"The reader says: " + said + "."}
}

// readableLines is the longest run of lines, from the first, that YAML can
// read, and what it reads.
func readableLines(lines []string) (*yaml.Node, int) {
	patience := 100 // lines that may belong to one unfinished text or list
	if len(lines) > 5000 {
		patience = 10
	}
	for n := len(lines); n > max(len(lines)-patience, 0); n-- {
		if root, _, err := parseLines(lines[:n]); err == nil {
			return root, n
		}
	}
	return nil, 0
}

// lineReader hands out one line at a time, so that the lines taken tell how far
// the parser came.
type lineReader struct {
	lines []string
	taken int
	rest  string
}

func (r *lineReader) Read(p []byte) (int, error) {
	if r.rest == "" {
		if r.taken == len(r.lines) {
			return 0, io.EOF
		}
		r.rest = r.lines[r.taken] + "\n"
		r.taken++
	}
	n := copy(p, r.rest)
	r.rest = r.rest[n:]
	return n, nil
}

// parseLines makes a tree of lines, and says how many were taken; an empty
// text has no tree.
func parseLines(lines []string) (root *yaml.Node, taken int, err error) {
	r := &lineReader{lines: lines}
	defer func() {
		if e := recover(); e != nil { // a fault of the parser must not end the program
			root, taken, err = nil, r.taken, fmt.Errorf("%v", e)
		}
	}()
	var doc yaml.Node
	err = yaml.NewDecoder(r).Decode(&doc)
	if errors.Is(err, io.EOF) {
		return nil, r.taken, nil
	}
	if err != nil || len(doc.Content) == 0 {
		return nil, r.taken, err
	}
	return doc.Content[0], r.taken, nil
}

// at is the place of a node in the text as it was written.
func (d *document) at(n *yaml.Node) diag.Position {
	line := ""
	if n.Line >= 1 && n.Line <= len(d.mended) {
		line = d.mended[n.Line-1]
	}
	from := byteOf(line, n.Column-1)
	to := from + d.width(n, line[from:])
	if at, ok := d.shifted[n.Line]; ok {
		if from >= at {
			from--
		}
		if to > at {
			to--
		}
	}
	return d.text.At(n.Line, from+1, to+1)
}

// byteOf is the byte at which the character number column stands.
func byteOf(line string, column int) int {
	i := 0
	for ; column > 0 && i < len(line); column-- {
		_, size := utf8.DecodeRuneInString(line[i:])
		i += size
	}
	return i
}

// width is how many bytes of its first line a node takes.
func (d *document) width(n *yaml.Node, rest string) int {
	switch {
	case n.Kind == yaml.ScalarNode &&
		n.Style&(yaml.DoubleQuotedStyle|yaml.SingleQuotedStyle) != 0 && rest != "":
		return quotedWidth(rest)
	case n.Kind == yaml.ScalarNode && strings.HasPrefix(rest, n.Value):
		return len(n.Value)
	case n.Kind == yaml.ScalarNode:
		return len(firstPlain(rest))
	case n.Style&yaml.FlowStyle != 0:
		return flowWidth(rest)
	}
	return len(strings.TrimRight(firstPlain(rest), " "))
}

// firstPlain is a line without a remark at its end.
func firstPlain(rest string) string {
	if i := strings.Index(rest, " #"); i >= 0 {
		rest = rest[:i]
	}
	return strings.TrimRight(rest, " ")
}

func quotedWidth(rest string) int {
	q := rest[0]
	for i := 1; i < len(rest); i++ {
		switch {
		case rest[i] == '\\' && q == '"':
			i++
		case rest[i] == q && q == '\'' && i+1 < len(rest) && rest[i+1] == q:
			i++
		case rest[i] == q:
			return i + 1
		}
	}
	return len(rest)
}

// flowWidth is how far a bracket goes on its first line.
func flowWidth(rest string) int {
	deep := 0
	for i := 0; i < len(rest); i++ {
		switch rest[i] {
		case '"', '\'':
			i += quotedWidth(rest[i:]) - 1
		case '[', '{':
			deep++
		case ']', '}':
			if deep--; deep == 0 {
				return i + 1
			}
		}
	}
	return len(strings.TrimRight(rest, " "))
}
