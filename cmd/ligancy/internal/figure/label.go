package figure

import (
	"regexp"
	"strings"
	"unicode"
)

// Label is a text made of runs in several faces.
type Label []Run

// Run is a piece of text in one face.
type Run struct {
	Text string
	Face Face
	Rise Rise
}

// Rise says where a run stands against the baseline.
type Rise int8

const (
	Sub   Rise = -1 // index
	Level Rise = 0
	Super Rise = 1 // exponent
)

const (
	small  = 0.72 // size of an index or exponent against its line
	subBy  = 0.22 // how far an index goes down, in sizes of the line
	supBy  = 0.36 // how far an exponent goes up
	ascent = 0.76 // of capitals and figures, in sizes
)

// Words is a text in one face.
func Words(f Face, s string) Label {
	if s == "" {
		return nil
	}
	return Label{{Text: s, Face: f}}
}

// And puts labels behind one another.
func (l Label) And(more ...Label) Label {
	out := append(Label{}, l...)
	for _, m := range more {
		out = append(out, m...)
	}
	return out
}

// Symbol sets a quantity as the trade prints it: the symbol in italics, what
// follows an underscore as an upright index ("n_H", "K_R", "x_half"), the
// d and its number of "Kd1" too, and anything behind it as plain words.
func Symbol(name string) Label {
	head, rest := name, ""
	if i := strings.IndexAny(name, " ,("); i >= 0 {
		head, rest = name[:i], name[i:]
	}
	var l Label
	base, index, found := strings.Cut(head, "_")
	switch {
	case found:
		index = strings.ReplaceAll(index, "_", " ")
	case head == "Bmax":
		base, index = "B", "max"
	case isKd(head):
		base, index = "K", head[1:]
	case isNumbered(head):
		base, index = head[:1], head[1:]
	}
	if len([]rune(base)) > 3 { // a word, not a symbol
		l = Words(Serif, head)
	} else {
		l = Words(SerifItalic, base)
		if index != "" {
			l = append(l, Run{Text: index, Face: Serif, Rise: Sub})
		}
	}
	return l.And(Prose(Serif, rest))
}

// Prose sets words in a face, with quantities among them as the trade prints
// them: "concerted, K_R differs", "1.5e3 torr".
func Prose(f Face, s string) Label {
	var l Label
	rest := s
	for _, m := range quantities.FindAllStringSubmatchIndex(s, -1) {
		part := func(k int) string {
			if m[2*k] < 0 {
				return ""
			}
			return s[m[2*k]:m[2*k+1]]
		}
		l = append(l, Words(f, s[len(s)-len(rest):m[0]])...)
		rest = s[m[1]:]
		if base := part(1); base != "" {
			l = append(l, Run{Text: base, Face: SerifItalic}, Run{Text: part(2), Face: f, Rise: Sub})
			continue
		}
		if power := part(5) + part(6); power != "" {
			l = append(l, Run{Text: minus(power), Face: f, Rise: Super})
			continue
		}
		l = append(l, Run{Text: part(3) + "\u2009·\u200910", Face: f}, Run{Text: minus(part(4)), Face: f, Rise: Super})
	}
	return append(l, Words(f, rest)...)
}

// quantities in running text: a symbol of at most three letters with an index,
// a number with an exponent, or a power.
var quantities = regexp.MustCompile(`\b([A-Za-zα-ωΔ]{1,3})_([A-Za-z0-9]+(?:\.[0-9]+)?)\b|\b([0-9]+(?:\.[0-9]+)?)e(-?[0-9]+)\b|\^\(([^)]*)\)|\^(-?[0-9.]+)`)

func isKd(s string) bool { return strings.HasPrefix(s, "Kd") && onlyDigits(s[2:]) }

func isNumbered(s string) bool {
	return len(s) > 1 && unicode.IsLetter(rune(s[0])) && onlyDigits(s[1:])
}

func onlyDigits(s string) bool { return strings.Trim(s, "0123456789") == "" }

// Width of the label at a size.
func (l Label) Width(size float64) float64 {
	w := 0.0
	for _, r := range l {
		s := size
		if r.Rise != Level {
			s *= small
		}
		w += r.Face.Width(r.Text, s)
	}
	return w
}

// Plain is the label without its typefaces.
func (l Label) Plain() string {
	var b strings.Builder
	for _, r := range l {
		switch r.Rise {
		case Sub:
			b.WriteByte('_')
		case Super:
			b.WriteByte('^')
		}
		b.WriteString(r.Text)
	}
	return b.String()
}

// Cut shortens a label to a width, with an ellipsis.
func (l Label) Cut(size, width float64) Label {
	if l.Width(size) <= width {
		return l
	}
	var out Label
	for _, r := range l {
		s := size
		if r.Rise != Level {
			s *= small
		}
		dots := r.Face.Width("…", s)
		if w := r.Face.Width(r.Text, s); w+dots <= width {
			out, width = append(out, r), width-w
			continue
		}
		kept := ""
		for _, c := range r.Text {
			if r.Face.Width(kept+string(c), s)+dots > width {
				break
			}
			kept += string(c)
		}
		r.Text = closeIsolates(strings.TrimRight(kept, " ")) + "…"
		return append(out, r)
	}
	return out
}

// closeIsolates ends direction isolates that a cut left open.
func closeIsolates(s string) string {
	open := strings.Count(s, "\u2068") - strings.Count(s, "\u2069")
	return s + strings.Repeat("\u2069", max(0, open))
}
