package main

import (
	"encoding/json"
	"errors"
	"io"
	"os/exec"
	"slices"
	"strings"
	"testing"
)

// layers are the packages in the order in which imports may run: each may
// import what stands in its list, and packages below its own folder.
var layers = []struct {
	path    string   // below the module, with everything under it, up to the next more exact entry
	imports []string // packages of the module
}{
	{"ode", nil},
	{"fit", nil},
	{"mechanisms", nil},
	{"mechanisms/kinetics", []string{"ode", "mechanisms"}},
	{"fit/saturation", []string{"ode", "fit", "mechanisms", "mechanisms/kinetics"}},
	{"specs", []string{"ode", "fit", "mechanisms", "mechanisms/kinetics", "fit/saturation"}},
	{"cmd", []string{"ode", "fit", "mechanisms", "mechanisms/kinetics", "fit/saturation", "specs"}},
}

// outside are packages that only some layers may use: units and YAML stop at
// specs; terminal, clock, environment and files stop at cmd.
var outside = []struct {
	prefix string
	only   []string
}{
	{"gopkg.in/yaml.v3", []string{"specs", "cmd"}},
	{"os", []string{"cmd"}},
	{"syscall", []string{"cmd", "ode/odetest"}}, // the test bench of ode counts processor time
	{"net", []string{"cmd"}},
	{"flag", []string{"cmd"}},
	{"log", []string{"cmd"}},
	{"golang.org/x/term", []string{"cmd"}},
	{"github.com/spf13", []string{"cmd"}},
	{"testing", []string{"ode/odetest", "fit/fittest", "mechanisms/mechtest"}},
}

// listed is what `go list` says of one package.
type listed struct {
	ImportPath   string
	Imports      []string
	TestImports  []string
	XTestImports []string
}

func TestImportsRunOneWay(t *testing.T) {
	out, err := exec.Command("go", "list", "-e", "-json", "ligancy/...").Output()
	if err != nil {
		t.Fatal(err)
	}
	d := json.NewDecoder(strings.NewReader(string(out)))
	n := 0
	for ; ; n++ {
		var p listed
		if err := d.Decode(&p); errors.Is(err, io.EOF) {
			break
		} else if err != nil {
			t.Fatal(err)
		}
		checkImports(t, &p)
	}
	if n < 10 {
		t.Errorf("go list names %d packages only", n)
	}
}

func checkImports(t *testing.T, p *listed) {
	path := strings.TrimPrefix(p.ImportPath, "ligancy/")
	own := layerOf(path)
	if own < 0 {
		t.Errorf("%s belongs to no layer", path)
		return
	}
	tests := slices.Concat(p.TestImports, p.XTestImports)
	for _, i := range slices.Concat(p.Imports, tests) {
		inner, ok := strings.CutPrefix(i, "ligancy/")
		if !ok {
			continue
		}
		l := layerOf(inner)
		if l != own && (l < 0 || !slices.Contains(layers[own].imports, layers[l].path)) {
			t.Errorf("%s must not import %s", path, inner)
		}
	}
	for _, i := range p.Imports {
		for _, o := range outside {
			if within(i, o.prefix) && !slices.ContainsFunc(o.only, func(l string) bool { return within(path, l) }) {
				t.Errorf("%s must not import %s", path, i)
			}
		}
	}
}

// layerOf is the most exact layer of a package; −1 if there is none.
func layerOf(path string) int {
	best := -1
	for i, l := range layers {
		if within(path, l.path) && (best < 0 || len(l.path) > len(layers[best].path)) {
			best = i
		}
	}
	return best
}

// within says whether a package is another or lies below it.
func within(path, folder string) bool {
	return path == folder || strings.HasPrefix(path, folder+"/")
}
