package figure

import (
	"math"
	"slices"
	"strconv"
	"strings"
)

// Ligand is the logarithmic axis that figures of one study share.
type Ligand struct {
	Title     Label     // "oxygen pressure / torr"
	Low, High float64   // ends, > 0
	Tested    []float64 // every concentration used, in order; 0 for none added
}

// tested is the range of the concentrations used, zero aside; false without any.
func (l Ligand) tested() (from, to float64, ok bool) {
	for _, x := range l.Tested {
		if x > 0 {
			if !ok {
				from, ok = x, true
			}
			to = x
		}
	}
	return from, to, ok
}

// hasZero says whether something was measured without ligand.
func (l Ligand) hasZero() bool { return len(l.Tested) > 0 && l.Tested[0] <= 0 }

// logAxis lays a Ligand over a stretch of the drawing. Without ligand there is
// no place on it: that stands apart, at its left.
type logAxis struct {
	low, high float64 // decadic logarithms
	x0, x1    float64
	zero      float64 // place of "no ligand"; NaN where nothing was measured there
}

// zeroRoom is the stretch that "no ligand" takes.
const zeroRoom = 26

func newLogAxis(l Ligand, x0, x1 float64) logAxis {
	a := logAxis{low: math.Log10(l.Low), high: math.Log10(l.High), x0: x0, x1: x1, zero: math.NaN()}
	if !(a.high > a.low) {
		a.low, a.high = a.low-0.5, a.low+0.5
	}
	if l.hasZero() {
		a.zero = x0 + zeroRoom*0.35
		a.x0 += zeroRoom
	}
	return a
}

// at is the place of a concentration.
func (a logAxis) at(x float64) float64 {
	if x <= 0 {
		return a.zero
	}
	return a.x0 + (math.Log10(x)-a.low)/(a.high-a.low)*(a.x1-a.x0)
}

// inside says whether a concentration lies on the axis.
func (a logAxis) inside(x float64) bool {
	at := a.at(x)
	return at >= a.left()-0.01 && at <= a.x1+0.01
}

// left is where the field begins, the room for "no ligand" included.
func (a logAxis) left() float64 {
	if math.IsNaN(a.zero) {
		return a.x0
	}
	return a.x0 - zeroRoom
}

// numbers are the concentrations that get a number: 1, 2, 5 of each decade
// where there is room, else 1 and 3, else decades, else every few decades.
func (a logAxis) numbers(size float64) []float64 {
	for _, within := range [][]float64{{1, 2, 5}, {1, 3}, {1}} {
		if all := a.every(1, within); a.fit(all, size) {
			return all
		}
	}
	for step := 2; step < 400; step++ {
		if all := a.every(step, []float64{1}); a.fit(all, size) {
			return all
		}
	}
	return nil
}

// every lists multiples of every step-th decade on the axis.
func (a logAxis) every(step int, within []float64) []float64 {
	var all []float64
	for e := int(math.Floor(a.low)) - 1; e <= int(math.Ceil(a.high)); e++ {
		if e%step != 0 {
			continue
		}
		for _, m := range within {
			// Parsing the decimal form gives 0.3, where 3 × 10⁻¹ would not.
			v, err := strconv.ParseFloat(strconv.FormatFloat(m, 'f', 0, 64)+"e"+strconv.Itoa(e), 64)
			if l := math.Log10(v); err == nil && l >= a.low-1e-9 && l <= a.high+1e-9 {
				all = append(all, v)
			}
		}
	}
	return all
}

// fit says whether numbers stand clear of one another.
func (a logAxis) fit(all []float64, size float64) bool {
	end := math.Inf(-1)
	if finite(a.zero) { // the 0 of no ligand
		end = a.zero + Words(Sans, "0").Width(size)/2
	}
	for _, v := range all {
		w := concentration(v).Width(size) / 2
		if a.at(v)-w < end+0.7*size {
			return false
		}
		end = a.at(v) + w
	}
	return true
}

// concentration writes 0.5, 20, or a power of ten.
func concentration(v float64) Label {
	e := int(math.Floor(math.Log10(v) + 1e-9))
	if e >= -3 && e <= 4 {
		return Words(Sans, strconv.FormatFloat(v, 'f', -1, 64))
	}
	l := Label{}
	if m := strconv.FormatFloat(v/math.Pow(10, float64(e)), 'g', 3, 64); m != "1" {
		l = append(l, Run{Text: m + "\u2009·\u2009", Face: Sans})
	}
	return append(l, Run{Text: "10", Face: Sans}, Run{Text: minus(strconv.Itoa(e)), Face: Sans, Rise: Super})
}

// minus writes the sign of a negative number as a minus.
func minus(s string) string { return strings.ReplaceAll(s, "-", "\u2212") }

// linear is a linear axis over a stretch of the drawing, low at y0.
type linear struct{ low, high, y0, y1 float64 }

func (a linear) at(y float64) float64 { return a.y0 + (y-a.low)/(a.high-a.low)*(a.y1-a.y0) }

// held is at, kept inside the stretch.
func (a linear) held(y float64) float64 { return a.at(min(max(y, a.low), a.high)) }

// ticks are round numbers on a linear axis, about so many.
func ticks(low, high float64, about int) []float64 {
	if !(high > low) || !finite(low) || !finite(high) {
		return nil
	}
	raw := (high - low) / float64(about)
	e := math.Floor(math.Log10(raw))
	step := 0.0
	for _, m := range []float64{1, 2, 2.5, 5, 10} {
		if step = m * math.Pow(10, e); step >= raw*0.999 {
			break
		}
	}
	var all []float64
	for i := math.Ceil(low/step - 1e-9); i*step <= high+1e-9*step; i++ {
		all = append(all, round(i*step, step))
	}
	return all
}

// round takes off what binary fractions leave behind a step's last place.
func round(v, step float64) float64 {
	places := max(0, 2-int(math.Floor(math.Log10(step))))
	r, err := strconv.ParseFloat(strconv.FormatFloat(v, 'f', min(places, 30), 64), 64)
	if err != nil {
		return v
	}
	return r
}

// tickLabels writes numbers of a linear axis with the same places; shares of 1
// as briefly as they can be.
func tickLabels(all []float64) []Label {
	if slices.Equal(all, quarters) {
		return []Label{Words(Sans, "0"), Words(Sans, "0.25"), Words(Sans, "0.5"), Words(Sans, "0.75"), Words(Sans, "1")}
	}
	places := 0
	large := false
	for _, v := range all {
		s := strconv.FormatFloat(v, 'f', -1, 64)
		if _, frac, ok := strings.Cut(s, "."); ok {
			places = max(places, len(frac))
		}
		large = large || math.Abs(v) >= 1e6
	}
	out := make([]Label, len(all))
	for i, v := range all {
		s := strconv.FormatFloat(v, 'f', places, 64)
		if large || places > 5 {
			s = strconv.FormatFloat(v, 'g', 3, 64)
		}
		if v == 0 {
			s = "0"
		}
		out[i] = Words(Sans, minus(s))
	}
	return out
}

// quarters are the numbers of an axis of shares.
var quarters = []float64{0, 0.25, 0.5, 0.75, 1}

// widest label at a size.
func widest(all []Label, size float64) float64 {
	w := 0.0
	for _, l := range all {
		w = max(w, l.Width(size))
	}
	return w
}

// spread moves places apart, in order, so that neighbours keep a gap and
// everything stays between low and high as far as it can.
func spread(at []float64, gap, low, high float64) []float64 {
	order := make([]int, len(at))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case at[a] < at[b]:
			return -1
		case at[a] > at[b]:
			return 1
		}
		return 0
	})
	out := slices.Clone(at)
	for range 50 {
		moved := false
		for k := 1; k < len(order); k++ {
			a, b := order[k-1], order[k]
			if d := gap - (out[b] - out[a]); d > 1e-6 {
				out[a], out[b], moved = out[a]-d/2, out[b]+d/2, true
			}
		}
		for _, i := range order {
			out[i] = min(max(out[i], low), high)
		}
		if !moved {
			break
		}
	}
	return out
}
