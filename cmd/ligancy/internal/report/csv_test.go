package report

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"math"
	"reflect"
	"slices"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"ligancy/fit/saturation"
)

// documented are the keys that users of result documents may rely on.
var documented = map[string][]string{
	"program":      {"version"},
	"study":        {"title", "origin", "file", "sha256"},
	"data":         {"name", "file", "sha256", "points", "left_out"},
	"settings":     {"seed", "starts", "level", "defaults"},
	"mechanisms":   {"name", "family", "sites", "status", "constants", "points", "sum_of_squares", "log_likelihood", "aicc", "aicc_behind", "aicc_weight", "bic", "starts", "starts_agreeing", "standing"},
	"quantities":   {"mechanism", "curve", "of", "name", "ligand", "site", "value", "unit", "low", "high", "level", "interval", "held", "why"},
	"points":       {"data", "row", "curve", "preparation", "x", "y", "left_out", "mechanism", "fitted", "residual"},
	"correlations": {"mechanism", "a", "b", "r"},
	"objections":   {"id", "group", "text", "remedy", "effect", "source"},
	"verdict":      {"text", "leads", "ties", "open", "out", "twins"},
}

func TestDocumentAsJSON(t *testing.T) {
	var b bytes.Buffer
	d := clamDocument(t)
	if err := WriteJSON(&b, d); err != nil {
		t.Fatal(err)
	}
	var doc map[string]any
	if err := json.Unmarshal(b.Bytes(), &doc); err != nil {
		t.Fatal(err)
	}
	if doc["format"] != "ligancy-result/1" || doc["interrupted"] != nil {
		t.Errorf("format %v, interrupted %v", doc["format"], doc["interrupted"])
	}
	for key, want := range documented {
		row, ok := doc[key].(map[string]any)
		if !ok {
			row = doc[key].([]any)[0].(map[string]any)
		}
		for _, k := range want {
			if _, ok := row[k]; !ok {
				t.Errorf("%s has no key %s", key, k)
			}
		}
	}
	// x_01 has no interval: null, not a word.
	for _, q := range doc["quantities"].([]any) {
		if q := q.(map[string]any); q["name"] == "x_01" && (q["low"] != nil || q["value"] == nil) {
			t.Errorf("%v", q)
		}
	}
	if strings.Contains(b.String(), `\u003c`) {
		t.Error("markup is escaped: JSON is no HTML")
	}
}

// Spreading changes nothing but blanks.
func TestSpreadKeepsTheDocument(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		type row struct {
			Name  string   `json:"name"`
			Value *float64 `json:"value"`
			List  []string `json:"list"`
		}
		var rows []row
		for range rapid.IntRange(0, 3).Draw(t, "rows") {
			v := rapid.Float64().Draw(t, "value")
			rows = append(rows, row{rapid.String().Draw(t, "name"), &v, rapid.SliceOf(rapid.StringMatching(`[\\\\"{}\\[\\],: a]*`)).Draw(t, "list")})
		}
		compact, err := json.Marshal(map[string]any{"rows": rows, "empty": []int{}, "nothing": map[string]int{}})
		if err != nil {
			t.Fatal(err)
		}
		for depth := range 4 {
			var back bytes.Buffer
			if err := json.Compact(&back, spread(compact, depth)); err != nil {
				t.Fatal(err)
			}
			if !bytes.Equal(back.Bytes(), compact) {
				t.Fatalf("%s became %s", compact, back.Bytes())
			}
		}
	})
}

// An outcome without rows still has every list, each a list.
func TestEmptyOutcomeHasEveryList(t *testing.T) {
	d := New(&saturation.Analysis{}, &saturation.Outcome{}, Source{})
	var b bytes.Buffer
	if err := WriteJSON(&b, d); err != nil {
		t.Fatal(err)
	}
	var doc map[string]json.RawMessage
	if err := json.Unmarshal(b.Bytes(), &doc); err != nil {
		t.Fatal(err)
	}
	for _, k := range []string{"data", "mechanisms", "quantities", "points", "curves", "correlations", "objections"} {
		if string(doc[k]) != "[]" {
			t.Errorf("%s is %s", k, doc[k])
		}
	}
	for k, v := range doc {
		// A condition that is asked for and not stated is null, in a list that is there.
		if k != "conditions" && bytes.Contains(v, []byte("null")) || string(v) == "null" {
			t.Errorf("null in %s: %s", k, v)
		}
	}
	if err := d.WriteText(&b, false); err != nil {
		t.Error(err)
	}
}

func TestTablesHaveTheKeysOfTheJSONAndTheSameNumbers(t *testing.T) {
	d := clamDocument(t)
	d.Populations = []saturation.PopulationRow{{Mechanism: leader, State: "R, 2 bound", Share: 0.25}}
	d.Preparations = []saturation.PreparationRow{{Curve: "pH 7.6", Preparation: "A", XHalf: 5.4}}
	d.Curves = []saturation.CurveRow{{Mechanism: "a, \"b\"", Curve: "all", X: 0.1, Saturation: saturation.Real(math.NaN()), NH: 1e-300}}
	for _, table := range d.Tables() {
		if table.rows.Len() == 0 { // lists that a new finding brings
			table.rows = reflect.Append(table.rows, reflect.Zero(table.rows.Type().Elem()))
		}
		var b bytes.Buffer
		if err := table.WriteCSV(&b); err != nil {
			t.Fatal(err)
		}
		records, err := csv.NewReader(&b).ReadAll()
		if err != nil {
			t.Fatal(err)
		}
		encoded, err := json.Marshal(table.rows.Interface())
		if err != nil {
			t.Fatal(err)
		}
		var rows []map[string]any
		if err := json.Unmarshal(encoded, &rows); err != nil {
			t.Fatal(err)
		}
		if len(records) != len(rows)+1 || len(rows) == 0 {
			t.Fatalf("%s: %d records for %d rows", table.Name, len(records), len(rows))
		}
		for i, row := range rows {
			if len(row) != len(records[0]) {
				t.Errorf("%s: %d keys, %d columns", table.Name, len(row), len(records[0]))
			}
			for k, v := range row {
				c := slices.Index(records[0], k)
				if c < 0 {
					t.Fatalf("%s has no column %s", table.Name, k)
				}
				got := records[i+1][c]
				switch v := v.(type) {
				case nil:
					if got != "" {
						t.Errorf("%s, %s: null is written %q", table.Name, k, got)
					}
				case string:
					if got != v {
						t.Errorf("%s, %s: %q for %q", table.Name, k, got, v)
					}
				case []any, map[string]any:
					if back := any(nil); json.Unmarshal([]byte(got), &back) != nil || !reflect.DeepEqual(back, v) {
						t.Errorf("%s, %s: %q for %v", table.Name, k, got, v)
					}
				case float64:
					if parse(t, got) != v {
						t.Errorf("%s, %s: %s for %v", table.Name, k, got, v)
					}
				}
			}
		}
	}
}
