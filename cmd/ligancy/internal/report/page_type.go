package report

import (
	"html"
	"html/template"
	"strings"
	"unicode"
)

// typesetter turns the plain writing of quantities into that of the trade:
// "n_H" becomes an italic n with the upright index H.
type typesetter struct {
	b       strings.Builder
	symbols map[string]bool // single letters that are quantities in running text
	formula bool            // every single letter is a quantity
}

// prose typesets running text; symbols are the single letters that are
// constants of this result.
func prose(s string, symbols map[string]bool) template.HTML { return typed(printable(s), symbols) }

// typed is prose of a text that is printable already.
func typed(s string, symbols map[string]bool) template.HTML {
	t := &typesetter{symbols: symbols}
	t.text([]rune(s))
	return template.HTML(t.b.String())
}

// quantityHTML typesets a text that begins with a symbol.
func quantityHTML(s string) template.HTML {
	symbol, _, _ := strings.Cut(s, " ")
	symbol = strings.TrimSuffix(symbol, ",")
	return typed(s, map[string]bool{symbol: len([]rune(symbol)) == 1})
}

// formulaHTML typesets an equation.
func formulaHTML(s string) template.HTML {
	t := &typesetter{formula: true}
	t.text([]rune(s))
	return template.HTML(t.b.String())
}

// operators stand upright in equations.
var operators = map[string]bool{"ln": true, "log": true, "exp": true, "Var": true, "Cov": true, "over": true, "all": true,
	"of": true, "ways": true, "the": true, "first": true, "and": true}

// indexed quantities that are written without an underscore.
var indexed = map[string]string{"p50": "<i>p</i><sub>50</sub>", "EC50": "EC<sub>50</sub>", "Bmax": "<i>B</i><sub>max</sub>", "Kd": "<i>K</i><sub>d</sub>"}

// macron over the letter before it: a mean.
const macron = '\u0304'

// raised and lowered signs of plain text and what they stand for.
const (
	superSigns = "⁰¹²³⁴⁵⁶⁷⁸⁹⁺⁻ⁿⁱʰ"
	superPlain = "0123456789+−nih"
	subSigns   = "₀₁₂₃₄₅₆₇₈₉ₙᵢ"
	subPlain   = "0123456789ni"
)

// text typesets letters from left to right.
func (t *typesetter) text(r []rune) {
	for i := 0; i < len(r); {
		switch {
		case unicode.IsDigit(r[i]):
			t.number(r, &i)
		case t.run(r, &i, superSigns, superPlain, "sup"), t.run(r, &i, subSigns, subPlain, "sub"):
		case r[i] == '^' && i > 0 && i+1 < len(r) && (t.formula || strings.ContainsRune("(-0123456789", r[i+1])):
			i++
			t.raise(r, &i)
		case unicode.IsLetter(r[i]):
			t.word(r, &i)
		case r[i] == '-' && i+1 < len(r) && unicode.IsDigit(r[i+1]) && (i == 0 || strings.ContainsRune(" (", r[i-1])):
			t.b.WriteString("−")
			i++
		default:
			t.b.WriteString(html.EscapeString(string(r[i])))
			i++
		}
	}
}

// number typesets a number, an exponent as the power of ten that it is.
func (t *typesetter) number(r []rune, i *int) {
	from := *i
	for *i < len(r) && (unicode.IsDigit(r[*i]) || r[*i] == '.' && *i+1 < len(r) && unicode.IsDigit(r[*i+1])) {
		*i++
	}
	t.b.WriteString(string(r[from:*i]))
	e := *i
	if e+1 >= len(r) || r[e] != 'e' {
		return
	}
	to := e + 1
	if r[to] == '-' || r[to] == '−' {
		to++
	}
	digits := to
	for to < len(r) && unicode.IsDigit(r[to]) {
		to++
	}
	if to == digits || to < len(r) && unicode.IsLetter(r[to]) {
		return
	}
	t.b.WriteString("\u2009·\u200910<sup>" + strings.ReplaceAll(string(r[e+1:to]), "-", "−") + "</sup>")
	*i = to
}

// run typesets signs that are raised or lowered in plain text.
func (t *typesetter) run(r []rune, i *int, signs, plain, tag string) bool {
	from, as := []rune(signs), []rune(plain)
	start := *i
	for *i < len(r) {
		k := -1
		for j, s := range from {
			if s == r[*i] {
				k = j
			}
		}
		if k < 0 {
			break
		}
		if *i == start {
			t.b.WriteString("<" + tag + ">")
		}
		if unicode.IsLetter(as[k]) {
			t.b.WriteString("<i>" + string(as[k]) + "</i>")
		} else {
			t.b.WriteRune(as[k])
		}
		*i++
	}
	if *i > start {
		t.b.WriteString("</" + tag + ">")
	}
	return *i > start
}

// raise typesets an exponent: a bracket with all that is in it, or one word.
func (t *typesetter) raise(r []rune, i *int) {
	from, to := *i, *i
	if from < len(r) && r[from] == '(' {
		from++
		for to < len(r) && r[to] != ')' {
			to++
		}
		*i = min(to+1, len(r))
	} else {
		if to < len(r) && strings.ContainsRune("-−", r[to]) {
			to++
		}
		for to < len(r) && (unicode.IsLetter(r[to]) || unicode.IsDigit(r[to]) || r[to] == '_' ||
			r[to] == '.' && to+1 < len(r) && unicode.IsDigit(r[to+1])) {
			to++
		}
		*i = to
	}
	exponent := []rune(strings.ReplaceAll(string(r[from:to]), "-", "−"))
	t.b.WriteString("<sup>")
	t.text(exponent)
	t.b.WriteString("</sup>")
}

// word typesets a word, with its index if it has one.
func (t *typesetter) word(r []rune, i *int) {
	from := *i
	for *i < len(r) && (unicode.IsLetter(r[*i]) && !strings.ContainsRune(superSigns+subSigns, r[*i]) || unicode.IsDigit(r[*i])) {
		if *i > from && *i+1 < len(r) && r[*i+1] == macron { // a barred letter is a word of its own
			break
		}
		*i++
		if *i < len(r) && r[*i] == macron {
			*i++
			break
		}
	}
	name := string(r[from:*i])
	index := ""
	if *i+1 < len(r) && r[*i] == '_' && (unicode.IsLetter(r[*i+1]) || unicode.IsDigit(r[*i+1]) || r[*i+1] == '{') {
		index = t.index(r, i)
	}
	letters := len([]rune(strings.TrimSuffix(name, "\u0304")))
	if base, ok := strings.CutSuffix(name, "\u0304"); ok {
		t.b.WriteString(`<i class="bar">` + html.EscapeString(base) + "</i>")
		if index != "" {
			t.b.WriteString("<sub>" + html.EscapeString(index) + "</sub>")
		}
		return
	}
	if w, ok := indexed[name]; ok && index == "" && !t.formula {
		t.b.WriteString(w)
		return
	}
	switch {
	case index != "" && letters <= 3:
		t.b.WriteString("<i>" + html.EscapeString(name) + "</i><sub>" + html.EscapeString(index) + "</sub>")
	case index != "":
		t.b.WriteString(html.EscapeString(name + "_" + index))
	case len(name) > 2 && strings.HasPrefix(name, "Kd") && strings.Trim(name[2:], "0123456789") == "":
		t.b.WriteString("<i>K</i><sub>" + name[1:] + "</sub>")
	case t.formula && operators[name]:
		t.b.WriteString(html.EscapeString(name))
	case t.symbols[name], t.formula && letters <= 3 && strings.Trim(name, "0123456789") != "":
		t.b.WriteString("<i>" + html.EscapeString(name) + "</i>")
	default:
		t.b.WriteString(html.EscapeString(name))
	}
}

// index reads what follows an underscore.
func (t *typesetter) index(r []rune, i *int) string {
	*i++
	if r[*i] == '{' {
		from := *i + 1
		for *i < len(r) && r[*i] != '}' {
			*i++
		}
		s := string(r[from:*i])
		*i = min(*i+1, len(r))
		return s
	}
	from := *i
	for *i < len(r) && (unicode.IsLetter(r[*i]) || unicode.IsDigit(r[*i]) ||
		r[*i] == '.' && *i+1 < len(r) && unicode.IsDigit(r[*i+1])) && !strings.ContainsRune(superSigns, r[*i]) {
		*i++
	}
	return string(r[from:*i])
}
