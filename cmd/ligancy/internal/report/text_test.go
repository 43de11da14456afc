package report

import (
	"bytes"
	"flag"
	"fmt"
	"os"
	"regexp"
	"strings"
	"testing"
)

var update = flag.Bool("update", false, "rewrite golden files")

// golden compares with a file of testdata.
func golden(t *testing.T, name string, got []byte) {
	t.Helper()
	path := "testdata/" + name
	if *update {
		if err := os.WriteFile(path, got, 0o666); err != nil {
			t.Fatal(err)
		}
		return
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(got, want) {
		t.Errorf("%s differs (rewrite with -update and read it):\n%s", path, got)
	}
}

func TestTextOfClam(t *testing.T) {
	var b bytes.Buffer
	if err := clamDocument(t).WriteText(&b, false); err != nil {
		t.Fatal(err)
	}
	golden(t, "clam.txt", b.Bytes())
	for _, line := range strings.Split(b.String(), "\n") {
		if w := width(line); w > Width {
			t.Errorf("%d columns: %s", w, line)
		}
	}
}

func TestTextIsPlainOrPaintedButSaysTheSame(t *testing.T) {
	d := clamDocument(t)
	var plain, painted bytes.Buffer
	if err := d.WriteText(&plain, false); err != nil {
		t.Fatal(err)
	}
	if err := d.WriteText(&painted, true); err != nil {
		t.Fatal(err)
	}
	if strings.Contains(plain.String(), "\x1b") || !strings.Contains(painted.String(), "\x1b[1m") {
		t.Error("colour is not where it belongs")
	}
	stripped := regexp.MustCompile("\x1b\\[[0-9;]*m").ReplaceAllString(painted.String(), "")
	if stripped != plain.String() {
		t.Error("colour changes what is said")
	}
}

// Names from a study cannot break the page.
func TestTextOfHostileNames(t *testing.T) {
	long := strings.Repeat("very long name ", 40)
	for _, name := range []string{
		"<script>alert(1)</script>", "\x1b]0;title\a\x1b[2J", "חמוגלובין של צדפה", "血紅蛋白" + long, long,
		strings.Repeat("x", 5000), "\u202egnp.exe", "",
	} {
		d := clamDocument(t)
		d.Study.Title, d.Study.File, d.Study.Origin = name, name, name
		d.analysis.Ligand.Unit = name
		d.Verdict.Leads, d.Verdict.Text = name, name+" leads."
		d.Verdict.Twins = [][]string{{name, "b"}}
		for i := range d.Mechanisms {
			d.Mechanisms[i].Name = name
		}
		for i := range d.Quantities {
			q := &d.Quantities[i]
			q.Mechanism, q.Unit, q.Site = name, name, &name
			q.Curve = strings.ReplaceAll(q.Curve, "pH", name)
		}
		for i := range d.Objections {
			d.Objections[i].Text = name
		}
		var b bytes.Buffer
		if err := d.WriteText(&b, false); err != nil {
			t.Fatal(err)
		}
		for _, line := range strings.Split(b.String(), "\n") {
			if w := width(line); w > Width {
				t.Errorf("%q: %d columns: %s", name[:min(20, len(name))], w, line)
			}
		}
		if strings.ContainsAny(b.String(), "\x1b\a\u202e") {
			t.Errorf("%q reaches the terminal", name)
		}
	}
}

func TestTextIsBounded(t *testing.T) {
	d := clamDocument(t)
	for i := range 300 {
		d.Mechanisms = append(d.Mechanisms, d.Mechanisms[6])
		for _, q := range d.Quantities[:13] {
			q.Curve = fmt.Sprintf("pH %d", i)
			d.Quantities = append(d.Quantities, q)
		}
		d.Objections = append(d.Objections, d.Objections[0])
	}
	var b bytes.Buffer
	if err := d.WriteText(&b, false); err != nil {
		t.Fatal(err)
	}
	if n := strings.Count(b.String(), "\n"); n > 150 {
		t.Errorf("%d lines", n)
	}
	for _, more := range []string{"and 287 more: mechanisms.csv", "more: quantities.csv", "more: result.json"} {
		if !strings.Contains(b.String(), more) {
			t.Errorf("does not say %q", more)
		}
	}
}

// An interrupted run says so before anything else can be read off it.
func TestTextOfInterruptedRun(t *testing.T) {
	d := clamDocument(t)
	d.Interrupted = true
	var b bytes.Buffer
	if err := d.WriteText(&b, false); err != nil {
		t.Fatal(err)
	}
	at, verdict := strings.Index(b.String(), "INTERRUPTED"), strings.Index(b.String(), "WHAT THE DATA SAY")
	if at < 0 || at > verdict {
		t.Errorf("not labelled:\n%s", b.String())
	}
}

func TestSharedWordsAreSaidOnce(t *testing.T) {
	for in, want := range map[string]string{
		"pH 7.0 / pH 7.6":                 "7.0 / 7.6",
		"alanine 0.5 mM / alanine 0 mM":   "0.5 / 0 mM",
		"pH 7.0 − pH 7.6":                 "7.0 − 7.6",
		"treated / control":               "treated / control",
		"state a / state a":               "a / a",
		"pH 7.0, salt 1 / pH 7.6, salt 1": "7.0 / 7.6, salt 1",
		"no pair":                         "no pair",
	} {
		if got := shortContrast(in); got != want {
			t.Errorf("%q: %q, want %q", in, got, want)
		}
	}
	for _, c := range []struct {
		in   []string
		want string
	}{
		{[]string{"pH 7.6", "pH 7.0"}, "pH 7.6, 7.0"},
		{[]string{"alanine 0 mM", "alanine 0.5 mM", "alanine 8 mM"}, "alanine 0, 0.5, 8 mM"},
		{[]string{"a", "b"}, "a, b"}, {[]string{"a"}, "a"}, {nil, ""}, {[]string{"", "x y"}, ", x y"},
	} {
		if got := shortList(c.in); got != c.want {
			t.Errorf("%q: %q, want %q", c.in, got, c.want)
		}
	}
}
