package mechanisms_test

import (
	"go/ast"
	"go/parser"
	"go/token"
	"os"
	"strings"
	"testing"

	"ligancy/mechanisms"
)

// typeComments is the doc comments of all types of the package.
func typeComments(t *testing.T) map[string]bool {
	comments := map[string]bool{}
	entries, err := os.ReadDir(".")
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		if !strings.HasSuffix(e.Name(), ".go") {
			continue
		}
		file, err := parser.ParseFile(token.NewFileSet(), e.Name(), nil, parser.ParseComments)
		if err != nil {
			t.Fatal(err)
		}
		for _, d := range file.Decls {
			if g, ok := d.(*ast.GenDecl); ok && g.Tok == token.TYPE {
				comments[g.Doc.Text()] = true
			}
		}
	}
	return comments
}

// The text that `families` prints is the doc comment of a type of the package.
func TestDocIsTheComment(t *testing.T) {
	comments := typeComments(t)
	for _, f := range mechanisms.Families() {
		if !comments[f.Doc] {
			t.Errorf("%s: the text is no type's doc comment", f.Name)
		}
		for _, part := range append([]string{"Constants", "Limits:", "What data hold what:", "Keys:"}, f.Keys...) {
			if !strings.Contains(f.Doc, part) {
				t.Errorf("%s: the text lacks %q", f.Name, part)
			}
		}
		for _, line := range strings.Split(f.Doc, "\n") {
			if n := len([]rune(strings.ReplaceAll(line, "\t", "    "))); n > 100 {
				t.Errorf("%s: a line of %d characters: %s", f.Name, n, line)
			}
		}
	}
}

func TestLookup(t *testing.T) {
	for _, f := range mechanisms.Families() {
		if g, ok := mechanisms.Lookup(f.Name); !ok || g.Name != f.Name {
			t.Errorf("%s is not found", f.Name)
		}
	}
	if _, ok := mechanisms.Lookup("Hill"); ok {
		t.Error("a family that is not there is found")
	}
}

// What a mechanism says of itself.
func TestMechanismsNameThemselves(t *testing.T) {
	for name, c := range every {
		m := c.Build()
		if m.Family() != c.Family {
			t.Errorf("%s says it is %s", name, m.Family())
		}
		m.Constants()[0].Name = "overwritten"
		if m.Constants()[0].Name == "overwritten" {
			t.Errorf("%s: its constants can be written over", name)
		}
	}
}
