package report

import (
	"strings"
	"testing"
	"unicode"

	"pgregory.net/rapid"
)

func TestPrintableDisarmsNames(t *testing.T) {
	for in, want := range map[string]string{
		"plain":             "plain",
		"a\x1b[31mred":      `a\x1b[31mred`,
		"two\nlines":        "two lines",
		"over\u202eride":    `over\u202eride`,
		"<b>bold</b> & co":  "<b>bold</b> & co",
		"המוגלובין":         "\u2068המוגלובין\u2069",
		"bad \xff byte":     "bad \uFFFD byte",
		"bell\a":            `bell\x07`,
		"c1 \u009b control": `c1 \x9b control`,
	} {
		if got := printable(in); got != want {
			t.Errorf("printable(%q) = %q, want %q", in, got, want)
		}
	}
}

func TestCutCountsColumns(t *testing.T) {
	for _, c := range []struct {
		in   string
		w    int
		want string
	}{
		{"haemoglobin", 20, "haemoglobin"},
		{"haemoglobin", 6, "haemo…"},
		{"血紅蛋白血紅蛋白", 8, "血紅蛋…"},
		{"e\u0301e\u0301e\u0301e\u0301", 3, "e\u0301e\u0301…"},
		{"המוגלובין של צדפה", 6, "\u2068המוגל…\u2069"},
	} {
		if got := cut(c.in, c.w); got != c.want {
			t.Errorf("cut(%q, %d) = %q, want %q", c.in, c.w, got, c.want)
		}
	}
}

func TestCutAndWrapHoldTheirWidth(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s, w := rapid.String().Draw(t, "text"), rapid.IntRange(2, 60).Draw(t, "width")
		lines := append(wrap(s, w), cut(s, w))
		for _, l := range lines {
			if width(l) > w {
				t.Fatalf("%d columns of %d: %q", width(l), w, l)
			}
			if strings.ContainsFunc(l, unicode.IsControl) {
				t.Fatalf("control character: %q", l)
			}
		}
	})
}

func TestGridAlignsWideSigns(t *testing.T) {
	g := &grid{gap: 2, right: []bool{false, true}}
	g.add("", "n")
	g.add("血紅", "4")
	g.add("abc", "12")
	want := []string{"       n", "血紅   4", "abc   12"}
	for i, l := range g.lines(Width - 2) {
		if l != want[i] {
			t.Errorf("line %d: %q, want %q", i, l, want[i])
		}
	}
}

func TestGridFoldsColumnsThatDoNotFit(t *testing.T) {
	g := &grid{gap: 2}
	g.add("", "first", "second", "third")
	g.add("row", "1", "2", "3")
	want := []string{"     first  second", "row  1      2", "     third", "row  3"}
	got := g.lines(18)
	if strings.Join(got, "\n") != strings.Join(want, "\n") {
		t.Errorf("got\n%s", strings.Join(got, "\n"))
	}
}

func TestGridWithoutRowsOrColumns(t *testing.T) {
	if got := (&grid{}).lines(80); len(got) != 0 {
		t.Errorf("%q", got)
	}
	g := &grid{}
	g.add("alone")
	if got := g.lines(80); len(got) != 1 || got[0] != "alone" {
		t.Errorf("%q", got)
	}
}
