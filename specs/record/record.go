// Package record keeps the result of a fit as one small text file beside the
// study, made for version control: digests of the files, program version,
// settings, and per mechanism how it stands and which numbers it found. Two
// records are compared in units of their own intervals.
package record

import (
	"cmp"
	"slices"
	"strings"

	"ligancy/fit/saturation"
)

// Format is the first word of a record, and the version of its layout.
const Format = "ligancy-record/1"

// Record is the result of one fit.
type Record struct {
	Format     string      `yaml:"format" json:"format"`
	Version    string      `yaml:"version" json:"version"` // of the program
	Title      string      `yaml:"title" json:"title"`
	Origin     string      `yaml:"origin" json:"origin"`
	Study      File        `yaml:"study" json:"study"`
	Data       []Data      `yaml:"data" json:"data"`
	Settings   Settings    `yaml:"settings" json:"settings"`
	Slope      string      `yaml:"slope" json:"slope"` // what all mechanisms not out say of n_H at half saturation
	Mechanisms []Mechanism `yaml:"mechanisms" json:"mechanisms"`
}

// File is a file and its SHA-256, in hexadecimal.
type File struct {
	File   string `yaml:"file" json:"file"`
	SHA256 string `yaml:"sha256" json:"sha256"`
}

// Data is one data set.
type Data struct {
	Name    string `yaml:"name" json:"name"`
	File    string `yaml:"file" json:"file"`
	SHA256  string `yaml:"sha256" json:"sha256"`
	Points  int    `yaml:"points" json:"points"` // used
	LeftOut int    `yaml:"left_out" json:"left_out"`
}

// Settings under which the numbers were found.
type Settings struct {
	Seed           uint64  `yaml:"seed" json:"seed"`
	Starts         int     `yaml:"starts" json:"starts"`
	Level          float64 `yaml:"level" json:"level"`
	Method         string  `yaml:"method" json:"method"`
	Draws          int     `yaml:"draws" json:"draws"` // of the bootstrap that decides standings
	BootstrapDraws int     `yaml:"bootstrap_draws,omitempty" json:"bootstrap_draws,omitempty"`
	BootstrapBy    string  `yaml:"bootstrap_by,omitempty" json:"bootstrap_by,omitempty"`
}

// Mechanism is how one mechanism stands, and its numbers.
type Mechanism struct {
	Name         string   `yaml:"name" json:"name"`
	Family       string   `yaml:"family" json:"family"`
	Sites        int      `yaml:"sites" json:"sites"`
	Status       string   `yaml:"status" json:"status"`
	Standing     string   `yaml:"standing" json:"standing"`
	Constants    int      `yaml:"constants" json:"constants"`
	Points       int      `yaml:"points" json:"points"`
	SumOfSquares *float64 `yaml:"sum_of_squares" json:"sum_of_squares"`
	AICc         *float64 `yaml:"aicc" json:"aicc"`
	Numbers      []Number `yaml:"numbers" json:"numbers"`
}

// Number is one number with its interval; what does not exist is nil.
type Number struct {
	Of     string   `yaml:"of" json:"of"` // constant, combination, response, hill, position, contrast
	Name   string   `yaml:"name" json:"name"`
	Curve  string   `yaml:"curve" json:"curve"`
	Ligand string   `yaml:"ligand,omitempty" json:"ligand,omitempty"`
	Site   string   `yaml:"site,omitempty" json:"site,omitempty"`
	Value  *float64 `yaml:"value" json:"value"`
	Low    *float64 `yaml:"low,omitempty" json:"low"`
	High   *float64 `yaml:"high,omitempty" json:"high"`
	Unit   string   `yaml:"unit" json:"unit"`
	Held   string   `yaml:"held" json:"held"`
}

// Source is what an analysis does not know of its files and its program.
type Source struct {
	Version, File, SHA256 string
	Digests               map[string]string // SHA-256 by name of data file
}

// New makes the record of an outcome, sorted, its numbers rounded to the digits
// that are kept.
func New(a *saturation.Analysis, o *saturation.Outcome, src Source) *Record {
	set := a.Settings
	r := &Record{Format: Format, Version: src.Version, Title: a.Title, Origin: a.Origin,
		Study: File{src.File, src.SHA256}, Slope: o.Verdict.Slope,
		Settings: Settings{Seed: set.Seed, Starts: set.Starts, Level: set.Level, Method: set.Method,
			Draws: set.Draws}}
	if set.Bootstrap.Draws > 0 {
		r.Settings.BootstrapDraws, r.Settings.BootstrapBy = set.Bootstrap.Draws, set.Bootstrap.By
	}
	for i := range a.Data {
		r.Data = append(r.Data, dataOf(&a.Data[i], src.Digests))
	}
	for i := range o.Mechanisms {
		r.Mechanisms = append(r.Mechanisms, mechanismOf(&o.Mechanisms[i], o.Quantities))
	}
	slices.SortStableFunc(r.Mechanisms, func(a, b Mechanism) int { return cmp.Compare(a.Name, b.Name) })
	return r
}

func dataOf(set *saturation.Dataset, digests map[string]string) Data {
	d := Data{Name: set.Name, File: set.File, SHA256: digests[set.File]}
	for i := range set.Points {
		if set.Points[i].LeftOut == "" {
			d.Points++
		} else {
			d.LeftOut++
		}
	}
	return d
}

func mechanismOf(row *saturation.MechanismRow, all []saturation.QuantityRow) Mechanism {
	m := Mechanism{Name: row.Name, Family: row.Family, Sites: row.Sites, Status: row.Status,
		Standing: row.Standing, Constants: row.Constants, Points: row.Points,
		SumOfSquares: significant(float64(row.SumOfSquares), freeDigits),
		AICc:         places(float64(row.AICc), aiccPlaces)}
	for i := range all {
		if q := &all[i]; q.Mechanism == row.Name && kept(q) {
			m.Numbers = append(m.Numbers, numberOf(q))
		}
	}
	slices.SortStableFunc(m.Numbers, compareNumbers)
	return m
}

// kinds of numbers that are kept, in their order, and which names of each; nil
// means all. Whatever else a result holds follows from these.
var kinds = []struct {
	of    string
	names []string
}{
	{"constant", nil}, {"combination", nil}, {"response", nil},
	{"hill", []string{"n_H_half", "n_H_max", "n_H_hill_reading"}},
	{"position", []string{"x_half"}},
	{"contrast", nil},
}

func kindOf(of string) int {
	for i := range kinds {
		if kinds[i].of == of {
			return i
		}
	}
	return -1
}

func kept(q *saturation.QuantityRow) bool {
	i := kindOf(q.Of)
	return i >= 0 && (kinds[i].names == nil || slices.Contains(kinds[i].names, q.Name))
}

func numberOf(q *saturation.QuantityRow) Number {
	n := Number{Of: q.Of, Name: q.Name, Curve: q.Curve, Unit: q.Unit, Held: q.Held}
	if q.Ligand != nil {
		n.Ligand = *q.Ligand
	}
	if q.Site != nil {
		n.Site = *q.Site
	}
	n.Value, n.Low, n.High = rounded(q)
	return n
}

// key tells the numbers of a mechanism apart.
func (n *Number) key() string {
	return strings.Join([]string{n.Of, n.Name, n.Curve, n.Ligand, n.Site, n.Unit}, "\x00")
}

func compareNumbers(a, b Number) int {
	return cmp.Or(cmp.Compare(kindOf(a.Of), kindOf(b.Of)), cmp.Compare(a.Name, b.Name),
		cmp.Compare(a.Curve, b.Curve), cmp.Compare(a.Ligand, b.Ligand), cmp.Compare(a.Site, b.Site))
}

// FileName is the name of a study's record: clam.yaml → clam.record.yaml.
func FileName(study string) string {
	for _, suffix := range []string{".yaml", ".yml"} {
		if base, ok := strings.CutSuffix(study, suffix); ok && base != "" && !strings.HasSuffix(base, "/") {
			return base + ".record.yaml"
		}
	}
	return study + ".record.yaml"
}
