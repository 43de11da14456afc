package record

import (
	"math"
	"testing"
)

func ref(x float64) *float64 { return &x }

// one is a record of one mechanism with one number.
func one(n Number) *Record {
	return &Record{Format: Format, Mechanisms: []Mechanism{{Name: "m", Points: 72, Standing: "leads",
		SumOfSquares: ref(0.0079), AICc: ref(-443.6), Numbers: []Number{n}}}}
}

func held(v, low, high float64) Number {
	n := Number{Of: "constant", Name: "K", Curve: "all", Value: &v, Held: "both"}
	if finite(low) {
		n.Low = &low
	}
	if finite(high) {
		n.High = &high
	}
	return n
}

// How far a number moved is measured by hand: half of 1.9 … 2.1 is 0.1; half of
// ln 4 is ln 2, so a doubling is one half width; one end alone is the measure.
func TestMovesAreMeasuredInHalfWidths(t *testing.T) {
	none := math.NaN()
	for _, c := range []struct {
		name     string
		old, now Number
		moved    float64
		within   bool
	}{
		{"not at all", held(2, 1.9, 2.1), held(2, 1.9, 2.1), 0, true},
		{"within tolerance", held(2, 1.9, 2.1), held(2.001, 1.901, 2.101), 0.01, true},
		{"half an interval", held(2, 1.9, 2.1), held(2.05, 1.95, 2.15), 0.5, false},
		{"on the logarithm", held(2, 1, 4), held(4, 2, 8), 1, false},
		{"one end", held(2, 1.5, none), held(1.75, 1.5, none), -0.5, false},
		{"no interval, tiny", held(2, none, none), held(2.00001, none, none), none, true},
		{"no interval, more", held(2, none, none), held(2.01, none, none), none, false},
		{"an end was lost", held(2, 1.9, 2.1), held(2, 1.9, none), 0, false},
		{"below zero", held(2, 1, 4), held(-1, 1, 4), none, false},
	} {
		m := Compare(one(c.old), one(c.now)).Numbers[0]
		got := float64(m.Moved)
		if m.Within != c.within || math.Abs(got-c.moved) > 1e-9 || math.IsNaN(got) != math.IsNaN(c.moved) {
			t.Errorf("%s: moved %v, within %v", c.name, got, m.Within)
		}
	}
}

// A number that the data hold at neither end is not compared; that it is no
// longer held is said.
func TestWhatNothingHoldsIsNotCompared(t *testing.T) {
	a, b := held(2, math.NaN(), math.NaN()), held(7, math.NaN(), math.NaN())
	a.Held, b.Held = "neither", "neither"
	if c := Compare(one(a), one(b)); !c.Holds() || !c.Numbers[0].Free {
		t.Error("a number without an interval decides")
	}
	a.Held = "low end only"
	if Compare(one(a), one(b)).Holds() {
		t.Error("that a number is no longer held is not said")
	}
}

func TestStandingsAreCompared(t *testing.T) {
	n := held(2, 1.9, 2.1)
	for name, change := range map[string]func(*Record){
		"standing":       func(r *Record) { r.Mechanisms[0].Standing = "open" },
		"status":         func(r *Record) { r.Mechanisms[0].Status = "at an edge" },
		"points":         func(r *Record) { r.Mechanisms[0].Points = 71 },
		"sum of squares": func(r *Record) { r.Mechanisms[0].SumOfSquares = ref(0.0080) },
		"AICc":           func(r *Record) { r.Mechanisms[0].AICc = nil },
		"mechanism":      func(r *Record) { r.Mechanisms[0].Name = "other" },
		"number":         func(r *Record) { r.Mechanisms[0].Numbers = nil },
	} {
		r := one(n)
		change(r)
		if Compare(one(n), r).Holds() {
			t.Errorf("%s may change unseen", name)
		}
	}
	r := one(n)
	r.Study.SHA256, r.Version, r.Mechanisms[0].SumOfSquares = "other", "9", ref(0.0079003)
	c := Compare(one(n), r)
	if !c.Holds() || !c.Files[0].Changed || len(c.Settings) != 1 {
		t.Errorf("a file and a version that move no number: %+v", c)
	}
}

func TestIntervalsApart(t *testing.T) {
	for _, c := range []struct {
		old, now Number
		apart    bool
	}{
		{held(2, 1.9, 2.1), held(2.3, 2.2, 2.4), true},
		{held(2, 1.9, 2.1), held(1.7, 1.6, 1.8), true},
		{held(2, 1.9, 2.1), held(2.2, 2.1, 2.4), false},
		{held(2, 1.9, math.NaN()), held(1, 0.9, 1.1), false},
	} {
		if got := Compare(one(c.old), one(c.now)).Numbers[0].Apart(); got != c.apart {
			t.Errorf("%v → %v: %v", *c.old.Value, *c.now.Value, got)
		}
	}
}
