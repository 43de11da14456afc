// Package report turns an outcome into what people keep: one JSON document,
// CSV tables, and text for a terminal.
package report

import (
	"maps"
	"reflect"

	"ligancy/fit/saturation"
)

// Format names the layout of result documents.
const Format = "ligancy-result/1"

// Document is a result: what was analysed, under which settings, and every row found.
type Document struct {
	Format      string   `json:"format"`
	Program     Program  `json:"program"`
	Interrupted bool     `json:"interrupted,omitempty"` // stopped by the user: whole rows, not all of them
	Study       Study    `json:"study"`
	Data        []Data   `json:"data"`
	Settings    Settings `json:"settings"`

	*saturation.Outcome // rows, under the names of its own tags

	analysis *saturation.Analysis
}

// Program says what wrote a document.
type Program struct {
	Version string `json:"version"`
}

// Study identifies the study file.
type Study struct {
	Title  string `json:"title"`
	Origin string `json:"origin"`
	File   string `json:"file"`
	SHA256 string `json:"sha256"`
}

// Data identifies one data set and counts its points.
type Data struct {
	Name    string `json:"name"`
	File    string `json:"file"`
	SHA256  string `json:"sha256"`
	Points  int    `json:"points"` // used
	LeftOut int    `json:"left_out"`
}

// Settings in force.
type Settings struct {
	Seed     uint64            `json:"seed"`
	Starts   int               `json:"starts"`
	Level    float64           `json:"level"`
	Method   string            `json:"method"`
	Draws    int               `json:"draws"`    // of the bootstrap that decides standings
	Defaults map[string]string `json:"defaults"` // in force without being said in the study
}

// Source is what the analysis itself does not know of its files.
type Source struct {
	Version string            // of the program
	File    string            // study file as the user named it
	SHA256  string            // of the study file
	Digests map[string]string // SHA-256 by name of data file
	// Defaults are the settings in force that the study does not say.
	Defaults map[string]string
}

// New assembles the document of an outcome. A list that is nil becomes an empty
// one, so that each is written as a list.
func New(a *saturation.Analysis, o *saturation.Outcome, src Source) *Document {
	rows := *o
	rows.Conditions = conditionsOf(a)
	for _, l := range lists(&rows) {
		if l.rows.IsNil() {
			l.rows.Set(reflect.MakeSlice(l.rows.Type(), 0, 0))
		}
	}
	rows.Verdict.Ties = list(rows.Verdict.Ties)
	rows.Verdict.Open = list(rows.Verdict.Open)
	rows.Verdict.Out = list(rows.Verdict.Out)
	rows.Verdict.Twins = list(rows.Verdict.Twins)
	d := &Document{
		Format:      Format,
		Program:     Program{Version: src.Version},
		Interrupted: o.Interrupted,
		Study:       Study{Title: a.Title, Origin: a.Origin, File: src.File, SHA256: src.SHA256},
		Data:        []Data{},
		Settings: Settings{
			Seed: a.Settings.Seed, Starts: a.Settings.Starts, Level: a.Settings.Level,
			Method: a.Settings.Method, Draws: a.Settings.Draws, Defaults: map[string]string{},
		},
		Outcome:  &rows,
		analysis: a,
	}
	maps.Copy(d.Settings.Defaults, src.Defaults)
	maps.Copy(d.Settings.Defaults, o.Defaults)
	for i := range a.Data {
		d.Data = append(d.Data, describe(&a.Data[i], src.Digests))
	}
	return d
}

func describe(set *saturation.Dataset, digests map[string]string) Data {
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

// list returns rows, or an empty list in place of nil.
func list[T any](rows []T) []T {
	if rows == nil {
		return []T{}
	}
	return rows
}
