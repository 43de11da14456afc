package table

import (
	"fmt"

	"ligancy/specs/diag"
)

// Reader reads one file format. The sheet is "" where none was named.
type Reader func(name, sheet string, data []byte) (*Table, diag.List)

// format is a file format: how to know it, and how to read it.
type format struct {
	is   func(name string, data []byte) bool
	read Reader
}

// formats are tried in order; the last takes whatever is text.
var formats = []format{
	{isWorkbook, readWorkbook},
	{isOldWorkbook, refuseOldWorkbook},
	{func(string, []byte) bool { return true }, readText},
}

// Read reads a table in whichever format the file is; of a workbook, the one
// sheet that holds anything. The table is nil where there is nothing to work with.
func Read(name string, data []byte) (*Table, diag.List) { return ReadSheet(name, "", data) }

// ReadSheet is Read with the name of a sheet, which only workbooks have.
func ReadSheet(name, sheet string, data []byte) (*Table, diag.List) {
	if len(data) > MaxBytes {
		return nil, whole(name, "file-too-large", fmt.Sprintf("%s has %d MB; a table may have %d",
			name, len(data)>>20, MaxBytes>>20),
			diag.Remedy{Say: "Keep the measurements that the study needs, one row each."})
	}
	for _, f := range formats {
		if f.is(name, data) {
			return f.read(name, sheet, data)
		}
	}
	return nil, nil
}

// readText reads a text file, which has no sheets.
func readText(name, sheet string, data []byte) (*Table, diag.List) {
	if sheet != "" {
		return nil, whole(name, "missing-sheet", name+" is no workbook and has no sheets",
			diag.Remedy{Say: "Leave the line away."})
	}
	return readDelimited(name, data)
}

// whole is a complaint about a file as a whole.
func whole(name, code, problem string, remedies ...diag.Remedy) diag.List {
	return diag.List{{Code: code, Position: diag.Position{File: name}, Problem: problem,
		Remedies: remedies}}
}
