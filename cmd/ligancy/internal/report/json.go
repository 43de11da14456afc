package report

import (
	"bytes"
	"encoding/json"
	"io"
)

// WriteJSON writes any document of this package without escaping the signs that
// only matter in HTML. The document and its lists are spread over lines, each
// row of a list stands on one: that is short, and compares well.
func WriteJSON(w io.Writer, document any) error {
	var b bytes.Buffer
	e := json.NewEncoder(&b)
	e.SetEscapeHTML(false)
	if err := e.Encode(document); err != nil {
		return err
	}
	depth := 2
	if bytes.HasPrefix(b.Bytes(), []byte("[")) { // several documents
		depth = 3
	}
	_, err := w.Write(spread(b.Bytes(), depth))
	return err
}

// spread puts the entries of compact JSON on lines of their own down to a depth.
func spread(compact []byte, depth int) []byte {
	out := make([]byte, 0, len(compact)+len(compact)/8)
	level, quoted := 0, false
	newline := func() {
		out = append(out, '\n')
		for range level {
			out = append(out, ' ', ' ')
		}
	}
	for i, c := range compact {
		if quoted {
			out = append(out, c)
			// An escaped quote is preceded by an odd number of backslashes.
			if c == '"' && backslashes(compact[:i])%2 == 0 {
				quoted = false
			}
			continue
		}
		switch c {
		case '{', '[':
			out = append(out, c)
			level++
			if level <= depth && !closes(compact[i+1]) {
				newline()
			}
		case '}', ']':
			level--
			if level < depth && !opens(compact[i-1]) {
				newline()
			}
			out = append(out, c)
		case ',':
			out = append(out, c)
			if level <= depth {
				newline()
			} else {
				out = append(out, ' ')
			}
		case ':':
			out = append(out, c, ' ')
		default:
			quoted = c == '"'
			out = append(out, c)
		}
	}
	return out
}

// backslashes counts those at the end of b.
func backslashes(b []byte) int {
	return len(b) - len(bytes.TrimRight(b, `\`))
}

func opens(c byte) bool  { return c == '{' || c == '[' }
func closes(c byte) bool { return c == '}' || c == ']' }
