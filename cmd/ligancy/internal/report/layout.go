package report

import (
	"fmt"
	"slices"
	"strings"
	"unicode"

	"github.com/mattn/go-runewidth"
	"golang.org/x/text/unicode/bidi"
)

// Width of a page of text, in columns.
const Width = 100

// columns counts as terminals outside East Asian locales do, whatever the
// locale of this process, so that the same result gives the same bytes.
var columns = &runewidth.Condition{EastAsianWidth: false, StrictEmojiNeutral: true}

// width of a text in columns of a terminal: the sum over its runes, as
// terminals count; combining signs take none.
func width(s string) int {
	w := 0
	for _, r := range s {
		w += columns.RuneWidth(r)
	}
	return w
}

// head is the longest beginning of s that fits into w columns.
func head(s string, w int) string {
	for i, r := range s {
		if w -= columns.RuneWidth(r); w < 0 {
			return s[:i]
		}
	}
	return s
}

// printable makes a text from a study safe to show: control characters, escape
// sequences and direction overrides are spelled out, line breaks and tabs
// become blanks, and text written from right to left is isolated so that it
// does not reorder the columns beside it.
func printable(s string) string {
	s = strings.ToValidUTF8(s, "\uFFFD")
	plain, rightToLeft := true, false
	for _, r := range s {
		if unsafe(r) {
			plain = false
		}
		if c := direction(r); c == bidi.R || c == bidi.AL {
			rightToLeft = true
		}
	}
	if !plain {
		s = spell(s)
	}
	if rightToLeft {
		s = "\u2068" + s + "\u2069" // FIRST STRONG ISOLATE … POP DIRECTIONAL ISOLATE
	}
	return s
}

func direction(r rune) bidi.Class {
	p, _ := bidi.LookupRune(r)
	return p.Class()
}

// unsafe runes change what a terminal does or the order in which it shows text.
func unsafe(r rune) bool {
	return unicode.IsControl(r) || unicode.Is(unicode.Bidi_Control, r) || r == '\u2028' || r == '\u2029'
}

// spell writes unsafe runes as their code points.
func spell(s string) string {
	var b strings.Builder
	for _, r := range s {
		switch {
		case r == '\n' || r == '\t' || r == '\r':
			b.WriteByte(' ')
		case unsafe(r) && r < 0x100:
			fmt.Fprintf(&b, `\x%02x`, r)
		case unsafe(r):
			fmt.Fprintf(&b, `\u%04x`, r)
		default:
			b.WriteRune(r)
		}
	}
	return b.String()
}

// cut shortens a printable text to at most w columns, with an ellipsis.
func cut(s string, w int) string {
	s = printable(s)
	if width(s) <= w {
		return s
	}
	short := head(s, w-1) + "…"
	if strings.ContainsRune(short, '\u2068') && !strings.ContainsRune(short, '\u2069') {
		short += "\u2069"
	}
	return short
}

// Short makes a text from a study safe to show in at most w columns.
func Short(s string, w int) string { return cut(s, w) }

// pad fills a text with blanks to w columns.
func pad(s string, w int) string {
	return s + strings.Repeat(" ", max(0, w-width(s)))
}

// padLeft fills a text with blanks before it to w columns.
func padLeft(s string, w int) string {
	return strings.Repeat(" ", max(0, w-width(s))) + s
}

// wrap breaks a paragraph into lines of at most w columns. A word that is
// longer than a line is broken; a percent sign stays with its number.
func wrap(s string, w int) []string {
	var lines []string
	line := ""
	for _, word := range wrapWords(printable(s)) {
		for width(word) > w {
			if line != "" {
				lines, line = append(lines, line), ""
			}
			first := head(word, w)
			if first == "" {
				break
			}
			lines, word = append(lines, first), word[len(first):]
		}
		switch {
		case line == "":
			line = word
		case width(line)+1+width(word) <= w:
			line += " " + word
		default:
			lines, line = append(lines, line), word
		}
	}
	if line != "" {
		lines = append(lines, line)
	}
	return lines
}

// wrapWords are the words of a text; a sign of percent belongs to the word before it.
func wrapWords(s string) []string {
	var all []string
	for _, w := range strings.Fields(s) {
		if n := len(all); n > 0 && strings.HasPrefix(w, "%") {
			all[n-1] += " " + w
			continue
		}
		all = append(all, w)
	}
	return all
}

// hanging writes a paragraph behind a mark, its further lines indented as far.
func hanging(mark, s string, w int) string {
	var b strings.Builder
	indent := strings.Repeat(" ", width(mark))
	for i, line := range wrap(s, w-width(mark)) {
		if i == 0 {
			b.WriteString(mark)
		} else {
			b.WriteString(indent)
		}
		b.WriteString(line)
		b.WriteByte('\n')
	}
	return b.String()
}

// between sets one text at the left and one at the right end of a line; on a
// line that is too short for both, the right one goes below.
func between(left, right string, w int) string {
	gap := w - width(left) - width(right)
	if gap < 2 {
		return left + "\n" + padLeft(right, w)
	}
	return left + strings.Repeat(" ", gap) + right
}

// grid is a table of cells, aligned by column.
type grid struct {
	right []bool // columns set against their right edge
	rows  [][]string
	gap   int // blanks between columns
}

// add appends one row; a row may end early.
func (g *grid) add(cells ...string) { g.rows = append(g.rows, cells) }

// without takes the column out whose head begins so.
func (g *grid) without(head string) {
	c := slices.IndexFunc(g.rows[0], func(cell string) bool { return strings.HasPrefix(cell, head) })
	if c < 0 {
		return
	}
	rows := make([][]string, len(g.rows))
	for i, row := range g.rows {
		if rows[i] = row; c < len(row) {
			rows[i] = slices.Delete(slices.Clone(row), c, c+1)
		}
	}
	g.rows = rows
}

// lines sets the table. Empty columns take no room; blanks at line ends are
// cut. Columns that do not fit into w columns of text follow below, behind the
// first column again.
func (g *grid) lines(w int) []string {
	widths := g.widths()
	var out []string
	for from := 1; ; {
		to, used := from, widths[0]
		for to < len(widths) && (to == from || used+g.step(widths[to]) <= w) {
			used += g.step(widths[to])
			to++
		}
		for _, row := range g.rows {
			if from > 1 && strings.Join(row[min(from, len(row)):min(to, len(row))], "") == "" {
				continue
			}
			out = append(out, g.line(row, widths, from, to))
		}
		if from = to; from >= len(widths) {
			break
		}
	}
	return out
}

// widths of the columns.
func (g *grid) widths() []int {
	widths := []int{0}
	for _, row := range g.rows {
		for i, cell := range row {
			if i == len(widths) {
				widths = append(widths, 0)
			}
			widths[i] = max(widths[i], width(cell))
		}
	}
	return widths
}

// step is what a column adds to a line.
func (g *grid) step(w int) int {
	if w == 0 {
		return 0
	}
	return w + g.gap
}

// line sets the first cell of a row and its cells from … to−1.
func (g *grid) line(row []string, widths []int, from, to int) string {
	var b strings.Builder
	b.WriteString(pad(row[0], widths[0]))
	for i := from; i < min(to, len(row)); i++ {
		if widths[i] == 0 {
			continue
		}
		if b.Len() > 0 {
			b.WriteString(strings.Repeat(" ", g.gap))
		}
		cell := row[i]
		if i < len(g.right) && g.right[i] {
			cell = padLeft(cell, widths[i])
		}
		b.WriteString(pad(cell, widths[i]))
	}
	return strings.TrimRight(b.String(), " ")
}
