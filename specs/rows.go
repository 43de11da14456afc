package specs

import (
	"fmt"
	"slices"

	"ligancy/specs/diag"
	"ligancy/specs/table"
)

// kept are the rows that `rows` keeps; false where the filter fits nothing.
func (r *points) kept() ([]table.Row, bool) {
	kept := r.t.Rows
	ok := true
	for _, f := range r.d.Rows {
		p := join(r.path+".rows", f.Name)
		i, found := r.t.Column(f.Name)
		if !found {
			var remedies []diag.Remedy
			if near := nearestColumn(f.Name, r.t.Header()); near != "" {
				remedies = []diag.Remedy{{Write: "rows: {" + plainOrQuoted(near) + ": …}"}}
			}
			r.faultAtKey(p, "missing-column", fmt.Sprintf("%s has no column %q", r.t.Name, f.Name),
				r.listColumns(), remedies...)
			ok = false
			continue
		}
		kept = r.filter(kept, i, f, p)
		ok = ok && len(kept) > 0
	}
	if ok && len(r.d.Rows) > 0 {
		r.t.Notes = append(r.t.Notes, fmt.Sprintf("%d of its %d rows were kept by `rows`",
			len(kept), len(r.t.Rows)))
	}
	return kept, ok
}

// filter keeps the rows that match one column, and complains of values that match none.
func (r *points) filter(rows []table.Row, column int, f Named[table.Match], p string) []table.Row {
	var kept []table.Row
	for _, row := range rows {
		if r.t.Keeps(f.Value, row.Cells[column]) {
			kept = append(kept, row)
		}
	}
	values := r.t.Values(column)
	note := []string{fmt.Sprintf("Column %s holds: %s.", f.Name, shortList(values, 12))}
	for i, want := range f.Value.Any {
		if slices.ContainsFunc(r.t.Rows,
			func(row table.Row) bool {
				return r.t.Keeps(table.Match{Any: []string{want}},
					row.Cells[column])
			}) {
			continue
		}
		at := p
		if r.said(indexed(p, i)) {
			at = indexed(p, i)
		}
		var remedies []diag.Remedy
		if near := diag.Nearest(want, values); near != "" {
			remedies = []diag.Remedy{{Write: plainOrQuoted(f.Name) + ": " + plainOrQuoted(near)}}
		}
		r.fault(at, "no-such-value", fmt.Sprintf("no row has %q in column %s", want, f.Name), note,
			remedies...)
	}
	if len(kept) == 0 && (len(f.Value.Any) == 0 || len(rows) > 0 && len(rows) < len(r.t.Rows)) {
		r.fault(p, "no-rows-kept", fmt.Sprintf("no row is left when column %s is asked for this",
			f.Name), note, diag.Remedy{Say: "Ask for values that the column holds."})
	}
	return kept
}
