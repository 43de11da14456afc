package cli

import (
	"bytes"
	"context"
	"os"
	"path/filepath"
	"testing"

	"ligancy/fit/saturation"
	"ligancy/specs/gallery"
)

// The same study gives the same bytes whatever the number of goroutines that
// share the work: result.json, and the record.
func TestResultsDoNotDependOnTheNumberOfCores(t *testing.T) {
	studies := []string{"clam"}
	if !testing.Short() {
		studies = append(studies, "crab")
	}
	for _, name := range studies {
		t.Run(name, func(t *testing.T) {
			dir := t.TempDir()
			if err := os.CopyFS(dir, gallery.Files(name)); err != nil {
				t.Fatal(err)
			}
			result, kept := fittedBy(t, dir, name, 1)
			for _, workers := range []int{2, 8} {
				r, k := fittedBy(t, dir, name, workers)
				if !bytes.Equal(r, result) {
					t.Errorf("result.json differs with %d workers", workers)
				}
				if !bytes.Equal(k, kept) {
					t.Errorf("the record differs with %d workers", workers)
				}
			}
		})
	}
}

// fittedBy fits a study with so many workers and returns what was written.
func fittedBy(t *testing.T, dir, name string, workers int) (result, kept []byte) {
	t.Helper()
	var out, complaints bytes.Buffer
	env := testEnv(dir, &out, &complaints, "fit", "--record", name+".yaml")
	env.Analyse = func(ctx context.Context, a *saturation.Analysis, rec saturation.Recorder) (*saturation.Outcome, error) {
		b := *a
		b.Settings.Workers = workers
		return b.Run(ctx, rec)
	}
	if code := Main(env); code != Success {
		t.Fatalf("exit %d\n%s", code, complaints.String())
	}
	result, err := os.ReadFile(filepath.Join(dir, name+".results", resultFile))
	if err != nil {
		t.Fatal(err)
	}
	if kept, err = os.ReadFile(filepath.Join(dir, name+".record.yaml")); err != nil {
		t.Fatal(err)
	}
	return result, kept
}
