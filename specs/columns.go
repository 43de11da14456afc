package specs

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"ligancy/specs/diag"
	"ligancy/specs/units"
)

// columns finds every column; false where one is missing.
func (r *points) columns() bool {
	c := &r.d.Columns
	p := r.path + ".columns"
	r.whole = true
	if c.Ligand.Name == "" && !r.said(p+".ligand") && c.Time.Name == "" {
		r.faultAtKey(p, "missing-key", `columns needs the key "ligand"`, r.listColumns(),
			diag.Remedy{Write: "ligand: COLUMN"})
		r.whole = false
	}
	yUnit := units.Unit{}
	if r.d.Response.Unit != nil {
		yUnit = *r.d.Response.Unit
	}
	r.ligand = r.measure("ligand", c.Ligand, r.study.Ligand.Unit, "the ligand")
	for i, col := range c.Response {
		key := "response"
		if len(c.Response) > 1 || r.said(indexed(p+".response", 0)) {
			key = indexed("response", i)
		}
		r.response = append(r.response, r.measure(key, col, yUnit, "the response"))
	}
	r.sigma = r.measure("sigma", c.Sigma, yUnit, "the response")
	r.sem = r.measure("sem", c.SEM, yUnit, "the response")
	r.weight = r.measure("weight", c.Weight, units.Unit{}, "a weight")
	r.time = r.measure("time", c.Time, units.MustParse("s"), "time")
	r.preparation = r.text("preparation", c.Preparation)
	r.blocked = r.text("blocked", c.Blocked)
	r.leftOut = r.text("left_out", c.LeftOut)
	known := r.countColumn(p)
	known = r.otherColumns(p) && known
	known = r.factorColumns(p) && known
	return r.whole && known
}

// measure settles a column of numbers.
func (r *points) measure(key string, col Column, to units.Unit, of string) measure {
	m := measure{index: -1, name: col.Name, unit: to, to: to, path: r.path + ".columns." + key}
	if col.Name == "" {
		return m
	}
	m.index = r.find(m.path, col.Name)
	r.whole = r.whole && m.index >= 0
	switch {
	case col.Unit == nil && m.index >= 0:
		r.otherUnitInHeader(m, of)
	case col.Unit != nil:
		m.unit = *col.Unit
		if !m.unit.Same(to) {
			r.wrongUnit(m.path+".unit", m.unit, to, of)
			r.whole = false
		}
	}
	return m
}

// text settles a column of words; −1 where the study names none.
func (r *points) text(key string, col Column) int {
	if col.Name == "" {
		return -1
	}
	i := r.find(r.path+".columns."+key, col.Name)
	r.whole = r.whole && i >= 0
	return i
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
	r.fault(at, "missing-column", fmt.Sprintf("%s has no column %q", r.t.Name, name),
		r.listColumns(), remedies...)
	return -1
}

func (r *points) listColumns() []string {
	return []string{"Its columns are: " + shortList(r.t.Header(), 40) + "."}
}

// nearestColumn also takes a header that begins with the word, or the reverse,
// or whose first word is near.
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
	for _, h := range header {
		if i := strings.IndexAny(h, "_ (.["); i > 2 && diag.Nearest(name, []string{h[:i]}) != "" {
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
		r.warn(m.path, "unit-in-header",
			fmt.Sprintf("column %s looks like %s, but is read as %s, the unit of %s", m.name, u,
				m.to, of), nil,
			diag.Remedy{Say: "If it holds " + u.String() + ", write",
				Write: fmt.Sprintf("%s: {name: %s, unit: %s}", lastName(m.path),
					plainOrQuoted(m.name), u)},
			diag.Remedy{Say: "If not, rename the column."})
	}
}

// countColumn settles n, a column or a number.
func (r *points) countColumn(p string) bool {
	r.n = measure{index: -1, path: p + ".n"}
	name := r.d.Columns.N.Name
	if name == "" {
		if r.d.Columns.SEM.Name != "" {
			r.faultAtKey(p+".sem", "missing-key",
				"a standard error needs the number of values it is of", nil,
				diag.Remedy{Write: "n: COLUMN"},
				diag.Remedy{Say: "or, where it is the same in every row,", Write: "n: 3"})
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
func (r *points) otherColumns(p string) bool {
	ok := true
	for _, e := range r.d.Columns.Others {
		if r.effector(e.Name) >= 0 || slices.ContainsFunc(r.d.Factors,
			func(f Named[string]) bool { return f.Name == e.Name }) {
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
			remedies = []diag.Remedy{{Say: "For a column that tells curves apart write",
				Write: fmt.Sprintf("factors: {%s: %s}", plainOrQuoted(e.Name),
					plainOrQuoted(e.Value.Name)), Where: "under the data set."}}
		}
		r.faultAtKey(join(p, e.Name), "unknown-key",
			fmt.Sprintf("columns has no key %q, and the study no such effector", e.Name),
			[]string{"Its keys are: " + strings.Join(valid, ", ") + "."}, remedies...)
	}
	for _, s := range r.study.Effectors {
		i := slices.IndexFunc(r.d.Columns.Others,
			func(c Named[Column]) bool {
				return c.Name == s.Name || s.Symbol != "" &&
					c.Name == s.Symbol
			})
		if i >= 0 {
			r.effectors = append(r.effectors, r.measure(r.d.Columns.Others[i].Name,
				r.d.Columns.Others[i].Value, s.Unit, s.Name))
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
	r.faultAtKey(r.path, "unknown-level",
		fmt.Sprintf("data set %q does not say how much %s there was", r.d.Name, s.Name), nil,
		diag.Remedy{Write: fmt.Sprintf("at: {%s: 0 %s}", plainOrQuoted(s.Name), s.Unit)},
		diag.Remedy{Say: "or name its column", Write: plainOrQuoted(s.Name) + ": COLUMN",
			Where: "under columns."})
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
		b.fault(p, "bad-quantity", s.Name+": "+e.Problem, nil,
			diag.Remedy{Write: plainOrQuoted(s.Name) + ": " + write})
		return 0, false
	}
	v, ok := b.inUnit(p, &q, s.Unit, s.Name)
	if ok && v < 0 {
		b.fault(p, "negative-concentration", fmt.Sprintf("%s cannot be negative", s.Name), nil,
			diag.Remedy{Write: plainOrQuoted(s.Name) + ": 0"})
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
