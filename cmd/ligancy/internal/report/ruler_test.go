package report

import (
	"math"
	"strings"
	"testing"
	"unicode/utf8"
)

func TestRulerDrawsSolidWithinTheTestedPointsAndBrokenBeyond(t *testing.T) {
	tested := []float64{1, 10, 100}
	a, ok := newAxis(tested, []float64{0.1, 1000}, 62)
	if !ok {
		t.Fatal("no axis")
	}
	got := a.bar(reach{x01: 0.1, x10: 3, half: 10, x90: 300, x99: 1000, from: 1, to: 100})
	const want = " ┄┄┄┄┄┄┄┄┄┄┄┄┄┄┄───────━━━━━━━━┃━━━━━━━━━━━━━━┅┅┅┅┅┅┅┄┄┄┄┄┄┄┄"
	if got != want {
		t.Errorf("bar:\n%s\n%s", got, want)
	}
	const scale = "0.1    0.3      1      3       10     30    100    300     1000"
	if got := a.scale(); got != scale {
		t.Errorf("scale:\n%s\n%s", got, scale)
	}
	const marks = "                ╵              ╵             ╵"
	if got := a.marks(tested); got != marks {
		t.Errorf("marks:\n%s\n%s", got, marks)
	}
}

func TestRulerNeverLeavesItsAxis(t *testing.T) {
	inf, nan := math.Inf(1), math.NaN()
	values := []float64{nan, 0, 1e-300, 1e-6, 1, 1e6, 1e300, inf}
	for _, columns := range []int{20, 61, 84} {
		for _, tested := range [][]float64{nil, {0}, {1}, {1, 1}, {1e-9, 1e9}, {0, 2, 5}} {
			for _, x01 := range values {
				for _, x99 := range values {
					a, ok := newAxis(tested, []float64{x01, x99}, columns)
					if !ok {
						continue
					}
					low, high := span(tested)
					r := reach{x01: x01, x10: x01 * 2, half: 1, x90: x99 / 2, x99: x99, from: math.Pow(10, low), to: math.Pow(10, high)}
					for _, s := range []string{a.bar(r), a.marks(tested)} {
						if n := utf8.RuneCountInString(s); n > columns {
							t.Fatalf("%d of %d columns: %s", n, columns, s)
						}
					}
					if n := utf8.RuneCountInString(a.scale()); n > columns+6 {
						t.Fatalf("scale: %d of %d columns: %s", n, columns, a.scale())
					}
				}
			}
		}
	}
}

func TestRulerSaysWhatGoesOnBeyondTheAxis(t *testing.T) {
	a, _ := newAxis([]float64{1, 10}, []float64{1e-9, 1e9}, 40)
	got := a.bar(reach{x01: 1e-9, x10: 1e-5, half: 3, x90: 1e5, x99: 1e9, from: 1, to: 10})
	if !strings.HasPrefix(got, "‹") || !strings.HasSuffix(got, "›") {
		t.Errorf("no arrows: %s", got)
	}
}

func TestNumbersOfAWideAxisStayApart(t *testing.T) {
	a, _ := newAxis([]float64{1e-12, 1e12}, nil, 70)
	got := a.scale()
	if strings.Contains(got, "1e-11") || len(strings.Fields(got)) < 5 {
		t.Errorf("scale: %s", got)
	}
}
