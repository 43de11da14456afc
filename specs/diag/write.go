package diag

import (
	"bufio"
	"encoding/json"
	"fmt"
	"io"
	"strings"
)

const (
	pageColumns   = 100 // a line of text is at most this wide
	marginColumns = 9   // "    31 | "
	indent        = "   "
)

// WriteText writes the complaints for people, one block each, a blank line
// between them: place and sentence, the line with its span marked, notes, and
// what to write.
func WriteText(w io.Writer, l List) error {
	out := bufio.NewWriter(w)
	for i, d := range l {
		if i > 0 {
			fmt.Fprintln(out)
		}
		writeBlock(out, d)
	}
	return out.Flush()
}

func writeBlock(out io.Writer, d Diagnostic) {
	problem, _ := screen(d.Problem)
	place, _ := screen(d.Position.String())
	if d.Severity == Warning {
		problem = "warning: " + problem
	}
	fmt.Fprintf(out, "%s%s%s\n", place, indent, problem)
	writeSource(out, d)
	for _, n := range d.Notes {
		writeWrapped(out, n)
	}
	for _, r := range d.Remedies {
		writeRemedy(out, r)
	}
}

// writeWrapped writes a paragraph at the indent, broken between words.
func writeWrapped(out io.Writer, s string) {
	column := 0
	for _, word := range strings.Fields(s) {
		word, w := screen(word)
		switch {
		case column == 0:
			fmt.Fprint(out, indent, word)
			column = len(indent) + w
		case column+1+w > pageColumns:
			fmt.Fprint(out, "\n", indent, word)
			column = len(indent) + w
		default:
			fmt.Fprint(out, " ", word)
			column += 1 + w
		}
	}
	fmt.Fprintln(out)
}

// writeRemedy keeps what is to be written in one piece, set off by blanks.
func writeRemedy(out io.Writer, r Remedy) {
	say := r.Say
	if say == "" {
		say = "Write"
	}
	if r.Write == "" {
		writeWrapped(out, say)
		return
	}
	say, a := screen(say)
	code, b := screen(r.Write)
	where, c := screen(r.Where)
	if where != "" {
		code, b = code+indent+where, b+len(indent)+c
	}
	if a+b+2*len(indent) <= pageColumns {
		fmt.Fprintf(out, "%s%s%s%s\n", indent, say, indent, code)
		return
	}
	fmt.Fprintf(out, "%s%s\n%s%s%s\n", indent, say, indent, indent, code)
}

// writeSource writes the line and, under it, marks over the width of the span.
func writeSource(out io.Writer, d Diagnostic) {
	if d.Line == 0 || d.Source == "" {
		return
	}
	start := min(max(d.Column-1-d.From, 0), len(d.Source))
	end := min(max(d.End-1-d.From, start), len(d.Source))
	v := view(d.Source, start, end)
	fmt.Fprintf(out, "%6d | %s\n", d.Line, v.text)
	switch {
	case d.Column == 0:
	case rightToLeft(d.Source):
		span, _ := screen(d.Source[start:end])
		fmt.Fprintf(out, "       | bytes %d to %d: %s\n", d.Column, max(d.End-1, d.Column), span)
	default:
		fmt.Fprintf(out, "       | %s%s\n", strings.Repeat(" ", v.before), strings.Repeat("‾",
			v.marks))
	}
}

// sight is a line as it is shown.
type sight struct {
	text   string
	before int // columns before the span
	marks  int // columns of the span, at least 1
}

// view shows a line, cut to the page around the span [start, end).
func view(line string, start, end int) sight {
	const room = pageColumns - marginColumns
	head, wHead := screen(line[:start])
	span, wSpan := screen(line[start:end])
	tail, wTail := screen(line[end:])
	if wHead+wSpan+wTail > room {
		keep := max((room-min(wSpan, room))/2, 8)
		if wHead > keep {
			head, wHead = lastColumns(head, keep)
			head, wHead = "… "+head, wHead+2
		}
		if left := room - wHead - 2; wSpan > left {
			span, wSpan = firstColumns(span, left)
			tail, wTail = " …", 2
		} else if left -= wSpan; wTail > left+2 {
			tail, _ = firstColumns(tail, left)
			tail += " …"
		}
	}
	return sight{text: head + span + tail, before: wHead, marks: max(wSpan, 1)}
}

// WriteJSON writes the complaints as one JSON array.
func WriteJSON(w io.Writer, l List) error {
	if l == nil {
		l = List{}
	}
	enc := json.NewEncoder(w)
	enc.SetIndent("", "  ")
	enc.SetEscapeHTML(false)
	return enc.Encode(l)
}
