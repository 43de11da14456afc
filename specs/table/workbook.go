package table

import (
	"archive/zip"
	"bytes"
	"fmt"
	"io"
	"path"
	"slices"
	"strconv"
	"strings"

	"github.com/xuri/excelize/v2"

	"ligancy/specs/diag"
)

// Bounds of a workbook: it is an archive, and a small one can unpack to anything.
const (
	maxUnpacked = 96 << 20
	maxParts    = 5_000
	maxCell     = 1 << 16 // bytes of one cell
)

// isWorkbook knows XLSX (Office Open XML, ISO/IEC 29500) and other archives.
func isWorkbook(_ string, data []byte) bool { return bytes.HasPrefix(data, []byte("PK\x03\x04")) }

// isOldWorkbook knows the compound files of XLS, and of workbooks with a password.
func isOldWorkbook(_ string, data []byte) bool {
	return bytes.HasPrefix(data, []byte("\xd0\xcf\x11\xe0"))
}

func refuseOldWorkbook(name, _ string, _ []byte) (*Table, diag.List) {
	return nil, whole(name, "workbook", name+" is an older workbook, or one with a password, and is not read",
		asXLSX, asCSV(name))
}

var asXLSX = diag.Remedy{Say: "Save it as XLSX without a password."}

// asCSV is the remedy that always works.
func asCSV(name string) diag.Remedy {
	csv := strings.TrimSuffix(path.Base(name), path.Ext(name)) + ".csv"
	return diag.Remedy{Say: "Or save the sheet as CSV (UTF-8) beside the study, and write", Write: "file: " + csv}
}

// Sheets lists the sheets of a workbook that hold anything, in its order; nil
// for other files.
func Sheets(name string, data []byte) (filled []string) {
	if !isWorkbook(name, data) || len(data) > MaxBytes {
		return nil
	}
	defer func() {
		if recover() != nil {
			filled = nil
		}
	}()
	w, complaints := openWorkbook(name, data)
	if complaints != nil {
		return nil
	}
	defer w.file.Close()
	return w.filled()
}

// readWorkbook reads one sheet of an XLSX file; sheet may be "" where only one
// holds anything.
func readWorkbook(name, sheet string, data []byte) (t *Table, complaints diag.List) {
	defer func() { // the reader of workbooks may fail over files that no program wrote
		if recover() != nil {
			t, complaints = nil, damaged(name)
		}
	}()
	w, complaints := openWorkbook(name, data)
	if complaints != nil {
		return nil, complaints
	}
	defer w.file.Close()
	if c := w.choose(sheet); c != nil {
		return nil, c
	}
	if c := w.read(); c != nil {
		return nil, c
	}
	w.judge()
	if len(w.Columns) == 0 {
		return nil, w.complaints
	}
	return w.Table, w.complaints
}

// openWorkbook unpacks a workbook, once its size was counted.
func openWorkbook(name string, data []byte) (*workbook, diag.List) {
	if problem := unpackable(data); problem != "" {
		return nil, whole(name, "workbook", name+" "+problem, asXLSX, asCSV(name))
	}
	f, err := excelize.OpenReader(bytes.NewReader(data), excelize.Options{RawCellValue: true,
		UnzipSizeLimit: maxUnpacked, UnzipXMLSizeLimit: maxUnpacked})
	if err != nil {
		return nil, damaged(name)
	}
	return &workbook{delimited: &delimited{Table: &Table{Name: name, Text: diag.Text{Name: name}}},
		file: f, styles: map[int]kind{}}, nil
}

func damaged(name string) diag.List {
	return whole(name, "workbook", name+" is a damaged workbook", diag.Remedy{Say: "Open it in a spreadsheet program and save it again as XLSX."}, asCSV(name))
}

// unpackable says why an archive is no workbook of bearable size; "" where it is.
// Sizes are counted, since those that an archive states may be wrong.
func unpackable(data []byte) string {
	z, err := zip.NewReader(bytes.NewReader(data), int64(len(data)))
	if err != nil {
		return "is a damaged archive"
	}
	if len(z.File) > maxParts {
		return fmt.Sprintf("is an archive of %d parts; a workbook may have %d", len(z.File), maxParts)
	}
	left, found := int64(maxUnpacked), false
	for _, part := range z.File {
		found = found || part.Name == "xl/workbook.xml"
		r, err := part.Open()
		if err != nil {
			return "is a damaged archive"
		}
		n, err := io.Copy(io.Discard, io.LimitReader(r, left+1))
		r.Close()
		if left -= n; left < 0 {
			return fmt.Sprintf("unpacks to more than %d MB", maxUnpacked>>20)
		}
		if err != nil {
			return "is a damaged archive"
		}
	}
	if !found {
		return "is an archive, but no XLSX workbook"
	}
	return ""
}

// workbook is an XLSX file while one of its sheets is read.
type workbook struct {
	*delimited
	file   *excelize.File
	sheet  string
	styles map[int]kind // by index of the style
}

// choose settles which sheet is read.
func (w *workbook) choose(sheet string) diag.List {
	all := w.file.GetSheetList()
	if sheet != "" {
		if !slices.Contains(all, sheet) {
			write := diag.Nearest(sheet, all)
			if write == "" && len(all) == 1 {
				write = all[0]
			}
			c := whole(w.Name, "missing-sheet", fmt.Sprintf("%s has no sheet %q", w.Name, sheet))
			c[0].Notes = []string{"Its sheets are: " + strings.Join(all, ", ") + "."}
			if write != "" {
				c[0].Remedies = []diag.Remedy{{Write: "sheet: " + write}}
			}
			return c
		}
		w.sheet = sheet
		return nil
	}
	filled := w.filled()
	switch len(filled) {
	case 0:
		return whole(w.Name, "empty-table", w.Name+" holds no sheet with anything in it")
	case 1:
		w.sheet = filled[0]
		return nil
	}
	c := whole(w.Name, "which-sheet", fmt.Sprintf("%s has %d sheets, and the study does not say which to read",
		w.Name, len(filled)), diag.Remedy{Write: "sheet: " + filled[0]})
	c[0].Notes = []string{"Its sheets are: " + strings.Join(filled, ", ") + "."}
	return c
}

// filled are the sheets that hold anything.
func (w *workbook) filled() []string {
	var all []string
	for _, s := range w.file.GetSheetList() {
		if w.holdsAnything(s) {
			all = append(all, s)
		}
	}
	return all
}

func (w *workbook) holdsAnything(sheet string) bool {
	rows, err := w.file.Rows(sheet)
	if err != nil {
		return false
	}
	defer rows.Close()
	for rows.Next() {
		if cells, err := rows.Columns(); err == nil && strings.TrimSpace(strings.Join(cells, "")) != "" {
			return true
		}
	}
	return false
}

// read takes the header and the rows of the sheet.
func (w *workbook) read() diag.List {
	w.note(fmt.Sprintf("sheet %q of a workbook", w.sheet))
	rows, err := w.file.Rows(w.sheet)
	if err != nil {
		return damaged(w.Name)
	}
	defer rows.Close()
	var title []Cell // a line of one cell above the header, until the next line tells
	for line := 1; rows.Next(); line++ {
		texts, err := rows.Columns()
		if err != nil {
			return damaged(w.Name)
		}
		cells, problem := w.cells(line, texts)
		if problem != nil {
			return problem
		}
		if len(cells) == 0 {
			if w.started {
				w.blank++
			}
			continue
		}
		if !w.started {
			if head := w.head(cells, &title); head != nil && !w.header(head) {
				return w.complaints
			}
			if !w.started || len(cells) > 1 {
				continue
			}
		}
		if !w.record(line, cells, rows.GetRowOpts().Hidden) {
			break
		}
	}
	if rows.Error() != nil {
		return damaged(w.Name)
	}
	if !w.started && title != nil {
		w.header(title)
	}
	w.merged()
	return nil
}

// head finds the header: the first line of several cells that is no remark; a
// line of one cell above it is a title. Where the next has one cell as well, the
// sheet has one column and the title was its header.
func (w *workbook) head(cells []Cell, title *[]Cell) []Cell {
	switch {
	case strings.HasPrefix(cells[0].Text, "#"):
		return nil
	case len(cells) == 1 && *title == nil:
		*title = cells
		return nil
	}
	w.started = true
	if len(cells) == 1 {
		return *title
	}
	return cells
}

// record takes one row, filled up to the width of the header.
func (w *workbook) record(line int, cells []Cell, hidden bool) bool {
	for c := len(cells); c < len(w.Columns); c++ {
		cells = append(cells, w.cell(line, c, ""))
	}
	if hidden {
		w.complaints = append(w.complaints, diag.Diagnostic{Severity: diag.Warning, Code: "hidden-row",
			Position: w.At(cells[0]), Problem: "this row is hidden in the sheet, and is read",
			Remedies: []diag.Remedy{{Say: "To leave a measurement out, give the table a column of reasons and say", Write: "left_out: COLUMN", Where: "under columns."}}})
	}
	w.row(line, cells)
	if len(w.Rows) > MaxRows {
		w.complain(cells[0], "too-many-rows", fmt.Sprintf("a table may have %d rows", MaxRows), nil,
			diag.Remedy{Say: "Keep the measurements that the study needs."})
		return false
	}
	return true
}

// cells of one row, blank ones at its end cut off.
func (w *workbook) cells(line int, texts []string) ([]Cell, diag.List) {
	for len(texts) > 0 && strings.TrimSpace(texts[len(texts)-1]) == "" {
		texts = texts[:len(texts)-1]
	}
	if len(texts) > MaxColumns {
		return nil, diag.List{w.Complain(w.cell(line, MaxColumns, ""), "too-many-columns",
			fmt.Sprintf("a table may have %d columns", MaxColumns), nil, diag.Remedy{Say: "Write one row per measurement."})}
	}
	cells := make([]Cell, len(texts))
	for i, s := range texts {
		if len(s) > maxCell {
			return nil, diag.List{w.Complain(w.cell(line, i, ""), "long-cell", "this cell holds more text than any measurement", nil)}
		}
		cells[i] = w.cell(line, i, strings.TrimSpace(s))
	}
	return cells, nil
}

// cell at a row from 1 and a column from 0, with what kind of value it holds; of
// an empty one, whether a formula stands there that was never worked out.
func (w *workbook) cell(line, column int, text string) Cell {
	ref, err := excelize.CoordinatesToCellName(column+1, line)
	if err != nil {
		ref = ""
	}
	c := Cell{Text: text, line: int32(line), column: int32(column + 1), ref: ref}
	if text == "" {
		if formula, err := w.file.GetCellFormula(w.sheet, ref); err == nil && formula != "" {
			c.kind = formulaOnly
		}
		return c
	}
	kindOf, err := w.file.GetCellType(w.sheet, ref)
	if err != nil {
		return c
	}
	switch kindOf {
	case excelize.CellTypeBool:
		c.kind, c.Text = truth, strings.NewReplacer("1", "TRUE", "0", "FALSE").Replace(text)
	case excelize.CellTypeError:
		c.kind = fault
	case excelize.CellTypeDate:
		c.kind = date
	case excelize.CellTypeUnset, excelize.CellTypeNumber:
		w.number(&c)
	}
	return c
}

// number settles a cell that holds a number, which a format may show as a date.
func (w *workbook) number(c *Cell) {
	v, err := strconv.ParseFloat(c.Text, 64)
	if err != nil {
		return
	}
	c.kind, c.Text = plainNumber, strconv.FormatFloat(v, 'g', -1, 64)
	style, err := w.file.GetCellStyle(w.sheet, c.ref)
	if err != nil {
		return
	}
	shown, ok := w.styles[style]
	if !ok {
		shown = w.shownAs(style)
		w.styles[style] = shown
	}
	if shown == date {
		c.kind = date
		if t, err := excelize.ExcelDateToTime(v, false); err == nil && v < 3e6 {
			c.Text = t.Format("2006-01-02 15:04")
		}
	}
}

// shownAs says whether a style shows a number as a date or time (ISO/IEC 29500-1,
// 18.8.30: formats 14 to 22, 27 to 36, 45 to 47 and 50 to 58, or one of its own
// with a letter of years, days, hours or seconds outside quotation marks).
func (w *workbook) shownAs(style int) kind {
	s, err := w.file.GetStyle(style)
	if err != nil {
		return plainNumber
	}
	n := s.NumFmt
	if s.CustomNumFmt == nil {
		if n >= 14 && n <= 22 || n >= 27 && n <= 36 || n >= 45 && n <= 47 || n >= 50 && n <= 58 {
			return date
		}
		return plainNumber
	}
	quoted := false
	format := strings.ToLower(*s.CustomNumFmt)
	for i := 0; i < len(format); i++ {
		switch c := format[i]; {
		case c == '"':
			quoted = !quoted
		case quoted:
		case c == '\\' || c == '_' || c == '*':
			i++
		case c == '[': // a colour, a condition, or [h] of elapsed hours
			end := strings.IndexByte(format[i:], ']')
			if end < 0 {
				return plainNumber
			}
			if inside := format[i+1 : i+end]; inside != "" && strings.Trim(inside, "hms") == "" {
				return date
			}
			i += end
		case strings.IndexByte("ydhs", c) >= 0:
			return date
		}
	}
	return plainNumber
}

// merged complains of cells that are joined: only the first of them holds a value.
func (w *workbook) merged() {
	all, err := w.file.GetMergeCells(w.sheet, true)
	if err != nil || len(w.Columns) == 0 {
		return
	}
	top, last := int(w.Columns[0].line), int(w.Columns[0].line)
	if n := len(w.Rows); n > 0 {
		last = w.Rows[n-1].Line
	}
	for _, m := range all {
		c1, r1, err1 := excelize.CellNameToCoordinates(m.GetStartAxis())
		c2, r2, err2 := excelize.CellNameToCoordinates(m.GetEndAxis())
		if err1 != nil || err2 != nil || r2 < top || r1 > last || c1 > len(w.Columns) || c1 == c2 && r1 == r2 {
			continue
		}
		at := w.cell(r1, c1-1, "")
		w.complain(at, "merged-cells", fmt.Sprintf("cells %s to %s are merged into one, so only the first holds a value",
			m.GetStartAxis(), m.GetEndAxis()), nil, diag.Remedy{Say: "Part them, and write the value in each."})
	}
}
