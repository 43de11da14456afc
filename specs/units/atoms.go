package units

// atom is a unit symbol that a prefix may stand before.
type atom struct {
	mantissa float64
	exponent int
	dim      dimension
	prefixed bool // takes prefixes: mM, kPa
	zero     float64
}

// atoms are the symbols of the trade and their UCUM codes.
var atoms = map[string]atom{
	"1":        {mantissa: 1},
	"fraction": {mantissa: 1},
	"percent":  {mantissa: 1, exponent: -2},
	"%":        {mantissa: 1, exponent: -2},
	"ppm":      {mantissa: 1, exponent: -6},
	"[ppm]":    {mantissa: 1, exponent: -6},
	"ppb":      {mantissa: 1, exponent: -9},
	"[ppb]":    {mantissa: 1, exponent: -9},

	"mol": {mantissa: 1, dim: dimension{amount: 1}, prefixed: true},
	"M":   {mantissa: 1, exponent: 3, dim: dimension{length: -3, amount: 1}, prefixed: true},
	"m":   {mantissa: 1, dim: dimension{length: 1}, prefixed: true},
	"L":   {mantissa: 1, exponent: -3, dim: dimension{length: 3}, prefixed: true},
	"l":   {mantissa: 1, exponent: -3, dim: dimension{length: 3}, prefixed: true},
	"g":   {mantissa: 1, dim: dimension{mass: 1}, prefixed: true},
	"Da":  {mantissa: 1.66053906892, exponent: -24, dim: dimension{mass: 1}, prefixed: true},
	// CODATA 2022

	"s":   {mantissa: 1, dim: dimension{time: 1}, prefixed: true},
	"min": {mantissa: 60, dim: dimension{time: 1}},
	"h":   {mantissa: 3600, dim: dimension{time: 1}},
	"d":   {mantissa: 86400, dim: dimension{time: 1}},
	"Hz":  {mantissa: 1, dim: dimension{time: -1}, prefixed: true},
	"Bq":  {mantissa: 1, dim: dimension{time: -1}, prefixed: true},
	"Ci":  {mantissa: 3.7, exponent: 10, dim: dimension{time: -1}, prefixed: true},

	"kat": {mantissa: 1, dim: dimension{time: -1, amount: 1}, prefixed: true},
	"U":   {mantissa: 1.0 / 60, exponent: -6, dim: dimension{time: -1, amount: 1}, prefixed: true},

	"Pa": {mantissa: 1, exponent: 3, dim: dimension{length: -1, mass: 1, time: -2},
		prefixed: true},
	"bar": {mantissa: 1, exponent: 8, dim: dimension{length: -1, mass: 1, time: -2},
		prefixed: true},
	"atm": {mantissa: 101325, exponent: 3, dim: dimension{length: -1, mass: 1, time: -2}},
	"torr": {mantissa: 101325.0 / 760, exponent: 3, dim: dimension{length: -1, mass: 1, time: -2},
		prefixed: true},
	"Torr": {mantissa: 101325.0 / 760, exponent: 3, dim: dimension{length: -1, mass: 1, time: -2},
		prefixed: true},
	"mmHg":   {mantissa: 133.322387415, exponent: 3, dim: dimension{length: -1, mass: 1, time: -2}},
	"mm[Hg]": {mantissa: 133.322387415, exponent: 3, dim: dimension{length: -1, mass: 1, time: -2}},

	"K":    {mantissa: 1, dim: dimension{temperature: 1}},
	"degC": {mantissa: 1, dim: dimension{temperature: 1}, zero: 273.15},
	"°C":   {mantissa: 1, dim: dimension{temperature: 1}, zero: 273.15},
	"Cel":  {mantissa: 1, dim: dimension{temperature: 1}, zero: 273.15},

	"J": {mantissa: 1, exponent: 3, dim: dimension{length: 2, mass: 1, time: -2},
		prefixed: true},
	"cal": {mantissa: 4.184, exponent: 3, dim: dimension{length: 2, mass: 1, time: -2},
		prefixed: true},
	"cells": {mantissa: 1},
}

// prefixes are those of the SI that the trade writes, with u and both micro signs for 10⁻⁶.
var prefixes = map[string]int{
	"a": -18, "f": -15, "p": -12, "n": -9, "u": -6, "µ": -6, "μ": -6, "m": -3, "c": -2, "d": -1,
	"h": 2, "k": 3, "G": 9, "T": 12,
}

// slips are writings that are no unit, with what their authors mean.
var slips = map[string]string{
	"molar": "M", "mol/dm3": "mol/L", "mmolar": "mM", "umolar": "uM", "µmolar": "uM",
	"nmolar": "nM", "pmolar": "pM",
	"millimolar": "mM", "micromolar": "uM", "nanomolar": "nM", "picomolar": "pM",
	"femtomolar": "fM",
	"mcM":        "uM", "mM/L": "mM", "uM/L": "uM", "nM/L": "nM", "MM": "mM", "mm": "mM",
	"um": "uM",
	"µm": "uM", "nm": "nM", "pm": "pM",
	"mm Hg": "mmHg", "mmhg": "mmHg", "mmHG": "mmHg", "MMHG": "mmHg", "TORR": "torr", "kpa": "kPa",
	"KPa": "kPa", "KPA": "kPa",
	"kilopascal": "kPa", "pascal": "Pa", "pa": "Pa", "Bar": "bar", "ATM": "atm", "Atm": "atm",
	"psi": "kPa",
	"C":   "degC", "c": "degC", "celsius": "degC", "Celsius": "degC", "deg C": "degC",
	"degrees": "degC", "ºC": "degC", "℃": "degC",
	"kelvin": "K", "Kelvin": "K", "deg K": "K", "°K": "K", "F": "degC", "°F": "degC",
	"sec": "s", "secs": "s", "second": "s", "seconds": "s", "S": "s", "msec": "ms",
	"mins": "min", "minute": "min", "minutes": "min", "MIN": "min", "hr": "h", "hrs": "h",
	"hour": "h", "hours": "h", "H": "h",
	"day": "d", "days": "d", "pct": "percent", "Percent": "percent", "per cent": "percent",
	"frac": "fraction", "Fraction": "fraction",
	"unit": "1", "none": "1", "dimensionless": "1", "-": "1", "PPM": "ppm", "katal": "kat",
	"IU": "U",
}
