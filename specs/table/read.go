package table

import (
	"bytes"
	"fmt"
	"path"
	"strings"
	"unicode/utf8"

	"ligancy/specs/diag"
)

// Reader reads one file format.
type Reader func(name string, data []byte) (*Table, diag.List)

// format is a file format: how to know it, and how to read it.
type format struct {
	is   func(name string, data []byte) bool
	read Reader
}

// formats are tried in order; the last takes whatever is text.
var formats = []format{
	{isWorkbook, refuseWorkbook},
	{func(string, []byte) bool { return true }, readDelimited},
}

// Read reads a table in whichever format the file is. The table is nil where
// there is nothing to work with.
func Read(name string, data []byte) (*Table, diag.List) {
	if len(data) > MaxBytes {
		return nil, whole(name, "file-too-large", fmt.Sprintf("%s has %d MB; a table may have %d", name, len(data)>>20, MaxBytes>>20),
			diag.Remedy{Say: "Keep the measurements that the study needs, one row each."})
	}
	for _, f := range formats {
		if f.is(name, data) {
			return f.read(name, data)
		}
	}
	return nil, nil
}

// whole is a complaint about a file as a whole.
func whole(name, code, problem string, remedies ...diag.Remedy) diag.List {
	return diag.List{{Code: code, Position: diag.Position{File: name}, Problem: problem, Remedies: remedies}}
}

// isWorkbook knows XLSX and ODS (zip archives) and the older XLS by their first bytes.
func isWorkbook(_ string, data []byte) bool {
	return bytes.HasPrefix(data, []byte("PK\x03\x04")) || bytes.HasPrefix(data, []byte("\xd0\xcf\x11\xe0"))
}

func refuseWorkbook(name string, _ []byte) (*Table, diag.List) {
	csv := strings.TrimSuffix(path.Base(name), path.Ext(name)) + ".csv"
	return nil, whole(name, "workbook", name+" is a spreadsheet workbook, which cannot be read yet",
		diag.Remedy{Say: "Save the sheet as CSV (UTF-8) beside the study, and write", Write: "file: " + csv})
}

// decode makes UTF-8 text with one kind of line end of a file, or complains.
func decode(name string, data []byte) (text string, bom bool, complaints diag.List) {
	saveAs := diag.Remedy{Say: "Save the table again as CSV with the encoding UTF-8."}
	switch {
	case len(bytes.TrimSpace(bytes.TrimPrefix(data, []byte("\ufeff")))) == 0:
		return "", false, whole(name, "empty-table", name+" is empty",
			diag.Remedy{Say: "Write a first line that names the columns, as", Write: "conc_uM,response"})
	case bytes.HasPrefix(data, []byte{0xff, 0xfe}), bytes.HasPrefix(data, []byte{0xfe, 0xff}), looksUTF16(data):
		return "", false, whole(name, "utf-16", name+" is saved as UTF-16", saveAs)
	}
	data, bom = bytes.CutPrefix(data, []byte("\ufeff"))
	src := diag.NewText(name, data)
	if i := bytes.IndexByte(data, 0); i >= 0 {
		return "", bom, placed(src, data, i, "binary-table", name+" is not a text file: it holds a zero byte",
			diag.Remedy{Say: "Export the table as CSV or TSV from the program that wrote it."})
	}
	if !utf8.Valid(data) {
		i := firstInvalid(data)
		return "", bom, placed(src, data, i, "not-utf-8", fmt.Sprintf("byte 0x%02X is not UTF-8", data[i]), saveAs)
	}
	for n, line := range src.Lines {
		if len(line) > MaxLine {
			d := src.Quote(diag.Diagnostic{Code: "line-too-long", Position: src.At(n+1, MaxLine+1, MaxLine+1),
				Problem:  fmt.Sprintf("this line has %d bytes; a line of a table may have %d", len(line), MaxLine),
				Remedies: []diag.Remedy{{Say: "Write one row of the table in each line."}}})
			return "", bom, diag.List{d}
		}
	}
	return strings.Join(src.Lines, "\n"), bom, nil
}

// looksUTF16 knows two-byte text without its mark: every second byte is zero.
func looksUTF16(data []byte) bool {
	n := min(len(data), 200) &^ 1
	even, odd := 0, 0
	for i := 0; i+1 < n; i += 2 {
		if data[i] == 0 {
			even++
		}
		if data[i+1] == 0 {
			odd++
		}
	}
	return n >= 8 && max(even, odd) > n/2*9/10 && min(even, odd) == 0
}

// placed is a complaint about one byte of a file.
func placed(src diag.Text, data []byte, offset int, code, problem string, r diag.Remedy) diag.List {
	before := strings.ReplaceAll(string(data[:offset]), "\r\n", "\n")
	before = strings.ReplaceAll(before, "\r", "\n")
	line := strings.Count(before, "\n") + 1
	column := len(before) - strings.LastIndexByte(before, '\n')
	return diag.List{src.Quote(diag.Diagnostic{Code: code, Position: src.At(line, column, column+1), Problem: problem, Remedies: []diag.Remedy{r}})}
}

func firstInvalid(data []byte) int {
	for i := 0; i < len(data); {
		r, size := utf8.DecodeRune(data[i:])
		if r == utf8.RuneError && size <= 1 {
			return i
		}
		i += size
	}
	return 0
}
