package specs

import (
	"fmt"
	"regexp"
	"slices"
	"strings"

	"ligancy/specs/diag"
)

// enough is how many complaints about one study are gathered.
const enough = 1000

// deepest is how many brackets, or dashes on one line, may stand inside each other.
const deepest = 40

// slips reads a study's text before YAML does, line by line, and names what
// YAML either takes silently for something else or complains of in vaguer
// words. What it names it mends in a copy of the text, byte for byte, so that
// the rest of the study can still be read and judged.
type slips struct {
	text       diag.Text
	mended     []string
	complaints diag.List
	muted      []diag.Position // places that need no further complaint
	shifted    map[int]int     // line → column before which one blank was put in
	fatal      bool            // YAML cannot get past what was named
	end        int             // lines to be read; fewer than all at a second document

	flow    []bracket
	quote   byte // ' or ", inside a quoted text
	opened  diag.Position
	block   int // indentation that the lines of a | or > text exceed; −1 outside
	content bool
	last    byte            // the last character before this one that is no blank
	known   map[string]bool // every key that a study may hold
}

var closing = map[byte]string{'[': "]", '{': "}"}

// bracket is an open [ or {.
type bracket struct {
	sign      byte
	line, col int  // col: byte, from 0
	colon     bool // the entry being read has its key already
	key       string
}

// findSlips reads a whole text.
func findSlips(text diag.Text, known map[string]bool) *slips {
	s := &slips{text: text, mended: slices.Clone(text.Lines), shifted: map[int]int{}, block: -1,
		known: known, end: len(text.Lines)}
	for i := range text.Lines {
		if s.fatal || i >= s.end {
			break
		}
		s.line(i + 1)
	}
	if s.fatal {
		return s
	}
	if s.quote != 0 {
		s.complain(s.opened, "open-quotation", "the quotation mark that opens here is never closed",
			nil,
			diag.Remedy{Say: "Close it with", Write: string(s.quote)})
		s.fatal = true
	}
	if len(s.flow) > 0 {
		s.unclosed(s.flow[0])
	}
	return s
}

func (s *slips) complain(p diag.Position, code, problem string, notes []string,
	remedies ...diag.Remedy) {
	s.complaints = append(s.complaints, s.text.Quote(diag.Diagnostic{Code: code, Position: p,
		Problem: problem, Notes: notes, Remedies: remedies}))
	s.muted = append(s.muted, p)
	if len(s.complaints) >= enough {
		s.fatal = true
	}
}

func (s *slips) unclosed(b bracket) {
	s.complain(s.text.At(b.line, b.col+1, b.col+2), "open-bracket",
		fmt.Sprintf("the %c that opens here is never closed", b.sign), nil,
		diag.Remedy{Say: "Close it with", Write: closing[b.sign]})
	s.fatal = true
}

// overwrite replaces bytes of a mended line, length for length.
func (s *slips) overwrite(line, from, to int, with byte) {
	l := s.mended[line-1]
	s.mended[line-1] = l[:from] + strings.Repeat(string(with), to-from) + l[to:]
}

var topLevelKey = regexp.MustCompile(`^([A-Za-z_]+):(\s|$)`)

// line reads one line in the state that the lines before it left.
func (s *slips) line(n int) {
	l := s.text.Line(n)
	body := strings.TrimLeft(l, " ")
	indent := len(l) - len(body)
	if s.block >= 0 {
		if body == "" || indent > s.block {
			return
		}
		s.block = -1
	}
	if s.quote == 0 && len(s.flow) == 0 && s.boundary(n, l) {
		return
	}
	if m := topLevelKey.FindStringSubmatch(body); len(s.flow) > 0 && s.quote == 0 && m != nil &&
		s.known[m[1]] &&
		(indent == 0 || strings.IndexByte(",[{", s.last) < 0) {
		s.unclosed(s.flow[0])
		return
	}
	c := cursor{slips: s, n: n, line: l, parent: indent, start: true, scalar: -1}
	c.read()
}

// boundary handles lines that begin or end documents, and directives.
func (s *slips) boundary(n int, l string) bool {
	switch {
	case l == "---" || strings.HasPrefix(l, "--- ") || l == "..." || strings.HasPrefix(l, "... "):
		if s.content {
			s.end = n - 1
			if rest := strings.TrimSpace(strings.Join(s.text.Lines[n:], "\n")); rest != "" ||
				l[:3] == "---" {
				s.complain(s.text.At(n, 1, 4), "second-document", "a second document begins here",
					[]string{"A study is one document; nothing after this line is read."},
					diag.Remedy{Say: "Put the second study into a file of its own."})
			}
			return true
		}
		s.overwrite(n, 0, len(l), ' ')
		return true
	case strings.HasPrefix(l, "%"):
		s.complain(s.text.At(n, 1, len(l)+1), "directive",
			"a line that begins with % is an instruction to the YAML reader", nil,
			diag.Remedy{Say: "Take the line out, or begin it with", Write: "#"})
		s.overwrite(n, 0, len(l), ' ')
		return true
	}
	return false
}

// secondColon names title: a: b.
func (c *cursor) secondColon(inFlow bool) {
	from, to := c.i, len(c.line)
	if c.scalar >= 0 {
		from = c.scalar
	} else if c.closed > 0 && c.began >= 0 {
		from = c.began
	}
	if i := strings.Index(c.line[c.i:], " #"); i >= 0 {
		to = c.i + i
	}
	if inFlow {
		if i := strings.IndexAny(c.line[c.i:], ",]}"); i >= 0 {
			to = c.i + i
		}
	}
	value := strings.TrimSpace(c.line[from:to])
	notes := []string{"A colon with a blank after it begins the value of a key, and this line has one already."}
	remedies := []diag.Remedy{{Write: c.entry(quoteText(value))}}
	if inFlow {
		notes = []string{"Inside { } entries are set apart by commas; a text that holds a colon is put in quotation marks."}
	}
	c.complain(c.at(from, from+len(value)), "second-colon", "a second colon in one entry", notes,
		remedies...)
	c.overwrite(c.n, c.i, c.i+1, '_')
	c.closed = 0
	if c.scalar < 0 {
		c.scalar = from
	}
	c.i++
}

// quoteText puts a text in the quotation marks that suit it.
func quoteText(s string) string {
	if strings.ContainsFunc(s, isOddBlank) {
		var b strings.Builder
		for _, r := range s {
			switch {
			case isOddBlank(r) && r <= 0xffff:
				fmt.Fprintf(&b, `\u%04X`, r)
			case r == '"' || r == '\\':
				b.WriteString(`\` + string(r))
			default:
				b.WriteRune(r)
			}
		}
		return `"` + b.String() + `"`
	}
	if strings.ContainsAny(s, "\"\\") && !strings.Contains(s, "'") {
		return "'" + s + "'"
	}
	return `"` + strings.NewReplacer(`\`, `\\`, `"`, `\"`).Replace(s) + `"`
}

// trailing names text after a closing quotation mark or bracket.
func (c *cursor) trailing() {
	from := max(c.began, 0)
	to := len(c.line)
	if i := strings.Index(c.line[c.i:], " #"); i >= 0 {
		to = c.i + i
	}
	if len(c.flow) > 0 {
		if i := strings.IndexAny(c.line[c.i:], ",]}"); i >= 0 {
			to = c.i + i
		}
	}
	value := strings.TrimSpace(c.line[from:to])
	was := c.line[c.closed-1]
	switch {
	case c.began >= 0 && (was == ']' || was == '}'):
		c.complain(c.at(from, from+len(value)), "bracket-begins-list",
			fmt.Sprintf("a text that begins with %c must be quoted", c.line[from]),
			[]string{"Without quotation marks it is read as a list or a mapping."},
			diag.Remedy{Write: c.entry(quoteText(value))})
		for j := from; j < to; j++ {
			if strings.IndexByte("[]{},:#\"'", c.line[j]) >= 0 {
				c.overwrite(c.n, j, j+1, '_')
			}
		}
	default:
		c.complain(c.at(from, from+len(value)), "text-after-quotation",
			"text follows the closing quotation mark", nil,
			diag.Remedy{Say: "Put all of it inside the quotation marks."})
		c.overwrite(c.n, c.closed, to, ' ')
	}
	c.closed, c.scalar = 0, -1
	c.start = false
	c.i = to
}

// anchor names &x, *x, !x and <<.
func (c *cursor) anchor(from, to int) {
	problem := "anchors, aliases and merges (&, *, <<) are not read in a study"
	if c.line[from] == '!' {
		problem = "tags (!) are not read in a study"
	}
	word := c.line[from:to]
	remedies := []diag.Remedy{{Say: "Write out what it stands for."}}
	if word != "<<" {
		remedies = append(remedies, diag.Remedy{Say: "If it is a text, write",
			Write: c.entry(quoteText(word))})
	}
	c.complain(c.at(from, to), "anchor", problem, nil, remedies...)
	c.overwrite(c.n, from, to, '_')
	if c.line[from] == '&' || c.line[from] == '!' {
		c.overwrite(c.n, from, to, ' ')
	} else {
		c.scalar, c.start = from, false
	}
	c.i = max(c.i, to)
}

// sign names a value that begins with a character YAML keeps for itself.
func (c *cursor) sign(b byte) {
	value := c.line[c.i : c.i+c.wordLength()]
	write := quoteText(value)
	if value == "%" {
		write = "percent"
	}
	c.complain(c.at(c.i, c.i+len(value)), "reserved-sign",
		fmt.Sprintf("a text that begins with %c must be quoted", b), nil,
		diag.Remedy{Write: c.entry(write)})
	c.overwrite(c.n, c.i, c.i+1, '_')
	c.scalar, c.start = c.i, false
	c.i++
}
