package specs

import (
	"fmt"
	"io/fs"
	"math"
	"path"
	"slices"
	"strconv"
	"strings"

	"ligancy/fit/saturation"
	"ligancy/specs/diag"
	"ligancy/specs/units"
)

// builder settles a study that was read: defaults, tables, units, mechanisms,
// and everything that can only be judged when the parts are seen together.
type builder struct {
	*reader
	study    *Study
	fsys     fs.FS
	files    map[string]file
	analysis *saturation.Analysis
}

// build makes the analysis; it is complete only where nothing was complained of.
func (b *builder) build() {
	s := b.study
	b.analysis = &saturation.Analysis{Title: s.Title, Origin: s.Origin,
		Conditions: map[string]string{}, Kelvin: math.NaN()}
	b.substances()
	b.general()
	for i := range s.Data {
		b.beside(i)
	}
	b.dataNames()
	for i := range s.Data {
		b.analysis.Data = append(b.analysis.Data, b.dataset(i))
	}
	b.commonTemperature()
	b.candidates()
	b.contrasts()
	b.requests()
	b.together()
}

// said reports whether the study holds something at a path.
func (b *builder) said(path string) bool {
	_, ok := b.places[path]
	return ok
}

// where is the place of a value; of a path that the study does not hold, the
// key of the nearest thing around it.
func (b *builder) where(p string) diag.Position {
	if at, ok := b.places[p]; ok {
		return at.value
	}
	return b.key(p)
}

// key is the place of a key, or of the nearest around it.
func (b *builder) key(p string) diag.Position {
	for p != "" {
		if at, ok := b.places[p]; ok {
			return at.key
		}
		p = around(p)
	}
	return diag.Position{File: b.study.File}
}

// around is the path of what holds a thing.
func around(p string) string {
	i := strings.LastIndexAny(p, ".[")
	if i < 0 {
		return ""
	}
	return p[:i]
}

// fault complains of the value at a path.
func (b *builder) fault(p, code, problem string, notes []string, remedies ...diag.Remedy) {
	b.complain(diag.Diagnostic{Code: code, Position: b.where(p), Problem: problem, Notes: notes,
		Remedies: remedies})
}

// faultAtKey complains of the key at a path.
func (b *builder) faultAtKey(p, code, problem string, notes []string, remedies ...diag.Remedy) {
	b.complain(diag.Diagnostic{Code: code, Position: b.key(p), Problem: problem, Notes: notes,
		Remedies: remedies})
}

// warn is fault for what can be used as it is.
func (b *builder) warn(p, code, problem string, notes []string, remedies ...diag.Remedy) {
	b.complain(diag.Diagnostic{Severity: diag.Warning, Code: code, Position: b.where(p),
		Problem: problem, Notes: notes, Remedies: remedies})
}

// byDefault records a setting that the study leaves out.
func (b *builder) byDefault(place, value string) { b.study.Defaults[place] = value }

// substances settles the ligand and the effectors.
func (b *builder) substances() {
	s := b.study
	b.analysis.Ligand = b.substance("ligand", s.Ligand)
	taken := map[string]string{s.Ligand.Name: "the ligand"}
	for i, e := range s.Effectors {
		p := indexed("effectors", i)
		b.analysis.Effectors = append(b.analysis.Effectors, b.substance(p, e))
		if who, ok := taken[e.Name]; ok && e.Name != "" {
			b.fault(p+".name", "repeated-name",
				fmt.Sprintf("%s and this effector are both named %q", who, e.Name), nil,
				diag.Remedy{Say: "Give each ligand a name of its own."})
		}
		if slices.Contains(keyNames(columnKeys()), e.Name) {
			b.fault(p+".name", "reserved-name", fmt.Sprintf("%q is the name of a kind of column",
				e.Name), nil, diag.Remedy{Say: "Give the effector another name."})
		}
		taken[e.Name] = "effector " + strconv.Itoa(i+1)
	}
}

func (b *builder) substance(p string, s Substance) saturation.Substance {
	if s.Unit.IsLogarithm() {
		b.fault(p+".unit", "wrong-unit", "constants and results are on a linear axis",
			[]string{"A column of logarithms says so itself."},
			diag.Remedy{Write: "unit: " + s.Unit.Linear().String()})
	}
	return saturation.Substance{Name: s.Name, Symbol: s.Symbol, Unit: s.Unit.String()}
}

// general settles what belongs to no data set.
func (b *builder) general() {
	s, a := b.study, b.analysis
	if s.Title == "" && !b.said("title") {
		a.Title = strings.TrimSuffix(path.Base(s.File), path.Ext(s.File))
		s.Title = a.Title
		b.byDefault("title", a.Title)
	}
	for _, c := range s.Conditions {
		a.Conditions[c.Name] = c.Value
	}
	b.temperature("conditions")
	b.settings()
	if len(s.Data) == 0 && s.Curve == nil && s.Course == nil && s.Plan == nil && !b.said("data") {
		b.faultAtKey("", "no-data", "the study has no data, and asks for no curve, course or plan",
			nil,
			diag.Remedy{Write: "data:"})
	}
}

// temperature reads the temperature, if one is stated.
func (b *builder) temperature(p string) {
	text, ok := b.analysis.Conditions["temperature"]
	if !ok {
		return
	}
	q, err := units.ParseQuantity(text)
	at := join(p, "temperature")
	switch {
	case err != nil:
		e := err.(*units.SyntaxError)
		write := e.Write
		if write == "" {
			write = "15 degC"
		}
		b.fault(at, "bad-quantity", "temperature: "+e.Problem, nil,
			diag.Remedy{Write: "temperature: " + write})
		return
	case q.Bare || !q.Unit.IsTemperature():
		b.fault(at, "wrong-unit", fmt.Sprintf("temperature: %s is no temperature", text), nil,
			diag.Remedy{Write: "temperature: " + strconv.FormatFloat(q.Value, 'g', -1,
				64) + " degC"})
		return
	}
	k, _ := q.In(units.MustParse("K"))
	if k < 200 || k > 500 {
		b.fault(at, "out-of-bounds", fmt.Sprintf("temperature: at %s nothing binds in water", text),
			nil, diag.Remedy{Write: "temperature: 15 degC"})
		return
	}
	b.analysis.Kelvin = k
}

// commonTemperature takes the temperature from the data sets, where all say the same.
func (b *builder) commonTemperature() {
	if _, ok := b.analysis.Conditions["temperature"]; ok || len(b.analysis.Data) == 0 {
		return
	}
	text := b.analysis.Data[0].Conditions["temperature"]
	for _, d := range b.analysis.Data {
		if text == "" || d.Conditions["temperature"] != text {
			return
		}
	}
	b.analysis.Conditions["temperature"] = text
	b.temperature("data[0].at")
}

// settings are those of the fit, with their defaults.
func (b *builder) settings() {
	f := &b.study.Fit
	set := &b.analysis.Settings
	count := func(p string, v *int, byDefault int) {
		if !b.said(p) {
			*v = byDefault
			b.byDefault(p, strconv.Itoa(byDefault))
		}
	}
	word := func(p string, v *string, byDefault string) {
		if !b.said(p) {
			*v = byDefault
			b.byDefault(p, byDefault)
		}
	}
	count("fit.starts", &f.Starts, 50)
	count("fit.seed", &f.Seed, 1)
	count("fit.decide.draws", &f.Decide.Draws, 199)
	word("fit.interval.method", &f.Interval.Method, "profile")
	if !b.said("fit.interval.level") {
		f.Interval.Level = 0.95
		b.byDefault("fit.interval.level", "0.95")
	}
	if b.said("fit.bootstrap") {
		word("fit.bootstrap.by", &f.Bootstrap.By, "parametric")
	}
	set.Starts, set.Seed, set.Draws = f.Starts, uint64(f.Seed), f.Decide.Draws
	set.Level, set.Method = f.Interval.Level, f.Interval.Method
	set.Bootstrap = saturation.Bootstrap{Draws: f.Bootstrap.Draws, By: f.Bootstrap.By}
}

// dataNames names data sets that have no name, and complains of repeated ones.
func (b *builder) dataNames() {
	seen := map[string]int{}
	for i := range b.study.Data {
		d := &b.study.Data[i]
		p := indexed("data", i)
		if !b.said(p+".name") && d.File != "" {
			d.Name = strings.TrimSuffix(path.Base(d.File), path.Ext(d.File))
			b.byDefault("data."+d.Name+".name", d.Name)
		}
		if j, ok := seen[d.Name]; ok && d.Name != "" {
			b.fault(p+".name", "repeated-name", fmt.Sprintf("data sets %d and %d are both named %q",
				j+1, i+1, d.Name), nil, diag.Remedy{Say: "Give each a name of its own:",
				Write: "name: " + d.Name + " 2"})
		}
		seen[d.Name] = i
	}
}
