package saturation

import "testing"

// Places follow the uncertainty: two figures where it begins with 1, else one
// (JCGM 100:2008, 7.2.6: two digits usually suffice), the value at least two.
func TestPlacesOfAnInterval(t *testing.T) {
	for _, c := range []struct {
		v, low, high         float64
		value, lower, higher string
	}{
		{5.4412, 5.38, 5.5, "5.44", "5.38", "5.50"},
		{0.0794, 0.0193, 0.1402, "0.079", "0.019", "0.140"},
		{1503, 1010, 2490, "1500", "1000", "2500"},
		{8212, 3040, 22100, "8200", "3000", "22100"},
		{1.2e7, 1.1e7, 1.3e7, "1.20e+07", "1.10e+07", "1.30e+07"},
		{-0.359, -0.37, -0.349, "-0.359", "-0.370", "-0.349"},
		{3.8, -0.016, 7.7, "3.8", "-0.016", "7.7"},
		{1120, 1e-7, 9e12, "1100", "1.0e-07", "9.0e+12"},
	} {
		got := [3]string{toInterval(c.v, c.low, c.high), intervalEnd(c.low, c.v, c.low, c.high), intervalEnd(c.high, c.v, c.low, c.high)}
		if want := [3]string{c.value, c.lower, c.higher}; got != want {
			t.Errorf("%v (%v to %v): %v, want %v", c.v, c.low, c.high, got, want)
		}
	}
}

func TestListsAndNumbersInWords(t *testing.T) {
	for n, want := range map[int]string{0: "no", 1: "one", 12: "twelve", 13: "13"} {
		if got := countWord(n); got != want {
			t.Errorf("%d is %q", n, got)
		}
	}
	for _, c := range []struct {
		names []string
		want  string
	}{{nil, ""}, {[]string{"a"}, "a"}, {[]string{"a", "b"}, "a and b"}, {[]string{"a", "b", "c"}, "a, b and c"}} {
		if got := list(c.names); got != c.want {
			t.Errorf("%v: %q", c.names, got)
		}
	}
	for v, want := range map[float64]string{0.0123: "0.012", 150: "150", 123456: "1.2e+05", 0: "0"} {
		if got := figures(v, 2); got != want {
			t.Errorf("%v: %q", v, got)
		}
	}
}
