package cli

import (
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"

	"ligancy/cmd/ligancy/internal/report"
	"ligancy/fit/saturation"
	"ligancy/specs"
	"ligancy/specs/diag"
)

// opened is a study that was read.
type opened struct {
	name       string // as the user wrote it
	dir        string // its folder, from the working directory of the process
	study      *specs.Study
	analysis   *saturation.Analysis // nil where something must be mended
	complaints diag.List
	digests    map[string]string // of the data files
}

// ready opens a study that can be used and says what it warns of. One that
// cannot is refused with all its complaints, and the exit code says so.
func (p *program) ready(name, notDone string) (*opened, error) {
	o := p.open(name)
	if o.analysis == nil {
		if err := o.refuse(p.Stderr, notDone); err != nil {
			return nil, err
		}
		return nil, exit(Unusable)
	}
	return o, diag.WriteText(p.Stderr, o.complaints)
}

// open reads a study and its tables. No file outside the study's folder is
// read, not by ".." and not by a link.
func (p *program) open(name string) *opened {
	path := p.path(name)
	o := &opened{name: name, dir: filepath.Dir(path)}
	root, err := os.OpenRoot(o.dir)
	if err != nil {
		o.complaints = diag.List{{Code: "missing-folder", Position: diag.Position{File: name}, Problem: reason(err)}}
		return o
	}
	defer root.Close()
	o.read(root.FS(), filepath.Base(path))
	prefix := filepath.Dir(name)
	for i := range o.complaints {
		d := &o.complaints[i]
		d.File = filepath.Join(prefix, d.File)
	}
	return o
}

func (o *opened) read(fsys fs.FS, base string) {
	o.study, o.complaints = specs.Load(fsys, base)
	if o.study == nil || o.complaints.HasErrors() {
		return
	}
	a, more := o.study.Build()
	o.complaints = append(o.complaints, more...).Sorted()
	if more.HasErrors() {
		return
	}
	o.analysis, o.digests = a, map[string]string{}
	for i := range a.Data {
		if content, err := fs.ReadFile(fsys, a.Data[i].File); err == nil {
			sum := sha256.Sum256(content)
			o.digests[a.Data[i].File] = hex.EncodeToString(sum[:])
		}
	}
}

// source says where a result comes from. The study is nil where its file could
// not be read.
func (o *opened) source() report.Source {
	s := report.Source{Version: Version, File: filepath.Base(o.name), Digests: o.digests}
	if o.study != nil {
		s.SHA256, s.Defaults = o.study.SHA256, o.study.Defaults
	}
	return s
}

// path of a name on the command line.
func (p *program) path(name string) string {
	if filepath.IsAbs(name) {
		return name
	}
	return filepath.Join(p.Dir, name)
}

// reason says in words why the system refused.
func reason(err error) string {
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return "there is no such folder"
	case errors.Is(err, fs.ErrPermission):
		return "the folder may not be read"
	}
	return fmt.Sprintf("the folder cannot be read: %v", bare(err))
}

// refuse writes the complaints of a study that cannot be used.
func (o *opened) refuse(w io.Writer, done string) error {
	if _, err := fmt.Fprintf(w, "%s cannot be used yet: %s to mend. %s\n\n", o.name, counted(o.complaints.Errors(), "thing"), done); err != nil {
		return err
	}
	if err := diag.WriteText(w, o.complaints); err != nil {
		return err
	}
	_, err := fmt.Fprintf(w, "\nOnce these are mended, `ligancy check %s` goes on to what a reviewer would ask.\n", o.name)
	return err
}
