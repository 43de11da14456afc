package record

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"gopkg.in/yaml.v3"

	"ligancy/specs/diag"
)

// Bounds of a record.
const (
	MaxBytes = 8 << 20
	maxLine  = 1 << 20
)

// IsRecord tells a record from other files of YAML by its format, which stands
// at the beginning of a line.
func IsRecord(data []byte) bool {
	return slices.ContainsFunc(strings.Split(string(data), "\n"), func(l string) bool {
		return strings.HasPrefix(strings.TrimPrefix(l, "\ufeff"), "format: ligancy-record/")
	})
}

// Read reads a record; it is nil where it cannot be used.
func Read(name string, data []byte) (*Record, diag.List) {
	if len(data) > MaxBytes {
		return nil, fault(diag.Position{File: name}, "file-too-large",
			fmt.Sprintf("%s has %d MB; a record has less than %d", name, len(data)>>20, MaxBytes>>20))
	}
	text, _, complaints := diag.Decode(name, data, maxLine)
	if complaints != nil {
		return nil, complaints
	}
	if c := conflict(text); c != nil {
		return nil, c
	}
	if !IsRecord(data) {
		return nil, otherFormat(text, "")
	}
	r := &Record{}
	d := yaml.NewDecoder(bytes.NewReader(bytes.TrimPrefix(data, []byte("\ufeff"))))
	d.KnownFields(true)
	if err := d.Decode(r); err != nil && !(errors.Is(err, io.EOF) && r.Format != "") {
		return nil, unreadable(text, r.Format, err)
	}
	if r.Format != Format {
		return nil, otherFormat(text, r.Format)
	}
	if problem := r.fault(); problem != "" {
		return nil, fault(diag.Position{File: name}, "bad-record", problem)
	}
	slices.SortStableFunc(r.Mechanisms, func(a, b Mechanism) int { return strings.Compare(a.Name, b.Name) })
	return r, nil
}

// again is the remedy for a record that cannot be used.
var again = diag.Remedy{Say: "Write it again with", Write: "ligancy fit --record STUDY"}

func fault(at diag.Position, code, problem string) diag.List {
	return diag.List{{Code: code, Position: at, Problem: problem, Remedies: []diag.Remedy{again}}}
}

// conflict finds the marks that version control leaves where two versions met.
func conflict(t diag.Text) diag.List {
	for i, l := range t.Lines {
		if strings.HasPrefix(l, "<<<<<<< ") || strings.HasPrefix(l, ">>>>>>> ") {
			return diag.List{t.Quote(diag.Diagnostic{Code: "conflict", Position: t.At(i+1, 1, len(l)+1),
				Problem:  "two versions of this record met here and neither was chosen",
				Remedies: []diag.Remedy{{Say: "Choose one, or write the record again with", Write: "ligancy fit --record STUDY"}}})}
		}
	}
	return nil
}

func otherFormat(t diag.Text, format string) diag.List {
	problem := t.Name + " is no record of a fit"
	if strings.HasPrefix(format, "ligancy-record/") {
		problem = fmt.Sprintf("%s is in the format %q, which this version does not read", t.Name, format)
	}
	return fault(diag.Position{File: t.Name}, "bad-format", problem)
}

var yamlLine = regexp.MustCompile(`line (\d+): (.*)`)

// unreadable says where a record is no longer what was written.
func unreadable(t diag.Text, format string, err error) diag.List {
	m := yamlLine.FindStringSubmatch(err.Error())
	if m == nil || format != "" && format != Format {
		return otherFormat(t, format)
	}
	n, _ := strconv.Atoi(m[1])
	n = min(max(n, 1), len(t.Lines))
	return diag.List{t.Quote(diag.Diagnostic{Code: "bad-record", Position: t.At(n, 1, len(t.Line(n))+1),
		Problem:  "this line is not what a record holds here",
		Notes:    []string{"Records are written by the program; this one was changed, or cut short."},
		Remedies: []diag.Remedy{again}})}
}

// fault is the first thing that no written record has; "" where all is well.
func (r *Record) fault() string {
	seen := map[string]bool{}
	for i := range r.Mechanisms {
		m := &r.Mechanisms[i]
		if m.Name == "" || seen[m.Name] {
			return fmt.Sprintf("mechanism %d has no name of its own", i+1)
		}
		seen[m.Name] = true
		keys := map[string]bool{}
		for j := range m.Numbers {
			n := &m.Numbers[j]
			for _, x := range []*float64{n.Value, n.Low, n.High} {
				if x != nil && !finite(*x) {
					return fmt.Sprintf("%s of %q is no number", n.Name, m.Name)
				}
			}
			if keys[n.key()] {
				return fmt.Sprintf("%s of %q stands there twice", n.Name, m.Name)
			}
			keys[n.key()] = true
		}
	}
	return ""
}
