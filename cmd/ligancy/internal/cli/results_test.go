package cli

import (
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

var errFull = errors.New("no space left on device")

// brittle is a disk whose nth writing call fails.
type brittle struct {
	osDisk
	fails, calls int
}

func (d *brittle) step() error {
	d.calls++
	if d.calls == d.fails {
		return errFull
	}
	return nil
}

func (d *brittle) Mkdir(name string) error {
	if err := d.step(); err != nil {
		return err
	}
	return d.osDisk.Mkdir(name)
}

func (d *brittle) Create(name string, content []byte) error {
	if err := d.step(); err != nil {
		return err
	}
	return d.osDisk.Create(name, content)
}

func (d *brittle) Sync(dir string) error {
	if err := d.step(); err != nil {
		return err
	}
	return d.osDisk.Sync(dir)
}

func (d *brittle) Rename(from, to string) error {
	if err := d.step(); err != nil {
		return err
	}
	return d.osDisk.Rename(from, to)
}

// tree reads every file below a folder.
func tree(t *testing.T, dir string) map[string]string {
	t.Helper()
	files := map[string]string{}
	err := filepath.WalkDir(dir, func(path string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() {
			return err
		}
		content, err := os.ReadFile(path)
		rel, _ := filepath.Rel(dir, path)
		files[filepath.ToSlash(rel)] = string(content)
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return files
}

func write(t *testing.T, dir string, files map[string]string) {
	t.Helper()
	for name, content := range files {
		path := filepath.Join(dir, name)
		if err := os.MkdirAll(filepath.Dir(path), 0o777); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path, []byte(content), 0o666); err != nil {
			t.Fatal(err)
		}
	}
}

const (
	wholeJSON   = `{"format": "ligancy-result/1"}`
	partialJSON = `{"format": "ligancy-result/1", "interrupted": true}`
)

var newFiles = []file{{resultFile, []byte(`{"format": "ligancy-result/1", "n": 2}`)}, {"curves.csv", []byte("x\n")},
	{filepath.Join("figures", "curves-85mm.svg"), []byte("<svg/>")}, {filepath.Join("figures", "curves-85mm.pdf"), []byte("%PDF")}}

// Whichever step of writing fails, the folder is the old one or the new one,
// whole, and nothing is left beside it.
func TestResultsAreWrittenWholeOrNotAtAll(t *testing.T) {
	older := map[string]string{"clam.results/result.json": wholeJSON, "clam.results/points.csv": "old\n"}
	newer := map[string]string{"clam.results/result.json": string(newFiles[0].content), "clam.results/curves.csv": "x\n",
		"clam.results/figures/curves-85mm.svg": "<svg/>", "clam.results/figures/curves-85mm.pdf": "%PDF"}
	for _, before := range []map[string]string{nil, older} {
		for fails := 1; ; fails++ {
			dir := t.TempDir()
			write(t, dir, before)
			disk := &brittle{fails: fails}
			err := writeResults(disk, filepath.Join(dir, "clam.results"), newFiles)
			got := tree(t, dir)
			want := newer
			if err != nil {
				want = before
			}
			if len(got)+len(want) > 0 && !cmp.Equal(got, want) {
				t.Errorf("step %d failing: %s", fails, cmp.Diff(want, got))
			}
			if entries, _ := os.ReadDir(dir); len(entries) > 1 {
				t.Errorf("step %d failing leaves %v", fails, entries)
			}
			if disk.calls < fails {
				if err != nil {
					t.Errorf("nothing failed, but: %v", err)
				}
				break
			}
			if !errors.Is(err, errFull) {
				t.Errorf("step %d failing is not said: %v", fails, err)
			}
		}
	}
}

func TestOnlyResultsOfOursAreReplaced(t *testing.T) {
	for name, c := range map[string]struct {
		files map[string]string
		want  standingResult
		says  string
	}{
		"nothing":        {nil, noResult, ""},
		"whole":          {map[string]string{"r/result.json": wholeJSON, "r/points.csv": "", "r/figures/a.svg": "", "r/.DS_Store": ""}, wholeResult, ""},
		"partial":        {map[string]string{"r/result.json": partialJSON}, partialResult, ""},
		"later version":  {map[string]string{"r/result.json": `{"format": "ligancy-result/7"}`, "r/report.html": ""}, wholeResult, ""},
		"a file":         {map[string]string{"r": "text"}, noResult, "not a folder"},
		"somebody's":     {map[string]string{"r/notes.txt": ""}, noResult, "holds no result of ligancy"},
		"other JSON":     {map[string]string{"r/result.json": `{"format": "else"}`}, noResult, "holds no result of ligancy"},
		"broken JSON":    {map[string]string{"r/result.json": `{"format": "ligancy-result/1"`}, noResult, "holds no result of ligancy"},
		"notes in ours":  {map[string]string{"r/result.json": wholeJSON, "r/notes.txt": ""}, noResult, `"notes.txt"`},
		"table of other": {map[string]string{"r/result.json": wholeJSON, "r/mine.csv": ""}, noResult, `"mine.csv"`},
	} {
		dir := t.TempDir()
		write(t, dir, c.files)
		got, err := standing(osDisk{}, filepath.Join(dir, "r"))
		if got != c.want {
			t.Errorf("%s: %d, want %d", name, got, c.want)
		}
		if (err == nil) != (c.says == "") || err != nil && !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s: %v does not say %q", name, err, c.says)
		}
	}
}

func TestALinkIsNoResultsFolder(t *testing.T) {
	dir := t.TempDir()
	write(t, dir, map[string]string{"elsewhere/result.json": wholeJSON})
	if err := os.Symlink("elsewhere", filepath.Join(dir, "r")); err != nil {
		t.Skip(err)
	}
	if _, err := standing(osDisk{}, filepath.Join(dir, "r")); err == nil {
		t.Error("a link would be replaced")
	}
}

func TestResultsFolderIsNamedForTheStudy(t *testing.T) {
	for study, want := range map[string]string{
		"clam.yaml": "clam.results", "a/clam.yml": "a/clam.results", "clam": "clam.results", "a.b.yaml": "a.b.results", ".yaml": ".yaml.results",
	} {
		if got := resultsFolder(study); got != want {
			t.Errorf("%s: %s, want %s", study, got, want)
		}
	}
}

func TestContentsOfAFolderAreCounted(t *testing.T) {
	if got := contents(newFiles); got != "report.html  result.json  1 table  1 figure" {
		t.Error(got)
	}
}
