package specs

import (
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"path"
	"slices"
	"strings"
	"sync"

	"gopkg.in/yaml.v3"

	"ligancy/fit/saturation"
	"ligancy/specs/diag"
	"ligancy/specs/table"
)

// Bounds of a study file, and of the complaints of one kind about one file.
const (
	maxStudy      = 1 << 20 // bytes
	maxStudyLine  = 1 << 16
	maxComplaints = 20
	maxMechanisms = 300
)

// Load reads the study `name` and the tables beside it, and finds every
// complaint that can be found at once, sorted. The study is nil only where the
// file could not be read at all.
func Load(fsys fs.FS, name string) (*Study, diag.List) {
	data, complaints := readFile(fsys, name, maxStudy, "study")
	if complaints != nil {
		return nil, complaints
	}
	sum := sha256.Sum256(data)
	text, _, complaints := diag.Decode(name, data, maxStudyLine)
	if complaints != nil {
		return nil, complaints
	}
	s := &Study{File: name, SHA256: hex.EncodeToString(sum[:]), Defaults: map[string]string{},
		text: text}
	r := &reader{document: parseDocument(text, knownKeys()), places: map[string]place{},
		failed: map[string]bool{}}
	s.places = r.places
	switch {
	case r.root != nil:
		studyShape().read(r, r.root, "", s)
	case len(r.document.complaints) == 0:
		r.complain(diag.Diagnostic{Code: "empty-study", Position: diag.Position{File: name},
			Problem: name + " holds no study",
			Remedies: []diag.Remedy{{Say: "Let the program write a first one:",
				Write: "ligancy new TABLE"}}})
	}
	if r.root != nil && r.root.Kind == yaml.MappingNode && !r.partial {
		b := &builder{reader: r, study: s, fsys: fsys, files: map[string]file{}}
		b.build()
		s.analysis = b.analysis
	}
	s.complaints = append(r.document.complaints, r.complaints...).Sorted().Capped(maxComplaints)
	return s, s.complaints
}

// Build returns what an analysis needs, or nil and the complaints of Load.
func (s *Study) Build() (*saturation.Analysis, diag.List) {
	if s.complaints.HasErrors() {
		return nil, s.complaints
	}
	return s.analysis, nil
}

// readFile reads one file of a bounded size.
func readFile(fsys fs.FS, name string, most int, what string) ([]byte, diag.List) {
	fault := func(code, problem string, remedies ...diag.Remedy) diag.List {
		return diag.List{{Code: code, Position: diag.Position{File: name}, Problem: problem,
			Remedies: remedies}}
	}
	if !fs.ValidPath(name) {
		return nil, fault("bad-file-name",
			fmt.Sprintf("%q cannot name a file in the study's folder", name))
	}
	info, err := fs.Stat(fsys, name)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil, fault("missing-file", "there is no file "+name,
			diag.Remedy{Say: "Write the name of a study that is there."})
	case err != nil:
		return nil, fault("unreadable", name+" cannot be opened: "+reason(err))
	case info.IsDir():
		return nil, fault("not-a-file", name+" is a folder", diag.Remedy{Say: "Name a file in it."})
	case !info.Mode().IsRegular():
		return nil, fault("not-a-file", name+" is not a plain file")
	case info.Size() > int64(most):
		return nil, fault("file-too-large", fmt.Sprintf("%s has %d bytes; a %s may have %d", name,
			info.Size(), what, most))
	}
	f, err := fsys.Open(name)
	if err != nil {
		return nil, fault("unreadable", name+" cannot be opened: "+reason(err))
	}
	defer f.Close()
	data, err := io.ReadAll(io.LimitReader(f, int64(most)+1))
	switch {
	case err != nil:
		return nil, fault("unreadable", name+" cannot be read: "+reason(err))
	case len(data) > most:
		return nil, fault("file-too-large",
			fmt.Sprintf("%s has more than %d bytes, the most a %s may have", name, most, what))
	}
	return data, nil
}

// reason is an error without the path that the complaint names already.
func reason(err error) string {
	var p *fs.PathError
	if errors.As(err, &p) {
		return p.Err.Error()
	}
	return err.Error()
}

// file is a table that was read once, with its complaints.
type file struct {
	table      *table.Table
	sha        string
	complaints diag.List
}

// beside reads the table that data set i names.
func (b *builder) beside(i int) {
	d := &b.study.Data[i]
	at := indexed("data", i) + ".file"
	if d.File == "" || !b.isBeside(at, d.File) {
		return
	}
	f := b.tableOnce(i, path.Join(path.Dir(b.study.File), d.File))
	if f.table == nil {
		return
	}
	d.faulty = f.complaints.HasErrors()
	t := *f.table
	t.Notes = slices.Clone(t.Notes)
	t.Study = b.study.File
	d.table, d.sha = &t, f.sha
	if d.Decimal == "comma" {
		t.Decimal = table.Comma
	}
}

// isBeside asks that a file lies in the study's folder, or below it, and is no link.
func (b *builder) isBeside(at, file string) bool {
	if strings.Contains(file, `\`) {
		b.fault(at, "bad-file-name", "folders are set apart by / on every system", nil,
			diag.Remedy{Write: "file: " + strings.ReplaceAll(file, `\`, "/")})
		return false
	}
	name := path.Join(path.Dir(b.study.File), file)
	up := slices.Contains(strings.Split(file, "/"), "..")
	if up || path.IsAbs(file) || strings.HasPrefix(file, "~") || strings.Contains(file, ":") ||
		!fs.ValidPath(name) {
		b.fault(at, "outside-folder", file+" lies outside the study's folder",
			[]string{"A study reads only what lies beside it, so that the folder can be kept and sent whole."},
			diag.Remedy{Say: "Copy the table beside the study, and write",
				Write: "file: " + path.Base(file)})
		return false
	}
	if link := b.linkIn(name); link != "" {
		b.fault(at, "link", link+" is a link to another place, which is not followed", nil,
			diag.Remedy{Say: "Put the table itself beside the study."})
		return false
	}
	return true
}

// tableOnce reads a table, or remembers it; what is wrong is said the first time.
func (b *builder) tableOnce(i int, name string) file {
	p, sheet := indexed("data", i), b.study.Data[i].Sheet
	at, once := p+".file", name+"\x00"+sheet
	f, ok := b.files[once]
	if ok {
		return f
	}
	f = b.readTable(name, sheet)
	b.files[once] = f
	for _, c := range f.complaints {
		if c.Line == 0 && c.Cell == "" { // about the file as a whole: said where the study names it
			if c.Code == "missing-sheet" {
				b.fault(p+".sheet", c.Code, c.Problem, c.Notes, c.Remedies...)
				continue
			}
			b.fault(at, c.Code, c.Problem, c.Notes, c.Remedies...)
			continue
		}
		b.complaints = append(b.complaints, c)
	}
	if f.table == nil && len(f.complaints) == 0 {
		b.missingFile(at, name)
	}
	return f
}

// linkIn is the first part of a path that is a symbolic link.
func (b *builder) linkIn(name string) string {
	parts := strings.Split(name, "/")
	for i := range parts {
		p := path.Join(parts[:i+1]...)
		if info, err := fs.Lstat(b.fsys, p); err == nil && info.Mode()&fs.ModeSymlink != 0 {
			return p
		}
	}
	return ""
}

func (b *builder) readTable(name, sheet string) file {
	if _, err := fs.Stat(b.fsys, name); errors.Is(err, fs.ErrNotExist) {
		return file{}
	}
	data, complaints := readFile(b.fsys, name, table.MaxBytes, "table")
	if complaints != nil {
		return file{complaints: complaints}
	}
	sum := sha256.Sum256(data)
	t, complaints := table.ReadSheet(name, sheet, data)
	for _, c := range complaints {
		if slices.Contains([]string{"one-column", "no-header", "repeated-column"}, c.Code) {
			t = nil // nothing can be said of its columns
		}
	}
	return file{table: t, sha: hex.EncodeToString(sum[:]), complaints: complaints}
}

// missingFile names the tables that are there.
func (b *builder) missingFile(at, name string) {
	var tables []string
	entries, _ := fs.ReadDir(b.fsys, path.Dir(name))
	for _, e := range entries {
		if ext := strings.ToLower(path.Ext(e.Name())); e.Type().IsRegular() &&
			slices.Contains([]string{".csv", ".tsv", ".tab", ".txt", ".xlsx"}, ext) {
			tables = append(tables, e.Name())
		}
	}
	notes := []string{"There is no table beside the study."}
	if len(tables) > 0 {
		notes = []string{"The tables there are: " + shortList(tables, 10) + "."}
	}
	var remedies []diag.Remedy
	near := diag.Nearest(path.Base(name), tables)
	if near == "" && len(tables) == 1 {
		near = tables[0]
	}
	if near != "" {
		remedies = []diag.Remedy{{Write: "file: " + near}}
	}
	b.fault(at, "missing-file", "there is no file "+name, notes, remedies...)
}

// shortList writes the first few of a list.
func shortList(words []string, most int) string {
	if len(words) <= most {
		return strings.Join(words, ", ")
	}
	return fmt.Sprintf("%s and %d more", strings.Join(words[:most], ", "), len(words)-most)
}

// knownKeys are all keys that a study may hold, at any depth.
var knownKeys = sync.OnceValue(func() map[string]bool {
	s := &schemata{definitions: object{}}
	studyShape().schema(s)
	known := map[string]bool{}
	for _, d := range s.definitions {
		properties, _ := d.(object)["properties"].(object)
		for name := range properties {
			known[name] = true
		}
	}
	return known
})
