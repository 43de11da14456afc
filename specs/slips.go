package specs

import (
	"fmt"
	"regexp"
	"slices"
	"strings"
	"unicode/utf8"

	"ligancy/specs/diag"
)

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
	s := &slips{text: text, mended: slices.Clone(text.Lines), shifted: map[int]int{}, block: -1, known: known, end: len(text.Lines)}
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
		s.complain(s.opened, "open-quotation", "the quotation mark that opens here is never closed", nil,
			diag.Remedy{Say: "Close it with", Write: string(s.quote)})
		s.fatal = true
	}
	if len(s.flow) > 0 {
		s.unclosed(s.flow[0])
	}
	return s
}

func (s *slips) complain(p diag.Position, code, problem string, notes []string, remedies ...diag.Remedy) {
	s.complaints = append(s.complaints, s.text.Quote(diag.Diagnostic{Code: code, Position: p, Problem: problem, Notes: notes, Remedies: remedies}))
	s.muted = append(s.muted, p)
}

func (s *slips) unclosed(b bracket) {
	s.complain(s.text.At(b.line, b.col+1, b.col+2), "open-bracket", fmt.Sprintf("the %c that opens here is never closed", b.sign), nil,
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
	if m := topLevelKey.FindStringSubmatch(body); len(s.flow) > 0 && s.quote == 0 && m != nil && s.known[m[1]] &&
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
			if rest := strings.TrimSpace(strings.Join(s.text.Lines[n:], "\n")); rest != "" || l[:3] == "---" {
				s.complain(s.text.At(n, 1, 4), "second-document", "a second document begins here", []string{"A study is one document; nothing after this line is read."},
					diag.Remedy{Say: "Put the second study into a file of its own."})
			}
			return true
		}
		s.overwrite(n, 0, len(l), ' ')
		return true
	case strings.HasPrefix(l, "%"):
		s.complain(s.text.At(n, 1, len(l)+1), "directive", "a line that begins with % is an instruction to the YAML reader", nil,
			diag.Remedy{Say: "Take the line out, or begin it with", Write: "#"})
		s.overwrite(n, 0, len(l), ' ')
		return true
	}
	return false
}

// cursor reads along one line.
type cursor struct {
	*slips
	n      int // line, from 1
	line   string
	i      int    // byte, from 0
	start  bool   // a new text, list or mapping may begin here
	key    bool   // this line has a key already, outside brackets
	name   string // that key
	dashes int
	parent int // column of the innermost dash or key of this line
	scalar int // where the plain text being read began; −1 outside
	closed int // 1 + where a quoted text or bracket just ended; 0 otherwise
	began  int // where that quoted text or bracket began, if on this line
}

func (c *cursor) at(from, to int) diag.Position { return c.text.At(c.n, from+1, to+1) }

// read walks to the end of the line.
func (c *cursor) read() {
	for c.i < len(c.line) && !c.fatal {
		r, size := utf8.DecodeRuneInString(c.line[c.i:])
		switch {
		case c.quote != 0:
			c.quoted()
		case r == ' ':
			c.i++
		case r == '\t':
			c.tab()
		case isOddBlank(r):
			c.oddBlank(r, size)
		case r == '#' && (c.i == 0 || isBlank(c.line[c.i-1])):
			c.remark()
			return
		default:
			c.content, c.last = true, c.line[c.i]
			c.visible(size)
		}
	}
	c.endPlain(len(c.line))
}

func isBlank(b byte) bool { return b == ' ' || b == '\t' }

// isOddBlank knows what looks like a blank or a line end but is a letter to YAML, or the reverse.
func isOddBlank(r rune) bool {
	switch {
	case r < 0x80:
		return r < ' ' || r == 0x7f
	case r == 0x85, r == 0xa0, r >= 0x2000 && r <= 0x200b, r == 0x2028, r == 0x2029, r == 0x202f, r == 0x205f, r == 0x3000, r == 0xfeff:
		return true
	}
	return false
}

// tab names a run of tabs.
func (c *cursor) tab() {
	to := c.i
	for to < len(c.line) && c.line[to] == '\t' {
		to++
	}
	c.complain(c.at(c.i, to), "tab", "a tab; YAML is indented and set apart with blanks", nil, diag.Remedy{Say: "Write blanks instead."})
	c.overwrite(c.n, c.i, to, ' ')
	c.i = to
}

func (c *cursor) oddBlank(r rune, size int) {
	name := fmt.Sprintf("U+%04X looks like a blank but is none", r)
	switch {
	case r == 0xa0 || r == 0x202f:
		name = "a no-break space, which YAML takes for a letter"
	case r < ' ' || r == 0x7f || r == 0x85 || r == 0x2028 || r == 0x2029:
		name = fmt.Sprintf("the control character U+%04X does not belong in a study", r)
	}
	c.complain(c.at(c.i, c.i+size), "odd-blank", name, nil, diag.Remedy{Say: "Write a plain blank instead."})
	c.overwrite(c.n, c.i, c.i+size, ' ')
	c.i += size
}

// remark meets a # that begins a remark.
func (c *cursor) remark() {
	c.endPlain(c.i)
	rest := c.line[c.i:]
	if strings.TrimSpace(c.line[:c.i]) == "" || len(rest) == 1 || isBlank(rest[1]) || rest[1] == '#' {
		return
	}
	d := diag.Diagnostic{Severity: diag.Warning, Code: "remark", Position: c.at(c.i, len(c.line)),
		Problem:  "from # on this is a remark, which is not read",
		Remedies: []diag.Remedy{{Say: "If it is a remark, put a blank after the #. If it belongs to the text before it, put all of it in quotation marks."}}}
	c.complaints = append(c.complaints, c.text.Quote(d))
}

// quoted walks inside a quoted text.
func (c *cursor) quoted() {
	b := c.line[c.i]
	switch {
	case b == '\\' && c.quote == '"':
		c.i += 2
	case b == '\'' && c.quote == '\'' && strings.HasPrefix(c.line[c.i+1:], "'"):
		c.i += 2
	case b == c.quote:
		c.quote = 0
		c.i++
		c.closed = c.i
		c.began = -1
		if c.opened.Line == c.n {
			c.began = c.opened.Column - 1
		}
	default:
		c.i++
	}
	c.i = min(c.i, len(c.line))
}

// visible reads one character that is no blank, outside quoted texts.
func (c *cursor) visible(size int) {
	b := c.line[c.i]
	inFlow := len(c.flow) > 0
	switch {
	case b == ':' && c.isColon(inFlow):
		c.colon(inFlow)
	case inFlow && strings.IndexByte(",]}", b) >= 0:
		c.endPlain(c.i)
		c.flowSign(b)
	case c.closed > 0:
		c.trailing()
	case c.start && c.scalar < 0:
		c.begin(b, inFlow, size)
	case inFlow && (b == '[' || b == '{'):
		c.push(b)
	default:
		if c.scalar < 0 {
			c.scalar = c.i
		}
		c.i += size
	}
}

// isColon reports whether the colon here ends a key.
func (c *cursor) isColon(inFlow bool) bool {
	next := c.line[c.i+1:]
	if r, _ := utf8.DecodeRuneInString(next); isOddBlank(r) {
		return true
	}
	return next == "" || isBlank(next[0]) || inFlow && strings.IndexByte(",[]{}", next[0]) >= 0 || inFlow && c.closed == c.i && c.closed > 0
}

// colon ends a key, or is one colon too many.
func (c *cursor) colon(inFlow bool) {
	taken := c.key
	if inFlow {
		taken = c.flow[len(c.flow)-1].colon
	}
	if taken {
		c.secondColon(inFlow)
		return
	}
	if inFlow {
		c.flow[len(c.flow)-1].colon, c.flow[len(c.flow)-1].key = true, c.keyText()
	} else {
		c.key, c.name = true, c.keyText()
		if c.closed > 0 {
			c.parent = max(c.parent, c.began)
		}
		c.parent = max(c.parent, c.scalar)
	}
	if c.scalar >= 0 && strings.TrimSpace(c.line[c.scalar:c.i]) == "<<" {
		c.anchor(c.scalar, c.scalar+2)
	}
	c.scalar, c.closed, c.start = -1, 0, true
	c.i++
}

// keyText is the text that a colon makes a key.
func (c *cursor) keyText() string {
	from := c.i
	switch {
	case c.scalar >= 0:
		from = c.scalar
	case c.closed > 0 && c.began >= 0:
		from = c.began
	}
	return strings.TrimSpace(c.line[from:c.i])
}

// entry writes a value after the key it belongs to.
func (c *cursor) entry(value string) string {
	name := c.name
	if len(c.flow) > 0 {
		name = c.flow[len(c.flow)-1].key
		if !c.flow[len(c.flow)-1].colon {
			name = ""
		}
	}
	if name == "" {
		return value
	}
	return name + ": " + value
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
	c.complain(c.at(from, from+len(value)), "second-colon", "a second colon in one entry", notes, remedies...)
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

// flowSign reads , ] } inside brackets.
func (c *cursor) flowSign(b byte) {
	c.closed, c.start = 0, true
	top := len(c.flow) - 1
	if b == ',' {
		c.flow[top].colon = false
		c.i++
		return
	}
	open := c.flow[top]
	if b == ']' && open.sign != '[' || b == '}' && open.sign != '{' {
		c.complain(c.at(c.i, c.i+1), "wrong-bracket", fmt.Sprintf("%c closes here, but %c was opened in line %d, column %d", b, open.sign, open.line, open.col+1), nil, diag.Remedy{Write: closing[open.sign]})
		c.fatal = true
		return
	}
	c.flow = c.flow[:top]
	c.i++
	c.closed, c.began = c.i, -1
	if open.line == c.n {
		c.began = open.col
	}
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
		c.complain(c.at(from, from+len(value)), "bracket-begins-list", fmt.Sprintf("a text that begins with %c must be quoted", c.line[from]),
			[]string{"Without quotation marks it is read as a list or a mapping."}, diag.Remedy{Write: c.entry(quoteText(value))})
		for j := from; j < to; j++ {
			if strings.IndexByte("[]{},:#\"'", c.line[j]) >= 0 {
				c.overwrite(c.n, j, j+1, '_')
			}
		}
	default:
		c.complain(c.at(from, from+len(value)), "text-after-quotation", "text follows the closing quotation mark", nil,
			diag.Remedy{Say: "Put all of it inside the quotation marks."})
		c.overwrite(c.n, c.closed, to, ' ')
	}
	c.closed, c.scalar = 0, -1
	c.start = false
	c.i = to
}

// begin reads the first character of a text, list or mapping.
func (c *cursor) begin(b byte, inFlow bool, size int) {
	next := byte(' ')
	if c.i+1 < len(c.line) {
		next = c.line[c.i+1]
	}
	switch {
	case b == '"' || b == '\'':
		c.quote, c.opened = b, c.at(c.i, c.i+1)
		c.i++
	case b == '[' || b == '{':
		c.push(b)
	case b == '-' && next == ' ' && !inFlow && !c.key:
		if c.dashes++; c.dashes > deepest {
			c.tooDeep("dashes")
		}
		c.parent = c.i
		c.i++
	case b == '?' && next == ' ':
		c.complain(c.at(c.i, c.i+1), "long-key", "a key is one word before a colon", nil, diag.Remedy{Say: "Take the question mark out."})
		c.fatal = true
	case (b == '|' || b == '>') && !inFlow:
		c.blockText(b)
	case b == '%' || b == '@' || b == '`' || b == '|' || b == '>':
		c.sign(b)
	case b == '&' || b == '*' || b == '!':
		c.anchor(c.i, c.i+c.wordLength())
	default:
		c.scalar, c.start = c.i, false
		c.i += size
	}
}

// push opens a bracket.
func (c *cursor) push(b byte) {
	c.endPlain(c.i)
	c.flow = append(c.flow, bracket{sign: b, line: c.n, col: c.i})
	c.start, c.closed = true, 0
	if len(c.flow) > deepest {
		c.tooDeep("brackets")
	}
	c.i++
}

func (c *cursor) tooDeep(what string) {
	c.complain(c.at(c.i, c.i+1), "too-deep", fmt.Sprintf("%d %s stand inside each other", deepest+1, what), []string{"No study needs that many."}, diag.Remedy{Say: "Take the " + what + " out."})
	c.fatal = true
}

// wordLength is how far the word at the cursor goes.
func (c *cursor) wordLength() int {
	rest := c.line[c.i:]
	cut := " \t"
	if len(c.flow) > 0 {
		cut += ",]}"
	}
	if i := strings.IndexAny(rest, cut); i >= 0 {
		return i
	}
	return len(rest)
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
		remedies = append(remedies, diag.Remedy{Say: "If it is a text, write", Write: c.entry(quoteText(word))})
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
	c.complain(c.at(c.i, c.i+len(value)), "reserved-sign", fmt.Sprintf("a text that begins with %c must be quoted", b), nil, diag.Remedy{Write: c.entry(write)})
	c.overwrite(c.n, c.i, c.i+1, '_')
	c.scalar, c.start = c.i, false
	c.i++
}

var blockHeader = regexp.MustCompile(`^[|>][-+1-9]{0,2}\s*(#.*)?$`)

// blockText begins a text over several lines, or names a stray | or >.
func (c *cursor) blockText(b byte) {
	if !blockHeader.MatchString(c.line[c.i:]) {
		c.sign(b)
		return
	}
	c.block = c.parent
	c.i = len(c.line)
}

var keyWithoutBlank = regexp.MustCompile(`^([A-Za-z_]+):[^\s/]`)

// endPlain ends the plain text that was being read, if any.
func (c *cursor) endPlain(to int) {
	if c.scalar < 0 {
		return
	}
	text := c.line[c.scalar:to]
	m := keyWithoutBlank.FindStringSubmatch(text)
	if m != nil && len(c.flow) == 0 && !c.key && c.known[m[1]] {
		colon := c.scalar + len(m[1])
		c.complain(c.at(c.scalar, colon+1), "no-blank-after-colon", "a blank is missing after the colon", nil,
			diag.Remedy{Write: m[1] + ": " + strings.TrimSpace(text[len(m[1])+1:])})
		l := c.mended[c.n-1]
		c.mended[c.n-1] = l[:colon+1] + " " + l[colon+1:]
		c.shifted[c.n] = colon + 1
	}
	c.scalar = -1
}
