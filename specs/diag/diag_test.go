package diag

import (
	"bytes"
	"encoding/json"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

const study = `format: ligancy/1
effectors: [{name: 2,3-BPG, unit: mM}]
`

// text writes one complaint as people see it.
func text(t *testing.T, ds ...Diagnostic) string {
	t.Helper()
	var b bytes.Buffer
	if err := WriteText(&b, ds); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func TestBlock(t *testing.T) {
	src := NewText("clam.yaml", []byte(study))
	d := src.Quote(Diagnostic{Position: src.At(2, 20, 27), Problem: "a comma ended this name",
		Notes:    []string{`Inside { } a comma begins the next entry, so the name would be "2".`},
		Remedies: []Remedy{{Write: `name: "2,3-BPG"`}}})
	want := `clam.yaml:2:20   a comma ended this name
     2 | effectors: [{name: 2,3-BPG, unit: mM}]
       |                    ‾‾‾‾‾‾‾
   Inside { } a comma begins the next entry, so the name would be "2".
   Write   name: "2,3-BPG"
`
	if diff := cmp.Diff(want, text(t, d)); diff != "" {
		t.Error(diff)
	}
}

func TestRemedyWithCondition(t *testing.T) {
	d := Diagnostic{Position: Position{File: "clam.csv"}, Problem: "p", Remedies: []Remedy{
		{Say: "If the whole file has decimal commas, say", Write: "decimal: comma",
			Where: "under this data set in clam.yaml."},
		{Say: "Save the table again."}}}
	want := `clam.csv   p
   If the whole file has decimal commas, say   decimal: comma   under this data set in clam.yaml.
   Save the table again.
`
	if diff := cmp.Diff(want, text(t, d)); diff != "" {
		t.Error(diff)
	}
}

// marks returns the line and the marks under it.
func marks(t *testing.T, line string, column, end int) (string, string) {
	t.Helper()
	src := NewText("f", []byte(line))
	out := strings.Split(text(t, src.Quote(Diagnostic{Position: src.At(1, column, end),
		Problem: "p"})), "\n")
	return strings.TrimPrefix(out[1], "     1 | "), strings.TrimPrefix(out[2], "       | ")
}

func TestMarksUnderTabsAndWideCharacters(t *testing.T) {
	for _, c := range []struct{ name, line, span, shown, under string }{
		{"tab before", "a\tb", "b", "a→ b", "   ‾"},
		{"tab itself", "a\tb", "\t", "a→ b", " ‾‾"},
		{"wide before", "酸素: x", "x", "酸素: x", "      ‾"},
		{"wide itself", "k: 酸素", "酸素", "k: 酸素", "   ‾‾‾‾"},
		{"accent as mark of its own", "e\u0301x", "x", "e\u0301x", " ‾"},
		{"micro sign", "unit: µM", "µM", "unit: µM", "      ‾‾"},
		{"escape", "a\x1b[31mb", "b", "a␛[31mb", "      ‾"},
		{"not UTF-8", "a\xb5M", "M", "a�M", "  ‾"},
		{"direction mark", "a\u202eb", "b", "a<U+202E>b", "         ‾"},
	} {
		t.Run(c.name, func(t *testing.T) {
			i := strings.Index(c.line, c.span)
			shown, under := marks(t, c.line, i+1, i+1+len(c.span))
			if shown != c.shown || under != c.under {
				t.Errorf("got\n%s|\n%s|\nwant\n%s|\n%s|", shown, under, c.shown, c.under)
			}
		})
	}
}

func TestRightToLeftIsNamedNotMarked(t *testing.T) {
	line := "title: חמצן x"
	_, under := marks(t, line, 8, 16)
	if want := "bytes 8 to 15: חמצן"; under != want {
		t.Errorf("got %q, want %q", under, want)
	}
}

func TestLongLinesAreCut(t *testing.T) {
	line := strings.Repeat("0123456789", 30)
	for _, at := range [][2]int{{1, 6}, {150, 160}, {296, 301}, {1, 301}, {100, 290}} {
		shown, under := marks(t, line, at[0], at[1])
		if n := len([]rune(shown)); n > pageColumns-marginColumns {
			t.Errorf("%v: %d columns", at, n)
		}
		n := strings.Count(under, "‾")
		before := len(under) - n*len("‾")
		got := string([]rune(shown)[before : before+n])
		if want := line[at[0]-1 : at[1]-1]; !strings.HasPrefix(want, got) || got == "" {
			t.Errorf("%v: %q is marked, %q is meant", at, got, want)
		}
	}
	huge := strings.Repeat("x", 10<<20)
	d := NewText("f", []byte(huge)).Quote(Diagnostic{Position: Position{"f", 1, 5 << 20, 5<<20 + 3,
		""}})
	if len(d.Source) > 3*keptBytes {
		t.Errorf("%d bytes of a long line are kept", len(d.Source))
	}
}

func TestSpansOutsideTheLineDoNoHarm(t *testing.T) {
	for _, p := range [][2]int{{0, 0}, {5, 2}, {99, 120}, {-4, 3}, {3, 99}} {
		marks(t, "abc", p[0], p[1])
	}
	text(t, Diagnostic{}, Diagnostic{Position: Position{Line: 3}})
}

func TestSortedAndOnce(t *testing.T) {
	at := func(f string, l, c int) Diagnostic {
		return Diagnostic{Position: Position{File: f, Line: l, Column: c}, Code: "x", Problem: "p"}
	}
	got := List{at("s.yaml", 5, 1), at("a.csv", 1, 1), at("s.yaml", 2, 9), at("s.yaml", 5, 1),
		at("s.yaml", 2, 1)}.Sorted()
	want := List{at("s.yaml", 2, 1), at("s.yaml", 2, 9), at("s.yaml", 5, 1), at("a.csv", 1, 1)}
	if diff := cmp.Diff(want, got); diff != "" {
		t.Error(diff)
	}
}

func TestCapped(t *testing.T) {
	var l List
	for i := range 50 {
		l = append(l, Diagnostic{Code: "not-a-number", Position: Position{File: "a.csv",
			Line: i + 1}})
	}
	l = append(l, Diagnostic{Code: "other", Position: Position{File: "a.csv"}})
	got := l.Capped(5)
	if len(got) != 6 || got[4].Notes[0] != "There are 45 more of this kind in a.csv." {
		t.Errorf("got %v", got)
	}
	if len(l[4].Notes) != 0 {
		t.Error("the list itself was changed")
	}
}

func TestNearest(t *testing.T) {
	valid := []string{"name", "file", "columns", "factors", "response", "ligand_axis", "noise",
		"K_half", "n_H"}
	for word, want := range map[string]string{
		"colums": "columns", "nosie": "noise", "ligand-axis": "ligand_axis", "Response": "response",
		"k_half": "K_half", "xyzzy": "", "": "", "fil": "file", "n_h": "n_H",
	} {
		if got := Nearest(word, valid); got != want {
			t.Errorf("Nearest(%q) = %q, want %q", word, got, want)
		}
	}
}

func TestJSON(t *testing.T) {
	var b bytes.Buffer
	d := Diagnostic{Severity: Warning, Code: "c", Position: Position{File: "f", Line: 1, Column: 2,
		End: 3}, Problem: "a < b"}
	if err := WriteJSON(&b, List{d}); err != nil {
		t.Fatal(err)
	}
	var rows []map[string]any
	if err := json.Unmarshal(b.Bytes(), &rows); err != nil {
		t.Fatal(err)
	}
	want := []map[string]any{{"severity": "warning", "code": "c", "file": "f", "line": 1.0,
		"column": 2.0, "end": 3.0, "problem": "a < b"}}
	if diff := cmp.Diff(want, rows); diff != "" {
		t.Error(diff)
	}
	b.Reset()
	if err := WriteJSON(&b, nil); err != nil || b.String() != "[]\n" {
		t.Errorf("no complaints: %q, %v", b.String(), err)
	}
}
