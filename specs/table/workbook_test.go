package table

import (
	"archive/zip"
	"bytes"
	"fmt"
	"io"
	"math"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"

	"ligancy/specs/diag"
)

// book makes a workbook of one sheet, Sheet1, from its cells by address.
func book(t testing.TB, cells map[string]any, edit ...func(*excelize.File)) []byte {
	t.Helper()
	f := excelize.NewFile()
	for ref, v := range cells {
		if err := f.SetCellValue("Sheet1", ref, v); err != nil {
			t.Fatal(err)
		}
	}
	for _, e := range edit {
		e(f)
	}
	var b bytes.Buffer
	if err := f.Write(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// curve is a table with a title above it.
func curve() map[string]any {
	return map[string]any{"A1": "Oxygen, day 1", "A3": "pO2_torr", "B3": "sat", "C3": "prep",
		"A4": 0.1, "B4": 0.2, "C4": "A", "A5": 1, "B5": "0.5", "C5": "A", "A6": 1e-7, "B6": 0.30000000000000004}
}

func TestWorkbook(t *testing.T) {
	tab, complaints := Read("t.xlsx", book(t, curve()))
	if complaints != nil {
		t.Fatal(complaints)
	}
	if got := tab.Header(); !slices.Equal(got, []string{"pO2_torr", "sat", "prep"}) {
		t.Errorf("header %q", got)
	}
	want := [][]float64{{0.1, 0.2}, {1, 0.5}, {1e-7, 0.30000000000000004}}
	for i, r := range tab.Rows {
		if r.Line != i+4 || len(r.Cells) != 3 {
			t.Errorf("row %d is line %d with %d cells", i, r.Line, len(r.Cells))
		}
		for j := range 2 {
			if v, d := tab.Number(r.Cells[j], "x"); d != nil || math.Abs(v-want[i][j]) > 1e-15 { // spreadsheets keep 15 digits
				t.Errorf("row %d: %v, %v", i, v, d)
			}
		}
	}
	if at := tab.At(tab.Rows[1].Cells[1]).String(); at != "t.xlsx:B5" {
		t.Errorf("at %s", at)
	}
	if !slices.Contains(tab.Notes, `sheet "Sheet1" of a workbook`) {
		t.Errorf("notes %q", tab.Notes)
	}
}

// A workbook's numbers have no decimal sign; only cells of text have one.
func TestDecimalCommasOfWorkbooks(t *testing.T) {
	cells := curve()
	cells["B4"], cells["B5"], cells["B6"] = "0,2", "0,5", 0.75
	tab, _ := Read("t.xlsx", book(t, cells))
	tab.FindDecimal([]int{0, 1})
	for i, want := range []float64{0.2, 0.5, 0.75} {
		if v, d := tab.Number(tab.Rows[i].Cells[1], "sat"); d != nil || v != want {
			t.Errorf("row %d: %v, %v", i, v, d)
		}
	}
}

// What a spreadsheet makes of a cell is named, with the cell's address.
func TestCellsOfWorkbooksThatHoldNoNumbers(t *testing.T) {
	format := func(ref string, s *excelize.Style) func(*excelize.File) {
		return func(f *excelize.File) {
			id, err := f.NewStyle(s)
			if err != nil {
				t.Fatal(err)
			}
			if err := f.SetCellStyle("Sheet1", ref, ref, id); err != nil {
				t.Fatal(err)
			}
		}
	}
	custom := func(s string) *excelize.Style { return &excelize.Style{CustomNumFmt: &s} }
	for _, c := range []struct {
		name string
		v    any
		edit func(*excelize.File)
		code string
		says string
	}{
		{"a date", time.Date(2024, 3, 1, 0, 0, 0, 0, time.UTC), nil, "date", "2024-03-01"},
		{"a number shown as a date", 45352, format("B5", &excelize.Style{NumFmt: 14}), "date", "2024-03-01"},
		{"a format of its own", 45352, format("B5", custom(`dd.mm.yyyy`)), "date", ""},
		{"hours that add up", 0.5, format("B5", custom(`[h]:mm`)), "date", ""},
		{"a colour and a word", 0.5, format("B5", custom(`[Red]0.00" days"`)), "", ""},
		{"a truth value", true, nil, "truth-value", "TRUE"},
		{"a word", "lost", nil, "not-a-number", "lost"},
		{"nothing", nil, nil, "empty-cell", ""},
		{"a formula without a value", nil, func(f *excelize.File) { _ = f.SetCellFormula("Sheet1", "B5", "A5*2") }, "formula", ""},
		{"an error", "to be replaced", nil, "formula-error", "#DIV/0!"},
	} {
		t.Run(c.name, func(t *testing.T) {
			cells := curve()
			cells["B5"] = c.v
			edits := []func(*excelize.File){}
			if c.edit != nil {
				edits = append(edits, c.edit)
			}
			data := book(t, cells, edits...)
			if c.code == "formula-error" {
				data = divided(t, data)
			}
			tab, complaints := Read("t.xlsx", data)
			if complaints.HasErrors() {
				t.Fatal(complaints)
			}
			_, d := tab.Number(tab.Rows[1].Cells[1], "sat")
			if c.code == "" {
				if d != nil {
					t.Fatal(d)
				}
				return
			}
			if d == nil || d.Code != c.code || d.Cell != "B5" || !strings.Contains(d.Problem, c.says) {
				t.Errorf("%+v", d)
			}
		})
	}
}

// divided puts the error of a formula into B5, as spreadsheet programs store it.
func divided(t *testing.T, data []byte) []byte {
	return replaced(t, data, "xl/worksheets/sheet1.xml", func(s string) string {
		i := strings.Index(s, `<c r="B5"`)
		j := i + strings.Index(s[i:], "</c>")
		return s[:i] + `<c r="B5" t="e"><v>#DIV/0!</v>` + s[j:]
	})
}

// replaced changes one part of a workbook.
func replaced(t testing.TB, data []byte, part string, change func(string) string) []byte {
	t.Helper()
	z, err := zip.NewReader(bytes.NewReader(data), int64(len(data)))
	if err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	w := zip.NewWriter(&b)
	for _, f := range z.File {
		r, err := f.Open()
		if err != nil {
			t.Fatal(err)
		}
		content, err := io.ReadAll(r)
		if err != nil {
			t.Fatal(err)
		}
		if f.Name == part {
			content = []byte(change(string(content)))
		}
		out, err := w.Create(f.Name)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := out.Write(content); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// codes of complaints with their places.
func codes(l diag.List) []string {
	var all []string
	for _, d := range l {
		all = append(all, d.Code+" "+d.Position.String())
	}
	return all
}

func TestFaultsOfWorkbooks(t *testing.T) {
	sheet := func(f func(*excelize.File) error) func(*excelize.File) {
		return func(b *excelize.File) {
			if err := f(b); err != nil {
				t.Fatal(err)
			}
		}
	}
	second := sheet(func(f *excelize.File) error {
		if _, err := f.NewSheet("day 2"); err != nil {
			return err
		}
		return f.SetCellValue("day 2", "A1", "pO2")
	})
	for _, c := range []struct {
		name  string
		cells map[string]any
		edit  func(*excelize.File)
		sheet string
		want  []string
	}{
		{"merged cells", curve(), sheet(func(f *excelize.File) error { return f.MergeCell("Sheet1", "C4", "C6") }), "", []string{"merged-cells t.xlsx:C4"}},
		{"a merged title", curve(), sheet(func(f *excelize.File) error { return f.MergeCell("Sheet1", "A1", "C1") }), "", nil},
		{"a hidden row", curve(), sheet(func(f *excelize.File) error { return f.SetRowVisible("Sheet1", 5, false) }), "", []string{"hidden-row t.xlsx:A5"}},
		{"a cell too many", with(curve(), "E5", 7), nil, "", []string{"ragged-row t.xlsx:D5"}},
		{"a name twice", with(curve(), "C3", "sat"), nil, "", []string{"repeated-column t.xlsx:C3"}},
		{"nothing at all", map[string]any{}, nil, "", []string{"empty-table t.xlsx"}},
		{"one column", map[string]any{"A1": "sat", "A2": 1, "A3": 2}, nil, "", []string{"one-column t.xlsx:A1"}},
		{"a header alone", map[string]any{"A1": "x", "B1": "y"}, nil, "", []string{"no-rows t.xlsx:A1"}},
		{"two sheets", curve(), second, "", []string{"which-sheet t.xlsx"}},
		{"a sheet of two", curve(), second, "Sheet1", nil},
		{"a sheet that is not there", curve(), second, "Day 2", []string{"missing-sheet t.xlsx"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			edits := []func(*excelize.File){}
			if c.edit != nil {
				edits = append(edits, c.edit)
			}
			_, complaints := ReadSheet("t.xlsx", c.sheet, book(t, c.cells, edits...))
			if got := codes(complaints); !slices.Equal(got, c.want) {
				t.Errorf("%q, want %q", got, c.want)
			}
		})
	}
	if _, c := ReadSheet("t.csv", "day 1", []byte("a,b\n1,2\n")); !slices.Equal(codes(c), []string{"missing-sheet t.csv"}) {
		t.Errorf("a sheet of a text file: %v", c)
	}
}

func with(cells map[string]any, ref string, v any) map[string]any {
	cells[ref] = v
	return cells
}

// An archive of a few kilobytes that unpacks to more than any measurement needs.
func TestSmallArchivesThatUnpackToMuchAreRefused(t *testing.T) {
	var b bytes.Buffer
	w := zip.NewWriter(&b)
	for _, name := range []string{"xl/workbook.xml", "xl/worksheets/sheet1.xml"} {
		out, err := w.Create(name)
		if err != nil {
			t.Fatal(err)
		}
		block := make([]byte, 1<<20)
		for range maxUnpacked>>20/2 + 2 {
			if _, err := out.Write(block); err != nil {
				t.Fatal(err)
			}
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	tab, complaints := Read("bomb.xlsx", b.Bytes())
	if tab != nil || len(complaints) != 1 || !strings.Contains(complaints[0].Problem, "unpacks to more than") {
		t.Errorf("%v of %d bytes", complaints, b.Len())
	}
	b.Reset()
	w = zip.NewWriter(&b)
	for i := range maxParts + 1 {
		if _, err := w.Create(fmt.Sprint(i)); err != nil {
			t.Fatal(err)
		}
	}
	w.Close()
	if _, complaints := Read("parts.xlsx", b.Bytes()); len(complaints) != 1 || !strings.Contains(complaints[0].Problem, "parts") {
		t.Error(complaints)
	}
	if _, complaints := Read("x.ods", zipOf(t, "content.xml")); len(complaints) != 1 || !strings.Contains(complaints[0].Problem, "no XLSX workbook") {
		t.Error(complaints)
	}
}

func zipOf(t *testing.T, name string) []byte {
	t.Helper()
	var b bytes.Buffer
	w := zip.NewWriter(&b)
	if _, err := w.Create(name); err != nil {
		t.Fatal(err)
	}
	w.Close()
	return b.Bytes()
}

// A workbook cut short, or with bytes or parts changed, is a complaint or a table, never more.
func TestDamagedWorkbooks(t *testing.T) {
	whole := book(t, curve())
	for n := 0; n < len(whole); n += 97 {
		settles(t, whole[:n])
		changed := bytes.Clone(whole)
		changed[n] ^= 0x55
		settles(t, changed)
	}
	for _, part := range []string{"xl/workbook.xml", "xl/worksheets/sheet1.xml", "xl/sharedStrings.xml", "xl/styles.xml", "[Content_Types].xml"} {
		for _, junk := range []string{"", "<", "\xff\xfe", "<worksheet><sheetData><row r=\"-1\"><c r=\"ZZZZ9\" t=\"s\"><v>99</v></c></row></sheetData></worksheet>",
			"<worksheet><sheetData><row r=\"1\"><c r=\"A1\" s=\"9999\" t=\"q\"><v>1e999</v></c><c><v>NaN</v></c></row></sheetData></worksheet>"} {
			settles(t, replaced(t, whole, part, func(string) string { return junk }))
		}
		settles(t, replaced(t, whole, part, func(s string) string { return s[:len(s)/2] }))
	}
}

// settles reads data as a workbook and uses what comes.
func settles(t testing.TB, data []byte) {
	t.Helper()
	tab, complaints := readWorkbook("t.xlsx", "", data)
	if tab == nil && len(complaints) == 0 {
		t.Fatal("neither a table nor a complaint")
	}
	if tab == nil {
		return
	}
	tab.FindDecimal(nil)
	for _, r := range tab.Rows {
		if len(r.Cells) != len(tab.Columns) {
			t.Fatalf("line %d has %d cells of %d", r.Line, len(r.Cells), len(tab.Columns))
		}
		for _, c := range r.Cells {
			_, _ = tab.Number(c, "x")
			tab.At(c)
		}
	}
}

func TestSheets(t *testing.T) {
	data := book(t, curve(), func(f *excelize.File) {
		_, _ = f.NewSheet("empty")
		_, _ = f.NewSheet("more")
		_ = f.SetCellValue("more", "C7", 1)
	})
	if got := Sheets("t.xlsx", data); !slices.Equal(got, []string{"Sheet1", "more"}) {
		t.Errorf("%q", got)
	}
	if got := Sheets("t.csv", []byte("a,b\n1,2\n")); got != nil {
		t.Errorf("%q", got)
	}
}

func FuzzWorkbook(f *testing.F) {
	whole := book(f, curve())
	f.Add("<worksheet><sheetData><row r=\"1\"><c r=\"A1\"><v>1</v></c></row></sheetData></worksheet>", "<sst/>")
	f.Fuzz(func(t *testing.T, sheet, shared string) {
		data := replaced(t, whole, "xl/worksheets/sheet1.xml", func(string) string { return sheet })
		settles(t, replaced(t, data, "xl/sharedStrings.xml", func(string) string { return shared }))
	})
}
