package saturation

import (
	"context"
	"strings"
	"testing"
)

// The clam study, as its draft has it: haem not stated first, then three
// preparations and ends that were set; spacing, replicates and axis are good.
func TestObjectionsToTheClamStudy(t *testing.T) {
	a := clamStudy(t)
	a.Conditions = map[string]string{"macromolecule": "red-cell haemoglobin, tetramer",
		"temperature": "15 degC", "buffer": "0.1 M HEPES, 0.45 M NaCl"}
	list := a.Objections(context.Background())
	for _, w := range []struct{ id, group, says string }{
		{"dissociation", settleFirst, "fall apart"},
		{"preparations", sayInPaper, "Three preparations; 5 is the usual least"},
		{"ends-set", sayInPaper, "high 1 and low 0"},
		{"conditions", forCompleteness, "organism, tissue, preparation, purity, pressure"},
		{"concentrations", foundGood, "Twelve ligand values"},
		{"replicates", foundGood, "48 degrees of freedom"},
		{"transformed-axes", foundGood, "untransformed"},
	} {
		o := objected(list, w.id)
		if o.Group != w.group || !strings.Contains(o.Text, w.says) {
			t.Errorf("%s: %s | %s", w.id, o.Group, o.Text)
		}
	}
	for _, o := range list {
		if o.Group == settleFirst && o.ID != "dissociation" {
			t.Errorf("also to be settled first: %s", o.Text)
		}
	}
	out := analysed(t, clamStudy(t))
	soundObjections(t, out.Objections)
	if m, r := objected(out.Objections, "ends-set"),
		"less than the intervals"; !strings.Contains(deref(m.Effect), r) {
		t.Errorf("ends: %s", deref(m.Effect))
	}
	for _, r := range out.Explanations {
		if r.Mechanism != nil && r.Standing == "open" && *r.Mechanism != "concerted, L differs" &&
			*r.Mechanism != "stepwise" {
			t.Errorf("%s is open", *r.Mechanism)
		}
	}
}

// What a reviewer asks of the study alone; the fits of Hill equations are in it.
func BenchmarkObjections(b *testing.B) {
	a := clamStudy(b)
	for b.Loop() {
		a.Objections(context.Background())
	}
}

// What a run of five mechanisms spends on objections and explanations.
func BenchmarkAsked(b *testing.B) {
	a := clamStudy(b)
	a.Candidates = a.Candidates[:5]
	out := analysed(b, a)
	a = a.withDefaults()
	fits := a.fitAll(context.Background(), nil)
	order := rank(fits, newCurves(a, fits))
	stand(fits, order)
	b.ResetTimer()
	for b.Loop() {
		a.asked(context.Background(), out, fits, order)
	}
}
