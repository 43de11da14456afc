package cli

import (
	"bytes"
	"context"
	"errors"
	"strings"
	"testing"
	"time"

	"github.com/spf13/pflag"
)

// called runs a command line in a folder and returns what it says.
func called(t *testing.T, dir string, args ...string) (code int, stdout, stderr string) {
	t.Helper()
	var out, err bytes.Buffer
	code = Main(testEnv(dir, &out, &err, args...))
	return code, out.String(), err.String()
}

func testEnv(dir string, out, err *bytes.Buffer, args ...string) Env {
	return Env{Args: args, Stdout: out, Stderr: err, Dir: dir, Disk: osDisk{}, Context: context.Background(),
		Getenv: func(string) string { return "" }, Now: func() time.Time { return time.Unix(0, 0) }, Analyse: analyse}
}

func TestWrongUsageExitsTwoAndSaysWhatToWrite(t *testing.T) {
	for _, c := range []struct {
		line, says, write string
	}{
		{"fti clam.yaml", `there is no command "fti"`, "ligancy fit"},
		{"nonsense", `there is no command "nonsense"`, "ligancy help"},
		{"help nonsense", `there is no command "nonsense"`, "ligancy help"},
		{"fit", "fit needs the name of a study", "ligancy fit STUDY"},
		{"check", "check needs the name of a study", "ligancy check STUDY"},
		{"fit --jsn x", "fit has no option --jsn; it has --json, --print-only, --record, --help", "ligancy fit --help"},
		{"fit -j x", "fit has no option -j", "ligancy fit --help"},
		{"fit --json=maybe x", "fit: the option --json cannot be \"maybe\"", "ligancy fit --help"},
		{"new", "new needs the name of a table", "ligancy new TABLE"},
		{"new a.csv b.csv", "new takes one table, not 2", "ligancy new TABLE"},
		{"new --example", "new: the option --example needs a value", "ligancy new --help"},
		{"new --example shark", `the gallery has no study "shark"; it has clam, oyster, crab`, "ligancy new --example clam"},
		{"new --example clam x.csv", "new takes a table or --example, not both", "ligancy new --example clam"},
		{"version now", `version takes no names, but "now" was given`, "ligancy version"},
		{"completion tcsh", `no completion for the shell "tcsh"`, "bash"},
	} {
		code, stdout, stderr := called(t, t.TempDir(), strings.Fields(c.line)...)
		if code != WrongUsage || stdout != "" {
			t.Errorf("%s: exit %d, stdout %q", c.line, code, stdout)
		}
		if !strings.HasPrefix(stderr, "ligancy: "+c.says) || !strings.Contains(stderr, "   Write   ") || !strings.Contains(stderr, c.write) {
			t.Errorf("%s:\n%s", c.line, stderr)
		}
		if strings.Contains(stderr, "Usage:") || strings.Contains(stderr, "unknown") {
			t.Errorf("%s: library words:\n%s", c.line, stderr)
		}
	}
}

// Every command's help is text of our own that names all of its options.
func TestHelpNamesEveryOptionWithinTheWidth(t *testing.T) {
	var out, err bytes.Buffer
	root := (&program{Env: testEnv(".", &out, &err)}).root()
	for _, c := range root.Commands() {
		code, stdout, stderr := called(t, ".", c.Name(), "--help")
		if code != Success || stderr != "" || stdout != c.Long {
			t.Errorf("%s --help: exit %d, %q", c.Name(), code, stderr)
		}
		c.Flags().VisitAll(func(f *pflag.Flag) {
			if f.Name != "help" && !strings.Contains(c.Long, "--"+f.Name) {
				t.Errorf("%s: its help does not name --%s", c.Name(), f.Name)
			}
		})
		if !strings.Contains(overview, "ligancy "+c.Name()) {
			t.Errorf("the overview does not name %s", c.Name())
		}
		for _, l := range strings.Split(c.Long, "\n") {
			if len([]rune(l)) > 100 {
				t.Errorf("%s: %d columns: %s", c.Name(), len([]rune(l)), l)
			}
		}
	}
}

func TestNoCommandPrintsTheOverview(t *testing.T) {
	if code, stdout, stderr := called(t, "."); code != WrongUsage || stdout != "" || stderr != overview {
		t.Errorf("exit %d, %q, %q", code, stdout, stderr)
	}
	for _, line := range [][]string{{"help"}, {"--help"}, {"-h"}} {
		if code, stdout, _ := called(t, ".", line...); code != Success || stdout != overview {
			t.Errorf("%v: exit %d, %q", line, code, stdout)
		}
	}
}

func TestCompletionScripts(t *testing.T) {
	for _, shell := range []string{"bash", "zsh", "fish", "powershell"} {
		if code, stdout, _ := called(t, ".", "completion", shell); code != Success || len(stdout) < 1000 {
			t.Errorf("%s: exit %d, %d bytes", shell, code, len(stdout))
		}
	}
	code, stdout, _ := called(t, ".", "__complete", "fi")
	if code != Success || !strings.Contains(stdout, "fit") {
		t.Errorf("exit %d, %q", code, stdout)
	}
}

// full is a standard output that takes nothing.
type full struct{}

func (full) Write([]byte) (int, error) { return 0, errors.New("no space left on device") }

func TestAFullStandardOutputIsAnError(t *testing.T) {
	var out, stderr bytes.Buffer
	env := testEnv(".", &out, &stderr, "version")
	env.Stdout = full{}
	if code := Main(env); code != Unusable || !strings.Contains(stderr.String(), "no space left") {
		t.Errorf("exit %d, %q", code, stderr.String())
	}
}
