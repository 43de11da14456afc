// Package gallery holds example studies with their data, all invented: the
// measurements of a marine station's laboratory that does not exist.
package gallery

import (
	"embed"
	"io/fs"
	"testing/fstest"
)

//go:embed studies
var studies embed.FS

// Names lists the studies, in the order in which they are worth reading.
func Names() []string { return []string{"clam", "oyster", "crab"} }

// Files returns the files of one study: NAME.yaml and its tables.
func Files(name string) (fs.FS, error) {
	out := fstest.MapFS{}
	for _, ext := range []string{".yaml", ".csv"} {
		b, err := studies.ReadFile("studies/" + name + ext)
		if err != nil {
			return nil, err
		}
		out[name+ext] = &fstest.MapFile{Data: b, Mode: 0o644}
	}
	return out, nil
}
