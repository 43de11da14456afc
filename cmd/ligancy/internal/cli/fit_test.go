package cli

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"ligancy/fit/saturation"
	"ligancy/specs/gallery"
)

// clamFolder is a folder with the gallery's oxygen study.
func clamFolder(t *testing.T) string {
	t.Helper()
	dir := t.TempDir()
	if err := os.CopyFS(dir, gallery.Files("clam")); err != nil {
		t.Fatal(err)
	}
	return dir
}

// quick is an outcome made without fitting.
func quick(context.Context, *saturation.Analysis, saturation.Recorder) (*saturation.Outcome, error) {
	return &saturation.Outcome{Verdict: saturation.Verdict{Text: "A quick outcome.", Leads: "stepwise"}}, nil
}

// fitted runs fit with a given analysis in place of the real one.
func fitted(t *testing.T, dir string, edit func(*Env), args ...string) (code int, stdout, stderr string) {
	t.Helper()
	var out, err bytes.Buffer
	env := testEnv(dir, &out, &err, append([]string{"fit"}, args...)...)
	env.Analyse = quick
	edit(&env)
	code = Main(env)
	return code, out.String(), err.String()
}

// interrupting analyses end the context and hand over what they have.
func interrupting(o *saturation.Outcome) func(*Env) {
	return func(e *Env) {
		ctx, cancel := context.WithCancel(context.Background())
		e.Context = ctx
		e.Analyse = func(context.Context, *saturation.Analysis, saturation.Recorder) (*saturation.Outcome, error) {
			cancel()
			if o == nil {
				return nil, context.Canceled
			}
			return o, nil
		}
	}
}

func TestAnInterruptLeavesALabelledPartialResult(t *testing.T) {
	dir := clamFolder(t)
	partial := &saturation.Outcome{Interrupted: true, Verdict: saturation.Verdict{Text: "So far."}}
	code, stdout, stderr := fitted(t, dir, interrupting(partial), "clam.yaml")
	if code != Interrupted || !strings.Contains(stdout, "INTERRUPTED") || stderr != "" {
		t.Errorf("exit %d\n%s\n%s", code, stdout, stderr)
	}
	var d struct{ Interrupted bool }
	content, err := os.ReadFile(filepath.Join(dir, "clam.results", "result.json"))
	if err != nil || json.Unmarshal(content, &d) != nil || !d.Interrupted {
		t.Errorf("the result is not labelled: %v %s", err, content)
	}
	// A partial result gives way to a whole one, a whole one not to a partial one.
	if code, _, stderr := fitted(t, dir, func(*Env) {}, "clam.yaml"); code != Success {
		t.Fatalf("exit %d: %s", code, stderr)
	}
	whole := tree(t, dir)
	code, stdout, stderr = fitted(t, dir, interrupting(partial), "clam.yaml")
	if code != Interrupted || !strings.Contains(stderr, "clam.results holds a whole result and was left as it is") {
		t.Errorf("exit %d\n%s\n%s", code, stdout, stderr)
	}
	if now := tree(t, dir); now["clam.results/result.json"] != whole["clam.results/result.json"] {
		t.Error("a whole result was replaced by a partial one")
	}
	// Of several studies, those after the interrupt are not begun.
	if _, stdout, _ := fitted(t, dir, interrupting(partial), "clam.yaml", "clam.yaml"); strings.Count(stdout, "INTERRUPTED") != 1 {
		t.Errorf("%s", stdout)
	}
}

func TestAnInterruptBeforeAnythingLeavesNothing(t *testing.T) {
	dir := clamFolder(t)
	before := tree(t, dir)
	code, stdout, stderr := fitted(t, dir, interrupting(nil), "clam.yaml")
	if code != Interrupted || stdout != "" || !strings.Contains(stderr, "interrupted before anything was found") {
		t.Errorf("exit %d\n%s\n%s", code, stdout, stderr)
	}
	if len(tree(t, dir)) != len(before) {
		t.Error("something is left")
	}
}

func TestAResultThatCannotBeWrittenIsStillPrinted(t *testing.T) {
	for fails := range 12 {
		dir := clamFolder(t)
		before := tree(t, dir)
		code, stdout, stderr := fitted(t, dir, func(e *Env) { e.Disk = &brittle{fails: fails + 1} }, "clam.yaml")
		if code != Unusable || !strings.Contains(stderr, "clam.results was not written: no space left on device") {
			t.Errorf("step %d: exit %d, %s", fails+1, code, stderr)
		}
		if !strings.Contains(stdout, "A quick outcome.") || strings.Contains(stdout, "written ") {
			t.Errorf("step %d: %s", fails+1, stdout)
		}
		entries, err := os.ReadDir(dir)
		if err != nil || len(entries) != len(before) {
			t.Errorf("step %d leaves %v", fails+1, entries)
		}
	}
}

// readOnly is a disk on which nothing can be made.
type readOnly struct{ osDisk }

func (readOnly) Mkdir(name string) error {
	return &fs.PathError{Op: "mkdir", Path: name, Err: fs.ErrPermission}
}

func TestAReadOnlyFolderIsSaid(t *testing.T) {
	dir := clamFolder(t)
	code, _, stderr := fitted(t, dir, func(e *Env) { e.Disk = readOnly{} }, "clam.yaml")
	if code != Unusable || !strings.Contains(stderr, "clam.results was not written: permission denied") {
		t.Errorf("exit %d, %s", code, stderr)
	}
}

func TestAnAnalysisThatFailsIsSaid(t *testing.T) {
	dir := clamFolder(t)
	code, stdout, stderr := fitted(t, dir, func(e *Env) {
		e.Analyse = func(context.Context, *saturation.Analysis, saturation.Recorder) (*saturation.Outcome, error) {
			return nil, errors.New("no mechanism to try")
		}
	}, "clam.yaml")
	if code != Unusable || stdout != "" || stderr != "ligancy: clam.yaml: no mechanism to try\n" {
		t.Errorf("exit %d\n%s\n%s", code, stdout, stderr)
	}
}

func TestColourReachesTheTerminalOnly(t *testing.T) {
	dir := clamFolder(t)
	for _, terminal := range []bool{false, true} {
		_, stdout, _ := fitted(t, dir, func(e *Env) { e.StdoutTerminal = terminal }, "--print-only", "clam.yaml")
		if strings.Contains(stdout, "\x1b[1m") != terminal {
			t.Errorf("terminal %v: %q", terminal, stdout)
		}
	}
}

// A study outside the folder's reach, by a link, is not read.
func TestNoFileOutsideTheFolderIsRead(t *testing.T) {
	dir, secret := clamFolder(t), t.TempDir()
	data := filepath.Join(dir, "clam.csv")
	if err := os.Rename(data, filepath.Join(secret, "clam.csv")); err != nil {
		t.Fatal(err)
	}
	if err := os.Symlink(filepath.Join(secret, "clam.csv"), data); err != nil {
		t.Skip(err)
	}
	code, _, stderr := fitted(t, dir, func(*Env) {}, "clam.yaml")
	if code != Unusable || !strings.Contains(stderr, "clam.yaml") {
		t.Errorf("exit %d, %s", code, stderr)
	}
}
