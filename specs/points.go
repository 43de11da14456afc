package specs

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"ligancy/fit/saturation"
	"ligancy/specs/diag"
	"ligancy/specs/table"
	"ligancy/specs/units"
)

// measure is a column of numbers: which, in which unit, and where the study says so.
type measure struct {
	index int // −1: no such column
	name  string
	unit  units.Unit // of the column
	to    units.Unit // of the analysis
	path  string
}

// points reads the rows of one data set.
type points struct {
	*builder
	d    *Data
	out  *saturation.Dataset
	t    *table.Table
	path string

	ligand, sigma, sem, n, weight, time measure
	response, effectors                 []measure
	factors                             []int    // columns; −1: the same for the whole table
	fixed                               []string // levels of those
	levels                              []float64
	preparation, blocked, leftOut       int
	nFixed                              float64 // `n: 3`
}

// points reads the table of data set i.
func (b *builder) points(i int, out *saturation.Dataset) {
	r := &points{builder: b, d: &b.study.Data[i], out: out, t: b.study.Data[i].table, path: indexed("data", i)}
	whole := r.columns()
	if !whole {
		r.d.faulty = true // the cells of the other columns are read all the same
	}
	r.decimals()
	kept, ok := r.kept()
	if !ok {
		return
	}
	for _, row := range kept {
		r.row(row)
	}
	if !whole {
		out.Points = nil // of no use for what follows
	}
	r.judge()
}

// columns finds every column; false where one is missing.
func (r *points) columns() bool {
	c := &r.d.Columns
	p := r.path + ".columns"
	ok := true
	number := func(key string, col Column, to units.Unit, of string) measure {
		m := measure{index: -1, name: col.Name, unit: to, to: to, path: p + "." + key}
		if col.Name == "" {
			return m
		}
		m.index = r.find(m.path, col.Name)
		ok = ok && m.index >= 0
		if col.Unit != nil {
			m.unit = *col.Unit
			if !m.unit.Same(to) {
				r.wrongUnit(m.path+".unit", m.unit, to, of)
				ok = false
			}
		} else if m.index >= 0 {
			r.otherUnitInHeader(m, of)
		}
		return m
	}
	text := func(key string, col Column) int {
		if col.Name == "" {
			return -1
		}
		i := r.find(p+"."+key, col.Name)
		ok = ok && i >= 0
		return i
	}
	if c.Ligand.Name == "" && !r.said(p+".ligand") && c.Time.Name == "" {
		r.faultAtKey(p, "missing-key", `columns needs the key "ligand"`, r.listColumns(), diag.Remedy{Write: "ligand: COLUMN"})
		ok = false
	}
	yUnit := units.Unit{}
	if r.d.Response.Unit != nil {
		yUnit = *r.d.Response.Unit
	}
	r.ligand = number("ligand", c.Ligand, r.study.Ligand.Unit, "the ligand")
	for i, col := range c.Response {
		key := "response"
		if len(c.Response) > 1 || r.said(indexed(p+".response", 0)) {
			key = indexed("response", i)
		}
		r.response = append(r.response, number(key, col, yUnit, "the response"))
	}
	r.sigma = number("sigma", c.Sigma, yUnit, "the response")
	r.sem = number("sem", c.SEM, yUnit, "the response")
	r.weight = number("weight", c.Weight, units.Unit{}, "a weight")
	r.time = number("time", c.Time, units.MustParse("s"), "time")
	r.preparation, r.blocked, r.leftOut = text("preparation", c.Preparation), text("blocked", c.Blocked), text("left_out", c.LeftOut)
	ok = r.countColumn(p) && ok
	ok = r.otherColumns(p, number) && ok
	ok = r.factorColumns(p) && ok
	return ok
}

// find is the index of a column; it complains of one that does not exist.
func (r *points) find(path, name string) int {
	if i, ok := r.t.Column(name); ok {
		return i
	}
	at := path
	if r.said(path + ".name") {
		at = path + ".name"
	}
	var remedies []diag.Remedy
	if near := nearestColumn(name, r.t.Header()); near != "" {
		remedies = []diag.Remedy{{Write: lastName(at) + ": " + plainOrQuoted(near)}}
	}
	r.fault(at, "missing-column", fmt.Sprintf("%s has no column %q", r.t.Name, name), r.listColumns(), remedies...)
	return -1
}

func (r *points) listColumns() []string {
	return []string{"Its columns are: " + shortList(r.t.Header(), 40) + "."}
}

// nearestColumn also takes a header that begins with the word, or the reverse.
func nearestColumn(name string, header []string) string {
	if near := diag.Nearest(name, header); near != "" {
		return near
	}
	lower := strings.ToLower(name)
	for _, h := range header {
		l := strings.ToLower(h)
		if len(lower) > 1 && (strings.HasPrefix(l, lower) || strings.HasPrefix(lower, l)) {
			return h
		}
	}
	return ""
}

// otherUnitInHeader warns of a column whose header names another unit than it is read in.
func (r *points) otherUnitInHeader(m measure, of string) {
	u, ok := unitInHeader(m.name)
	if !ok || !u.Same(m.to) || m.to.IsLogarithm() {
		return
	}
	if f, err := units.Factor(u, m.to); err == nil && f != 1 || err != nil {
		r.warn(m.path, "unit-in-header", fmt.Sprintf("column %s looks like %s, but is read as %s, the unit of %s", m.name, u, m.to, of), nil,
			diag.Remedy{Say: "If it holds " + u.String() + ", write", Write: fmt.Sprintf("%s: {name: %s, unit: %s}", lastName(m.path), plainOrQuoted(m.name), u)},
			diag.Remedy{Say: "If not, rename the column."})
	}
}

// countColumn settles n, a column or a number.
func (r *points) countColumn(p string) bool {
	r.n = measure{index: -1, path: p + ".n"}
	name := r.d.Columns.N.Name
	if name == "" {
		if r.d.Columns.SEM.Name != "" {
			r.faultAtKey(p+".sem", "missing-key", "a standard error needs the number of values it is of", nil, diag.Remedy{Write: "n: COLUMN"}, diag.Remedy{Say: "or, where it is the same in every row,", Write: "n: 3"})
			return false
		}
		return true
	}
	if i, ok := r.t.Column(name); ok {
		r.n.index, r.n.name = i, name
		return true
	}
	if v, err := units.ParseNumber(name); err == nil && v >= 2 && v == math.Trunc(v) {
		r.nFixed = v
		return true
	}
	return r.find(p+".n", name) >= 0
}

// otherColumns settles columns of effectors, and what holds instead of a column.
func (r *points) otherColumns(p string, number func(string, Column, units.Unit, string) measure) bool {
	ok := true
	for _, e := range r.d.Columns.Others {
		if r.effector(e.Name) >= 0 || slices.ContainsFunc(r.d.Factors, func(f Named[string]) bool { return f.Name == e.Name }) {
			continue
		}
		ok = false
		valid := keyNames(columnKeys())
		for _, s := range r.study.Effectors {
			valid = append(valid, s.Name)
		}
		var remedies []diag.Remedy
		if near := diag.Nearest(e.Name, valid); near != "" {
			remedies = []diag.Remedy{{Write: near + ":"}}
		} else {
			remedies = []diag.Remedy{{Say: "For a column that tells curves apart write", Write: fmt.Sprintf("factors: {%s: %s}", plainOrQuoted(e.Name), plainOrQuoted(e.Value.Name)), Where: "under the data set."}}
		}
		r.faultAtKey(join(p, e.Name), "unknown-key", fmt.Sprintf("columns has no key %q, and the study no such effector", e.Name), []string{"Its keys are: " + strings.Join(valid, ", ") + "."}, remedies...)
	}
	for _, s := range r.study.Effectors {
		i := slices.IndexFunc(r.d.Columns.Others, func(c Named[Column]) bool { return c.Name == s.Name || s.Symbol != "" && c.Name == s.Symbol })
		if i >= 0 {
			r.effectors = append(r.effectors, number(r.d.Columns.Others[i].Name, r.d.Columns.Others[i].Value, s.Unit, s.Name))
			r.levels = append(r.levels, 0)
			continue
		}
		v, known := r.levelOf(s)
		ok = ok && known
		r.effectors = append(r.effectors, measure{index: -1})
		r.levels = append(r.levels, v)
	}
	return ok
}

// levelOf is the concentration of an effector that holds for the whole table.
func (r *points) levelOf(s Substance) (float64, bool) {
	for _, from := range []struct {
		path string
		list []Named[string]
	}{{r.path + ".at", r.d.At}, {"conditions", r.study.Conditions}} {
		for _, e := range from.list {
			if e.Name != s.Name && (s.Symbol == "" || e.Name != s.Symbol) {
				continue
			}
			return r.effectorValue(join(from.path, e.Name), e.Value, s)
		}
	}
	if r.failed["effectors"] {
		return 0, false
	}
	r.faultAtKey(r.path, "unknown-level", fmt.Sprintf("data set %q does not say how much %s there was", r.d.Name, s.Name), nil,
		diag.Remedy{Write: fmt.Sprintf("at: {%s: 0 %s}", plainOrQuoted(s.Name), s.Unit)}, diag.Remedy{Say: "or name its column", Write: plainOrQuoted(s.Name) + ": COLUMN", Where: "under columns."})
	return 0, false
}

// effectorValue reads a concentration of an effector.
func (b *builder) effectorValue(p, text string, s Substance) (float64, bool) {
	q, err := units.ParseQuantity(text)
	if err != nil {
		e := err.(*units.SyntaxError)
		write := e.Write
		if write == "" {
			write = "5 " + s.Unit.String()
		}
		b.fault(p, "bad-quantity", s.Name+": "+e.Problem, nil, diag.Remedy{Write: plainOrQuoted(s.Name) + ": " + write})
		return 0, false
	}
	v, ok := b.inUnit(p, &q, s.Unit, s.Name)
	if ok && v < 0 {
		b.fault(p, "negative-concentration", fmt.Sprintf("%s cannot be negative", s.Name), nil, diag.Remedy{Write: plainOrQuoted(s.Name) + ": 0"})
		ok = false
	}
	return v, ok
}

// factorColumns settles the columns of factors, and levels that hold for the
// whole table.
func (r *points) factorColumns(p string) bool {
	ok := true
	for _, name := range r.out.Factors {
		i := slices.IndexFunc(r.d.Factors, func(f Named[string]) bool { return f.Name == name })
		if i < 0 {
			level, _ := r.levelText(r.d, name)
			r.factors, r.fixed = append(r.factors, -1), append(r.fixed, level)
			continue
		}
		at, column := r.path+".factors."+name, r.d.Factors[i].Value
		for _, c := range r.d.Columns.Others { // factors: [pH] with columns: {pH: acidity}
			if c.Name == name {
				column, at = c.Value.Name, p+"."+name
			}
		}
		if !r.said(at) {
			at = r.path + ".factors"
		}
		k := r.find(at, column)
		r.factors, r.fixed = append(r.factors, k), append(r.fixed, "")
		ok = ok && k >= 0
	}
	return ok
}

// decimals lets the table decide how its numbers are written.
func (r *points) decimals() {
	if r.d.Decimal != "" {
		return
	}
	var columns []int
	for _, m := range slices.Concat([]measure{r.ligand, r.sigma, r.sem, r.weight, r.time}, r.response, r.effectors) {
		if m.index >= 0 {
			columns = append(columns, m.index)
		}
	}
	r.t.FindDecimal(columns)
}

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
			r.faultAtKey(p, "missing-column", fmt.Sprintf("%s has no column %q", r.t.Name, f.Name), r.listColumns(), remedies...)
			ok = false
			continue
		}
		kept = r.filter(kept, i, f, p)
		ok = ok && len(kept) > 0
	}
	if ok && len(r.d.Rows) > 0 {
		r.t.Notes = append(r.t.Notes, fmt.Sprintf("%d of its %d rows were kept by `rows`", len(kept), len(r.t.Rows)))
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
		if slices.ContainsFunc(r.t.Rows, func(row table.Row) bool { return r.t.Keeps(table.Match{Any: []string{want}}, row.Cells[column]) }) {
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
		r.fault(at, "no-such-value", fmt.Sprintf("no row has %q in column %s", want, f.Name), note, remedies...)
	}
	if len(kept) == 0 && (len(f.Value.Any) == 0 || len(rows) > 0 && len(rows) < len(r.t.Rows)) {
		r.fault(p, "no-rows-kept", fmt.Sprintf("no row is left when column %s is asked for this", f.Name), note, diag.Remedy{Say: "Ask for values that the column holds."})
	}
	return kept
}

// row makes the points of one row.
func (r *points) row(row table.Row) {
	base := saturation.Point{Row: row.Line, X: math.NaN(), Y: math.NaN()}
	if r.leftOut >= 0 {
		base.LeftOut = row.Cells[r.leftOut].Text
	}
	if r.preparation >= 0 {
		base.Preparation = row.Cells[r.preparation].Text
		if base.Preparation == "" && base.LeftOut == "" {
			r.cell(row, r.preparation, "empty-cell", fmt.Sprintf("column %s: the preparation is missing", r.d.Columns.Preparation.Name), diag.Remedy{Say: "Write which preparation this row comes from."})
		}
	}
	if r.blocked >= 0 {
		base.Blocked = row.Cells[r.blocked].Text == r.d.BlockedWhen
	}
	for i, c := range r.factors {
		level := r.fixed[i]
		if c >= 0 {
			level = row.Cells[c].Text
			if level == "" && base.LeftOut == "" {
				r.cell(row, c, "empty-cell", fmt.Sprintf("column %s: the level of %s is missing", r.t.Columns[c].Text, r.out.Factors[i]))
			}
		}
		base.Levels = append(base.Levels, level)
	}
	ok := r.numbers(row, &base)
	r.responses(row, base, ok)
}

// numbers reads everything but the response.
func (r *points) numbers(row table.Row, pt *saturation.Point) bool {
	ok := true
	read := func(m measure, into *float64) {
		if m.index < 0 {
			return
		}
		v, good := r.number(row, m, pt.LeftOut != "")
		*into, ok = v, ok && good
	}
	read(r.ligand, &pt.X)
	if r.ligand.index < 0 {
		pt.X = 0
	}
	ok = r.notNegative(row, r.ligand, pt.X, "a concentration", pt.LeftOut) && ok
	for i, m := range r.effectors {
		y := r.levels[i]
		read(m, &y)
		ok = r.notNegative(row, m, y, "a concentration", pt.LeftOut) && ok
		pt.Effectors = append(pt.Effectors, y)
	}
	read(r.time, &pt.Seconds)
	ok = r.notNegative(row, r.time, pt.Seconds, "a time", pt.LeftOut) && ok
	return ok && r.scatter(row, pt)
}

// scatter reads the standard deviation or the weight of a row.
func (r *points) scatter(row table.Row, pt *saturation.Point) bool {
	m, v := r.sigma, 0.0
	factor := 1.0
	switch {
	case r.sem.index >= 0:
		m = r.sem
		n, ok := r.nFixed, r.nFixed > 0
		if r.n.index >= 0 {
			n, ok = r.number(row, r.n, pt.LeftOut != "")
		}
		if ok && (n < 1 || n != math.Trunc(n)) && pt.LeftOut == "" {
			r.cell(row, r.n.index, "out-of-bounds", fmt.Sprintf("column %s: %v is no number of values", r.n.name, n))
			ok = false
		}
		if !ok {
			return false
		}
		factor = math.Sqrt(n)
	case r.weight.index >= 0:
		m = r.weight
	}
	if m.index < 0 {
		return true
	}
	v, ok := r.number(row, m, pt.LeftOut != "")
	if ok && v <= 0 && pt.LeftOut == "" {
		what := "a standard deviation must be above 0"
		if m.path == r.weight.path {
			what = "a weight must be above 0; a row is left out by a reason in a left_out column"
		}
		r.cell(row, m.index, "out-of-bounds", fmt.Sprintf("column %s: %s", m.name, what))
		return false
	}
	if m.path == r.weight.path {
		pt.Weight = v
	} else {
		pt.Sigma = v * factor
	}
	return ok
}

// responses makes one point of each replicate column.
func (r *points) responses(row table.Row, base saturation.Point, ok bool) {
	found := 0
	for _, m := range r.response {
		if m.index < 0 {
			found++ // complained of already
			continue
		}
		if len(r.response) > 1 && row.Cells[m.index].IsEmpty() {
			continue // a replicate that was not measured
		}
		pt := base
		v, good := r.number(row, m, base.LeftOut != "")
		found++
		if !ok || !good {
			if base.LeftOut == "" {
				continue
			}
		}
		pt.Y = v
		r.out.Points = append(r.out.Points, pt)
	}
	if found == 0 && len(r.response) > 0 && base.LeftOut == "" {
		r.cell(row, r.response[0].index, "empty-cell", "no replicate of this row holds a number")
	}
}

// number reads a cell and converts it; in rows left out nothing is complained of.
func (r *points) number(row table.Row, m measure, leftOut bool) (float64, bool) {
	v, d := r.t.Number(row.Cells[m.index], m.name)
	if d != nil {
		if !leftOut {
			r.complaints = append(r.complaints, *d)
			r.d.faulty = true
		}
		return math.NaN(), leftOut
	}
	w, err := units.Convert(v, m.unit, m.to)
	if err == nil && (math.IsInf(w, 0) || math.IsNaN(w)) {
		if !leftOut {
			r.cell(row, m.index, "out-of-bounds", fmt.Sprintf("column %s: %v %s is beyond all numbers", m.name, v, m.unit))
		}
		return math.NaN(), false
	}
	return w, err == nil
}

// notNegative complains of a negative concentration or time.
func (r *points) notNegative(row table.Row, m measure, v float64, what, leftOut string) bool {
	if m.index < 0 || !(v < 0) {
		return true
	}
	if leftOut == "" {
		r.cell(row, m.index, "negative-concentration", fmt.Sprintf("column %s: %s cannot be negative", m.name, what),
			diag.Remedy{Say: "A blank is written as", Write: "0"}, diag.Remedy{Say: "A column of logarithms says so:", Write: fmt.Sprintf("{name: %s, unit: log10 %s}", plainOrQuoted(m.name), m.to)})
	}
	return false
}

// cell complains of one cell of a row.
func (r *points) cell(row table.Row, column int, code, problem string, remedies ...diag.Remedy) {
	if column < 0 {
		column = 0
	}
	if len(remedies) == 0 {
		remedies = []diag.Remedy{{Say: "Write what was measured, or leave the row out: with a column of reasons, say", Write: "left_out: COLUMN", Where: "under columns."}}
	}
	r.d.faulty = true
	r.complaints = append(r.complaints, r.t.Complain(row.Cells[column], code, problem, nil, remedies...))
}

// number writes a value as briefly as it can be written.
func number(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }
