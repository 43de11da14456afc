package specs

import (
	"fmt"
	"strings"

	"gopkg.in/yaml.v3"

	"ligancy/specs/diag"
)

// listShape is a list.
type listShape[V any] struct {
	of          shape[V]
	form        string // "a list of data sets"
	least, most int    // most 0: no bound
	single      bool   // one value may stand without its brackets
}

func (l listShape[V]) read(r *reader, n *yaml.Node, path string, v *[]V) bool {
	if n.Kind != yaml.SequenceNode {
		if !l.single || n.Kind == yaml.ScalarNode && isNull(n) {
			r.wrong(n, path, l.form)
			return false
		}
		var one V
		if !l.of.read(r, n, path, &one) {
			return false
		}
		*v = []V{one}
		return true
	}
	ok := true
	for i, item := range n.Content {
		p := fmt.Sprintf("%s[%d]", path, i)
		at := r.at(item)
		r.places[p] = place{key: at, value: at}
		var one V
		if !l.of.read(r, item, p, &one) {
			r.failed[p] = true
			ok = false
		}
		*v = append(*v, one)
	}
	switch {
	case len(n.Content) < l.least:
		r.complain(diag.Diagnostic{Code: "wrong-length", Position: r.at(n),
			Problem: fmt.Sprintf("%s: %s belongs here; there should be at least %d, not %d",
				lastName(path), l.form, l.least, len(n.Content)), Remedies: r.exampleRemedy()})
		return false
	case l.most > 0 && len(n.Content) > l.most:
		r.complain(diag.Diagnostic{Code: "wrong-length", Position: r.at(n),
			Problem: fmt.Sprintf("%s: %s belongs here; there may be at most %d, not %d",
				lastName(path), l.form, l.most, len(n.Content)), Remedies: r.exampleRemedy()})
		return false
	}
	return ok
}

func (r *reader) exampleRemedy() []diag.Remedy {
	if r.example == "" {
		return nil
	}
	return []diag.Remedy{{Say: "Write for example", Write: r.example}}
}

func (l listShape[V]) schema(s *schemata) object {
	o := object{"type": "array", "items": l.of.schema(s)}
	if l.least > 0 {
		o["minItems"] = l.least
	}
	if l.most > 0 {
		o["maxItems"] = l.most
	}
	if l.single {
		return object{"anyOf": []object{l.of.schema(s), o}}
	}
	return o
}

// Named is an entry of a mapping whose keys are the author's own names.
type Named[V any] struct {
	Name  string
	Value V
}

// namesShape is a mapping from the author's own names, in their order.
type namesShape[V any] struct {
	of   shape[V]
	form string // "a mapping from factors to columns"
}

func (m namesShape[V]) read(r *reader, n *yaml.Node, path string, v *[]Named[V]) bool {
	if n.Kind != yaml.MappingNode {
		r.wrong(n, path, m.form)
		return false
	}
	ok := true
	whole := r.entries(n, path, func(name string, _, value *yaml.Node) {
		e := Named[V]{Name: name}
		if !m.of.read(r, value, join(path, name), &e.Value) {
			ok = false
			return
		}
		*v = append(*v, e)
	})
	return ok && whole
}

func (m namesShape[V]) schema(s *schemata) object {
	return object{"type": "object", "additionalProperties": m.of.schema(s)}
}

// key is one key of a record: how it is read, and what it is for.
type key[T any] struct {
	name, doc, example string
	required           bool
	read               func(r *reader, n *yaml.Node, path string, t *T) bool
	schema             func(s *schemata) object
}

// with makes a key that is read by a shape into a field of the record.
func with[T, V any](name string, s shape[V], at func(*T) *V, doc, example string) key[T] {
	return key[T]{name: name, doc: doc, example: example,
		read: func(r *reader, n *yaml.Node, path string, t *T) bool {
			return s.read(r, n, path,
				at(t))
		},
		schema: s.schema}
}

func (k key[T]) must() key[T] {
	k.required = true
	return k
}

// recordShape is a mapping with keys of the program's own.
type recordShape[T any] struct {
	name string // "a data set": for sentences, and in the schema
	keys func() []key[T]
	// others reads keys that are the author's own names, where there may be
	// any; it returns false for a key that it does not know.
	others func(r *reader, name string, n *yaml.Node, path string, t *T) bool
	// otherSchema describes those.
	otherSchema func(s *schemata) object
	// plain reads a value that is not a mapping, where one may stand for the record.
	plain       func(r *reader, n *yaml.Node, path string, t *T) bool
	plainSchema func(s *schemata) object
}

func (c recordShape[T]) read(r *reader, n *yaml.Node, path string, t *T) bool {
	if n.Kind != yaml.MappingNode {
		if c.plain != nil && !isNull(n) {
			return c.plain(r, n, path, t)
		}
		r.wrong(n, path, "a mapping from keys to values")
		return false
	}
	ok := true
	keys := c.keys()
	seen := map[string]bool{}
	outer := r.example
	whole := r.entries(n, path, func(name string, kn, value *yaml.Node) {
		seen[name] = true
		for _, k := range keys {
			if k.name != name {
				continue
			}
			r.example = k.example
			if !k.read(r, value, join(path, name), t) {
				r.failed[join(path, name)] = true
				ok = false
			}
			r.example = outer
			return
		}
		if c.others != nil && c.others(r, name, value, join(path, name), t) {
			return
		}
		ok = false
		r.unknownKey(kn, c.name, name, keyNames(keys))
	})
	for _, k := range keys {
		if k.required && !seen[k.name] && !r.partial {
			ok = false
			r.missingKey(n, path, c.name, k.name, k.example)
		}
	}
	return ok && whole
}

func keyNames[T any](keys []key[T]) []string {
	names := make([]string, len(keys))
	for i, k := range keys {
		names[i] = k.name
	}
	return names
}

// unknownKey names a key that means nothing here, and the nearest that does.
func (r *reader) unknownKey(n *yaml.Node, record, name string, valid []string) {
	if len(r.complaints) >= enough {
		return
	}
	d := diag.Diagnostic{Code: "unknown-key", Position: r.at(n),
		Problem: fmt.Sprintf("%s has no key %q", record, name),
		Notes:   []string{"Its keys are: " + strings.Join(valid, ", ") + "."}}
	if near := diag.Nearest(name, valid); near != "" {
		d.Remedies = []diag.Remedy{{Write: near + ":"}}
	}
	r.complain(d)
}

// missingKey names a key that must be there.
func (r *reader) missingKey(n *yaml.Node, path, record, name, example string) {
	at := r.at(n)
	if p, ok := r.places[path]; ok && n.Style&yaml.FlowStyle == 0 {
		at = p.key
	}
	if path == "" {
		at = diag.Position{File: r.text.Name}
	}
	r.complain(diag.Diagnostic{Code: "missing-key", Position: at,
		Problem:  fmt.Sprintf("%s needs the key %q", record, name),
		Remedies: []diag.Remedy{{Write: example}}})
}

func (c recordShape[T]) schema(s *schemata) object {
	ref := s.define(c.name, func() object {
		properties, required := object{}, []string{}
		for _, k := range c.keys() {
			o := object{}
			for name, v := range k.schema(s) {
				o[name] = v
			}
			if _, isRef := o["$ref"]; isRef { // draft-07 reads nothing beside $ref
				o = object{"allOf": []object{o}}
			}
			o["description"] = k.doc
			properties[k.name] = o
			if k.required {
				required = append(required, k.name)
			}
		}
		o := object{"type": "object", "properties": properties, "additionalProperties": false}
		if c.otherSchema != nil {
			o["additionalProperties"] = c.otherSchema(s)
		}
		if len(required) > 0 {
			o["required"] = required
		}
		return o
	})
	if c.plain != nil {
		return object{"anyOf": []object{c.plainSchema(s), ref}}
	}
	return ref
}

// pointerShape reads a value that may be missing.
type pointerShape[V any] struct{ of shape[V] }

func (p pointerShape[V]) read(r *reader, n *yaml.Node, path string, v **V) bool {
	x := new(V)
	if !p.of.read(r, n, path, x) {
		return false
	}
	*v = x
	return true
}

func (p pointerShape[V]) schema(s *schemata) object { return p.of.schema(s) }
