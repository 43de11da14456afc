// Package gallery holds example studies with their data, all invented: the
// measurements of a marine station's laboratory that does not exist.
package gallery

import (
	"embed"
	"io/fs"
	"slices"
)

//go:embed studies/*/*.yaml studies/*/*.csv
var studies embed.FS

// Names lists the studies, in the order in which they are worth reading.
func Names() []string { return []string{"clam", "oyster", "crab"} }

// Files returns the files of one study, NAME.yaml and its table, or nil where
// there is no study of that name.
func Files(name string) fs.FS {
	if !slices.Contains(Names(), name) {
		return nil
	}
	sub, err := fs.Sub(studies, "studies/"+name)
	if err != nil {
		panic("gallery: embedded studies are missing")
	}
	return sub
}
