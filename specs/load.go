package specs

import (
	"io/fs"

	"ligancy/fit/saturation"
	"ligancy/specs/diag"
)

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
