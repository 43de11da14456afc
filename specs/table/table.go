// Package table reads tables of measurements and keeps the place of every
// cell, so that a complaint can point at it.
//
// A table has a header and rows of cells. Numbers, units and the roles of
// columns are settled by who reads the cells.
package table

import (
	"slices"
	"strings"

	"ligancy/specs/diag"
)

// Bounds that keep a mistaken file from exhausting a laptop.
const (
	MaxBytes   = 64 << 20 // of a file
	MaxLine    = 1 << 20  // bytes of one line
	MaxRows    = 200_000
	MaxColumns = 2_000
)

// Table is a header with rows of cells.
type Table struct {
	Name    string
	Text    diag.Text
	Columns []Cell // the header
	Rows    []Row
	// Notes say what was recognised without being asked: separators, a
	// byte-order mark, lines of remarks. Whole phrases without a full stop.
	Notes   []string
	Decimal Decimal
	// Study names the study in remedies; "" where there is none.
	Study string

	separator rune // 0 of a workbook
}

// Row is one row; its cells are as many as the table has columns.
type Row struct {
	Line  int // in the file, from 1
	Cells []Cell
}

// Cell is the text of one cell, blanks around it cut off, and its place.
type Cell struct {
	Text         string
	line, column int32  // from 1
	ref          string // address in a spreadsheet
	kind         kind
}

// kind is what a cell of a workbook holds; cells of text files hold text.
type kind uint8

const (
	someText kind = iota
	plainNumber
	date
	truth
	fault       // the error of a formula, as #DIV/0!
	formulaOnly // a formula without a stored value
)

// Column finds a column by its header.
func (t *Table) Column(name string) (int, bool) {
	i := slices.IndexFunc(t.Columns, func(c Cell) bool { return c.Text == strings.TrimSpace(name) })
	return i, i >= 0 && name != ""
}

// Header lists the names of the columns.
func (t *Table) Header() []string {
	names := make([]string, 0, len(t.Columns))
	for _, c := range t.Columns {
		if c.Text != "" {
			names = append(names, c.Text)
		}
	}
	return names
}

// Values lists the distinct texts of a column, in order of appearance.
func (t *Table) Values(column int) []string {
	var values []string
	seen := map[string]bool{}
	for _, r := range t.Rows {
		if v := r.Cells[column].Text; !seen[v] {
			seen[v] = true
			values = append(values, v)
		}
	}
	return values
}

// At is the place of a cell.
func (t *Table) At(c Cell) diag.Position {
	p := diag.Position{File: t.Name, Line: int(c.line), Column: int(c.column), Cell: c.ref}
	if p.Column > 0 {
		p.End = max(p.Column+t.written(c), p.Column)
	}
	return p
}

// written is how many bytes of its line a cell takes, quotation marks included.
func (t *Table) written(c Cell) int {
	line := t.Text.Line(int(c.line))
	if int(c.column) > len(line) {
		return 0
	}
	rest := line[c.column-1:]
	if !strings.HasPrefix(rest, `"`) {
		if i := strings.IndexRune(rest, t.separator); i >= 0 {
			return i
		}
		return len(rest)
	}
	for i := 1; i < len(rest); i++ {
		if rest[i] != '"' {
			continue
		}
		if i+1 < len(rest) && rest[i+1] == '"' {
			i++
			continue
		}
		return i + 1
	}
	return len(rest)
}

// Complain is a complaint about a cell, its line quoted.
func (t *Table) Complain(c Cell, code, problem string, notes []string,
	remedies ...diag.Remedy) diag.Diagnostic {
	return t.Text.Quote(diag.Diagnostic{Code: code, Position: t.At(c), Problem: problem,
		Notes: notes, Remedies: remedies})
}
