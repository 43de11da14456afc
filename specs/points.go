package specs

import (
	"fmt"
	"math"
	"slices"
	"strconv"

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
	whole                               bool    // every column was found
}

// points reads the table of data set i.
func (b *builder) points(i int, out *saturation.Dataset) {
	r := &points{builder: b, d: &b.study.Data[i], out: out, t: b.study.Data[i].table,
		path: indexed("data", i)}
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

// decimals lets the table decide how its numbers are written.
func (r *points) decimals() {
	if r.d.Decimal != "" {
		return
	}
	var columns []int
	for _, m := range slices.Concat([]measure{r.ligand, r.sigma, r.sem, r.weight, r.time},
		r.response, r.effectors) {
		if m.index >= 0 {
			columns = append(columns, m.index)
		}
	}
	r.t.FindDecimal(columns)
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
			r.cell(row, r.preparation, "empty-cell",
				fmt.Sprintf("column %s: the preparation is missing", r.d.Columns.Preparation.Name),
				diag.Remedy{Say: "Write which preparation this row comes from."})
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
				r.cell(row, c, "empty-cell", fmt.Sprintf("column %s: the level of %s is missing",
					r.t.Columns[c].Text, r.out.Factors[i]))
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
			r.cell(row, r.n.index, "out-of-bounds",
				fmt.Sprintf("column %s: %v is no number of values", r.n.name, n))
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
			r.cell(row, m.index, "out-of-bounds",
				fmt.Sprintf("column %s: %v %s is beyond all numbers", m.name, v, m.unit))
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
		r.cell(row, m.index, "negative-concentration",
			fmt.Sprintf("column %s: %s cannot be negative", m.name, what),
			diag.Remedy{Say: "A blank is written as", Write: "0"},
			diag.Remedy{Say: "A column of logarithms says so:",
				Write: fmt.Sprintf("{name: %s, unit: log10 %s}", plainOrQuoted(m.name), m.to)})
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
	r.complaints = append(r.complaints, r.t.Complain(row.Cells[column], code, problem, nil,
		remedies...))
}

// number writes a value as briefly as it can be written.
func number(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }
