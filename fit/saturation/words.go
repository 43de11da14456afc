package saturation

import (
	"math"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// figures writes a value with a fixed number of significant figures, as a
// co-author would: no exponent between 0.001 and 100,000.
func figures(v float64, digits int) string {
	if v == 0 || math.IsNaN(v) || math.IsInf(v, 0) {
		return strconv.FormatFloat(v, 'g', -1, 64)
	}
	e := math.Floor(math.Log10(math.Abs(v)))
	if e < -3 || e >= 5 {
		return strconv.FormatFloat(v, 'e', digits-1, 64)
	}
	return strconv.FormatFloat(v, 'f', max(0, digits-1-int(e)), 64)
}

// toInterval writes a value with the places that its interval allows: its
// uncertainty is given two figures when it begins with 1, else one (JCGM 100),
// but the value at least two.
func toInterval(v, low, high float64) string {
	e, ok := lastFigure(v, low, high)
	if !ok {
		return figures(v, 3)
	}
	return atFigure(v, e)
}

// intervalEnd writes an end of the interval of v with the places of v, or more
// where it would have less than two figures.
func intervalEnd(end, v, low, high float64) string {
	e, ok := lastFigure(v, low, high)
	if !ok {
		return figures(end, 3)
	}
	if end != 0 {
		two := int(math.Floor(math.Log10(math.Abs(end)))) - 1
		if e = min(e, two); math.Abs(end) > 1000*math.Abs(v) {
			e = two
		}
	}
	return atFigure(end, e)
}

// lastFigure is the power of ten of the last figure that an interval allows a
// value; false where there is no interval.
func lastFigure(v, low, high float64) (e int, ok bool) {
	half := (high - low) / 2
	if !(half > 0) || math.IsInf(half, 0) || math.IsNaN(v) {
		return 0, false
	}
	e = int(math.Floor(math.Log10(half)))
	if half/math.Pow(10, float64(e)) < 2 {
		e--
	}
	if v != 0 {
		e = min(e, int(math.Floor(math.Log10(math.Abs(v))))-1)
	}
	return e, true
}

// atFigure writes a value to the figure of 10^e.
func atFigure(v float64, e int) string {
	exp := e + 1
	if v != 0 {
		exp = int(math.Floor(math.Log10(math.Abs(v))))
	}
	if exp >= 6 || exp < -4 || exp >= 5 && e > 0 {
		return strconv.FormatFloat(v, 'e', min(max(0, exp-e), 6), 64)
	}
	if e > 0 {
		step := math.Pow(10, float64(e))
		return strconv.FormatFloat(math.Round(v/step)*step, 'f', 0, 64)
	}
	return strconv.FormatFloat(v, 'f', -e, 64)
}

// list joins names as prose: "a", "a and b", "a, b and c".
func list(names []string) string {
	switch n := len(names); n {
	case 0:
		return ""
	case 1:
		return names[0]
	default:
		return strings.Join(names[:n-1], ", ") + " and " + names[n-1]
	}
}

// countWord writes small numbers as words.
func countWord(n int) string {
	words := []string{"no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven", "twelve"}
	if n >= 0 && n < len(words) {
		return words[n]
	}
	return strconv.Itoa(n)
}

// capital begins a sentence.
func capital(s string) string {
	r, n := utf8.DecodeRuneInString(s)
	return string(unicode.ToUpper(r)) + s[n:]
}

// plural of the constants of a mechanism.
func constantsWord(n int) string {
	if n == 1 {
		return "1 constant"
	}
	return strconv.Itoa(n) + " constants"
}
