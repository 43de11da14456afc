package report

import (
	"encoding/csv"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"reflect"
	"strconv"

	"ligancy/fit/saturation"
)

// Table is one list of a document under the name that its JSON key and its file have.
type Table struct {
	Name string // "quantities"
	rows reflect.Value
}

// Tables returns the document's lists in the order of the document.
func (d *Document) Tables() []Table { return lists(d.Outcome) }

// TableNames are the names of the lists that a document has.
func TableNames() []string {
	var names []string
	for _, t := range lists(&saturation.Outcome{}) {
		names = append(names, t.Name)
	}
	return names
}

// lists finds the lists of an outcome: its exported slices that have a key.
func lists(o *saturation.Outcome) []Table {
	var all []Table
	v := reflect.ValueOf(o).Elem()
	for i := range v.NumField() {
		key := v.Type().Field(i).Tag.Get("json")
		if v.Field(i).Kind() == reflect.Slice && key != "" && key != "-" {
			all = append(all, Table{Name: key, rows: v.Field(i)})
		}
	}
	return all
}

// WriteCSV writes the table after RFC 4180 with line feeds: a header of the
// keys that the JSON rows have, then one record a row. What does not exist is
// an empty cell. Numbers read back to the same double.
func (t Table) WriteCSV(w io.Writer) error {
	kind := t.rows.Type().Elem()
	record := make([]string, kind.NumField())
	for i := range record {
		record[i] = kind.Field(i).Tag.Get("json")
	}
	c := csv.NewWriter(w)
	if err := c.Write(record); err != nil {
		return err
	}
	for r := range t.rows.Len() {
		for i := range record {
			record[i] = csvCell(t.rows.Index(r).Field(i).Interface())
		}
		if err := c.Write(record); err != nil {
			return err
		}
	}
	c.Flush()
	return c.Error()
}

// csvCell writes one value of a row.
func csvCell(value any) string {
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
	case bool:
		return strconv.FormatBool(v)
	case saturation.Real:
		x := float64(v)
		if math.IsNaN(x) || math.IsInf(x, 0) {
			return ""
		}
		return strconv.FormatFloat(x, 'g', -1, 64)
	}
	// A list or record within a row: its JSON, as in the document.
	encoded, err := json.Marshal(value)
	if err != nil {
		panic(fmt.Sprintf("report: a row holds a %T", value))
	}
	if string(encoded) == "null" {
		return ""
	}
	return string(encoded)
}
