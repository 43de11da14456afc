package record

import (
	"math"
	"strconv"

	"ligancy/fit/saturation"
)

// Digits that are kept: enough to compare by, few enough to read in a diff.
const (
	freeDigits     = 6 // significant digits of a number without an interval
	intervalDigits = 3 // digits of half an interval, beside the first
	aiccPlaces     = 3 // decimals of AICc
	mostDigits     = 9 // of any number
)

// zeroContrast is below every difference of Hill coefficients that is not the
// rounding of equal numbers.
const zeroContrast = 1e-12

// rounded is a row's value and ends, all to one place: a thousandth of the first
// digit of half the interval. A number without an interval keeps six significant
// digits; what is not finite is nil.
func rounded(q *saturation.QuantityRow) (value, low, high *float64) {
	v, lo, hi := float64(q.Value), float64(q.Low), float64(q.High)
	if q.Of == "contrast" && math.Abs(v) < zeroContrast {
		v = 0
	}
	u := halfWidth(v, lo, hi)
	if !(u > 0) {
		return significant(v, freeDigits), significant(lo, freeDigits), significant(hi, freeDigits)
	}
	place := int(math.Floor(math.Log10(u))) - intervalDigits
	return toPlace(v, place), toPlace(lo, place), toPlace(hi, place)
}

// halfWidth of an interval; of one with a single end, the way to that end; NaN
// without any.
func halfWidth(v, low, high float64) float64 {
	hasLow, hasHigh := finite(low), finite(high)
	switch {
	case hasLow && hasHigh:
		return (high - low) / 2
	case hasLow && finite(v):
		return v - low
	case hasHigh && finite(v):
		return high - v
	}
	return math.NaN()
}

// toPlace rounds to a power of ten, and to at most nine significant digits; never
// to fewer than four, so that a skewed interval's short end keeps its meaning.
func toPlace(x float64, place int) *float64 {
	if !finite(x) {
		return nil
	}
	if x == 0 {
		return significant(x, 1)
	}
	digits := int(math.Floor(math.Log10(math.Abs(x)))) - place + 1
	return significant(x, min(max(digits, 4), mostDigits))
}

// significant rounds to so many significant digits; nil where not finite.
func significant(x float64, digits int) *float64 {
	return parsed(x, strconv.FormatFloat(x, 'e', digits-1, 64))
}

// places rounds to so many decimals; nil where not finite.
func places(x float64, decimals int) *float64 {
	return parsed(x, strconv.FormatFloat(x, 'f', decimals, 64))
}

func parsed(x float64, text string) *float64 {
	if !finite(x) {
		return nil
	}
	v, err := strconv.ParseFloat(text, 64)
	if err != nil {
		panic("record: a number that cannot be read back")
	}
	v += 0 // a zero without a sign
	return &v
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }

// valueOf is a number that may not exist; NaN where it does not.
func valueOf(p *float64) float64 {
	if p == nil {
		return math.NaN()
	}
	return *p
}
