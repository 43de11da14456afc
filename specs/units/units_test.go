package units

import (
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"
)

// near compares to 12 digits.
func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if math.Abs(got-want) > tolerance*math.Abs(want) {
		t.Errorf("%s = %.15g, want %.15g", what, got, want)
	}
}

// Conversions with their sources: NIST SP 811 (2008), appendix B, for atm,
// mmHg and bar; ISO 80000-4 for torr; IUBMB for U; CODATA for Da; the rest are
// definitions.
func TestConversions(t *testing.T) {
	for _, c := range []struct {
		from, to string
		want     float64
		digits   float64
	}{
		{"kPa", "torr", 7.500616827, 1e-9}, // 760/101.325
		{"kPa", "torr", 7.50062, 1e-6},     // as usually printed
		{"atm", "Pa", 101325, 0},
		{"atm", "torr", 760, 1e-15},
		{"mmHg", "Pa", 133.322387415, 1e-15},
		{"mm[Hg]", "mmHg", 1, 0},
		{"bar", "kPa", 100, 0},
		{"mbar", "Pa", 100, 0},
		{"M", "mM", 1000, 0},
		{"M", "umol/L", 1e6, 0},
		{"uM", "µM", 1, 0},
		{"µM", "μM", 1, 0},
		{"uM", "nM", 1000, 0},
		{"mol.L-1", "M", 1, 0},
		{"mol L^-1", "M", 1, 0},
		{"mol·L⁻¹", "M", 1, 0},
		{"mmol/m^3", "uM", 1, 0},
		{"U", "nkat", 1000.0 / 60, 1e-15},
		{"U/mg", "nkat/mg", 1000.0 / 60, 1e-15},
		{"mg/mL", "g/L", 1, 0},
		{"ng/mL", "ug/L", 1, 0},
		{"fmol/mg", "pmol/g", 1, 0},
		{"nmol/mg", "mol/kg", 1e-3, 0},
		{"h", "min", 60, 0},
		{"min", "ms", 60000, 0},
		{"percent", "fraction", 0.01, 0},
		{"%", "1", 0.01, 0},
		{"ppm", "percent", 1e-4, 1e-15},
		{"1/(M s)", "1/(uM s)", 1e-6, 0},
		{"1/(M.s)", "L/mol/s", 1, 0},
		{"1/M/s", "1/(M s)", 1, 0},
		{"1/s", "1/min", 60, 1e-15},
		{"kDa", "g", 1.66053906892e-21, 1e-12},
		{"kcal/mol", "kJ/mol", 4.184, 1e-15},
	} {
		got, err := Factor(MustParse(c.from), MustParse(c.to))
		if err != nil {
			t.Errorf("%s to %s: %v", c.from, c.to, err)
			continue
		}
		near(t, c.from+" in "+c.to, got, c.want, c.digits)
	}
}

func TestPowersOfTenAreExact(t *testing.T) {
	for _, c := range []struct {
		v        float64
		from, to string
		want     float64
	}{
		{5, "uM", "mM", 0.005}, {0.3, "mM", "uM", 300}, {1.7, "nM", "uM", 0.0017}, {60, "percent",
			"fraction", 0.6},
	} {
		got, err := Convert(c.v, MustParse(c.from), MustParse(c.to))
		if err != nil || got != c.want {
			t.Errorf("%v %s = %v %s, %v; want %v", c.v, c.from, got, c.to, err, c.want)
		}
	}
}

func TestTemperature(t *testing.T) {
	got, err := Convert(15, MustParse("degC"), MustParse("K"))
	if err != nil || got != 288.15 {
		t.Errorf("15 degC = %v K, %v", got, err)
	}
	if got, _ = Convert(310.15, MustParse("K"), MustParse("°C")); math.Abs(got-37) > 1e-12 {
		t.Errorf("310.15 K = %v °C", got)
	}
	if _, err := Factor(MustParse("degC"), MustParse("K")); err == nil {
		t.Error("degC and K have no factor")
	}
}

func TestLogarithms(t *testing.T) {
	for _, c := range []struct {
		v        float64
		from, to string
		want     float64
	}{
		{-6, "log10 M", "uM", 1}, {-6, "log10(M)", "uM", 1}, {6, "-log10 M", "uM", 1},
		{0, "log10 uM", "M", 1e-6}, {1, "uM", "log10 M", -6},
	} {
		got, err := Convert(c.v, MustParse(c.from), MustParse(c.to))
		if err != nil {
			t.Fatal(err)
		}
		near(t, c.from, got, c.want, 1e-14)
	}
	u := MustParse("log10 M")
	if !u.IsLogarithm() || u.Linear().String() != "M" || u.Linear().IsLogarithm() {
		t.Errorf("%v: %v", u, u.Linear())
	}
}

func TestNeverConverts(t *testing.T) {
	for _, c := range [][2]string{
		{"torr", "uM"}, {"mg/mL", "mM"}, {"nkat", "nkat/mg"}, {"fmol/mg", "nM"}, {"s", "1/s"},
		{"1", "M"}, {"degC", "torr"},
	} {
		if v, err := Convert(1, MustParse(c[0]), MustParse(c[1])); err == nil {
			t.Errorf("1 %s became %v %s", c[0], v, c[1])
		}
	}
	od := Label("optical density")
	if _, err := Convert(1, od, Unit{}); err == nil {
		t.Error("a label became a number")
	}
	if v, err := Convert(0.4, od, Label("optical density")); err != nil || v != 0.4 {
		t.Errorf("a label is not itself: %v, %v", v, err)
	}
}

func TestKinds(t *testing.T) {
	for written, want := range map[string]string{
		"mM": "a concentration", "torr": "a pressure", "mg/mL": "a mass per volume",
		"fmol/mg": "an amount per mass",
		"nkat/mg": "a catalytic activity per mass", "1/s": "a rate constant of first order",
		"1/(M s)": "a rate constant of second order",
		"percent": "a plain number", "min": "a time", "log10 M": "a logarithm of a concentration",
		"mol2": "something else",
	} {
		if got := MustParse(written).Kind(); got != want {
			t.Errorf("%s is %s, want %s", written, got, want)
		}
	}
	if !MustParse("percent").IsPercent() || MustParse("fraction").IsPercent() ||
		MustParse("ppm").IsPercent() {
		t.Error("percent and fraction are not told apart")
	}
}

func TestUnitComplaints(t *testing.T) {
	for written, want := range map[string]string{
		"uMM": "uM", "micromolar": "uM", "mm Hg": "mmHg", "Torrs": "torr", "sec": "s", "hours": "h",
		"C": "degC", "MM": "mM",
		"nkatt/mg": "nkat/mg", "1/(M s": "1/(M s)", "log10 uMM": "log10 uM", "": "1",
		"furlongs": "", "mM/": "", "M^": "", "mM)": "",
		"((((((M": "", "M99": "", "M0": "", "M9.M9": "", "$": "", "log10 degC": "", "mm{x": "mm{x}",
		"optical density": "", "µ": "",
		"GM": "uM",
	} {
		u, err := Parse(written)
		var e *SyntaxError
		if !errors.As(err, &e) {
			t.Errorf("%q was read as %v", written, u)
			continue
		}
		if written == "GM" {
			continue // any near word will do
		}
		if e.Write != want {
			t.Errorf("%q: write %q, want %q (%s)", written, e.Write, want, e.Problem)
		}
		if e.Start < 0 || e.End < e.Start || e.End > len(written) {
			t.Errorf("%q: span %d to %d", written, e.Start, e.End)
		}
	}
}

func TestNumbers(t *testing.T) {
	for text, want := range map[string]float64{
		"5": 5, "-0.3": -0.3, "+2": 2, ".5": 0.5, "5.": 5, "1e-9": 1e-9, "1E-9": 1e-9, "1e+3": 1000,
		" 7 ": 7, "0": 0, "0e-400": 0,
	} {
		if got, err := ParseNumber(text); err != nil || got != want {
			t.Errorf("%q = %v, %v", text, got, err)
		}
	}
	for text, write := range map[string]string{
		"0,83": "0.83", "-1,5e-3": "-1.5e-3", "1,234,567": "1234567", "1_000": "1000",
		"12 000": "12000", "5*10^-3": "5e-3", "5x10-3": "5e-3",
		"10^-3": "1e-3", "−5": "-5", "1e-400": "0", "": "", "abc": "", "NaN": "", "Inf": "",
		"-inf": "", "0x1F": "", "1e999": "", "1.2.3": "",
		"1.234,5": "", "e5": "", "-": "", ".": "", "5e": "", "1 2 x": "", "<0.01": "", "n.d.": "",
	} {
		v, err := ParseNumber(text)
		var e *SyntaxError
		if !errors.As(err, &e) {
			t.Errorf("%q was read as %v", text, v)
		} else if e.Write != write {
			t.Errorf("%q: write %q, want %q", text, e.Write, write)
		}
	}
}

func TestQuantities(t *testing.T) {
	for text, want := range map[string]string{
		"5 mM": "5 mM", "0.30 mg/mL": "0.3 mg/mL", "90 min": "90 min", "15 degC": "15 degC",
		"5mM": "5 mM", "1e7 1/(M s)": "1e+07 1/(M s)",
		"1e3 1/s": "1000 1/s", "80 μM": "80 µM", "7.0": "7", "50 %": "50 %", " 3  h ": "3 h",
		"5E-3 M": "0.005 M", "5 e": "",
	} {
		q, err := ParseQuantity(text)
		if want == "" {
			if err == nil {
				t.Errorf("%q was read as %v", text, q)
			}
			continue
		}
		if err != nil || q.String() != want {
			t.Errorf("%q = %q, %v; want %q", text, q, err, want)
		}
	}
	for text, write := range map[string]string{
		"1,5 mM": "1.5 mM", "5 uMM": "5 uM", "mM": "", "": "", "5 mM mM )": "", "5 log10 M": "",
		"5*10^-3 M": "5e-3 M", "ninety min": "",
	} {
		q, err := ParseQuantity(text)
		var e *SyntaxError
		if !errors.As(err, &e) {
			t.Errorf("%q was read as %v", text, q)
		} else if e.Write != write {
			t.Errorf("%q: write %q, want %q", text, e.Write, write)
		} else if e.Start < 0 || e.End < e.Start || e.End > len(text) {
			t.Errorf("%q: span %d to %d", text, e.Start, e.End)
		}
	}
}

// There and back again changes nothing, between any two units of one kind.
func TestRoundTrips(t *testing.T) {
	groups := [][]string{
		{"M", "mM", "uM", "µM", "nM", "pM", "fM", "mol/L", "umol/L"}, {"torr", "mmHg", "kPa", "Pa",
			"atm", "bar"},
		{"mg/mL", "ng/mL", "g/L"}, {"nkat/mg", "U/mg"}, {"ms", "s", "min", "h"}, {"degC", "K"},
		{"log10 M", "uM", "-log10 nM"},
	}
	rapid.Check(t, func(t *rapid.T) {
		g := rapid.SampledFrom(groups).Draw(t, "kind")
		a, b := MustParse(rapid.SampledFrom(g).Draw(t, "from")),
			MustParse(rapid.SampledFrom(g).Draw(t, "to"))
		v := rapid.Float64Range(0.01, 5).Draw(t, "value")
		w, err := Convert(v, a, b)
		if err != nil {
			t.Fatal(err)
		}
		back, err := Convert(w, b, a)
		if err != nil || math.Abs(back-v) > 1e-10*max(1, v) {
			t.Fatalf("%v %s = %v %s = %v %s, %v", v, a, w, b, back, a, err)
		}
	})
}

func FuzzParseQuantity(f *testing.F) {
	for _, s := range []string{"5 mM", "1e7 1/(M s)", "log10 M", "-log10(M)", "mol·L⁻¹", "((M",
		"M^-", "{x}", "mm[Hg]", "1,5 uMM", "%", "5*10^-3 M", "°C/K"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		check := func(err error) {
			var e *SyntaxError
			if !errors.As(err, &e) {
				return
			}
			if e.Problem == "" || e.Start < 0 || e.End < e.Start || e.End > len(e.Text) {
				t.Fatalf("%q: %+v", s, e)
			}
		}
		u, err := Parse(s)
		check(err)
		if err == nil {
			if v, err := Parse(u.String()); err != nil || v.dim != u.dim {
				t.Fatalf("%q is printed as %q, which is not it: %v", s, u, err)
			}
			_ = u.Kind() + u.Linear().String()
			if v, err := Convert(1, u, u); err != nil || v != 1 {
				t.Fatalf("1 %q in itself is %v, %v", s, v, err)
			}
		}
		q, err := ParseQuantity(s)
		check(err)
		if err == nil && (math.IsNaN(q.Value) || math.IsInf(q.Value, 0)) {
			t.Fatalf("%q = %v", s, q.Value)
		}
		v, err := ParseNumber(s)
		check(err)
		if err == nil && (math.IsNaN(v) || math.IsInf(v, 0)) {
			t.Fatalf("%q = %v", s, v)
		}
	})
}
