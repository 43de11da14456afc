package specs

import (
	"bytes"
	"io/fs"
	"os"
	"path/filepath"

	"github.com/santhosh-tekuri/jsonschema/v6"
	"gopkg.in/yaml.v3"

	"ligancy/specs/gallery"

	"encoding/json"
	"slices"
	"testing"
)

// properties finds, for every record of the schema, the keys that it accepts.
func properties(t *testing.T) map[string][]string {
	t.Helper()
	var doc struct {
		Definitions map[string]struct {
			Properties map[string]json.RawMessage
		}
	}
	if err := json.Unmarshal(Schema(), &doc); err != nil {
		t.Fatal(err)
	}
	out := map[string][]string{}
	for name, d := range doc.Definitions {
		for k := range d.Properties {
			out[name] = append(out[name], k)
		}
		slices.Sort(out[name])
	}
	return out
}

// The reader and the schema accept the same keys.
func TestSchemaHasTheKeysOfTheReader(t *testing.T) {
	got := properties(t)
	check := func(name string, keys []string) {
		slices.Sort(keys)
		if !slices.Equal(got[name], keys) {
			t.Errorf("%s: schema %v, reader %v", name, got[name], keys)
		}
	}
	check("study", keyNames(studyKeys()))
	check("data_set", keyNames(dataKeys()))
	check("columns", keyNames(columnKeys()))
	check("response", keyNames(responseKeys()))
	check("mechanism", keyNames(mechanismKeys()))
	check("constant", keyNames(saysKeys()))
	check("interval", keyNames(intervalKeys()))
	check("bootstrap", keyNames(bootstrapKeys()))
	check("decide", keyNames(decideKeys()))
	if len(got) < 20 {
		t.Errorf("only %d records", len(got))
	}
}

// Every key has a sentence, and an example that the reader itself accepts.
func TestExamplesOfKeys(t *testing.T) {
	checkExamples(t, "a study", studyKeys())
	checkExamples(t, "a data set", dataKeys())
	checkExamples(t, "columns", columnKeys())
	checkExamples(t, "a response", responseKeys())
	checkExamples(t, "a mechanism", mechanismKeys())
	checkExamples(t, "a constant", saysKeys())
	checkExamples(t, "a substance", studyKeysOf(substanceShape("a ligand")))
	checkExamples(t, "a contrast", studyKeysOf(contrastShape()))
	checkExamples(t, "fit", studyKeysOf(fitShape()))
	checkExamples(t, "a state", studyKeysOf(stateShape()))
	checkExamples(t, "a step", studyKeysOf(stepShape()))
	checkExamples(t, "curve", studyKeysOf(curveShape()))
	checkExamples(t, "course", studyKeysOf(courseShape()))
	checkExamples(t, "plan", studyKeysOf(planShape()))
	checkExamples(t, "a conformation", studyKeysOf(conformationShape()))
	checkExamples(t, "an effector's binding", studyKeysOf(bindingShape()))
}

func studyKeysOf[T any](s shape[T]) []key[T] { return s.(recordShape[T]).keys() }

func checkExamples[T any](t *testing.T, record string, keys []key[T]) {
	t.Helper()
	for _, k := range keys {
		if k.doc == "" || k.example == "" {
			t.Errorf("%s, key %s: no sentence or no example", record, k.name)
			continue
		}
		c := recordShape[T]{name: record, keys: func() []key[T] { return []key[T]{k} }}
		doc := parseText(k.example + "\n")
		r := &reader{document: doc, places: map[string]place{}, failed: map[string]bool{}}
		var v T
		if doc.root == nil || !c.read(r, doc.root, "", &v) ||
			len(r.complaints)+len(doc.complaints) > 0 {
			t.Errorf("%s, key %s: the example %q cannot be read: %v %v", record, k.name, k.example,
				r.complaints, doc.complaints)
		}
	}
}

// A validator of JSON Schema accepts the studies that the reader accepts, and
// refuses a key that means nothing.
func TestSchemaBeforeAValidator(t *testing.T) {
	doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(Schema()))
	if err != nil {
		t.Fatal(err)
	}
	c := jsonschema.NewCompiler()
	if err := c.AddResource("study.json", doc); err != nil {
		t.Fatal(err)
	}
	schema, err := c.Compile("study.json")
	if err != nil {
		t.Fatal(err)
	}
	studies := map[string]string{"base": base, "surface": surface}
	for _, name := range gallery.Names() {
		text, err := fs.ReadFile(gallery.Files(name), name+".yaml")
		if err != nil {
			t.Fatal(err)
		}
		studies[name] = string(text)
	}
	files, _ := filepath.Glob("../testdata/*.yaml")
	for _, f := range files {
		text, err := os.ReadFile(f)
		if err != nil {
			t.Fatal(err)
		}
		studies[f] = string(text)
	}
	for name, text := range studies {
		var v any
		if err := yaml.Unmarshal([]byte(text), &v); err != nil {
			t.Fatal(err)
		}
		if err := schema.Validate(v); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
	for _, e := range []edit{{"noise:", "nosie:"}, {"sites: 4}", "sites: 4, zebra: 1}"}, {"kind: saturation", "kind: saturated"}, {"format: ligancy/1\n", ""}} {
		var v any
		if err := yaml.Unmarshal([]byte(spoil(t, base, []edit{e})), &v); err != nil {
			t.Fatal(err)
		}
		if schema.Validate(v) == nil {
			t.Errorf("%q is accepted", e.to)
		}
	}
}
