package diag

import (
	"bytes"
	"fmt"
	"strings"
	"unicode/utf8"
)

// Decode makes lines of UTF-8 text of a file, or complains that it is none:
// two-byte text, bytes that are not UTF-8, a binary file, a line longer than
// longest bytes. A byte-order mark is passed over and reported in marked.
func Decode(name string, data []byte, longest int) (text Text, marked bool, complaints List) {
	saveAs := Remedy{Say: "Save the file again as plain text with the encoding UTF-8."}
	if bytes.HasPrefix(data, []byte{0xff, 0xfe}) || bytes.HasPrefix(data, []byte{0xfe, 0xff}) ||
		looksUTF16(data) {
		return Text{}, false, List{{Code: "utf-16", Position: Position{File: name},
			Problem: name + " is saved as UTF-16", Remedies: []Remedy{saveAs}}}
	}
	data, marked = bytes.CutPrefix(data, []byte("\ufeff"))
	text = NewText(name, data)
	if i := bytes.IndexByte(data, 0); i >= 0 {
		d := Diagnostic{Code: "binary-file", Position: text.byteAt(data, i),
			Problem:  name + " is not a text file: it holds a zero byte",
			Remedies: []Remedy{{Say: "Export it as plain text from the program that wrote it."}}}
		return text, marked, List{text.Quote(d)}
	}
	if !utf8.Valid(data) {
		i := firstInvalid(data)
		d := Diagnostic{Code: "not-utf-8", Position: text.byteAt(data, i),
			Problem: fmt.Sprintf("byte 0x%02X is not UTF-8", data[i]), Remedies: []Remedy{saveAs}}
		return text, marked, List{text.Quote(d)}
	}
	for n, line := range text.Lines {
		if len(line) > longest {
			d := Diagnostic{Code: "line-too-long", Position: text.At(n+1, longest+1, longest+1),
				Problem: fmt.Sprintf("this line has %d bytes; a line may have %d", len(line),
					longest),
				Remedies: []Remedy{{Say: "Break it into several lines."}}}
			return text, marked, List{text.Quote(d)}
		}
	}
	return text, marked, nil
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

// byteAt is the place of one byte of the file.
func (t Text) byteAt(data []byte, offset int) Position {
	before := strings.ReplaceAll(string(data[:offset]), "\r\n", "\n")
	before = strings.ReplaceAll(before, "\r", "\n")
	line := strings.Count(before, "\n") + 1
	column := len(before) - strings.LastIndexByte(before, '\n')
	return t.At(line, column, column+1)
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
