package diag

import (
	"fmt"
	"strings"
	"unicode"
	"unicode/utf8"

	"github.com/mattn/go-runewidth"
)

// terminal counts columns the same way wherever the program runs.
var terminal = &runewidth.Condition{EastAsianWidth: false, StrictEmojiNeutral: true}

// screen makes a text safe to print, so that no file can steer a terminal, and
// says how many columns it takes: tabs as an arrow, control characters as
// pictures, marks of writing direction by number, bytes that are no UTF-8 as �.
func screen(s string) (string, int) {
	var b strings.Builder
	for s != "" {
		r, size := utf8.DecodeRuneInString(s)
		b.WriteString(visible(r, s[:size]))
		s = s[size:]
	}
	return b.String(), terminal.StringWidth(b.String())
}

// visible writes one character so that it can be seen.
func visible(r rune, written string) string {
	switch {
	case r == '\t':
		return "→ "
	case r == utf8.RuneError && len(written) <= 1:
		return "�"
	case r < 0x20:
		return string(rune(0x2400) + r)
	case r == 0x7f:
		return "␡"
	case unicode.IsControl(r), unicode.In(r, unicode.Bidi_Control), r == 0xfeff, r == 0x2028,
		r == 0x2029, r == 0x200b, r == 0x2060:
		return fmt.Sprintf("<U+%04X>", r)
	}
	return written
}

// rightToLeft reports whether a terminal may reorder the line, so that marks
// under it would lie.
func rightToLeft(s string) bool {
	for _, r := range s {
		if r > 0x590 && unicode.In(r, unicode.Hebrew, unicode.Arabic, unicode.Syriac,
			unicode.Thaana,
			unicode.Nko, unicode.Samaritan, unicode.Mandaic, unicode.Adlam,
			unicode.Hanifi_Rohingya) {
			return true
		}
	}
	return false
}

// firstColumns is the start of a text, at most n columns of it.
func firstColumns(s string, n int) (string, int) {
	s = terminal.Truncate(s, n, "")
	return s, terminal.StringWidth(s)
}

// lastColumns is the end of a text, at most n columns of it.
func lastColumns(s string, n int) (string, int) {
	if total := terminal.StringWidth(s); total > n {
		s = terminal.TruncateLeft(s, total-n, "")
	}
	return s, terminal.StringWidth(s)
}
