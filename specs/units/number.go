package units

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
)

// ParseNumber reads a number as people write it: 5, -0.3, .5, 1e-9, 1E-9. A
// decimal comma, grouped thousands, infinities, NaN and other bases are
// errors that say what to write.
func ParseNumber(text string) (float64, error) {
	s := strings.TrimSpace(text)
	if n := numberLength(s); s != "" && n == len(s) {
		return inRange(text, s)
	}
	e := &SyntaxError{Text: text, End: len(text)}
	plain := strings.NewReplacer("−", "-", "–", "-", "\u00a0", "", "\u202f", "").Replace(s)
	lower := strings.ToLower(s)
	switch {
	case s == "":
		e.Problem = "a number is missing"
	case plain != s && numberLength(plain) == len(plain):
		e.Problem, e.Write = fmt.Sprintf("%q is not a number: it holds a sign that only looks right", s), plain
	case isDecimalComma(s):
		e.Problem, e.Write = notNumber(s), strings.Replace(s, ",", ".", 1)
	case isGrouped(s):
		e.Problem, e.Write = notNumber(s), strings.NewReplacer(",", "", "_", "", " ", "", "'",
			"").Replace(s)
	case strings.Contains(lower, "nan"), strings.Contains(lower, "inf"):
		e.Problem = fmt.Sprintf("%q is not a measurement", s)
	case timesTen(s) != "":
		e.Problem, e.Write = notNumber(s), timesTen(s)
	default:
		e.Problem = notNumber(s)
	}
	return 0, e
}

func notNumber(s string) string { return fmt.Sprintf("%q is not a number", s) }

// inRange refuses what overflows, and what would silently become zero.
func inRange(text, s string) (float64, error) {
	v, _ := strconv.ParseFloat(s, 64)
	switch {
	case math.IsInf(v, 0):
		return 0, &SyntaxError{Text: text, End: len(text), Problem: fmt.Sprintf("%q is too large",
			s)}
	case math.Abs(v) < 1e-300 && strings.ContainsAny(mantissa(s), "123456789"):
		return 0, &SyntaxError{Text: text, End: len(text), Problem: fmt.Sprintf("%q is too small",
			s), Write: "0"}
	}
	return v, nil
}

func mantissa(s string) string {
	if i := strings.IndexAny(s, "eE"); i >= 0 {
		return s[:i]
	}
	return s
}

// numberLength is how many bytes at the start of a text are a number; 0 for none.
func numberLength(s string) int {
	i := 0
	if i < len(s) && (s[i] == '-' || s[i] == '+') {
		i++
	}
	whole := digits(s[i:])
	i += whole
	part := 0
	if i < len(s) && s[i] == '.' {
		part = digits(s[i+1:])
		if whole+part > 0 {
			i += 1 + part
		}
	}
	if whole+part == 0 {
		return 0
	}
	if i < len(s) && (s[i] == 'e' || s[i] == 'E') {
		j := i + 1
		if j < len(s) && (s[j] == '-' || s[j] == '+') {
			j++
		}
		if n := digits(s[j:]); n > 0 {
			i = j + n
		}
	}
	return i
}

func digits(s string) int {
	i := 0
	for i < len(s) && s[i] >= '0' && s[i] <= '9' {
		i++
	}
	return i
}

// isDecimalComma reports 0,83 and 1,5e-3; one comma, no point.
func isDecimalComma(s string) bool {
	if strings.Count(s, ",") != 1 || strings.Contains(s, ".") {
		return false
	}
	p := strings.Replace(s, ",", ".", 1)
	return numberLength(p) == len(p)
}

var grouped = regexp.MustCompile(`^[+-]?\d{1,3}([,_ ']\d{3})+(\.\d+)?$`)

// isGrouped reports 1,234,567 and 1_000 and 12 000.
func isGrouped(s string) bool { return grouped.MatchString(s) }

// timesTen reads 5*10^-3, 5x10-3 and 10^-3 as what they mean.
func timesTen(s string) string {
	s = strings.NewReplacer("×", "*", "x", "*", "·", "*", " ", "", "−", "-").Replace(s)
	m, e, ok := strings.Cut(s, "10^")
	if !ok {
		if m, e, ok = strings.Cut(s, "*10"); !ok {
			return ""
		}
	}
	if m = strings.TrimSuffix(m, "*"); m == "" {
		m = "1"
	}
	if p := m + "e" + e; numberLength(p) == len(p) {
		return p
	}
	return ""
}
