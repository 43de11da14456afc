package main

import (
	"encoding/csv"
	"fmt"
	"os"
	"strconv"
	"strings"
	"testing"

	"github.com/rogpeppe/go-internal/testscript"
	"github.com/xuri/excelize/v2"
)

// The program runs as a command of its own inside the scripts.
func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){"ligancy": main})
}

// TestScript runs testdata/script/*.txtar: files, a command line, what it
// prints, and its exit code.
func TestScript(t *testing.T) {
	testscript.Run(t, testscript.Params{
		Dir: "testdata/script",
		Cmds: map[string]func(*testscript.TestScript, bool, []string){
			"exits":    exits,
			"repeat":   repeat,
			"workbook": workbook,
		},
		Setup: func(e *testscript.Env) error {
			return os.CopyFS(e.WorkDir+"/gallery", os.DirFS("../../specs/gallery/studies"))
		},
		UpdateScripts: os.Getenv("UPDATE_SCRIPTS") != "",
	})
}

// exits CODE COMMAND… runs a command that must end with the exit code.
func exits(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 2 {
		ts.Fatalf("usage: exits CODE COMMAND…")
	}
	want, err := strconv.Atoi(args[0])
	ts.Check(err)
	got := 0
	if err := ts.Exec(args[1], args[2:]...); err != nil {
		code, ok := err.(interface{ ExitCode() int })
		if !ok {
			ts.Fatalf("%v", err)
		}
		got = code.ExitCode()
	}
	if got != want {
		ts.Fatalf("exit code %d, want %d\n%s%s", got, want, ts.ReadFile("stdout"), ts.ReadFile("stderr"))
	}
	if trace := ts.ReadFile("stderr"); strings.Contains(trace, "goroutine ") || strings.Contains(trace, "panic:") {
		ts.Fatalf("a panic:\n%s", trace)
	}
}

// repeat FILE HEAD N TEXT TAIL writes HEAD, N times TEXT, TAIL; the texts may
// hold \n and \x00 escapes.
func repeat(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) != 5 {
		ts.Fatalf("usage: repeat FILE HEAD N TEXT TAIL")
	}
	n, err := strconv.Atoi(args[2])
	ts.Check(err)
	plain := func(s string) string {
		p, err := strconv.Unquote(`"` + s + `"`)
		ts.Check(err)
		return p
	}
	content := fmt.Sprint(plain(args[1]), strings.Repeat(plain(args[3]), n), plain(args[4]))
	ts.Check(os.WriteFile(ts.MkAbs(args[0]), []byte(content), 0o666))
}

// workbook FILE SHEET=TABLE… writes an XLSX workbook, one sheet from each CSV
// table; what reads as a number is one.
func workbook(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 2 {
		ts.Fatalf("usage: workbook FILE SHEET=TABLE…")
	}
	f := excelize.NewFile()
	for i, a := range args[1:] {
		sheet, table, _ := strings.Cut(a, "=")
		if i == 0 {
			ts.Check(f.SetSheetName("Sheet1", sheet))
		} else {
			_, err := f.NewSheet(sheet)
			ts.Check(err)
		}
		rows, err := csv.NewReader(strings.NewReader(ts.ReadFile(table))).ReadAll()
		ts.Check(err)
		for r, row := range rows {
			for c, text := range row {
				at, err := excelize.CoordinatesToCellName(c+1, r+1)
				ts.Check(err)
				if v, err := strconv.ParseFloat(text, 64); err == nil {
					ts.Check(f.SetCellValue(sheet, at, v))
				} else {
					ts.Check(f.SetCellValue(sheet, at, text))
				}
			}
		}
	}
	ts.Check(f.SaveAs(ts.MkAbs(args[0])))
}
