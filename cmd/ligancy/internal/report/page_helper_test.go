package report

import (
	"bytes"
	"context"
	"sync"
	"testing"

	"ligancy/specs"
	"ligancy/specs/gallery"
)

// galleryDocument is the result of a gallery study, without the bootstraps,
// which the page does not need. Each study is analysed once.
func galleryDocument(t testing.TB, name string) *Document {
	t.Helper()
	d, ok := galleryDocuments[name]
	if !ok {
		t.Fatalf("no gallery study %q", name)
	}
	return d(t)
}

var galleryDocuments = func() map[string]func(testing.TB) *Document {
	all := map[string]func(testing.TB) *Document{}
	for _, name := range gallery.Names() {
		var once sync.Once
		var d *Document
		all[name] = func(t testing.TB) *Document {
			once.Do(func() { d = analysed(t, name) })
			if d == nil {
				t.Fatalf("%s could not be analysed", name)
			}
			return d
		}
	}
	return all
}()

func analysed(t testing.TB, name string) *Document {
	s, complaints := specs.Load(gallery.Files(name), name+".yaml")
	if complaints.HasErrors() {
		t.Fatal(complaints)
	}
	a, complaints := s.Build()
	if complaints.HasErrors() {
		t.Fatal(complaints)
	}
	a.Settings.Draws, a.Settings.Bootstrap.Draws = 0, 0
	o, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	return New(a, o, Source{Version: "0.1.0", File: name + ".yaml", SHA256: s.SHA256, Defaults: s.Defaults})
}

// pageOf is a document's page.
func pageOf(t testing.TB, d *Document) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := Page(&b, d); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}
