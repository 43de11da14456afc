package table

import (
	"fmt"
	"strings"

	"ligancy/specs/diag"
	"ligancy/specs/units"
)

// Decimal says how a table writes its decimal sign.
type Decimal uint8

const (
	Point Decimal = iota
	Comma
)

// IsEmpty reports a cell without a value: nothing, or the NA of statistics programs.
func (c Cell) IsEmpty() bool { return c.Text == "" || c.Text == "NA" }

// Number reads a cell as a number; column is the name to complain under.
func (t *Table) Number(c Cell, column string) (float64, *diag.Diagnostic) {
	if d := t.otherKind(c, column); d != nil {
		return 0, d
	}
	text := c.Text
	if t.Decimal == Comma && c.kind != plainNumber {
		if strings.Contains(text, ".") {
			d := t.Complain(c, "not-a-number",
				fmt.Sprintf("column %s: %q has a point, but decimals are written with commas here",
					column, text), nil,
				diag.Remedy{Write: withComma(text)})
			return 0, &d
		}
		text = strings.Replace(text, ",", ".", 1)
	}
	v, err := units.ParseNumber(text)
	if err == nil {
		return v, nil
	}
	d := t.notNumber(c, column, err.(*units.SyntaxError))
	return 0, &d
}

// otherKind complains of a cell of a workbook that holds no number whatever its text.
func (t *Table) otherKind(c Cell, column string) *diag.Diagnostic {
	var d diag.Diagnostic
	switch c.kind {
	case date:
		d = t.Complain(c, "date", fmt.Sprintf("column %s: this cell holds a date or time, %s", column, c.Text),
			[]string{"Spreadsheet programs make dates of what looks like one, such as 1-3 or 1.3."},
			diag.Remedy{Say: "Format the cell as a number and write the number again."})
	case truth:
		d = t.Complain(c, "truth-value", fmt.Sprintf("column %s: %s is a truth value, not a number", column, c.Text),
			nil, diag.Remedy{Say: "Write the number."})
	case fault:
		d = t.Complain(c, "formula-error", fmt.Sprintf("column %s: %s is the error of a formula", column, c.Text),
			nil, diag.Remedy{Say: "Mend the formula, or write the number."})
	case formulaOnly:
		d = t.Complain(c, "formula", fmt.Sprintf("column %s: this formula was never worked out", column),
			[]string{"Formulas are not worked out here: their stored values are read."},
			diag.Remedy{Say: "Open the workbook in a spreadsheet program and save it."})
	default:
		return nil
	}
	return &d
}

// withComma writes 0.83 as 0,83 and 1.234,5 as 1234,5.
func withComma(s string) string {
	if strings.Contains(s, ",") {
		return strings.ReplaceAll(s, ".", "")
	}
	return strings.Replace(s, ".", ",", 1)
}

func (t *Table) notNumber(c Cell, column string, e *units.SyntaxError) diag.Diagnostic {
	leaveOut := diag.Remedy{Say: "Write the number, or leave the row out: with a column of reasons, say", Write: "left_out: COLUMN", Where: "under columns."}
	if c.IsEmpty() {
		return t.Complain(c, "empty-cell", fmt.Sprintf("column %s: a number is missing", column),
			nil, leaveOut)
	}
	problem := fmt.Sprintf("column %s: %s", column, e.Problem)
	if t.Decimal == Point && strings.Count(c.Text, ",") == 1 && !strings.Contains(c.Text, ".") &&
		e.Write != "" {
		study := t.Study
		if study == "" {
			study = "the study"
		}
		return t.Complain(c, "decimal-comma", problem, nil,
			diag.Remedy{Say: "If the whole file has decimal commas, say", Write: "decimal: comma",
				Where: "under this data set in " + study + "."},
			diag.Remedy{Say: "If only this cell has one, write", Write: e.Write})
	}
	if e.Write != "" {
		write := e.Write
		if t.Decimal == Comma {
			write = withComma(write)
		}
		return t.Complain(c, "not-a-number", problem, nil, diag.Remedy{Write: write})
	}
	return t.Complain(c, "not-a-number", problem, nil, leaveOut)
}

// FindDecimal decides by the cells of some columns whether decimals are
// written with commas: only where columns are set apart by semicolons or tabs,
// and no number has a point. It says so in Notes.
func (t *Table) FindDecimal(columns []int) {
	if t.separator == ',' || t.Decimal == Comma {
		return
	}
	commas, points := 0, 0
	for _, r := range t.Rows {
		for _, i := range columns {
			if r.Cells[i].kind != someText {
				continue
			}
			s := r.Cells[i].Text
			if _, err := units.ParseNumber(s); err == nil {
				if strings.Contains(s, ".") {
					points++
				}
			} else if _, err := units.ParseNumber(strings.Replace(s, ",", ".", 1)); err == nil {
				commas++
			}
		}
	}
	if commas > 0 && points == 0 {
		t.Decimal = Comma
		t.Notes = append(t.Notes, "its decimal commas were read as such")
	}
}
