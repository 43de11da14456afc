// Package diag is complaints about files as data: how bad, a code, where, one
// sentence, and what to write instead.
//
// Readers collect every complaint that they can find into a List; writers turn
// the list into text for people or JSON for programs.
package diag

import (
	"cmp"
	"fmt"
	"slices"
	"strings"
)

// Severity says how bad a complaint is.
type Severity uint8

const (
	// Error: the file cannot be used until this is mended.
	Error Severity = iota
	// Warning: the file can be used, and the author should look.
	Warning
)

func (s Severity) String() string {
	if s == Warning {
		return "warning"
	}
	return "error"
}

// MarshalText writes "error" or "warning".
func (s Severity) MarshalText() ([]byte, error) { return []byte(s.String()), nil }

// Position is a place in a file. The zero Line is the file as a whole, the
// zero Column the line as a whole.
type Position struct {
	File   string `json:"file"`
	Line   int    `json:"line,omitempty"`   // from 1
	Column int    `json:"column,omitempty"` // byte in the line, from 1
	End    int    `json:"end,omitempty"`    // byte just after the span, on the same line
	Cell   string `json:"cell,omitempty"`   // of a spreadsheet: "C31" or "Sheet1!C31"
}

// String is the place as compilers write it: clam.yaml:9:20.
func (p Position) String() string {
	switch {
	case p.Cell != "":
		return p.File + ":" + p.Cell
	case p.Line == 0:
		return p.File
	case p.Column == 0:
		return fmt.Sprintf("%s:%d", p.File, p.Line)
	}
	return fmt.Sprintf("%s:%d:%d", p.File, p.Line, p.Column)
}

// Remedy is one way to mend a complaint: "Write   ligand: pO2_torr".
type Remedy struct {
	Say   string `json:"say"`             // "Write", or a condition: "If only this cell has one, write"
	Write string `json:"write"`           // exactly what to write
	Where string `json:"where,omitempty"` // "under this data set in clam.yaml."
}

// Diagnostic is one complaint.
type Diagnostic struct {
	Severity Severity `json:"severity"`
	Code     string   `json:"code"` // a word of our own: "missing-column"
	Position
	Problem  string   `json:"problem"`            // one sentence without a full stop
	Notes    []string `json:"notes,omitempty"`    // why, or what there is instead; whole sentences
	Remedies []Remedy `json:"remedies,omitempty"` // what to write
	Source   string   `json:"source,omitempty"`   // the line, as it stands in the file
	From     int      `json:"from,omitempty"`     // bytes of the line that Source leaves out before it
}

func (d Diagnostic) Error() string { return d.Position.String() + ": " + d.Problem }

// List is complaints about one study and its tables.
type List []Diagnostic

// Errors counts the complaints that are errors.
func (l List) Errors() int {
	n := 0
	for _, d := range l {
		if d.Severity == Error {
			n++
		}
	}
	return n
}

// HasErrors reports whether anything must be mended.
func (l List) HasErrors() bool { return l.Errors() > 0 }

// Sorted returns the list in order of file, line and column, each complaint
// once. Files keep the order in which they first appear in the list.
func (l List) Sorted() List {
	order := map[string]int{}
	for _, d := range l {
		if _, ok := order[d.File]; !ok {
			order[d.File] = len(order)
		}
	}
	s := slices.Clone(l)
	slices.SortStableFunc(s, func(a, b Diagnostic) int {
		return cmp.Or(
			cmp.Compare(order[a.File], order[b.File]),
			cmp.Compare(a.Line, b.Line),
			cmp.Compare(a.Column, b.Column),
			cmp.Compare(a.Severity, b.Severity),
			strings.Compare(a.Code, b.Code),
			strings.Compare(a.Problem, b.Problem),
		)
	})
	return slices.CompactFunc(s, func(a, b Diagnostic) bool {
		return a.Position == b.Position && a.Code == b.Code && a.Problem == b.Problem
	})
}

// Capped keeps the first few complaints of each code and file, and says on the
// last of them how many there are more.
func (l List) Capped(each int) List {
	type kind struct{ file, code string }
	seen, last := map[kind]int{}, map[kind]int{}
	var kept List
	for _, d := range l {
		k := kind{d.File, d.Code}
		if seen[k]++; seen[k] > each {
			continue
		}
		last[k] = len(kept)
		kept = append(kept, d)
	}
	for k, n := range seen {
		if n > each {
			d := &kept[last[k]]
			d.Notes = append(slices.Clone(d.Notes),
				fmt.Sprintf("There are %d more of this kind in %s.", n-each, k.file))
		}
	}
	return kept
}
