package report

import (
	"math"
	"slices"
	"strconv"
	"strings"
)

// Strokes of the ruler. Beyond the tested points they are broken.
const (
	thick, thickBeyond = '━', '┅'
	thin, thinBeyond   = '─', '┄'
	upright            = '┃'
	tick               = '╵'
	goesOnLeft         = '‹'
	goesOnRight        = '›'
)

// axis is a logarithmic axis over columns of text.
type axis struct {
	low, high float64 // ends, as decadic logarithms
	columns   int
}

// newAxis lays an axis over tested points and the reach of the curves. Curves
// may stretch it by a decade beyond the tested points on each side, not more.
func newAxis(tested, reach []float64, columns int) (axis, bool) {
	low, high := span(tested)
	if low > high {
		low, high = span(reach)
		if low > high {
			return axis{}, false
		}
	}
	from, to := span(reach)
	a := axis{low: low, high: high, columns: columns}
	if from <= to {
		a.low = min(low, max(from, low-1))
		a.high = max(high, min(to, high+1))
	}
	if a.high-a.low < 0.1 {
		a.low, a.high = a.low-0.5, a.high+0.5
	}
	margin := (a.high - a.low) / float64(columns)
	a.low, a.high = a.low-margin, a.high+margin
	return a, true
}

// span is the range of decadic logarithms of the positive, finite values;
// low > high where there are none.
func span(values []float64) (low, high float64) {
	low, high = math.Inf(1), math.Inf(-1)
	for _, v := range values {
		if v > 0 && finite(v) {
			low, high = min(low, math.Log10(v)), max(high, math.Log10(v))
		}
	}
	return low, high
}

// column of a positive value; it may lie outside 0 … columns−1.
func (a axis) column(x float64) int {
	c := (math.Log10(x) - a.low) / (a.high - a.low) * float64(a.columns-1)
	return int(math.Round(max(-1, min(c, float64(a.columns)))))
}

// scale writes the numbers of the axis: 1, 2, 5 of each decade where all of
// them have room, else 1 and 3, else decades, else every few decades.
func (a axis) scale() string {
	for _, within := range [][]float64{{1, 2, 5}, {1, 3}, {1}} {
		if line, ok := a.numbered(within, 1); ok {
			return line
		}
	}
	for every := 2; ; every++ {
		if line, ok := a.numbered([]float64{1}, every); ok {
			return line
		}
	}
}

// numbered sets numbers over the axis; ok is false where two come too close.
func (a axis) numbered(within []float64, every int) (line string, ok bool) {
	runes := []rune(strings.Repeat(" ", a.columns+6))
	free := 0
	for _, v := range a.numbers(within, every) {
		text := axisNumber(v)
		at := max(0, a.column(v)-(width(text)-1)/2)
		if at < free {
			return "", false
		}
		if at < a.columns {
			copy(runes[at:], []rune(text))
			free = at + width(text) + 2
		}
	}
	return strings.TrimRight(string(runes), " "), true
}

// numbers lists the multiples of every so many decades that lie on the axis.
func (a axis) numbers(within []float64, every int) []float64 {
	var all []float64
	for e := int(math.Floor(a.low)); e <= int(math.Ceil(a.high)); e++ {
		if e%every != 0 {
			continue
		}
		for _, m := range within {
			// Parsing the decimal form gives 0.3, where 3 × 10⁻¹ would not.
			v, err := strconv.ParseFloat(strconv.FormatFloat(m, 'f', 0, 64)+"e"+strconv.Itoa(e), 64)
			if l := math.Log10(v); err == nil && l >= a.low && l <= a.high {
				all = append(all, v)
			}
		}
	}
	return all
}

// axisNumber writes 0.5, 20, 1e4, 2e-5.
func axisNumber(v float64) string {
	if v >= 1e4 || v < 1e-3 {
		return shortExponent(strconv.FormatFloat(v, 'e', -1, 64))
	}
	return strconv.FormatFloat(v, 'f', -1, 64)
}

// marks draws one tick at every tested value.
func (a axis) marks(tested []float64) string {
	line := []rune(strings.Repeat(" ", a.columns))
	for _, x := range tested {
		if x > 0 && finite(x) {
			line[min(max(a.column(x), 0), a.columns-1)] = tick
		}
	}
	return strings.TrimRight(string(line), " ")
}

// reach is where a curve lies on the ligand axis: values that do not exist are NaN.
type reach struct {
	x01, x10, half, x90, x99 float64
	from, to                 float64 // tested range of this curve; from > to where nothing was tested
}

// bar draws one curve: thin from 1 to 99 %, thick from 10 to 90 %, an upright
// at half saturation; broken strokes lie beyond the tested points. What goes
// on beyond the axis, or has no end, is drawn to its edge with an arrow.
func (a axis) bar(r reach) string {
	line := []rune(strings.Repeat(" ", a.columns))
	testedFrom, testedTo := 0, a.columns
	if r.from <= r.to {
		testedFrom, testedTo = a.column(r.from), a.column(r.to)
	}
	stroke := func(from, to float64, solid, broken rune) {
		lo, hi := 0, a.columns-1
		if finite(from) && from > 0 {
			lo = a.column(from)
		}
		if finite(to) && to > 0 {
			hi = a.column(to)
		}
		for c := max(lo, 0); c <= min(hi, a.columns-1); c++ {
			line[c] = solid
			if c < testedFrom || c > testedTo {
				line[c] = broken
			}
		}
	}
	stroke(r.x01, r.x99, thin, thinBeyond)
	if finite(r.x10) || finite(r.x90) {
		stroke(r.x10, r.x90, thick, thickBeyond)
	}
	if !(finite(r.x01) && a.column(r.x01) >= 0) {
		line[0] = goesOnLeft
	}
	if !(finite(r.x99) && a.column(r.x99) < a.columns) {
		line[a.columns-1] = goesOnRight
	}
	if finite(r.half) && r.half > 0 {
		if c := a.column(r.half); c >= 0 && c < a.columns {
			line[c] = upright
		}
	}
	return strings.TrimRight(string(line), " ")
}

// distinct values in ascending order.
func distinct(values []float64) []float64 {
	s := slices.Clone(values)
	slices.Sort(s)
	return slices.Compact(s)
}
