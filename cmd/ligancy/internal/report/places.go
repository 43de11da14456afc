package report

import (
	"math"
	"strconv"
	"strings"

	"ligancy/fit/saturation"
)

// most digits that print, whatever an interval would allow.
const most = 6

// figures writes a value and the ends of its interval with the places that the
// interval allows.
//
// The last place shown is set by half the width of the interval, rounded to
// one significant digit, or to two where that leaves a 1 or a 2 in front (GUM,
// JCGM 100:2008, 7.2.6: one or two digits of the uncertainty, and the value to
// the same place). A number that is held by a factor (a constant, a position, a
// ratio), within more than 1.5 from end to end, has no common place that serves
// both ends: each then carries two significant digits of its own. An end that
// is not finite is missing, "": the others then carry two digits. With neither
// end, the value carries three.
func figures(value, low, high float64, held precision) (v, lo, hi string) {
	hasLow, hasHigh := finite(low), finite(high)
	switch {
	case hasLow && hasHigh && high > low && !(held.byFactor && spansFactor(low, high)):
		place := max(lastPlace((high-low)/2, max(math.Abs(low), math.Abs(high))), held.finest)
		sci := scientific(max(math.Abs(value), math.Abs(low), math.Abs(high)), place)
		return atPlace(value, place, sci), atPlace(low, place, sci), atPlace(high, place, sci)
	case hasLow || hasHigh:
		return significant(value, 2), significant(low, 2), significant(high, 2)
	default:
		return significant(value, 3), "", ""
	}
}

// precision says how a number is held.
type precision struct {
	byFactor bool // by a factor, not within plus or minus
	finest   int  // finest place worth showing, as a power of ten
}

// rowFigures writes a row's value and ends. Slopes show a thousandth at most.
func rowFigures(q *saturation.QuantityRow) (v, lo, hi string) {
	held := precision{finest: -300}
	switch q.Of {
	case "constant", "combination":
		held.byFactor = true
	case "position":
		held.byFactor = q.Unit != "1"
	case "contrast":
		held.byFactor = strings.Contains(q.Curve, " / ")
	case "hill":
		held.finest = -3
	}
	return figures(float64(q.Value), float64(q.Low), float64(q.High), held)
}

// spansFactor says whether two ends of one sign lie more than a factor of 1.5 apart.
func spansFactor(low, high float64) bool {
	return low > 0 && high > 1.5*low || high < 0 && low < 1.5*high
}

// lastPlace is the power of ten of the last digit shown for half-width u beside
// numbers of the given size.
func lastPlace(u, size float64) int {
	two := strconv.FormatFloat(u, 'e', 1, 64) // "2.4e-02"
	place := exponent(two)
	if two[0] == '1' || two[0] == '2' {
		place--
	}
	if size > 0 {
		place = max(place, exponent(strconv.FormatFloat(size, 'e', most-1, 64))-most+1)
	}
	return place
}

// exponent of a number in scientific form.
func exponent(form string) int {
	_, e, _ := strings.Cut(form, "e")
	n, err := strconv.Atoi(e)
	if err != nil {
		panic("report: not in scientific form: " + form)
	}
	return n
}

// scientific says whether numbers up to size read better with an exponent:
// where plain digits would have to show zeros that are not known, or many
// leading zeros.
func scientific(size float64, place int) bool {
	return size >= 1000 && place > 1 || size >= 1e5 && place > 0 || size >= 1e6 || size > 0 && size < 1e-3
}

// atPlace rounds x to 10^place.
func atPlace(x float64, place int, sci bool) string {
	if !finite(x) {
		return ""
	}
	scale := math.Pow(10, float64(place))
	rounded := x
	if q := x / scale; finite(q) && scale > 0 {
		rounded = math.RoundToEven(q) * scale
	}
	switch {
	case rounded == 0:
		return strconv.FormatFloat(0, 'f', max(0, -place), 64)
	case sci:
		e := exponent(strconv.FormatFloat(rounded, 'e', most, 64))
		return shortExponent(strconv.FormatFloat(x, 'e', max(0, e-place), 64))
	case place > 0:
		return strconv.FormatFloat(rounded, 'f', 0, 64)
	default:
		return strconv.FormatFloat(x, 'f', -place, 64)
	}
}

// significant writes x with so many significant digits.
func significant(x float64, digits int) string {
	if !finite(x) {
		return ""
	}
	if x == 0 {
		return "0"
	}
	place := exponent(strconv.FormatFloat(x, 'e', digits-1, 64)) - digits + 1
	return atPlace(x, place, scientific(math.Abs(x), place))
}

// shortExponent turns 1.5e+03 into 1.5e3.
func shortExponent(form string) string {
	mantissa, e, found := strings.Cut(form, "e")
	if !found {
		return form
	}
	n, err := strconv.Atoi(e)
	if err != nil {
		return form
	}
	return mantissa + "e" + strconv.Itoa(n)
}

// factor writes how firmly a positive number is held: √(high/low), the factor
// by which an interval that is symmetrical in the logarithm goes either way.
// Close to 1 what matters is the distance from 1: one digit of that is shown.
func factor(low, high float64) string {
	f := math.Exp((math.Log(high) - math.Log(low)) / 2)
	switch {
	case f >= 1.2:
		return significant(f, 2)
	case f >= 1.01:
		return strconv.FormatFloat(f, 'f', 2, 64)
	case f-1 < 1e-6:
		return "1.000001"
	}
	e := exponent(strconv.FormatFloat(f-1, 'e', 0, 64))
	return strconv.FormatFloat(f, 'f', -e, 64)
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
