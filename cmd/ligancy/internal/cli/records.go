package cli

import (
	"errors"
	"fmt"
	"io/fs"
	"path/filepath"

	"ligancy/cmd/ligancy/internal/report"
	"ligancy/specs/diag"
	"ligancy/specs/record"
)

// record of a result.
func (o *opened) record(d *report.Document) *record.Record {
	s := o.source()
	return record.New(o.analysis, d.Outcome, record.Source{Version: s.Version, File: s.File,
		SHA256: s.SHA256, Digests: s.Digests})
}

// readSmall reads a file that has at most so many bytes.
func (p *program) readSmall(name string, most int) ([]byte, error) {
	info, err := p.Disk.Lstat(p.path(name))
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil, err
	case err == nil && info.IsDir():
		err = errors.New("it is a folder")
	case err == nil && !info.Mode().IsRegular():
		err = errors.New("it is no plain file")
	case err == nil && info.Size() > int64(most):
		err = fmt.Errorf("it has more than %d bytes", most)
	}
	var content []byte
	if err == nil {
		content, err = p.Disk.ReadFile(p.path(name))
	}
	if err != nil {
		return nil, fmt.Errorf("%s cannot be read: %w", name, bare(err))
	}
	return content, nil
}

// readRecord reads a record. What is wrong inside it is said at once, and ends
// the command.
func (p *program) readRecord(name string) (*record.Record, error) {
	content, err := p.readSmall(name, record.MaxBytes)
	if err != nil {
		return nil, err
	}
	r, complaints := record.Read(filepath.Base(name), content)
	for i := range complaints {
		complaints[i].File = name
	}
	if r == nil {
		if err := diag.WriteText(p.Stderr, complaints); err != nil {
			return nil, err
		}
		return nil, exit(Unusable)
	}
	return r, nil
}

// recordPlace asks that nothing but a record stands where a record will go.
func (p *program) recordPlace(name string) error {
	content, err := p.readSmall(name, record.MaxBytes)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil
	case err != nil:
		return fmt.Errorf("%w, and will not be replaced; move it away", err)
	case !record.IsRecord(content):
		return fmt.Errorf("%s exists but is no record of ligancy, and will not be replaced; move it away", name)
	}
	return nil
}

// keepRecord writes a record whole or not at all: beside its place, and renamed.
func (p *program) keepRecord(name string, r *record.Record) error {
	parent, base := filepath.Split(p.path(name))
	parent = filepath.Clean(parent)
	fresh, err := spare(p.Disk, parent, "."+base+".unfinished")
	if err == nil {
		defer p.Disk.RemoveAll(fresh)
		unfinished := filepath.Join(fresh, base)
		if err = p.Disk.Create(unfinished, r.Bytes()); err == nil {
			err = p.Disk.Rename(unfinished, filepath.Join(parent, base))
		}
		if err == nil {
			err = p.Disk.Sync(parent)
		}
	}
	if err != nil {
		return fmt.Errorf("%s was not written: %w", name, bare(err))
	}
	return nil
}
