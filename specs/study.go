// Package specs reads studies: one YAML file with its tables becomes a typed
// Study and a list of every complaint with its place; a Study without errors
// builds what an analysis needs. Units and YAML stop here.
package specs

import (
	"io/fs"

	"ligancy/fit/saturation"
	"ligancy/specs/diag"
)

// Study is a study as it was read, its tables included.
type Study struct {
	File          string // name in the file system it was read from
	SHA256        string // of the study file, in hexadecimal
	Title, Origin string
	// Defaults are the settings in force that the study does not say, by
	// their place: "data.curves.response.low" → "0".
	Defaults map[string]string

	complaints diag.List
	analysis   *saturation.Analysis
}

// Load reads the study `name` and the tables beside it, and finds every
// complaint that can be found at once, sorted. The study is nil only where the
// file could not be read at all.
func Load(fsys fs.FS, name string) (*Study, diag.List) {
	return nil, diag.List{{Code: "not-ready", Position: diag.Position{File: name}, Problem: "studies cannot be read yet"}}
}

// Build returns what an analysis needs, or nil and the errors of Load.
func (s *Study) Build() (*saturation.Analysis, diag.List) {
	if s.complaints.HasErrors() {
		return nil, s.complaints
	}
	return s.analysis, nil
}
