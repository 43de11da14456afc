package table

import (
	"strings"

	"ligancy/specs/units"
)

// Match says which texts of a column keep a row: any of a list, or numbers
// from Low to High, both included; nil ends are open.
type Match struct {
	Any       []string
	Low, High *float64
}

// Keeps reports whether a cell matches. Numbers match as numbers: 7 keeps 7.0.
func (t *Table) Keeps(m Match, c Cell) bool {
	v, isNumber := t.value(c.Text)
	if m.Low != nil || m.High != nil {
		return isNumber && (m.Low == nil || v >= *m.Low) && (m.High == nil || v <= *m.High)
	}
	for _, s := range m.Any {
		if s == c.Text {
			return true
		}
		if w, err := units.ParseNumber(s); err == nil && isNumber && v == w {
			return true
		}
	}
	return false
}

// value reads a text as a number with the table's decimal sign.
func (t *Table) value(s string) (float64, bool) {
	if t.Decimal == Comma {
		s = strings.Replace(s, ",", ".", 1)
	}
	v, err := units.ParseNumber(s)
	return v, err == nil
}
