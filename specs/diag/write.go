package diag

import (
	"encoding/json"
	"fmt"
	"io"
)

// WriteText writes the complaints for people, one block each: place and
// sentence, the line with its span marked, notes, and what to write.
func WriteText(w io.Writer, l List) error {
	for _, d := range l {
		if _, err := fmt.Fprintf(w, "%s   %s\n", d.Position, d.Problem); err != nil {
			return err
		}
	}
	return nil
}

// WriteJSON writes the complaints as one JSON array.
func WriteJSON(w io.Writer, l List) error {
	if l == nil {
		l = List{}
	}
	enc := json.NewEncoder(w)
	enc.SetIndent("", "  ")
	enc.SetEscapeHTML(false)
	return enc.Encode(l)
}
