package report

import (
	"bytes"
	"strings"
	"testing"

	"ligancy/specs/diag"
)

func TestCheckOfAUsableStudy(t *testing.T) {
	a := clamAnalysis(t)
	c := NewCheck(a, Source{File: "clam.yaml"}, nil, clamOutcome(a).Objections)
	var b bytes.Buffer
	if err := c.WriteText(&b, "clam.yaml", false); err != nil {
		t.Fatal(err)
	}
	golden(t, "check.txt", b.Bytes())
	for _, line := range strings.Split(b.String(), "\n") {
		if width(line) > Width {
			t.Errorf("%d columns: %s", width(line), line)
		}
	}
	if !c.Holds() {
		t.Error("nothing is to be settled first, but the check does not hold")
	}
}

func TestCheckHoldsOnlyWithoutWarningsAndThingsToSettle(t *testing.T) {
	a := clamAnalysis(t)
	asked := clamOutcome(a).Objections
	if NewCheck(a, Source{}, diag.List{{Severity: diag.Warning}}, asked).Holds() {
		t.Error("a warning holds")
	}
	asked[0].Group = "settle first"
	if NewCheck(a, Source{}, nil, asked).Holds() {
		t.Error("something to settle first holds")
	}
	c := NewCheck(nil, Source{}, diag.List{{Problem: "no"}}, nil)
	if c.Usable || c.Holds() {
		t.Error("a study that cannot be used holds")
	}
}

func TestReviewersQuestionsTakeTheNumbersOfTheirValues(t *testing.T) {
	a := clamAnalysis(t)
	o := clamOutcome(a)
	o.Objections[0].ID, o.Objections[0].Text = "n_H-definition", "Two numbers are called n_H"
	o.Objections[1].ID, o.Objections[1].Text = "tied-constants", "L and K_R are tied"
	var b bytes.Buffer
	if err := New(a, o, Source{}).WriteText(&b, false); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"2.61  [1]", "a factor 1.6   [2]", "[1] Two numbers are called n_H.", "[2] L and K_R are tied."} {
		if !strings.Contains(b.String(), want) {
			t.Errorf("no %q in\n%s", want, b.String())
		}
	}
	if strings.Contains(b.String(), "midpoint slope and a fitted") || strings.Contains(b.String(), "move together") {
		t.Error("the same is said twice")
	}
}

func TestPercentStaysWithItsNumber(t *testing.T) {
	for w := 8; w < 40; w++ {
		for _, l := range wrap("interval at 95 % from 10 to 90 % bound, or 99 %, then", w) {
			if strings.HasPrefix(l, "%") {
				t.Errorf("width %d: %q", w, l)
			}
		}
	}
}
