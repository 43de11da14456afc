package table

import (
	"bytes"
	"fmt"
	"path"
	"strings"

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
		return nil, whole(name, "file-too-large", fmt.Sprintf("%s has %d MB; a table may have %d",
			name, len(data)>>20, MaxBytes>>20),
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
	return diag.List{{Code: code, Position: diag.Position{File: name}, Problem: problem,
		Remedies: remedies}}
}

// isWorkbook knows XLSX and ODS (zip archives) and the older XLS by their first bytes.
func isWorkbook(_ string, data []byte) bool {
	return bytes.HasPrefix(data, []byte("PK\x03\x04")) || bytes.HasPrefix(data,
		[]byte("\xd0\xcf\x11\xe0"))
}

func refuseWorkbook(name string, _ []byte) (*Table, diag.List) {
	csv := strings.TrimSuffix(path.Base(name), path.Ext(name)) + ".csv"
	return nil, whole(name, "workbook", name+" is a spreadsheet workbook, which cannot be read yet",
		diag.Remedy{Say: "Save the sheet as CSV (UTF-8) beside the study, and write",
			Write: "file: " + csv})
}
