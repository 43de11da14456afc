package saturation

import (
	"math"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

var (
	inQuotes = regexp.MustCompile(`“[^”]*”`)
	// Symbols of the trade that end in a figure ("Kd3·Kd4", "beta3").
	symbols = regexp.MustCompile(`(?:\b(?:Kd|beta)\d+·?)+`)
	digits  = regexp.MustCompile(`-?\d+(?:\.\d+)?(?:e[+-]?\d+)?`)
)

// checkNumbers holds that every number of a verdict stands in a row of the
// outcome: the number, its hundredfold where a share is written in per cent, or
// the factor √(high/low) within which a row holds it, to the places that the text
// gives.
func checkNumbers(t *testing.T, out *Outcome) {
	t.Helper()
	known := numbersOf(out)
	text := symbols.ReplaceAllString(inQuotes.ReplaceAllString(out.Verdict.Text, ""), "")
	for _, label := range labelsOf(out) {
		text = strings.ReplaceAll(text, label, "")
	}
	for _, s := range digits.FindAllString(text, -1) {
		v, err := strconv.ParseFloat(s, 64)
		if err != nil {
			t.Fatal(err)
		}
		if !stands(v, lastPlace(s), known) {
			t.Errorf("%s stands in no row:\n%s", s, out.Verdict.Text)
		}
	}
}

// stands says whether a number is one of those known, to half a unit of its
// last place.
func stands(v, unit float64, known []float64) bool {
	for _, k := range known {
		for _, w := range []float64{k, 100 * k} {
			if math.Abs(v-w) <= 0.5001*unit {
				return true
			}
		}
	}
	return false
}

// lastPlace is one unit of the last figure of a number as written; of the last
// two figures that are not zero, for whole numbers that end in zeros.
func lastPlace(s string) float64 {
	mantissa, exp, _ := strings.Cut(s, "e")
	e, _ := strconv.Atoi(exp)
	if _, places, ok := strings.Cut(mantissa, "."); ok {
		return math.Pow(10, float64(e-len(places)))
	}
	zeros := len(mantissa) - len(strings.TrimRight(mantissa, "0"))
	if mantissa == "0" {
		zeros = 0
	}
	return math.Pow(10, float64(e+zeros))
}

// numbersOf gathers every number of the rows, and 1: what n_H is held against.
func numbersOf(out *Outcome) []float64 {
	known := []float64{1}
	add := func(list ...Real) {
		for _, v := range list {
			if !math.IsNaN(float64(v)) {
				known = append(known, float64(v))
			}
		}
	}
	for _, m := range out.Mechanisms {
		add(Real(m.Sites), Real(m.Constants), Real(m.Points), m.Scatter, m.AICcBehind, m.AICcWeight, m.LackOfFitP)
	}
	for _, q := range out.Quantities {
		add(q.Value, q.Low, q.High, q.Level)
		if q.Low > 0 {
			add(Real(math.Sqrt(float64(q.High / q.Low))))
		}
	}
	for _, f := range out.Factors {
		add(f.Share, f.P, f.Behind)
		for _, k := range f.Kd {
			add(k.Value, k.Low, k.High)
		}
	}
	for _, p := range out.Preparations {
		add(p.XHalf, p.NH, Real(p.N))
	}
	for _, e := range out.Explanations {
		add(e.Value, e.Low, e.High, e.AICcBehind)
	}
	return known
}

// labelsOf are the curves' labels and the names of combinations, which may hold
// figures of their own, and the words of edges, which a row of the mechanisms holds whole.
func labelsOf(out *Outcome) []string {
	var labels []string
	for _, q := range out.Quantities {
		if q.Curve != "all" {
			labels = append(labels, q.Curve)
		}
		if q.Of == "combination" {
			labels = append(labels, q.Name)
		}
	}
	for _, m := range out.Mechanisms {
		for _, s := range []*string{m.Edge, m.Why} {
			if s != nil {
				labels = append(labels, *s)
			}
		}
	}
	return labels
}
