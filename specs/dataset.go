package specs

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"ligancy/fit/saturation"
	"ligancy/specs/diag"
	"ligancy/specs/units"
)

// dataset settles one data set and reads its points.
func (b *builder) dataset(i int) saturation.Dataset {
	d := &b.study.Data[i]
	p := indexed("data", i)
	out := saturation.Dataset{Name: d.Name, File: d.File, SHA256: d.sha, Incubation: math.NaN(),
		Conditions: map[string]string{}}
	b.dataDefaults(p, d)
	out.Response = b.response(p+".response", d)
	out.Total = d.LigandAxis == "total"
	out.SitesPresent = b.sitesPresent(p, d)
	out.Noise = saturation.Noise(d.Noise)
	out.Incubation = b.seconds(p+".incubation", d.Incubation)
	out.Trace = d.Columns.Time.Name != ""
	out.Phases = b.phases(p+".phases", d.Phases)
	if out.Trace && len(d.Phases) == 0 && !b.said(p+".phases") {
		b.faultAtKey(p+".columns.time", "missing-key",
			"a table with a time column needs its phases", nil,
			diag.Remedy{Write: "phases: [{add: 10 nM, for: 30 min}]"})
	}
	b.levels(p, d, &out)
	if d.table != nil {
		b.points(i, &out)
		out.Notes = d.table.Notes
	}
	return out
}

// levels settles the factors of a data set: its columns, and what `at` or the
// conditions hold where a mechanism, a response or a contrast asks for it.
func (b *builder) levels(p string, d *Data, out *saturation.Dataset) {
	for _, f := range d.Factors {
		out.Factors = append(out.Factors, f.Name)
		if slices.Contains([]string{byData, byPreparation, "all"}, f.Name) {
			b.faultAtKey(join(p+".factors", f.Name), "reserved-name",
				fmt.Sprintf("%q has a meaning of its own and cannot name a factor", f.Name), nil,
				diag.Remedy{Say: "Give the factor another name."})
		}
	}
	for _, e := range d.At {
		if b.effector(e.Name) >= 0 {
			continue // read with the effectors
		}
		out.Conditions[e.Name] = e.Value
		if slices.Contains(out.Factors, e.Name) {
			b.faultAtKey(join(p+".at", e.Name), "two-answers",
				fmt.Sprintf("%s is a column here, so it cannot hold for the whole table", e.Name),
				nil, diag.Remedy{Say: "Keep one of the two."})
		}
	}
	for _, name := range b.asked() {
		if _, ok := b.levelText(d, name); ok && !slices.Contains(out.Factors, name) &&
			b.effector(name) < 0 {
			out.Factors = append(out.Factors, name)
		}
	}
}

// levelText is what `at`, or else the conditions, say of a factor.
func (b *builder) levelText(d *Data, name string) (string, bool) {
	for _, e := range slices.Concat(d.At, b.study.Conditions) {
		if e.Name == name {
			return e.Value, true
		}
	}
	return "", false
}

// asked are the names by which something is to differ or to be compared, and
// all factors that are columns somewhere.
func (b *builder) asked() []string {
	var names []string
	add := func(name string) {
		if !slices.Contains(names, name) {
			names = append(names, name)
		}
	}
	for _, d := range b.study.Data {
		for _, f := range d.Factors {
			add(f.Name)
		}
		for _, e := range d.Response.Differs {
			add(e.Value)
		}
	}
	for _, m := range b.study.Mechanisms {
		for _, e := range m.Differs {
			add(e.Value)
		}
	}
	for _, c := range b.study.Contrasts {
		add(c.Between)
	}
	return names
}

// dataDefaults fills in what a data set leaves out.
func (b *builder) dataDefaults(p string, d *Data) {
	word := func(key string, v *string, byDefault string) {
		if !b.said(p + "." + key) {
			*v = byDefault
			b.byDefault("data."+d.Name+"."+key, byDefault)
		}
	}
	word("ligand_axis", &d.LigandAxis, "free")
	noise := "constant"
	if d.Columns.Sigma.Name != "" || d.Columns.SEM.Name != "" {
		noise = "given"
	}
	word("noise", &d.Noise, noise)
	if d.Columns.Blocked.Name != "" {
		word("blocked_when", &d.BlockedWhen, "blocked")
	} else if d.BlockedWhen != "" {
		b.fault(p+".blocked_when", "missing-column",
			"blocked_when needs a column that says which tubes were blocked", nil,
			diag.Remedy{Write: "blocked: COLUMN", Where: "under columns."})
	}
}

// knowsLevel reports whether a data set can tell the levels of a key apart, or complains.
func (b *builder) knowsLevel(d *Data, key, at string) bool {
	var known []string
	for _, f := range d.Factors {
		known = append(known, f.Name)
	}
	for _, e := range slices.Concat(d.At, b.study.Conditions) {
		known = append(known, e.Name)
	}
	for _, e := range b.study.Effectors {
		known = append(known, e.Name)
	}
	if d.Columns.Preparation.Name != "" {
		known = append(known, byPreparation)
	}
	known = append(known, byData)
	if slices.Contains(known, key) {
		return true
	}
	b.levelUnknown(d.Name, key, at, known)
	return false
}

func (b *builder) levelUnknown(data, key, at string, known []string) {
	if key == byPreparation {
		b.fault(at, "unknown-factor",
			fmt.Sprintf("data set %q does not say which preparation a row comes from", data), nil,
			diag.Remedy{Write: "preparation: COLUMN", Where: "under columns."})
		return
	}
	var remedies []diag.Remedy
	if near := diag.Nearest(key, known); near != "" {
		remedies = []diag.Remedy{{Write: lastName(at) + ": " + near}}
	}
	remedies = append(remedies, diag.Remedy{Say: "For a column that tells curves apart write",
		Write: fmt.Sprintf("factors: {%s: COLUMN}", key), Where: "under the data set."})
	b.fault(at, "unknown-factor", fmt.Sprintf("data set %q has no factor %q", data, key),
		[]string{"It can tell apart: " + strings.Join(unique(known), ", ") + "."}, remedies...)
}

// effector is the index of an effector by name or symbol; −1 where there is none.
func (b *builder) effector(name string) int {
	return slices.IndexFunc(b.study.Effectors, func(s Substance) bool {
		return name != "" && (s.Name == name || s.Symbol == name)
	})
}

func (b *builder) effectorNames() string {
	var names []string
	for _, e := range b.study.Effectors {
		names = append(names, e.Name)
	}
	if len(names) == 0 {
		return "none so far"
	}
	return strings.Join(names, ", ")
}

// plainOrQuoted writes a name so that YAML reads it as it is.
func plainOrQuoted(s string) string {
	for _, r := range s {
		if !(r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z' || r >= '0' && r <= '9' || r == '_' ||
			r == '-' || r == ' ' || r == '.') {
			return quoteText(s)
		}
	}
	if s == "" || s == "null" || s == "Null" || s == "NULL" || isNumber(s) || strings.HasPrefix(s,
		"-") || strings.TrimSpace(s) != s {
		return quoteText(s)
	}
	return s
}

// seconds settles a time; NaN where it is not said.
func (b *builder) seconds(p string, q *units.Quantity) float64 {
	if q == nil {
		return math.NaN()
	}
	if q.Bare || !q.Unit.IsTime() {
		b.fault(p, "wrong-unit", fmt.Sprintf("%s: %s is no time", lastName(p), q), nil,
			diag.Remedy{Write: fmt.Sprintf("%s: %v min", lastName(p), q.Value)})
		return math.NaN()
	}
	v, _ := q.In(units.MustParse("s"))
	if v <= 0 {
		b.fault(p, "out-of-bounds", fmt.Sprintf("%s must be above 0", lastName(p)), nil,
			diag.Remedy{Write: lastName(p) + ": 30 min"})
	}
	return v
}

// inUnit converts a quantity to a unit; a bare number is in that unit already.
func (b *builder) inUnit(p string, q *units.Quantity, u units.Unit, of string) (float64, bool) {
	if q.Bare {
		return q.Value, true
	}
	v, err := q.In(u)
	if err != nil {
		b.wrongUnit(p, q.Unit, u, of)
		return math.NaN(), false
	}
	return v, true
}

// wrongUnit complains of a unit that does not convert.
func (b *builder) wrongUnit(p string, got, want units.Unit, of string) {
	if b.failed["ligand.unit"] || b.failed["effectors"] {
		return // nothing is known of the unit it should have
	}
	d := diag.Diagnostic{Code: "wrong-unit", Position: b.where(p),
		Problem: fmt.Sprintf("%s is %s; %s is in %s, %s", got, got.Kind(), of, want, want.Kind())}
	switch {
	case got.IsPressure() && want.IsConcentration() || got.IsConcentration() && want.IsPressure():
		d.Notes = []string{"A pressure becomes a concentration only with a solubility, which belongs to your buffer and temperature: convert the column yourself."}
	case got.Kind() == "a length" && want.IsConcentration():
		if meant := strings.TrimSuffix(got.String(), "m") + "M"; isUnit(meant) {
			d.Remedies = []diag.Remedy{{Write: meant}}
		}
	}
	if d.Remedies == nil {
		d.Remedies = []diag.Remedy{{Say: "Write a unit like", Write: want.String()}}
	}
	b.complain(d)
}

func isUnit(s string) bool {
	_, err := units.Parse(s)
	return err == nil
}
