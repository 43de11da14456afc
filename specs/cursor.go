package specs

import (
	"fmt"
	"regexp"
	"strings"
	"unicode/utf8"

	"ligancy/specs/diag"
)

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
	case r == 0x85, r == 0xa0, r >= 0x2000 && r <= 0x200b, r == 0x2028, r == 0x2029, r == 0x202f,
		r == 0x205f, r == 0x3000, r == 0xfeff:
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
	c.complain(c.at(c.i, to), "tab", "a tab; YAML is indented and set apart with blanks", nil,
		diag.Remedy{Say: "Write blanks instead."})
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
	c.complain(c.at(c.i, c.i+size), "odd-blank", name, nil,
		diag.Remedy{Say: "Write a plain blank instead."})
	c.overwrite(c.n, c.i, c.i+size, ' ')
	c.i += size
}

// remark meets a # that begins a remark.
func (c *cursor) remark() {
	c.endPlain(c.i)
	rest := c.line[c.i:]
	if strings.TrimSpace(c.line[:c.i]) == "" || len(rest) == 1 || isBlank(rest[1]) ||
		rest[1] == '#' {
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
	return next == "" || isBlank(next[0]) || inFlow && strings.IndexByte(",[]{}", next[0]) >= 0 ||
		inFlow && c.closed == c.i && c.closed > 0
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
		c.complain(c.at(c.i, c.i+1), "wrong-bracket",
			fmt.Sprintf("%c closes here, but %c was opened in line %d, column %d", b, open.sign,
				open.line, open.col+1), nil, diag.Remedy{Write: closing[open.sign]})
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
		c.complain(c.at(c.i, c.i+1), "long-key", "a key is one word before a colon", nil,
			diag.Remedy{Say: "Take the question mark out."})
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
