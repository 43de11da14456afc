package cli

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io/fs"
	"path/filepath"
	"slices"
	"strings"

	"ligancy/cmd/ligancy/internal/report"
)

const (
	resultFile  = "result.json" // by which a results folder is known as ours
	pageFile    = "report.html"
	summaryFile = "report.md" // for pull requests
)

// figuresFolder is the folder of figures within a results folder.
const figuresFolder = "figures"

// file of a results folder; its name may begin with the folder of figures.
type file struct {
	name    string
	content []byte
}

// resultFiles renders a document: result.json, one CSV a list, the report page,
// its summary in Markdown and its figures.
func resultFiles(d *report.Document) ([]file, error) {
	var b bytes.Buffer
	if err := report.WriteJSON(&b, d); err != nil {
		return nil, err
	}
	files := []file{{resultFile, b.Bytes()}}
	for _, t := range d.Tables() {
		var b bytes.Buffer
		if err := t.WriteCSV(&b); err != nil {
			return nil, err
		}
		files = append(files, file{t.Name + ".csv", b.Bytes()})
	}
	var page bytes.Buffer
	if err := report.Page(&page, d); err != nil {
		return nil, err
	}
	files = append(files, file{pageFile, page.Bytes()})
	var summary bytes.Buffer
	if err := report.Markdown(&summary, d); err != nil {
		return nil, err
	}
	files = append(files, file{summaryFile, summary.Bytes()})
	figures, err := report.Figures(d)
	if err != nil {
		return nil, err
	}
	for _, f := range figures {
		files = append(files, file{filepath.Join(figuresFolder, f.Name), f.Content})
	}
	return files, nil
}

// contents says what a results folder holds: "report.html  result.json  5 tables  7 figures".
func contents(files []file) string {
	tables, figures := 0, map[string]bool{}
	for _, f := range files {
		if strings.HasSuffix(f.name, ".csv") {
			tables++
		}
		if filepath.Dir(f.name) == figuresFolder {
			name, _, _ := strings.Cut(filepath.Base(f.name), "mm.")
			figures[name[:strings.LastIndex(name, "-")]] = true // curves-85mm.svg: one of curves
		}
	}
	s := pageFile + "  " + resultFile + "  " + counted(tables, "table")
	if len(figures) > 0 {
		s += "  " + counted(len(figures), "figure")
	}
	return s
}

// counted writes "1 table", "2 tables".
func counted(n int, noun string) string {
	if n == 1 {
		return "1 " + noun
	}
	return fmt.Sprintf("%d %ss", n, noun)
}

// resultsFolder is the folder of a study's results: clam.yaml → clam.results.
func resultsFolder(study string) string {
	for _, suffix := range []string{".yaml", ".yml"} {
		if base, ok := strings.CutSuffix(study, suffix); ok && filepath.Base(study) != suffix {
			return base + ".results"
		}
	}
	return study + ".results"
}

// standingResult says what stands at the place of a results folder: nothing, or a
// whole or partial result of ours. Anything else is an error that says what to do.
type standingResult uint8

const (
	noResult standingResult = iota
	partialResult
	wholeResult
)

// standing looks at the place where results will go.
func standing(disk Disk, folder string) (standingResult, error) {
	info, err := disk.Lstat(folder)
	if errors.Is(err, fs.ErrNotExist) {
		return noResult, nil
	}
	if err != nil {
		return noResult, err
	}
	if !info.IsDir() {
		return noResult, fmt.Errorf("%s is not a folder, and will not be replaced; move it away", folder)
	}
	partial, err := ours(disk, folder)
	if err != nil {
		return noResult, err
	}
	entries, err := disk.ReadDir(folder)
	if err != nil {
		return noResult, err
	}
	for _, e := range entries {
		if !known(e.Name()) {
			return noResult, fmt.Errorf("%s holds %q, which is not a result of ligancy, and will not be replaced; move that file away", folder, e.Name())
		}
	}
	if partial {
		return partialResult, nil
	}
	return wholeResult, nil
}

// ours reads whether a folder holds a result, of whatever version, and whether it is partial.
func ours(disk Disk, folder string) (partial bool, err error) {
	var d struct {
		Format      string `json:"format"`
		Interrupted bool   `json:"interrupted"`
	}
	content, err := disk.ReadFile(filepath.Join(folder, resultFile))
	if err == nil {
		err = json.Unmarshal(content, &d)
	}
	if err != nil || !strings.HasPrefix(d.Format, "ligancy-result/") {
		return false, fmt.Errorf("%s exists but holds no result of ligancy, and will not be replaced; move it away", folder)
	}
	return d.Interrupted, nil
}

// known names of a results folder: what is written into it, now or by later
// versions, and what desktops leave behind.
func known(name string) bool {
	if base, ok := strings.CutSuffix(name, ".csv"); ok {
		return slices.Contains(report.TableNames(), base)
	}
	return slices.Contains([]string{resultFile, pageFile, summaryFile, figuresFolder, ".DS_Store", "Thumbs.db", "desktop.ini"}, name)
}

// writeResults puts files into a folder, whole or not at all: they are written
// beside it, synced, and renamed into place. An older result at that place is
// moved aside first and comes back if the new one cannot take its place.
func writeResults(disk Disk, folder string, files []file) (err error) {
	parent, base := filepath.Split(folder)
	parent = filepath.Clean(parent)
	fresh, err := spare(disk, parent, "."+base+".unfinished")
	if err != nil {
		return err
	}
	defer func() {
		if err != nil {
			disk.RemoveAll(fresh)
		}
	}()
	if err := fill(disk, fresh, files); err != nil {
		return err
	}
	return swap(disk, parent, base, fresh)
}

// fill writes files into a fresh folder, with the folders they lie in.
func fill(disk Disk, fresh string, files []file) error {
	folders := []string{fresh}
	for _, f := range files {
		path := filepath.Join(fresh, f.name)
		if dir := filepath.Dir(path); !slices.Contains(folders, dir) {
			if err := disk.Mkdir(dir); err != nil {
				return err
			}
			folders = append(folders, dir)
		}
		if err := disk.Create(path, f.content); err != nil {
			return err
		}
	}
	for _, dir := range slices.Backward(folders) {
		if err := disk.Sync(dir); err != nil {
			return err
		}
	}
	return nil
}

// swap moves a fresh folder to its place and what stood there aside. If the
// fresh one cannot take the place for good, the older one comes back.
func swap(disk Disk, parent, base, fresh string) error {
	folder := filepath.Join(parent, base)
	if _, err := disk.Lstat(folder); errors.Is(err, fs.ErrNotExist) {
		return settle(disk, parent, folder, fresh)
	}
	aside, err := spare(disk, parent, "."+base+".replaced")
	if err != nil {
		return err
	}
	old := filepath.Join(aside, base)
	if err = disk.Rename(folder, old); err == nil {
		if err = settle(disk, parent, folder, fresh); err != nil {
			if back := disk.Rename(old, folder); back != nil {
				return fmt.Errorf("%w; the older result is in %s", err, old)
			}
		}
	}
	disk.RemoveAll(aside)
	return err
}

// settle renames a fresh folder to its place, and back if the disk does not confirm it.
func settle(disk Disk, parent, folder, fresh string) error {
	if err := disk.Rename(fresh, folder); err != nil {
		return err
	}
	err := disk.Sync(parent)
	if err != nil {
		err = errors.Join(err, disk.Rename(folder, fresh))
	}
	return err
}

// spare makes a new folder whose name begins with prefix.
func spare(disk Disk, parent, prefix string) (string, error) {
	for n := 1; ; n++ {
		name := filepath.Join(parent, fmt.Sprintf("%s-%d", prefix, n))
		err := disk.Mkdir(name)
		if err == nil || !errors.Is(err, fs.ErrExist) || n == 1000 {
			return name, err
		}
	}
}
