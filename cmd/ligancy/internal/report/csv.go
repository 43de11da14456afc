package report

import (
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"reflect"
	"strconv"

	"ligancy/fit/saturation"
)

// Table is one list of a document under the name of its file.
type Table struct {
	Name string // "quantities"
	rows any    // slice of flat structs
}

// Tables returns the document's lists in the order in which they are listed to the user.
func (d *Document) Tables() []Table {
	return []Table{
		{"mechanisms", d.Mechanisms},
		{"quantities", d.Quantities},
		{"points", d.Points},
		{"curves", d.Curves},
		{"correlations", d.Correlations},
		{"objections", d.Objections},
	}
}

// WriteCSV writes the table after RFC 4180 with line feeds: a header of the
// keys that the JSON rows have, then one record a row. What does not exist is
// an empty cell. Numbers read back to the same double.
func (t Table) WriteCSV(w io.Writer) error {
	rows := reflect.ValueOf(t.rows)
	kind := rows.Type().Elem()
	record := make([]string, kind.NumField())
	for i := range record {
		record[i] = kind.Field(i).Tag.Get("json")
	}
	c := csv.NewWriter(w)
	if err := c.Write(record); err != nil {
		return err
	}
	for r := range rows.Len() {
		for i := range record {
			record[i] = cell(rows.Index(r).Field(i).Interface())
		}
		if err := c.Write(record); err != nil {
			return err
		}
	}
	c.Flush()
	return c.Error()
}

// cell writes one value of a row.
func cell(value any) string {
	switch v := value.(type) {
	case string:
		return v
	case *string:
		if v == nil {
			return ""
		}
		return *v
	case int:
		return strconv.Itoa(v)
	case saturation.Real:
		x := float64(v)
		if math.IsNaN(x) || math.IsInf(x, 0) {
			return ""
		}
		return strconv.FormatFloat(x, 'g', -1, 64)
	}
	panic(fmt.Sprintf("report: a row holds a %T", value))
}
