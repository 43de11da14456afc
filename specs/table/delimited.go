package table

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"path"
	"strconv"
	"strings"

	"ligancy/specs/diag"
	"ligancy/specs/units"
)

// delimited is a CSV or TSV file (RFC 4180) while it is read.
type delimited struct {
	*Table
	complaints diag.List
	blank      int // rows without any text
	next       int // first line that no record has taken yet
	started    bool
}

// readDelimited reads comma-, semicolon- or tab-separated text.
func readDelimited(name string, data []byte) (*Table, diag.List) {
	if len(bytes.TrimSpace(bytes.TrimPrefix(data, []byte("\ufeff")))) == 0 {
		return nil, whole(name, "empty-table", name+" is empty",
			diag.Remedy{Say: "Write a first line that names the columns, as",
				Write: "conc_uM,response"})
	}
	text, marked, complaints := diag.Decode(name, data, MaxLine)
	if complaints != nil {
		return nil, complaints
	}
	d := &delimited{Table: &Table{Name: name, Text: text}, next: 1}
	d.separator = separator(name, d.Text.Lines)
	if marked {
		d.note("its byte-order mark was passed over")
	}
	if d.separator == ';' {
		d.note("its columns are set apart by semicolons")
	}
	d.records(strings.Join(text.Lines, "\n"))
	if d.blank > 0 {
		d.note(count(d.blank, "row") + " without any text passed over")
	}
	d.judge()
	if len(d.Columns) == 0 {
		return nil, d.complaints
	}
	return d.Table, d.complaints
}

func (d *delimited) note(s string) { d.Notes = append(d.Notes, s) }

func (d *delimited) complain(c Cell, code, problem string, notes []string,
	remedies ...diag.Remedy) {
	d.complaints = append(d.complaints, d.Complain(c, code, problem, notes, remedies...))
}

// separator finds what parts the columns, by the first line that is no remark.
func separator(name string, lines []string) rune {
	header := ""
	for _, l := range lines {
		if !strings.HasPrefix(l, "#") && strings.TrimSpace(l) != "" {
			header = l
			break
		}
	}
	var tabs, semicolons, commas int
	quoted := false
	for _, r := range header {
		switch {
		case r == '"':
			quoted = !quoted
		case quoted:
		case r == '\t':
			tabs++
		case r == ';':
			semicolons++
		case r == ',':
			commas++
		}
	}
	ext := strings.ToLower(path.Ext(name))
	switch {
	case tabs > 0 && (tabs >= commas && tabs >= semicolons || ext == ".tsv" || ext == ".tab"):
		return '\t'
	case semicolons > 0 && semicolons >= commas:
		return ';'
	}
	return ','
}

// records reads the header and the rows.
func (d *delimited) records(text string) {
	r := csv.NewReader(strings.NewReader(text))
	r.Comma, r.Comment, r.FieldsPerRecord = d.separator, '#', -1
	for {
		record, err := r.Read()
		if err == io.EOF {
			d.remarks(len(d.Text.Lines) + 1)
			return
		}
		var syntax *csv.ParseError
		if errors.As(err, &syntax) {
			d.quoting(syntax)
			return
		}
		if err != nil {
			d.complaints = append(d.complaints, whole(d.Name, "unreadable",
				d.Name+" cannot be read: "+err.Error())...)
			return
		}
		if !d.take(r, record) {
			return
		}
	}
}

// take adds one record; false means that nothing more is to be read.
func (d *delimited) take(r *csv.Reader, record []string) bool {
	cells := make([]Cell, len(record))
	for i, s := range record {
		line, column := r.FieldPos(i)
		cells[i] = Cell{Text: strings.TrimSpace(s), line: int32(line), column: int32(column)}
	}
	line := int(cells[0].line)
	d.remarks(line)
	d.next = line + 1 + strings.Count(strings.Join(record, ""), "\n")
	if strings.TrimSpace(strings.Join(record, "")) == "" {
		d.blank++
		return true
	}
	if !d.started {
		d.started = true
		return d.header(cells)
	}
	d.row(line, cells)
	if len(d.Rows) > MaxRows {
		d.complain(cells[0], "too-many-rows", fmt.Sprintf("a table may have %d rows", MaxRows), nil,
			diag.Remedy{Say: "Keep the measurements that the study needs."})
		return false
	}
	return true
}

// header takes the names of the columns.
func (d *delimited) header(cells []Cell) bool {
	for len(cells) > 0 && cells[len(cells)-1].Text == "" {
		cells = cells[:len(cells)-1]
	}
	if len(cells) > MaxColumns {
		d.complain(cells[MaxColumns], "too-many-columns", fmt.Sprintf("a table may have %d columns",
			MaxColumns), nil,
			diag.Remedy{Say: "Write one row per measurement."})
		return false
	}
	d.Columns = cells
	return true
}

// row takes one row, and complains when it has not as many cells as the header.
func (d *delimited) row(line int, cells []Cell) {
	n := len(d.Columns)
	for len(cells) > n && cells[len(cells)-1].Text == "" {
		cells = cells[:len(cells)-1]
	}
	if len(cells) == n {
		d.Rows = append(d.Rows, Row{Line: line, Cells: cells})
		return
	}
	at := cells[min(len(cells)-1, n)]
	var notes []string
	remedy := diag.Remedy{Say: "Write one cell for each column; an empty cell is nothing between two separators."}
	if i := splitDecimal(cells); len(cells) > n && i >= 0 && d.separator == ',' {
		at = cells[i]
		notes = []string{fmt.Sprintf("A decimal comma may have cut %s,%s in two.", cells[i].Text,
			cells[i+1].Text)}
		remedy = diag.Remedy{Write: cells[i].Text + "." + cells[i+1].Text,
			Where: "or separate the columns with semicolons."}
	}
	d.complain(at, "ragged-row", fmt.Sprintf("this row has %s, the header has %d", count(len(cells),
		"cell"), n), notes, remedy)
}

// splitDecimal finds two neighbouring cells that look like 0 and 83 of 0,83.
func splitDecimal(cells []Cell) int {
	for i := 0; i+1 < len(cells); i++ {
		a, b := cells[i].Text, cells[i+1].Text
		if _, err := strconv.ParseUint(strings.TrimLeft(a, "+-"), 10, 64); err != nil {
			continue
		}
		if _, err := strconv.ParseUint(b, 10, 64); err == nil && (a == "0" || len(b) > 1) {
			return i
		}
	}
	return -1
}

// remarks counts the lines that begin with # up to a record. Those above the
// header are remarks; further down they may be rows that somebody hid.
func (d *delimited) remarks(line int) {
	n := 0
	for l := d.next; l < line && l <= len(d.Text.Lines); l++ {
		if !strings.HasPrefix(d.Text.Line(l), "#") {
			continue
		}
		n++
		if d.started {
			s := d.Text.Line(l)
			w := d.Text.Quote(diag.Diagnostic{Severity: diag.Warning, Code: "hidden-row",
				Position: d.Text.At(l, 1, 1+len(s)),
				Problem:  "this line begins with # and is not read",
				Remedies: []diag.Remedy{{Say: "To leave a measurement out, give the table a column of reasons and say", Write: "left_out: COLUMN", Where: "under columns."}}})
			d.complaints = append(d.complaints, w)
		}
	}
	if n > 0 && !d.started {
		d.note(count(n, "line") + " of remarks above the header")
	}
}

// quoting complains of quotation marks in our own words.
func (d *delimited) quoting(e *csv.ParseError) {
	at, problem := d.Text.At(e.Line, e.Column, e.Column+1),
		"this cell holds a quotation mark but does not begin with one"
	if errors.Is(e.Err, csv.ErrQuote) {
		at, problem = d.Text.At(e.Line, max(e.Column, 1), e.Column+1),
			"text follows the closing quotation mark of this cell"
		if e.StartLine != e.Line || e.Line >= len(d.Text.Lines) {
			s := d.Text.Line(e.StartLine)
			at, problem = d.Text.At(e.StartLine, max(strings.LastIndex(s, `"`)+1, 1), len(s)+1),
				"the quotation mark that opens here is never closed"
		}
	}
	d.complaints = append(d.complaints, d.Text.Quote(diag.Diagnostic{Code: "quotation-mark",
		Position: at, Problem: problem,
		Remedies: []diag.Remedy{{Say: "Put the whole cell in quotation marks and double those inside it, as", Write: `"5"" disk"`}}}))
}

// judge looks at the table as a whole.
func (d *delimited) judge() {
	switch {
	case len(d.Columns) == 0:
		if len(d.complaints) == 0 {
			d.complaints = whole(d.Name, "empty-table", d.Name+" holds no table, only remarks",
				diag.Remedy{Say: "Write a line that names the columns, as",
					Write: "conc_uM,response"})
		}
		return
	case len(d.Columns) == 1:
		if d.separator == 0 {
			d.complain(d.Columns[0], "one-column", "the sheet has only one column", nil,
				diag.Remedy{Say: "Write the ligand and the response in columns of their own."})
			return
		}
		d.complain(d.Columns[0], "one-column", d.Name+" has only one column",
			[]string{"Columns are set apart by commas, semicolons or tabs."},
			diag.Remedy{Say: "Save the table again with one of these between the columns."})
		return
	}
	numbers := true
	for _, c := range d.Columns {
		_, err := units.ParseNumber(c.Text)
		numbers = numbers && err == nil
	}
	if numbers {
		d.complain(d.Columns[0], "no-header",
			"the first line holds numbers only, so the columns have no names", nil,
			diag.Remedy{Say: "Write a first line that names the columns, as",
				Write: "conc_uM,response"})
	}
	d.repeated()
	if len(d.Rows) == 0 && len(d.complaints) == 0 {
		d.complain(d.Columns[0], "no-rows", d.Name+" has a header and no rows", nil,
			diag.Remedy{Say: "Write one row per measurement."})
	}
}

// repeated complains of columns with the same name.
func (d *delimited) repeated() {
	seen := map[string]int{}
	for i, c := range d.Columns {
		if c.Text == "" {
			continue
		}
		if j, ok := seen[c.Text]; ok {
			d.complain(c, "repeated-column", fmt.Sprintf("columns %d and %d are both named %q", j+1,
				i+1, c.Text), nil,
				diag.Remedy{Say: "Give each column a name of its own, as", Write: c.Text + "_2"})
			continue
		}
		seen[c.Text] = i
	}
}

// count writes "1 row" or "3 rows".
func count(n int, thing string) string {
	if n == 1 {
		return "1 " + thing
	}
	return fmt.Sprintf("%d %ss", n, thing)
}
