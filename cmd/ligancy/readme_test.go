package main

import (
	"io/fs"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
)

// shown is one command of README.md with the output printed below it.
type shown struct {
	command string
	output  []string
	line    int
}

// Every `$ …` command of README.md runs, in order, in a folder that holds what
// a fresh clone holds of the gallery, and prints what README.md shows. A line
// `…` stands for lines that are not shown.
func TestReadme(t *testing.T) {
	text, err := os.ReadFile("../../README.md")
	if err != nil {
		t.Fatal(err)
	}
	commands := shownCommands(string(text))
	if len(commands) < 3 {
		t.Fatalf("README.md shows %d commands only", len(commands))
	}
	bin, dir := t.TempDir(), t.TempDir()
	if out, err := exec.Command("go", "build", "-o", bin, ".").CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	if err := os.CopyFS(filepath.Join(dir, "specs", "gallery"), os.DirFS("../../specs/gallery")); err != nil {
		t.Fatal(err)
	}
	for _, c := range commands {
		runShown(t, c, bin, dir)
	}
}

// runShown runs one command. What builds or tests the program itself was done
// or is being done.
func runShown(t *testing.T, c shown, bin, dir string) {
	t.Helper()
	if c.command == "go test ./..." || c.command == "go install ./cmd/ligancy" {
		return
	}
	command := strings.ReplaceAll(c.command, "go run ./cmd/ligancy", "ligancy")
	run := exec.Command("sh", "-c", command)
	run.Dir = dir
	run.Env = append(os.Environ(), "PATH="+bin+string(os.PathListSeparator)+os.Getenv("PATH"))
	out, err := run.CombinedOutput()
	if err != nil {
		t.Fatalf("README.md:%d: %s: %v\n%s", c.line, c.command, err, out)
	}
	if missing := notShown(c.output, strings.Split(string(out), "\n")); missing != "" {
		t.Errorf("README.md:%d: %s does not print\n%s\nbut\n%s", c.line, c.command, missing, out)
	}
}

// shownCommands reads the console blocks of a text.
func shownCommands(text string) []shown {
	var all []shown
	inside := false
	for i, l := range strings.Split(text, "\n") {
		switch {
		case strings.HasPrefix(l, "```"):
			inside = strings.TrimSpace(l) == "```console"
		case !inside:
		case strings.HasPrefix(l, "$ "):
			all = append(all, shown{command: strings.TrimSpace(l[2:]), line: i + 1})
		case len(all) > 0:
			c := &all[len(all)-1]
			c.output = append(c.output, strings.TrimRight(l, " "))
		}
	}
	return all
}

// notShown is the first expected line that is not printed in its place.
func notShown(want, got []string) string {
	at, skip := 0, false
	for _, w := range want {
		if strings.TrimSpace(w) == "…" {
			skip = true
			continue
		}
		for skip && at < len(got) && strings.TrimRight(got[at], " ") != w {
			at++
		}
		if at >= len(got) || strings.TrimRight(got[at], " ") != w {
			return w
		}
		at, skip = at+1, false
	}
	return ""
}

// Every file that DEVELOPERS.md names exists, under the path it is given or,
// named without one, somewhere.
func TestDevelopersNamesFilesThatExist(t *testing.T) {
	text, err := os.ReadFile("../../DEVELOPERS.md")
	if err != nil {
		t.Fatal(err)
	}
	var files []string
	err = fs.WalkDir(os.DirFS("../.."), ".", func(path string, d fs.DirEntry, err error) error {
		if err == nil && d.IsDir() && d.Name() == ".git" {
			return fs.SkipDir
		}
		files = append(files, "/"+path)
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	named := regexp.MustCompile("`([\\w./*-]+\\.(?:go|md|txtar))`").FindAllStringSubmatch(string(text), -1)
	if len(named) < 20 {
		t.Fatalf("%d files are named", len(named))
	}
	for _, m := range named {
		pattern := regexp.QuoteMeta("/" + m[1])
		pattern = strings.ReplaceAll(pattern, `\*`, "[^/]*") + "$"
		if !slices.ContainsFunc(files, regexp.MustCompile(pattern).MatchString) {
			t.Errorf("DEVELOPERS.md names %s, which does not exist", m[1])
		}
	}
}
