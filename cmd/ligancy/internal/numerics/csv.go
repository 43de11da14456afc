package numerics

import (
	"encoding/csv"
	"io"
	"strconv"
)

// WriteCSV writes rows as a table whose numbers read back to the same doubles.
func WriteCSV(w io.Writer, rows []Row) error {
	g := func(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }
	c := csv.NewWriter(w)
	if err := c.Write([]string{"check", "at", "exact", "reached", "relative_deviation", "held"}); err != nil {
		return err
	}
	for _, r := range rows {
		if err := c.Write([]string{r.Check, r.At, g(r.Exact), g(r.Reached), g(r.Relative), strconv.FormatBool(r.Held)}); err != nil {
			return err
		}
	}
	c.Flush()
	return c.Error()
}
