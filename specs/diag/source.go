package diag

import (
	"strings"
	"unicode/utf8"
)

// Text is a file's lines, kept so that complaints can show them.
type Text struct {
	Name  string
	Lines []string
}

// NewText cuts a file into lines; CR LF, LF and a lone CR each end one.
func NewText(name string, data []byte) Text {
	s := strings.ReplaceAll(string(data), "\r\n", "\n")
	s = strings.ReplaceAll(s, "\r", "\n")
	return Text{Name: name, Lines: strings.Split(s, "\n")}
}

// At is a place in the text: bytes column to end−1 of a line, all from 1.
func (t Text) At(line, column, end int) Position {
	return Position{File: t.Name, Line: line, Column: column, End: max(end, column)}
}

// Line is one line, from 1; empty where there is none.
func (t Text) Line(n int) string {
	if n < 1 || n > len(t.Lines) {
		return ""
	}
	return t.Lines[n-1]
}

// Quote fills in the line that a complaint is about. Of a very long line only
// the neighbourhood of the span is kept.
func (t Text) Quote(d Diagnostic) Diagnostic {
	if d.File != t.Name || d.Line == 0 {
		return d
	}
	d.Source, d.From = around(t.Line(d.Line), d.Column-1, d.End-1)
	return d
}

// keptBytes is how much of a long line is kept on either side of a span.
const keptBytes = 400

// around cuts a line to the neighbourhood of bytes [start, end), at runes.
func around(line string, start, end int) (string, int) {
	if len(line) <= 2*keptBytes {
		return line, 0
	}
	start = min(max(start, 0), len(line))
	end = min(max(end, start), len(line))
	from, to := max(start-keptBytes, 0), min(min(end, start+keptBytes)+keptBytes, len(line))
	for from > 0 && from < len(line) && !utf8.RuneStart(line[from]) {
		from--
	}
	for to < len(line) && !utf8.RuneStart(line[to]) {
		to++
	}
	return line[from:to], from
}
