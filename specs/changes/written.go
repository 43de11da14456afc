// Package changes says how two versions of a study differ, in the words that a
// study is written in: what was measured, which mechanisms are tried, how they
// are fitted, and which points came, went or are left out.
package changes

import (
	"fmt"
	"slices"
	"strconv"
	"strings"

	"gopkg.in/yaml.v3"
)

// Difference is one thing that is written differently.
type Difference struct {
	About string `json:"about"` // "measured", "mechanisms", "fitted"
	Where string `json:"where"` // "curves: response: low"
	Old   string `json:"old"`   // as it is written; "" where it is not
	New   string `json:"new"`
}

// What a difference is about.
const (
	Measured   = "measured"
	Mechanisms = "mechanisms"
	Fitted     = "fitted"
)

// about is the part of a study that a key at its top belongs to.
func about(key string) string {
	switch key {
	case "mechanisms":
		return Mechanisms
	case "fit", "contrasts", "curve", "course", "plan":
		return Fitted
	}
	return Measured
}

// Written compares two studies as they are written. The order of keys and of
// named entries, remarks and the layout do not count.
func Written(old, now []byte) ([]Difference, error) {
	a, err := root(old)
	if err != nil {
		return nil, err
	}
	b, err := root(now)
	if err != nil {
		return nil, err
	}
	w := &walk{all: []Difference{}}
	eachKey(a, b, func(key string, old, now *yaml.Node) {
		w.about = about(key)
		switch {
		case key == "format":
		case old != nil && now != nil && listsNames(old) && listsNames(now):
			w.entries("", old, now)
		case key == "fit" || key == "conditions":
			w.node("", old, now)
		default:
			w.node(key, old, now)
		}
	})
	return w.all, nil
}

// root is the mapping of a study.
func root(data []byte) (*yaml.Node, error) {
	var n yaml.Node
	if err := yaml.Unmarshal(data, &n); err != nil {
		return nil, fmt.Errorf("not read: %w", err)
	}
	if len(n.Content) == 0 || n.Content[0].Kind != yaml.MappingNode {
		return &yaml.Node{Kind: yaml.MappingNode}, nil
	}
	return n.Content[0], nil
}

// walk collects differences.
type walk struct {
	about string
	all   []Difference
}

// node compares two nodes at one place; either may be nil.
func (w *walk) node(where string, old, now *yaml.Node) {
	switch {
	case old != nil && now != nil && old.Kind == yaml.MappingNode && now.Kind == yaml.MappingNode:
		eachKey(old, now, func(key string, a, b *yaml.Node) { w.node(join(where, key), a, b) })
		return
	case old != nil && now != nil && listsNames(old) && listsNames(now):
		w.entries(where, old, now)
		return
	}
	a, b := flow(old), flow(now)
	if a != b {
		w.all = append(w.all, Difference{About: w.about, Where: where, Old: a, New: b})
	}
}

func join(where, key string) string {
	if where == "" {
		return key
	}
	return where + ": " + key
}

// entries compares two lists whose entries have names.
func (w *walk) entries(where string, old, now *yaml.Node) {
	before, after := named(old), named(now)
	for _, n := range before.names {
		w.node(join(where, n), before.of[n], after.of[n])
	}
	for _, n := range after.names {
		if before.of[n] == nil {
			w.node(join(where, n), nil, after.of[n])
		}
	}
}

// list is the entries of a list by their names.
type list struct {
	names []string
	of    map[string]*yaml.Node
}

func named(n *yaml.Node) list {
	l := list{of: map[string]*yaml.Node{}}
	for _, e := range n.Content {
		name := nameOf(e)
		for i := 2; l.of[name] != nil; i++ { // no study has two of a name, but nothing is lost here
			name = nameOf(e) + " " + strconv.Itoa(i)
		}
		l.names, l.of[name] = append(l.names, name), e
	}
	return l
}

// nameOf is what an entry of a list is called: by name, else by its family and
// what differs, else by its file.
func nameOf(n *yaml.Node) string {
	if n.Kind == yaml.ScalarNode {
		return n.Value
	}
	if v := child(n, "name"); v != nil {
		return v.Value
	}
	if v := child(n, "family"); v != nil {
		if d := child(n, "differs"); d != nil {
			return v.Value + " " + flow(d)
		}
		return v.Value
	}
	if v := child(n, "file"); v != nil {
		return v.Value
	}
	return ""
}

// listsNames says whether every entry of a list has a name, and one is more than a name.
func listsNames(n *yaml.Node) bool {
	return n.Kind == yaml.SequenceNode &&
		!slices.ContainsFunc(n.Content, func(e *yaml.Node) bool { return nameOf(e) == "" }) &&
		slices.ContainsFunc(n.Content, func(e *yaml.Node) bool { return e.Kind == yaml.MappingNode })
}

// child is the value of a key of a mapping; nil where there is none.
func child(n *yaml.Node, key string) *yaml.Node {
	if n == nil || n.Kind != yaml.MappingNode {
		return nil
	}
	for i := 0; i+1 < len(n.Content); i += 2 {
		if n.Content[i].Value == key {
			return n.Content[i+1]
		}
	}
	return nil
}

// eachKey visits the keys of two mappings, those of the older first.
func eachKey(old, now *yaml.Node, visit func(key string, old, now *yaml.Node)) {
	for i := 0; i+1 < len(old.Content); i += 2 {
		key := old.Content[i].Value
		visit(key, old.Content[i+1], child(now, key))
	}
	for i := 0; i+1 < len(now.Content); i += 2 {
		if key := now.Content[i].Value; child(old, key) == nil {
			visit(key, nil, now.Content[i+1])
		}
	}
}

// flow writes a node on one line; numbers that are equal are written alike, and
// the keys of a mapping in the order of the alphabet.
func flow(n *yaml.Node) string {
	if n == nil {
		return ""
	}
	switch n.Kind {
	case yaml.MappingNode:
		var parts []string
		for i := 0; i+1 < len(n.Content); i += 2 {
			parts = append(parts, n.Content[i].Value+": "+flow(n.Content[i+1]))
		}
		slices.Sort(parts)
		return "{" + strings.Join(parts, ", ") + "}"
	case yaml.SequenceNode:
		var parts []string
		for _, e := range n.Content {
			parts = append(parts, flow(e))
		}
		return "[" + strings.Join(parts, ", ") + "]"
	}
	text := strings.Join(strings.Fields(n.Value), " ")
	if v, err := strconv.ParseFloat(text, 64); err == nil && n.Style == 0 {
		return strconv.FormatFloat(v, 'g', -1, 64)
	}
	if text == "" {
		return `""`
	}
	return text
}
