package saturation

import (
	"testing"

	"ligancy/mechanisms"
)

// build makes a mechanism of the table of families.
func build(t testing.TB, family string, d mechanisms.Definition) mechanisms.Mechanism {
	t.Helper()
	f, ok := mechanisms.Lookup(family)
	if !ok {
		t.Fatalf("no family %q", family)
	}
	m, err := f.Build(d)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// lookupCurve is a bound curve of a simple mechanism: `sites` in def, or one site.
func lookupCurve(t testing.TB, family string, def map[string]int, theta []float64) mechanisms.Curve {
	t.Helper()
	d := mechanisms.Definition{Sites: def["sites"]}
	if family == "independent" {
		d = mechanisms.Definition{Classes: []mechanisms.Count{{Name: "only", Sites: 1}}}
	}
	c := build(t, family, d).Curve()
	c.Bind(theta, mechanisms.Environment{})
	return c
}
