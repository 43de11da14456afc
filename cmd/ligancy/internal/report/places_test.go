package report

import (
	"math"
	"strconv"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"ligancy/fit/saturation"
)

func TestFigures(t *testing.T) {
	inf, nan := math.Inf(1), math.NaN()
	for _, c := range []struct {
		value, low, high float64
		want             string
	}{
		// GUM (JCGM 100:2008) 7.2.2: m = 100.02147 g with u = 0.35 mg is 100.02147(35);
		// one digit of the uncertainty, as 7.2.6 allows, is 100.0215.
		{100.02147, 100.02112, 100.02182, "100.021 100.021 100.022"}, // no more than six digits print
		{100.02147, 100.0200, 100.0230, "100.021 100.020 100.023"},
		// The ark-clam study's own numbers (invented data).
		{5.441, 5.38, 5.50, "5.44 5.38 5.50"},
		{2.865, 2.812, 2.921, "2.87 2.81 2.92"},
		{0.901, 0.794, 1.009, "0.90 0.79 1.01"},
		{0.0116, 0.0101, 0.0131, "0.0116 0.0101 0.0131"},
		{1540, 1010, 2490, "1.5e3 1.0e3 2.5e3"},
		{9410, 6210, 15100, "9.4e3 6.2e3 1.5e4"},
		{1.6432, 1.6188, 1.6671, "1.643 1.619 1.667"},
		{6.13, 5.79, 6.49, "6.1 5.8 6.5"},
		// Sizes.
		{12345, 11000, 13700, "1.23e4 1.10e4 1.37e4"},
		{850, 790, 920, "850 790 920"},
		{212.683, 197.2, 229.5, "213 197 230"},
		{0.00012, 0.00011, 0.00013, "1.20e-4 1.10e-4 1.30e-4"},
		{0.5, 0.02, 300, "0.50 0.020 300"},
		{2.5e-9, 2.4e-9, 2.6e-9, "2.50e-9 2.40e-9 2.60e-9"},
		// Offsets around zero.
		{0.0004, -0.03, 0.04, "0.00 -0.03 0.04"},
		{-0.362, -0.371, -0.354, "-0.362 -0.371 -0.354"},
		{0, 0, 0.013, "0.000 0.000 0.013"},
		// Ends that do not exist.
		{1234, 800, inf, "1.2e3 800 "},
		{1234, nan, 2000, "1.2e3  2.0e3"},
		{2.6131, nan, nan, "2.61  "},
		{nan, nan, nan, "  "},
		{0.29, 0.29, 0.29, "0.29 0.29 0.29"},
	} {
		v, lo, hi := figures(c.value, c.low, c.high, precision{byFactor: true, finest: -300})
		if got := v + " " + lo + " " + hi; got != c.want {
			t.Errorf("figures(%v, %v, %v) = %q, want %q", c.value, c.low, c.high, got, c.want)
		}
	}
}

// A difference has one place for all: it is not held by a factor.
func TestFiguresOfADifference(t *testing.T) {
	if v, lo, hi := figures(0.079, 0.019, 0.14, precision{finest: -300}); v+" "+lo+" "+hi != "0.08 0.02 0.14" {
		t.Error(v, lo, hi)
	}
}

func TestSlopesShowAThousandthAtMost(t *testing.T) {
	q := &saturation.QuantityRow{Of: "hill", Value: 1, Low: 0.99999, High: 1.00001}
	if v, _, _ := rowFigures(q); v != "1.000" {
		t.Error(v)
	}
}

// Whatever the numbers: what prints lies within one unit of its last place,
// and an interval never shows more than two digits of its half-width.
func TestFiguresKeepTheNumber(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		value := rapid.Float64Range(-12, 12).Draw(t, "log10")
		x := math.Pow(10, value)
		low := x * rapid.Float64Range(0.3, 0.9999).Draw(t, "low")
		high := x * rapid.Float64Range(1.0001, 3).Draw(t, "high")
		v, lo, hi := figures(x, low, high, precision{byFactor: rapid.Bool().Draw(t, "by factor"), finest: -300})
		for i, s := range []string{v, lo, hi} {
			want := []float64{x, low, high}[i]
			got, err := strconv.ParseFloat(s, 64)
			if err != nil {
				t.Fatal(err)
			}
			if math.Abs(got-want) > (high-low)/2 && math.Abs(got-want) > 0.051*math.Abs(want) {
				t.Fatalf("%v prints as %s beside %v to %v", want, s, low, high)
			}
			if digits := strings.Trim(strings.SplitN(s, "e", 2)[0], "-0."); len(digits) > most+1 {
				t.Fatalf("%s shows more than %d digits", s, most)
			}
		}
	})
}

func TestFactor(t *testing.T) {
	for _, c := range []struct {
		low, high float64
		want      string
	}{
		{0.794, 1.009, "1.13"}, {1010, 2490, "1.6"}, {5.79, 6.49, "1.06"}, {1, 1600, "40"}, {1, 1e12, "1.0e6"},
		{1, 1.0064, "1.003"}, {1, 1.0000001, "1.000001"}, {1, 1.002, "1.001"}, {1, 1.0002, "1.0001"},
		{1e-300, 1e300, "1.0e300"},
	} {
		if got := factor(c.low, c.high); got != c.want {
			t.Errorf("factor(%v, %v) = %s, want %s", c.low, c.high, got, c.want)
		}
	}
}

func TestCorrelationKeepsItsDistanceFromOne(t *testing.T) {
	for r, want := range map[float64]string{-0.9962: "-0.996", -0.99993: "-0.9999", 0.957: "0.96", -0.9999999: "-1.000000", 0.999: "0.999"} {
		if got := correlation(r); got != want {
			t.Errorf("correlation(%v) = %s, want %s", r, got, want)
		}
	}
}
