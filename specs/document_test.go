package specs

import (
	"strings"
	"testing"

	"ligancy/specs/diag"
)

func parseText(text string) *document {
	return parseDocument(diag.NewText("study.yaml", []byte(text)), knownKeys())
}

// What YAML allows and means is left alone.
func TestNoFalseSlips(t *testing.T) {
	for _, text := range []string{
		base,
		"a: 'it''s: fine'\nb: \"x: y # z\"\n",
		"a: |\n  any: thing: goes # here\n  \t tab\nb: 1\n",
		"a: >-\n  x: y: z\n\nb: 1\n",
		"- a: |\n    x: y: z\n  b: 1\n",
		"- |\n  x: y: z\n- b\n",
		"a:\n  - b: 1\n    c: 2\n  -\n    b: 3\n",
		"a: {b: 1,\n    c: [1, 2,\n        3], d: x}\ne: 1\n",
		"a: {response: 1,\n  columns: 2}\n",
		"---\na: 1\n",
		"a: 1\n...\n",
		"a: http://x.y/z\nb: 12:30\nc: a#b\n",
		"a: [x, 'y, z', \"q]\"]\n",
		"a: \"two\n  lines: of # text\"\nb: 1\n",
		"a: 1 # a remark: with a colon\n# whole line: x: y\n#no blank\n",
		"a: -5\nb: - 5\n",
		"a: {\"b\":1, c: 2}\n",
		"a: x [y]\nb: 5 %\nc: p&q\nd: 2*3\n",
		"\"a b\": 1\n",
		"? a\n",
	} {
		doc := parseText(text)
		if strings.HasPrefix(text, "?") || strings.Contains(text, "b: - 5") {
			continue // not plain, and named
		}
		if len(doc.complaints) > 0 || doc.root == nil || doc.partial {
			t.Errorf("%q: %v", text, doc.complaints)
		}
	}
}

// A mended text has its lines and its columns where the author has them.
func TestPlacesAfterMending(t *testing.T) {
	doc := parseText("title:Oxygen\nfit: {starts:\u00a0many}\n")
	r := &reader{document: doc, places: map[string]place{}, failed: map[string]bool{}}
	var s Study
	studyShape().read(r, doc.root, "", &s)
	at := r.places["title"].value
	if at.Line != 1 || at.Column != 7 || at.End != 13 {
		t.Errorf("title is at %+v", at)
	}
	at = r.places["fit.starts"].value
	if at.Line != 2 || at.Column != 16 || at.End != 20 {
		t.Errorf("starts is at %+v", at)
	}
}
