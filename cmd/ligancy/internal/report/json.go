package report

import (
	"encoding/json"
	"io"
)

// WriteJSON writes any document of this package, indented, without escaping
// the signs that only matter in HTML.
func WriteJSON(w io.Writer, document any) error {
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	e.SetIndent("", "  ")
	return e.Encode(document)
}
