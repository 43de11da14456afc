// Package units reads, converts and prints the units in which saturation data
// are written: UCUM codes and the trade's own writing.
//
// A unit is a number times a product of powers of five bases:
//
//	u = mantissa · 10^exponent · m^a g^b s^c mol^d K^e
//
// Powers of ten are kept apart, so that going from µM to mM divides by 1000
// exactly. Two units convert into each other when a to e agree: a partial
// pressure (g m⁻¹ s⁻²) never becomes a concentration (mol m⁻³), nor mg/mL one.
//
// Sources: UCUM (Unified Code for Units of Measure) for codes and prefixes;
// ISO 80000-4 for the torr, 101325/760 Pa; the conventional millimetre of
// mercury, 133.322387415 Pa; IUBMB for the enzyme unit, 1 µmol/min.
package units

import (
	"fmt"
	"math"
	"strings"
)

// dimension counts the powers of metre, gram, second, mole and kelvin.
type dimension [5]int8

const (
	length = iota
	mass
	time
	amount
	temperature
)

// scaleKind is the axis on which numbers of a unit are written.
type scaleKind uint8

const (
	linear scaleKind = iota
	decadic
	minusDecadic
)

// Unit is a unit of measurement. The zero Unit is the plain number, 1.
type Unit struct {
	written  string
	mantissa float64 // 0 stands for 1
	exponent int
	zero     float64 // of the scale, in the coherent unit: 273.15 for degC
	dim      dimension
	scale    scaleKind
	label    bool
}

// Label is a unit of the author's own, "optical density": it is printed as
// written and converts into nothing but itself.
func Label(written string) Unit { return Unit{written: strings.TrimSpace(written), label: true} }

// String is the unit as it was written, with one kind of micro sign.
func (u Unit) String() string {
	if u.written == "" {
		return "1"
	}
	return strings.ReplaceAll(u.written, "μ", "µ")
}

// IsLabel reports whether the unit is a label of the author's own.
func (u Unit) IsLabel() bool { return u.label }

// IsLogarithm reports whether numbers are decadic logarithms: log10 M.
func (u Unit) IsLogarithm() bool { return u.scale != linear }

// IsNumber reports whether the unit has no dimension: 1, fraction, percent, ppm.
func (u Unit) IsNumber() bool { return !u.label && u.dim == dimension{} }

// IsPercent reports whether numbers count hundredths.
func (u Unit) IsPercent() bool { return u.IsNumber() && u.factor() == 1 && u.exponent == -2 }

// IsConcentration reports amount of substance per volume: M, umol/L.
func (u Unit) IsConcentration() bool {
	return !u.label && u.dim == dimension{length: -3,
		amount: 1}
}

// IsPressure reports torr, kPa and their like.
func (u Unit) IsPressure() bool {
	return !u.label && u.dim == dimension{length: -1, mass: 1, time: -2}
}

// IsTime reports s, min, h and their like.
func (u Unit) IsTime() bool { return !u.label && u.dim == dimension{time: 1} }

// IsTemperature reports degC and K.
func (u Unit) IsTemperature() bool { return !u.label && u.dim == dimension{temperature: 1} }

// Linear is the unit without its logarithm: M for log10 M.
func (u Unit) Linear() Unit {
	if u.scale == linear {
		return u
	}
	v := u
	v.scale = linear
	_, v.written = cutLogarithm(u.written)
	return v
}

func (u Unit) factor() float64 {
	if u.mantissa == 0 {
		return 1
	}
	return u.mantissa
}

// Same reports whether two units are of one kind, so that numbers convert.
func (u Unit) Same(v Unit) bool {
	if u.label || v.label {
		return u.label == v.label && u.String() == v.String()
	}
	return u.dim == v.dim
}

// kinds names the dimensions that the trade meets.
var kinds = map[dimension]string{
	{}:                                "a plain number",
	{length: -3, amount: 1}:           "a concentration",
	{length: -3, mass: 1}:             "a mass per volume",
	{length: -1, mass: 1, time: -2}:   "a pressure",
	{time: 1}:                         "a time",
	{time: -1}:                        "a rate constant of first order",
	{length: 3, time: -1, amount: -1}: "a rate constant of second order",
	{length: 3, amount: -1}:           "a volume per amount",
	{amount: 1}:                       "an amount of substance",
	{mass: 1}:                         "a mass",
	{length: 1}:                       "a length",
	{length: 3}:                       "a volume",
	{temperature: 1}:                  "a temperature",
	{amount: 1, mass: -1}:             "an amount per mass",
	{time: -1, amount: 1}:             "a catalytic activity",
	{time: -1, amount: 1, mass: -1}:   "a catalytic activity per mass",
	{length: -3, time: -1, amount: 1}: "a concentration per time",
	{length: 2, mass: 1, time: -2}:    "an energy",
	{length: 2, mass: 1, time: -2, amount: -1}: "an energy per amount",
	{length: -3}:          "a number per volume",
	{mass: 1, amount: -1}: "a molar mass",
}

// Kind says in words what the unit measures: "a concentration".
func (u Unit) Kind() string {
	kind, ok := kinds[u.dim]
	switch {
	case u.label:
		return "a label"
	case !ok:
		kind = "something else"
	}
	if u.scale != linear {
		return "a logarithm of " + kind
	}
	return kind
}

// Factor is the number of `to` units in one `from` unit. Neither may be a
// logarithm, nor a scale with a zero of its own (degC).
func Factor(from, to Unit) (float64, error) {
	if from.scale != linear || to.scale != linear || from.zero != to.zero {
		return 0, fmt.Errorf("%s and %s are not in proportion", from, to)
	}
	return Convert(1, from, to)
}

// Convert turns a number in one unit into the same quantity in another.
func Convert(v float64, from, to Unit) (float64, error) {
	if !from.Same(to) {
		return 0, fmt.Errorf("%s is %s, %s is %s", from, from.Kind(), to, to.Kind())
	}
	if from.sameScale(to) {
		return v, nil
	}
	v = undoLogarithm(v, from.scale)
	v = shift(v, from, to)
	switch to.scale {
	case decadic:
		v = math.Log10(v)
	case minusDecadic:
		v = -math.Log10(v)
	}
	return v, nil
}

// sameScale reports whether numbers mean the same in both units.
func (u Unit) sameScale(v Unit) bool {
	return u.scale == v.scale && u.factor() == v.factor() && u.exponent == v.exponent &&
		u.zero == v.zero
}

// shift converts between linear units of one dimension.
func shift(v float64, from, to Unit) float64 {
	if from.zero != 0 || to.zero != 0 {
		return (v*from.factor()*math.Pow10(from.exponent) + from.zero - to.zero) / (to.factor() * math.Pow10(to.exponent))
	}
	if from.factor() != to.factor() {
		v *= from.factor() / to.factor()
	}
	if e := from.exponent - to.exponent; e < 0 {
		return v / math.Pow10(-e)
	} else {
		return v * math.Pow10(e)
	}
}

func undoLogarithm(v float64, s scaleKind) float64 {
	switch s {
	case decadic:
		return math.Pow(10, v)
	case minusDecadic:
		return math.Pow(10, -v)
	}
	return v
}

// Multiply is the product of two units, written with a point.
func Multiply(u, v Unit) Unit { return combine(u, v, 1, u.String()+"."+v.String()) }

// Divide is the quotient of two units, written with a stroke.
func Divide(u, v Unit) Unit {
	by := v.String()
	if strings.ContainsAny(by, "/. *·") {
		by = "(" + by + ")"
	}
	return combine(u, v, -1, u.String()+"/"+by)
}

// combine multiplies u by v to a power.
func combine(u, v Unit, power int, written string) Unit {
	w := Unit{written: written, mantissa: u.factor() * math.Pow(v.factor(), float64(power)),
		exponent: u.exponent + power*v.exponent, label: u.label || v.label}
	for i := range w.dim {
		w.dim[i] = u.dim[i] + int8(power)*v.dim[i]
	}
	return w
}
