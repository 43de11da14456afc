package diag

import "testing"

func TestDecode(t *testing.T) {
	text, marked, complaints := Decode("f", []byte("\ufeffa\r\nb\rc\n"), 100)
	if !marked || complaints != nil || len(text.Lines) != 4 || text.Line(3) != "c" {
		t.Errorf("%q, %v, %v", text.Lines, marked, complaints)
	}
	for name, c := range map[string]struct {
		data, code string
		line, col  int
	}{
		"UTF-16":             {"\xfe\xff\x00a", "utf-16", 0, 0},
		"UTF-16 by its look": {"a\x00b\x00c\x00d\x00e\x00", "utf-16", 0, 0},
		"zero byte":          {"ab\r\nc\x00d", "binary-file", 2, 2},
		"Latin-1":            {"ab\ncd\xe9", "not-utf-8", 2, 3},
		"long line":          {"ab\n0123456789012345678901234567890123456789", "line-too-long", 2, 31},
	} {
		_, _, complaints := Decode("f", []byte(c.data), 30)
		if len(complaints) != 1 || complaints[0].Code != c.code || complaints[0].Line != c.line || complaints[0].Column != c.col {
			t.Errorf("%s: %+v", name, complaints)
		}
	}
}
