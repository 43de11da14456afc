package record

import (
	"math"
	"slices"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"ligancy/fit/saturation"
)

func word(s string) *string { return &s }

// outcome is one of two mechanisms with names that need quoting.
func outcome() (*saturation.Analysis, *saturation.Outcome) {
	a := &saturation.Analysis{Title: "Oxygen: \"two\" pH # and more", Origin: "invented data",
		Settings: saturation.Settings{Seed: 1, Starts: 50, Level: 0.95, Method: "profile", Draws: 199},
		Data: []saturation.Dataset{{Name: "curves", File: "clam.csv",
			Points: []saturation.Point{{X: 1}, {X: 2, LeftOut: "bubble"}}}}}
	row := func(mechanism, of, name, curve string, v, low, high float64, held string) saturation.QuantityRow {
		return saturation.QuantityRow{Mechanism: mechanism, Of: of, Name: name, Curve: curve, Unit: "torr",
			Value: saturation.Real(v), Low: saturation.Real(low), High: saturation.Real(high), Held: held,
			Ligand: word("oxygen")}
	}
	none := math.NaN()
	o := &saturation.Outcome{
		Mechanisms: []saturation.MechanismRow{
			{Name: "yes", Family: "hill", Status: "converged", Standing: "out", Points: 1, Constants: 2,
				SumOfSquares: 0.017577433336848552, AICc: -383.64575742123606},
			{Name: "concerted, L differs", Family: "mwc", Sites: 4, Status: "no answer", Points: 1,
				SumOfSquares: saturation.Real(none), AICc: saturation.Real(none)},
		},
		Quantities: []saturation.QuantityRow{
			row("concerted, L differs", "hill", "n_H_half", "pH 7.6", 2.8655103192, 2.8111590049, 2.9204006148, "both"),
			row("concerted, L differs", "constant", "L", "pH 7.6", 1534.55053785, 1009.53459312, 2465.70973472, "both"),
			row("concerted, L differs", "constant", "L", "pH 7.0", 9423.577, 6218.2133, none, "low end only"),
			row("concerted, L differs", "position", "x_90", "pH 7.0", 1, none, none, "neither"),
			row("concerted, L differs", "contrast", "n_H_half", "pH 7.0 − pH 7.6", -8.9e-16, none, none, "neither"),
		},
		Verdict: saturation.Verdict{Slope: "above 1"},
	}
	return a, o
}

func made() *Record {
	a, o := outcome()
	return New(a, o, Source{Version: "1.2.3", File: "clam.yaml", SHA256: "ab", Digests: map[string]string{"clam.csv": "cd"}})
}

func TestARecordIsSortedAndSmall(t *testing.T) {
	want := `# What a fit found, kept beside the study. Compare with   ligancy repeat clam.yaml
format: ligancy-record/1
version: "1.2.3"
title: "Oxygen: \"two\" pH # and more"
origin: invented data
study: {file: clam.yaml, sha256: ab}
data:
  - {name: curves, file: clam.csv, points: 1, left_out: 1,
     sha256: cd}
settings: {seed: 1, starts: 50, level: 0.95, method: profile, draws: 199}
slope: above 1
mechanisms:

  - name: "concerted, L differs"
    family: mwc
    sites: 4
    status: no answer
    standing: ""
    constants: 0
    points: 1
    sum_of_squares: null
    aicc: null
    numbers:
      - {of: constant, name: L, curve: pH 7.0, ligand: oxygen, value: 9424, low: 6218, unit: torr, held: low end only}
      - {of: constant, name: L, curve: pH 7.6, ligand: oxygen, value: 1534.6, low: 1009.5, high: 2465.7, unit: torr, held: both}
      - {of: hill, name: n_H_half, curve: pH 7.6, ligand: oxygen, value: 2.86551, low: 2.81116, high: 2.9204, unit: torr, held: both}
      - {of: contrast, name: n_H_half, curve: "pH 7.0 − pH 7.6", ligand: oxygen, value: 0, unit: torr, held: neither}

  - name: "yes"
    family: hill
    sites: 0
    status: converged
    standing: out
    constants: 2
    points: 1
    sum_of_squares: 0.0175774
    aicc: -383.646
    numbers: []
`
	if d := cmp.Diff(want, string(made().Bytes())); d != "" {
		t.Error(d)
	}
}

func TestARecordReadsBack(t *testing.T) {
	r := made()
	got, complaints := Read("clam.record.yaml", r.Bytes())
	if complaints != nil {
		t.Fatal(complaints)
	}
	if d := cmp.Diff(string(r.Bytes()), string(got.Bytes())); d != "" {
		t.Error(d)
	}
	if c := Compare(r, got); !c.Holds() || len(c.Settings) > 0 || slices.ContainsFunc(c.Files, func(f FileChange) bool { return f.Changed }) {
		t.Errorf("a record differs from itself: %+v", c)
	}
	if !IsRecord(r.Bytes()) || IsRecord([]byte("format: ligancy/1\n")) {
		t.Error("a record is not told from a study")
	}
}

func TestRecordsThatCannotBeUsedAreNamed(t *testing.T) {
	whole := string(made().Bytes())
	for _, c := range []struct{ name, text, code string }{
		{"a study", "format: ligancy/1\ntitle: x\n", "bad-format"},
		{"a later format", strings.Replace(whole, "record/1", "record/9", 1), "bad-format"},
		{"a table", "pO2_torr,sat\n1,0.1\n", "bad-format"},
		{"nothing", "", "bad-format"},
		{"no YAML", "format: ligancy-record/1\n]: {\n", "bad-record"},
		{"a key of nobody", whole + "colour: red\n", "bad-record"},
		{"a word for a number", strings.Replace(whole, "seed: 1", "seed: one", 1), "bad-record"},
		{"a mechanism twice", strings.Replace(whole, `name: "yes"`, `name: "concerted, L differs"`, 1), "bad-record"},
		{"an infinite number", strings.Replace(whole, "value: 1534.6", "value: .inf", 1), "bad-record"},
		{"two versions", strings.Replace(whole, "slope:", "<<<<<<< ours\nslope:", 1), "conflict"},
		{"no text", "format: \xff\xfe\x00", "encoding"},
	} {
		r, complaints := Read("x.record.yaml", []byte(c.text))
		if r != nil || len(complaints) == 0 {
			t.Errorf("%s was taken", c.name)
			continue
		}
		if got := complaints[0].Code; got != c.code && c.code != "encoding" {
			t.Errorf("%s: %s, want %s: %v", c.name, got, c.code, complaints[0])
		}
	}
}

// Half an interval of 728 keeps its first digit and three more: one place after
// the point. A short end of a skewed interval keeps four digits all the same.
func TestDigitsFollowTheInterval(t *testing.T) {
	none := math.NaN()
	for _, c := range []struct{ v, low, high, wantV, wantLow, wantHigh float64 }{
		{1534.55053785, 1009.53459312, 2465.70973472, 1534.6, 1009.5, 2465.7},
		{0.0116176729, 0.0100849125, 0.0131309988, 0.011618, 0.010085, 0.013131},
		{0.123456789, none, none, 0.123457, none, none},
		{1, 1.23456789e-6, 4.2e7, 1.000, 1.235e-6, 4.2e7},
		{0, none, none, 0, none, none},
		{none, none, none, none, none, none},
	} {
		v, lo, hi := rounded(&saturation.QuantityRow{Of: "constant", Value: saturation.Real(c.v),
			Low: saturation.Real(c.low), High: saturation.Real(c.high)})
		for i, p := range []*float64{v, lo, hi} {
			want := []float64{c.wantV, c.wantLow, c.wantHigh}[i]
			if got := valueOf(p); got != want && !(math.IsNaN(got) && math.IsNaN(want)) {
				t.Errorf("%v: %v, want %v", c, got, want)
			}
		}
	}
}

func TestFileName(t *testing.T) {
	for study, want := range map[string]string{"clam.yaml": "clam.record.yaml", "a/clam.yml": "a/clam.record.yaml",
		"a/.yaml": "a/.yaml.record.yaml", "clam": "clam.record.yaml"} {
		if got := FileName(study); got != want {
			t.Errorf("%s: %s, want %s", study, got, want)
		}
	}
}

func FuzzRead(f *testing.F) {
	f.Add(made().Bytes())
	f.Add([]byte("format: ligancy-record/1\nmechanisms: [{name: a, numbers: [{value: 1}]}]\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		r, complaints := Read("x.record.yaml", data)
		if (r == nil) == (len(complaints) == 0) {
			t.Fatal("neither a record nor a complaint, or both")
		}
		if r == nil {
			return
		}
		again, complaints := Read("x.record.yaml", r.Bytes())
		if again == nil {
			t.Fatalf("what was written cannot be read: %v\n%s", complaints, r.Bytes())
		}
		Compare(r, again).Holds()
	})
}
