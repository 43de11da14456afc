package units

import (
	"fmt"
	"strconv"
	"strings"
)

// Quantity is a number with its unit.
type Quantity struct {
	Value float64
	Unit  Unit
	Bare  bool // no unit was written
}

// String writes the number as briefly as it can be written, then the unit.
func (q Quantity) String() string {
	s := strconv.FormatFloat(q.Value, 'g', -1, 64)
	if q.Bare {
		return s
	}
	return s + " " + q.Unit.String()
}

// In is the number in another unit.
func (q Quantity) In(u Unit) (float64, error) { return Convert(q.Value, q.Unit, u) }

// ParseQuantity reads "5 mM", "0.30 mg/mL", "15 degC", "1e7 1/(M s)", and a
// bare number.
func ParseQuantity(text string) (Quantity, error) {
	s := strings.TrimSpace(text)
	start := strings.Index(text, s)
	n := numberLength(s)
	number, unit := s[:n], strings.TrimSpace(s[n:])
	if n == 0 || strings.HasPrefix(s[n:], ",") || strings.HasPrefix(s[n:], "_") ||
		strings.HasPrefix(s[n:], "*10") {
		number, unit = cutNumber(s)
	}
	v, err := ParseNumber(number)
	if err != nil {
		e := err.(*SyntaxError)
		if number == "" {
			e.Problem = fmt.Sprintf("%q does not begin with a number", s)
			e.End = len(s)
		}
		if e.Write != "" && unit != "" {
			e.Write += " " + unit
		}
		e.Text, e.Start, e.End = text, start, start+max(e.End, 0)
		return Quantity{}, e
	}
	if unit == "" {
		return Quantity{Value: v, Bare: true}, nil
	}
	u, err := Parse(unit)
	if err != nil {
		e := err.(*SyntaxError)
		shift := start + len(s) - len(unit)
		e.Text, e.Start, e.End = text, e.Start+shift, e.End+shift
		if e.Write != "" {
			e.Write = number + " " + e.Write
		}
		return Quantity{}, e
	}
	if u.IsLogarithm() {
		return Quantity{}, &SyntaxError{Text: text, Start: start, End: start + len(s),
			Problem: "a quantity is written on a linear axis", Write: ""}
	}
	return Quantity{Value: v, Unit: u}, nil
}

// cutNumber parts a miswritten number from what follows: "1,5 mM".
func cutNumber(s string) (number, unit string) {
	i := strings.IndexFunc(s, func(r rune) bool { return !strings.ContainsRune("+-−–0123456789.,_'*×^eE", r) })
	if i < 0 {
		return s, ""
	}
	return s[:i], strings.TrimSpace(s[i:])
}
