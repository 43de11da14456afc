package units

import (
	"fmt"
	"math"
	"strings"
	"unicode"
	"unicode/utf8"

	"ligancy/specs/diag"
)

// SyntaxError is a unit, a number or a quantity that cannot be read.
type SyntaxError struct {
	Text       string // all of it
	Start, End int    // bytes of Text that the complaint is about
	Problem    string // one sentence without a full stop
	Write      string // what to write for all of Text; may be empty
}

func (e *SyntaxError) Error() string { return e.Problem }

const (
	maxWritten = 80 // bytes of a unit
	maxPower   = 9
)

// Parse reads a unit: mM, umol/L, 1/(M s), nkat/mg, degC, log10 M.
//
// Factors are set off by a point, a blank, * or ·; what follows a stroke is
// divided by, one factor or a pair of brackets; powers are written s-1, s^-1 or s⁻¹.
func Parse(written string) (Unit, error) {
	s := strings.TrimSpace(written)
	switch {
	case s == "":
		return Unit{}, &SyntaxError{Text: written, Problem: "the unit is empty", Write: "1"}
	case len(s) > maxWritten:
		return Unit{}, &SyntaxError{Text: written, End: len(written),
			Problem: "no unit is as long as this"}
	case !utf8.ValidString(s):
		return Unit{}, &SyntaxError{Text: written, End: len(written),
			Problem: "the unit holds bytes that are not UTF-8"}
	}
	scale, rest := cutLogarithm(s)
	p := parser{text: rest}
	u, err := p.all()
	if err != nil {
		return Unit{}, atWhole(err, written, rest)
	}
	u.written, u.scale = s, scale
	if scale != linear && u.zero != 0 {
		return Unit{}, &SyntaxError{Text: written, End: len(written),
			Problem: "a temperature has no logarithm here"}
	}
	return u, nil
}

// MustParse is Parse for units that the program itself writes.
func MustParse(written string) Unit {
	u, err := Parse(written)
	if err != nil {
		panic("units: " + err.Error())
	}
	return u
}

// cutLogarithm parts "log10 M" into its scale and "M".
func cutLogarithm(s string) (scaleKind, string) {
	scale, rest := decadic, s
	if strings.HasPrefix(s, "-") {
		scale, rest = minusDecadic, strings.TrimSpace(s[1:])
	}
	for _, word := range []string{"log10", "lg"} {
		after, ok := strings.CutPrefix(rest, word)
		if !ok || after == "" || !strings.ContainsAny(after[:1], " (") {
			continue
		}
		after = strings.TrimSpace(after)
		if strings.HasPrefix(after, "(") && strings.HasSuffix(after, ")") && strings.Count(after,
			"(") == 1 {
			after = strings.TrimSpace(after[1 : len(after)-1])
		}
		return scale, after
	}
	return linear, s
}

// atWhole moves an error about a part to the whole of what was written.
func atWhole(err *SyntaxError, written, part string) *SyntaxError {
	if part == written {
		return err
	}
	shift := max(strings.Index(written, part), 0)
	err.Text, err.Start, err.End = written, err.Start+shift, err.End+shift
	if err.Write != "" {
		err.Write = written[:shift] + err.Write + written[min(shift+len(part), len(written)):]
	}
	return err
}

// parser reads a product of powers of symbols.
type parser struct {
	text string
	at   int
	deep int
}

func (p *parser) fail(start, end int, write, format string, args ...any) *SyntaxError {
	return &SyntaxError{Text: p.text, Start: start, End: end, Problem: fmt.Sprintf(format, args...),
		Write: write}
}

// all reads the whole text.
func (p *parser) all() (Unit, *SyntaxError) {
	if meant, ok := slips[p.text]; ok {
		if _, known := atoms[p.text]; !known && !isPrefixed(p.text) {
			return Unit{}, p.fail(0, len(p.text), meant, "there is no unit %q", p.text)
		}
	}
	u, err := p.product()
	if err != nil {
		return u, err
	}
	if p.at < len(p.text) {
		return u, p.fail(p.at, len(p.text), "", "%q does not belong in a unit", p.text[p.at:])
	}
	return u, nil
}

// product reads factors and quotients up to the end or a closing bracket.
func (p *parser) product() (Unit, *SyntaxError) {
	var u Unit
	first, power := true, 1
	for {
		p.blanks()
		if p.at >= len(p.text) || p.text[p.at] == ')' {
			if first || power < 0 {
				return u, p.fail(p.at, p.at, "", "the unit %q ends too early", p.text)
			}
			return u, nil
		}
		if first && p.text[p.at] == '/' { // UCUM: /s
			p.at, first, power = p.at+1, false, -1
			continue
		}
		f, err := p.factor()
		if err != nil {
			return u, err
		}
		if u, err = p.join(u, f, power, first); err != nil {
			return u, err
		}
		first = false
		power = p.operator()
	}
}

// join multiplies what was read so far by one more factor.
func (p *parser) join(u, f Unit, power int, first bool) (Unit, *SyntaxError) {
	p.blanks()
	if alone := first && p.at >= len(p.text) && p.deep == 0; f.zero != 0 && !alone {
		f.zero = 0 // a difference of temperatures: J/degC
	}
	if first && power == 1 {
		return f, nil
	}
	w := combine(u, f, power, "")
	for _, d := range w.dim {
		if d > maxPower || d < -maxPower {
			return w, p.fail(0, len(p.text), "", "the powers in %q are too high", p.text)
		}
	}
	if e := w.exponent; e > 200 || e < -200 || math.Abs(math.Log10(w.mantissa)) > 90 {
		return w, p.fail(0, len(p.text), "", "the powers in %q are too high", p.text)
	}
	return w, nil
}

// operator reads what stands between two factors: −1 after a stroke, else 1.
func (p *parser) operator() int {
	p.blanks()
	for _, op := range []struct {
		sign  string
		power int
	}{{"/", -1}, {".", 1}, {"*", 1}, {"·", 1}, {"×", 1}, {"⋅", 1}} {
		if strings.HasPrefix(p.text[p.at:], op.sign) {
			p.at += len(op.sign)
			return op.power
		}
	}
	return 1
}

// factor reads a bracket or a symbol, with its power.
func (p *parser) factor() (Unit, *SyntaxError) {
	var u Unit
	if p.text[p.at] == '(' {
		open := p.at
		if p.deep++; p.deep > 4 {
			return u, p.fail(open, open+1, "", "the unit has too many brackets")
		}
		p.at++
		var err *SyntaxError
		if u, err = p.product(); err != nil {
			return u, err
		}
		if p.at >= len(p.text) {
			return u, p.fail(open, open+1, p.text+")", "the bracket in %q is not closed", p.text)
		}
		p.at++
		p.deep--
	} else {
		var err *SyntaxError
		if u, err = p.symbol(); err != nil {
			return u, err
		}
	}
	return p.power(u)
}

// power reads s-1, s^-1, s⁻¹ or nothing.
func (p *parser) power(u Unit) (Unit, *SyntaxError) {
	start := p.at
	sign, n, digits := 1, 0, 0
	rest := strings.TrimPrefix(p.text[p.at:], "^")
	p.at = len(p.text) - len(rest)
	for _, r := range rest {
		d := strings.IndexRune("0123456789", r)
		if d < 0 {
			d = superscript(r)
		}
		switch {
		case digits == 0 && sign == 1 && (r == '-' || r == '⁻' || r == '+' || r == '⁺'):
			if r == '-' || r == '⁻' {
				sign = -1
			}
		case d >= 0 && digits < 2:
			n, digits = 10*n+d, digits+1
		default:
			d = -2
		}
		if d == -2 {
			break
		}
		p.at += utf8.RuneLen(r)
	}
	if digits == 0 {
		if p.at > start {
			return u, p.fail(start, len(p.text), "", "a power is missing in %q", p.text)
		}
		return u, nil
	}
	if n == 0 || n > maxPower {
		return u, p.fail(start, p.at, "", "the power %d in %q makes no unit", sign*n, p.text)
	}
	one := Unit{}
	return combine(one, u, sign*n, ""), nil
}

func superscript(r rune) int {
	for i, s := range []rune("⁰¹²³⁴⁵⁶⁷⁸⁹") {
		if r == s {
			return i
		}
	}
	return -1
}

// symbol reads one symbol with its prefix, and passes over a UCUM {remark}.
func (p *parser) symbol() (Unit, *SyntaxError) {
	start := p.at
	if p.text[p.at] == '1' {
		p.at++
		return Unit{}, nil
	}
	for p.at < len(p.text) {
		r, size := utf8.DecodeRuneInString(p.text[p.at:])
		if !unicode.IsLetter(r) && !strings.ContainsRune("%[]°µ℃", r) {
			break
		}
		p.at += size
	}
	word := p.text[start:p.at]
	if after, ok := strings.CutPrefix(p.text[p.at:], "{"); ok {
		i := strings.Index(after, "}")
		if i < 0 {
			return Unit{}, p.fail(p.at, len(p.text), p.text+"}", "the remark in %q is not closed",
				p.text)
		}
		p.at += i + 2
		if word == "" {
			return Unit{}, nil
		}
	}
	if u, ok := lookUp(word); ok {
		return u, nil
	}
	if word == "" {
		return Unit{}, p.fail(start, min(start+1, len(p.text)), "", "%q does not belong in a unit",
			p.text[start:])
	}
	return Unit{}, p.unknown(start, word)
}

// unknown complains of a symbol, with what its author may have meant.
func (p *parser) unknown(start int, word string) *SyntaxError {
	meant, ok := slips[word]
	if !ok {
		meant = diag.Nearest(word, common)
	}
	write := ""
	if meant != "" {
		write = p.text[:start] + meant + p.text[start+len(word):]
		if _, err := Parse(write); err != nil {
			write = ""
		}
	}
	return p.fail(start, start+len(word), write, "there is no unit %q", word)
}

// common are the units that a mistaken word is compared with.
var common = []string{
	"M", "mM", "uM", "nM", "pM", "fM", "mol/L", "umol/L", "torr", "mmHg", "kPa", "Pa", "atm", "bar",
	"ppm",
	"mg/mL", "ng/mL", "ug/mL", "mg", "mL", "ug", "nkat", "kat", "U", "fmol", "pmol", "nmol", "umol",
	"mol",
	"percent", "fraction", "ms", "s", "min", "h", "degC", "Cel", "K",
}

// lookUp finds a symbol, with or without a prefix.
func lookUp(word string) (Unit, bool) {
	if a, ok := atoms[word]; ok {
		return a.unit(0), true
	}
	_, size := utf8.DecodeRuneInString(word)
	e, ok := prefixes[word[:size]]
	if !ok {
		return Unit{}, false
	}
	a, ok := atoms[word[size:]]
	if !ok || !a.prefixed || e > 0 && a.dim == (dimension{length: -3, amount: 1}) {
		return Unit{}, false
	}
	return a.unit(e), true
}

func isPrefixed(word string) bool {
	if word == "" {
		return false
	}
	_, ok := lookUp(word)
	return ok
}

func (a atom) unit(prefix int) Unit {
	return Unit{mantissa: a.mantissa, exponent: a.exponent + prefix, dim: a.dim, zero: a.zero}
}

func (p *parser) blanks() {
	for p.at < len(p.text) && (p.text[p.at] == ' ' || p.text[p.at] == '\t') {
		p.at++
	}
}
