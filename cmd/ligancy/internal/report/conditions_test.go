package report

import (
	"testing"

	"ligancy/fit/saturation"
)

// Conditions list what STRENDA level 1A asks for, as the study or its data
// state it, with null for what is not stated, then what else is stated.
func TestConditionsListWhatIsAskedFor(t *testing.T) {
	a := &saturation.Analysis{Ligand: saturation.Substance{Name: "oxygen", Unit: "torr"},
		Conditions: map[string]string{"temperature": "15 degC", "haem_spectrum": "checked"},
		Data: []saturation.Dataset{{Factors: []string{"pH"}, Response: saturation.Response{Kind: "saturation"}, Points: []saturation.Point{
			{X: 0, Levels: []string{"7.6"}, Preparation: "A"}, {X: 50, Levels: []string{"7.0"}, Preparation: "B"}, {X: 900, Levels: []string{"7.0"}, LeftOut: "bubble"}}}}}
	stated := map[string]string{}
	blank := map[string]bool{}
	for _, c := range conditionsOf(a) {
		if c.Stated == nil {
			blank[c.Condition] = c.Asked
			continue
		}
		stated[c.Condition] = *c.Stated
	}
	for name, want := range map[string]string{"temperature": "15 degC", "pH": "varied: 7.6, 7.0", "independent preparations": "2",
		"oxygen, range": "50 to 50 torr, and none", "haem spectrum": "checked"} {
		if stated[name] != want {
			t.Errorf("%s is %q, want %q", name, stated[name], want)
		}
	}
	if !blank["organism and strain"] || !blank["macromolecule"] || len(stated) != 5 {
		t.Errorf("stated %v, not stated %v", stated, blank)
	}
	if _, ok := blank["initial rates"]; ok {
		t.Error("initial rates are asked of a binding study")
	}
}
