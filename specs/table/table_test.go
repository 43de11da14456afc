package table

import (
	"bytes"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"ligancy/specs/diag"
)

// read reads a table that has nothing wrong with it.
func read(t *testing.T, name, data string) *Table {
	t.Helper()
	table, complaints := Read(name, []byte(data))
	if len(complaints) > 0 {
		t.Fatalf("complaints: %v", complaints)
	}
	return table
}

// cells lists the texts of the rows.
func cells(t *Table) [][]string {
	var rows [][]string
	for _, r := range t.Rows {
		var row []string
		for _, c := range r.Cells {
			row = append(row, c.Text)
		}
		rows = append(rows, row)
	}
	return rows
}

func TestSeparatorsAndMarks(t *testing.T) {
	want := [][]string{{"0.5", "A, left", "0.1"}, {"1", "B", "0.2"}}
	for _, c := range []struct{ name, file, data string }{
		{"comma", "t.csv", "x,prep,y\n0.5,\"A, left\",0.1\n1,B,0.2\n"},
		{"no last line end", "t.csv", "x,prep,y\n0.5,\"A, left\",0.1\n1,B,0.2"},
		{"CR LF", "t.csv", "x,prep,y\r\n0.5,\"A, left\",0.1\r\n1,B,0.2\r\n"},
		{"CR alone", "t.csv", "x,prep,y\r0.5,\"A, left\",0.1\r1,B,0.2\r"},
		{"semicolon", "t.csv", "x;prep;y\n0.5;A, left;0.1\n1;B;0.2\n"},
		{"tab", "t.tsv", "x\tprep\ty\n0.5\tA, left\t0.1\n1\tB\t0.2\n"},
		{"tab in a .txt", "t.txt", "x\tprep\ty\n0.5\tA, left\t0.1\n1\tB\t0.2\n"},
		{"byte-order mark", "t.csv", "\ufeffx,prep,y\n0.5,\"A, left\",0.1\n1,B,0.2\n"},
		{"remarks", "t.csv", "# a, remark\n#another\nx,prep,y\n0.5,\"A, left\",0.1\n1,B,0.2\n"},
		{"blanks", "t.csv", "x, prep ,y\n 0.5,\"A, left\",0.1 \n\n1,B,0.2\n,,\n"},
		{"empty column at the end", "t.csv", "x,prep,y,\n0.5,\"A, left\",0.1,\n1,B,0.2,\n"},
	} {
		t.Run(c.name, func(t *testing.T) {
			table := read(t, c.file, c.data)
			if diff := cmp.Diff([]string{"x", "prep", "y"}, table.Header()); diff != "" {
				t.Error(diff)
			}
			if diff := cmp.Diff(want, cells(table)); diff != "" {
				t.Error(diff)
			}
		})
	}
}

func TestNotesSayWhatWasRecognised(t *testing.T) {
	table := read(t, "t.csv", "\ufeff# one\n# two\nx;y\n0,5;1,25\n2;3,5\n;\n")
	table.FindDecimal([]int{0, 1})
	want := []string{
		"its byte-order mark was passed over", "its columns are set apart by semicolons",
		"2 lines of remarks above the header",
		"1 row without any text passed over", "its decimal commas were read as such",
	}
	if diff := cmp.Diff(want, table.Notes); diff != "" {
		t.Error(diff)
	}
	if v, d := table.Number(table.Rows[0].Cells[1], "y"); d != nil || v != 1.25 {
		t.Errorf("1,25 = %v, %v", v, d)
	}
}

// Quoted cells may hold separators, quotation marks and line ends (RFC 4180, section 2).
func TestQuotedCells(t *testing.T) {
	table := read(t, "t.csv", "x,note\n1,\"a \"\"b\"\", c\"\n2,\"two\nlines\"\n3,z\n")
	if diff := cmp.Diff([][]string{{"1", `a "b", c`}, {"2", "two\nlines"}, {"3", "z"}},
		cells(table)); diff != "" {
		t.Error(diff)
	}
	for i, line := range []int{2, 3, 5} {
		if got := table.Rows[i].Line; got != line {
			t.Errorf("row %d is in line %d, want %d", i, got, line)
		}
	}
}

func TestPlaces(t *testing.T) {
	table := read(t, "clam.csv", "pH,prep,pO2_torr,sat\n7.0,B,9,\"0,83\"\n7.0,µ,10,0.9\n7.0, C ,\"1\"\"\",\n")
	for _, c := range []struct{ row, column, from, end int }{
		{0, 3, 9, 15}, {0, 0, 1, 4}, {1, 1, 5, 7}, {1, 3, 11, 14}, {2, 1, 5, 8}, {2, 2, 9, 14},
		{2, 3, 15, 15},
	} {
		p := table.At(table.Rows[c.row].Cells[c.column])
		if p.Line != c.row+2 || p.Column != c.from || p.End != c.end {
			t.Errorf("cell %d,%d: %+v, want %d to %d", c.row, c.column, p, c.from, c.end)
		}
	}
}

func TestRowsThatMatch(t *testing.T) {
	table := read(t, "t.csv", "pH,state\n7.0,treated\n7.6,no\n7,yes\n")
	keeps := func(column int, m Match) (rows []int) {
		for i, r := range table.Rows {
			if table.Keeps(m, r.Cells[column]) {
				rows = append(rows, i)
			}
		}
		return rows
	}
	low, high := 7.2, 8.0
	for _, c := range []struct {
		column int
		m      Match
		want   []int
	}{
		{0, Match{Any: []string{"7"}}, []int{0, 2}},
		{0, Match{Any: []string{"7.00", "7.6"}}, []int{0, 1, 2}},
		{1, Match{Any: []string{"yes", "no"}}, []int{1, 2}},
		{1, Match{Any: []string{"none"}}, nil},
		{0, Match{Low: &low}, []int{1}},
		{0, Match{Low: &low, High: &high}, []int{1}},
		{0, Match{High: &low}, []int{0, 2}},
		{1, Match{High: &low}, nil},
	} {
		if diff := cmp.Diff(c.want, keeps(c.column, c.m)); diff != "" {
			t.Errorf("%+v: %s", c.m, diff)
		}
	}
	if diff := cmp.Diff([]string{"treated", "no", "yes"}, table.Values(1)); diff != "" {
		t.Error(diff)
	}
}

// firstBlock is the first complaint as people see it.
func firstBlock(t *testing.T, l diag.List) string {
	t.Helper()
	if len(l) == 0 {
		t.Fatal("no complaint")
	}
	var b bytes.Buffer
	if err := diag.WriteText(&b, l[:1]); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func TestComplaints(t *testing.T) {
	for _, c := range []struct{ name, data, want string }{
		{"empty file", "", `t.csv   t.csv is empty
   Write a first line that names the columns, as   conc_uM,response
`},
		{"byte-order mark alone", "\ufeff", `t.csv   t.csv is empty
   Write a first line that names the columns, as   conc_uM,response
`},
		{"remarks only", "# x\n# y\n", `t.csv   t.csv holds no table, only remarks
   Write a line that names the columns, as   conc_uM,response
`},
		{"one column", "conc response\n1 2\n", `t.csv:1:1   t.csv has only one column
     1 | conc response
       | ‾‾‾‾‾‾‾‾‾‾‾‾‾
   Columns are set apart by commas, semicolons or tabs.
   Save the table again with one of these between the columns.
`},
		{"no header", "1,2\n3,4\n", `t.csv:1:1   the first line holds numbers only, so the columns have no names
     1 | 1,2
       | ‾
   Write a first line that names the columns, as   conc_uM,response
`},
		{"no rows", "x,y\n", `t.csv:1:1   t.csv has a header and no rows
     1 | x,y
       | ‾
   Write one row per measurement.
`},
		{"short row", "x,y\n1,2\n3\n", `t.csv:3:1   this row has 1 cell, the header has 2
     3 | 3
       | ‾
   Write one cell for each column; an empty cell is nothing between two separators.
`},
		{"long row", "x,y\n1,2,3\n", `t.csv:2:5   this row has 3 cells, the header has 2
     2 | 1,2,3
       |     ‾
   Write one cell for each column; an empty cell is nothing between two separators.
`},
		{"decimal comma cuts a number", "x,y\n1,0,83\n", `t.csv:2:3   this row has 3 cells, the header has 2
     2 | 1,0,83
       |   ‾
   A decimal comma may have cut 0,83 in two.
   Write   0.83   or separate the columns with semicolons.
`},
		{"repeated column", "x,y,x\n1,2,3\n", `t.csv:1:5   columns 1 and 3 are both named "x"
     1 | x,y,x
       |     ‾
   Give each column a name of its own, as   x_2
`},
		{"open quotation", "x,y\n1,\"2\n3,4\n", `t.csv:2:3   the quotation mark that opens here is never closed
     2 | 1,"2
       |   ‾‾
   Put the whole cell in quotation marks and double those inside it, as   "5"" disk"
`},
		{"quotation inside", "x,y\n1,5\" disk\n", `t.csv:2:4   this cell holds a quotation mark but does not begin with one
     2 | 1,5" disk
       |    ‾
   Put the whole cell in quotation marks and double those inside it, as   "5"" disk"
`},
		{"text after quotation", "x,y\n1,\"5\"disk,3\n", `t.csv:2:5   text follows the closing quotation mark of this cell
     2 | 1,"5"disk,3
       |     ‾
   Put the whole cell in quotation marks and double those inside it, as   "5"" disk"
`},
		{"hidden row", "x,y\n1,2\n#3,4\n5,6\n", `t.csv:3:1   warning: this line begins with # and is not read
     3 | #3,4
       | ‾‾‾‾
   To leave a measurement out, give the table a column of reasons and say
      left_out: COLUMN   under columns.
`},
		{"UTF-16", "\xff\xfex\x00,\x00y\x00\n\x00", `t.csv   t.csv is saved as UTF-16
   Save the file again as plain text with the encoding UTF-8.
`},
		{"UTF-16 without a mark", "x\x00,\x00y\x00\n\x001\x00,\x002\x00\n\x00", `t.csv   t.csv is saved as UTF-16
   Save the file again as plain text with the encoding UTF-8.
`},
		{"Latin-1", "x,y\n1,2\n3,\xb5\n", `t.csv:3:3   byte 0xB5 is not UTF-8
     3 | 3,�
       |   ‾
   Save the file again as plain text with the encoding UTF-8.
`},
		{"binary", "x,y\n\x01\x02\x00\x03", `t.csv:2:3   t.csv is not a text file: it holds a zero byte
     2 | ␁␂␀␃
       |   ‾
   Export it as plain text from the program that wrote it.
`},
		{"workbook", "PK\x03\x04...", `t.csv   t.csv is a damaged archive
   Save it as XLSX without a password.
   Or save the sheet as CSV (UTF-8) beside the study, and write   file: t.csv
`},
		{"older workbook", "\xd0\xcf\x11\xe0...", `t.csv   t.csv is an older workbook, or one with a password, and is not read
   Save it as XLSX without a password.
   Or save the sheet as CSV (UTF-8) beside the study, and write   file: t.csv
`},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, complaints := Read("t.csv", []byte(c.data))
			if diff := cmp.Diff(c.want, firstBlock(t, complaints)); diff != "" {
				t.Error(diff)
			}
		})
	}
}

func TestNumberComplaints(t *testing.T) {
	for _, c := range []struct {
		name, data string
		decimal    Decimal
		want       string
	}{
		{"decimal comma", "pH,sat\n7.0,\"0,83\"\n", Point, `t.csv:2:5   column sat: "0,83" is not a number
     2 | 7.0,"0,83"
       |     ‾‾‾‾‾‾
   If the whole file has decimal commas, say   decimal: comma   under this data set in clam.yaml.
   If only this cell has one, write   0.83
`},
		{"point among commas", "pH;sat\n7,0;0.83\n", Comma, `t.csv:2:5   column sat: "0.83" has a point, but decimals are written with commas here
     2 | 7,0;0.83
       |     ‾‾‾‾
   Write   0,83
`},
		{"word", "pH,sat\n7.0,low\n", Point, `t.csv:2:5   column sat: "low" is not a number
     2 | 7.0,low
       |     ‾‾‾
   Write the number, or leave the row out: with a column of reasons, say
      left_out: COLUMN   under columns.
`},
		{"NaN", "pH,sat\n7.0,NaN\n", Point, `t.csv:2:5   column sat: "NaN" is not a measurement
     2 | 7.0,NaN
       |     ‾‾‾
   Write the number, or leave the row out: with a column of reasons, say
      left_out: COLUMN   under columns.
`},
		{"empty", "sat,pH\n,7.0\n", Point, `t.csv:2:1   column sat: a number is missing
     2 | ,7.0
       | ‾
   Write the number, or leave the row out: with a column of reasons, say
      left_out: COLUMN   under columns.
`},
	} {
		t.Run(c.name, func(t *testing.T) {
			table := read(t, "t.csv", c.data)
			table.Study, table.Decimal = "clam.yaml", c.decimal
			i, ok := table.Column("sat")
			if !ok {
				t.Fatal("no column sat")
			}
			_, d := table.Number(table.Rows[0].Cells[i], "sat")
			if d == nil {
				t.Fatal("no complaint")
			}
			if diff := cmp.Diff(c.want, firstBlock(t, diag.List{*d})); diff != "" {
				t.Error(diff)
			}
		})
	}
}

func TestDecimalCommaIsNotGuessedAmongPoints(t *testing.T) {
	for _, data := range []string{"x;y\n0,5;1.5\n", "x,y\n\"0,5\",1\n"} {
		table := read(t, "t.csv", data)
		table.FindDecimal([]int{0, 1})
		if table.Decimal != Point {
			t.Errorf("%q: commas were guessed", data)
		}
	}
}

func TestHugeInputs(t *testing.T) {
	for _, c := range []struct{ name, data, code string }{
		{"10 MB line", "x,y\n1," + strings.Repeat("9", 10<<20) + "\n", "line-too-long"},
		{"10 MB header", strings.Repeat("x,", 5<<20) + "\n", "line-too-long"},
		{"columns", strings.Repeat("x,", MaxColumns) + "y,z\n", "too-many-columns"},
		{"rows", "x,y\n" + strings.Repeat("1,2\n", MaxRows+1), "too-many-rows"},
		{"file", strings.Repeat(" ", MaxBytes+1), "file-too-large"},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, complaints := Read("t.csv", []byte(c.data))
			if len(complaints) == 0 || complaints[0].Code != c.code {
				t.Fatalf("complaints %.200v, want %s", complaints, c.code)
			}
			for _, d := range complaints {
				if len(d.Source) > 2000 {
					t.Errorf("a complaint holds %d bytes of source", len(d.Source))
				}
			}
		})
	}
	table := read(t, "t.csv", "x,y\n"+strings.Repeat("1,2\n", 50_000))
	if len(table.Rows) != 50_000 {
		t.Errorf("%d rows", len(table.Rows))
	}
}

func FuzzRead(f *testing.F) {
	for _, s := range []string{
		"x,y\n1,2\n", "x;y\n0,5;1\n", "\ufeff# r\nx\ty\n1\t2\n", "x,\"y\"\"\n1,2",
		"x,y\n1,\"2\n3\"\n#h\n", "a\rb,c\r1,2", "\xff\xfea\x00", "x,y,x\n1\n,,,\n",
		"\"\n\",b\n#\n1,2",
	} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		table, complaints := Read("t.csv", data)
		if err := diag.WriteText(&bytes.Buffer{}, complaints); err != nil {
			t.Fatal(err)
		}
		if table == nil {
			if !complaints.HasErrors() {
				t.Fatal("no table and no complaint")
			}
			return
		}
		all := make([]int, len(table.Columns))
		for i := range all {
			all[i] = i
		}
		table.FindDecimal(all)
		for _, r := range table.Rows {
			if len(r.Cells) != len(table.Columns) {
				t.Fatalf("row %d has %d cells of %d", r.Line, len(r.Cells), len(table.Columns))
			}
			for _, c := range r.Cells {
				p := table.At(c)
				if line := table.Text.Line(p.Line); p.Line < 1 || p.Column < 1 ||
					p.Column > len(line)+1 || p.End > len(line)+1 {
					t.Fatalf("cell %q at %+v of line %q", c.Text, p, line)
				}
				table.Number(c, "x")
			}
		}
	})
}
