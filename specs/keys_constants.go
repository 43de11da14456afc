package specs

import (
	"fmt"
	"strings"

	"gopkg.in/yaml.v3"

	"ligancy/specs/diag"
	"ligancy/specs/units"
)

func saysKeys() []key[ConstantSays] {
	return []key[ConstantSays]{
		optional("start", quantityShape{},
			func(c *ConstantSays) **units.Quantity { return &c.Start }, "where one search starts",
			"start: 1"),
		{name: "range", doc: "the range that the constant may take", example: "range: [0.01, 100]",
			read: readRange, schema: rangeList().schema},
		optional("fixed", quantityShape{},
			func(c *ConstantSays) **units.Quantity { return &c.Fixed },
			"the value at which it is held", "fixed: 0.01"),
		optional("value", quantityShape{},
			func(c *ConstantSays) **units.Quantity { return &c.Value },
			"the value that curve and course take, and where one search starts", "value: 0.9 torr"),
	}
}

func rangeList() shape[[]units.Quantity] {
	return listShape[units.Quantity]{of: quantityShape{}, form: "two values, [lowest, highest]",
		least: 2, most: 2}
}

func readRange(r *reader, n *yaml.Node, path string, c *ConstantSays) bool {
	var ends []units.Quantity
	if !rangeList().read(r, n, path, &ends) {
		return false
	}
	c.Low, c.High = &ends[0], &ends[1]
	return true
}

// saysShape reads {start, range, fixed, value}; a bare number is fixed.
func saysShape() shape[ConstantSays] {
	return recordShape[ConstantSays]{name: "a constant", keys: saysKeys,
		plain: func(r *reader, n *yaml.Node, path string, c *ConstantSays) bool {
			return pointerShape[units.Quantity]{quantityShape{}}.read(r, n, path, &c.Fixed)
		},
		plainSchema: quantityShape{}.schema}
}

// constantsShape reads constants, those of effectors, classes and parts one
// level further in: {K_R: {start: 1}, alanine: {K_T: {start: 0.5}}}. They come
// out with their full names, alanine.K_T.
type constantsShape struct{}

func (c constantsShape) read(r *reader, n *yaml.Node, path string, v *[]Named[ConstantSays]) bool {
	if n.Kind != yaml.MappingNode {
		r.wrong(n, path, "a mapping from constants to what is known of them")
		return false
	}
	return c.group(r, n, path, "", v)
}

func (c constantsShape) group(r *reader, n *yaml.Node, path, prefix string,
	v *[]Named[ConstantSays]) bool {
	ok := true
	whole := r.entries(n, path, func(name string, kn, value *yaml.Node) {
		p := join(path, name)
		if isGroup(value) && strings.Count(prefix, ".") < 3 {
			ok = c.group(r, value, p, prefix+name+".", v) && ok
			return
		}
		e := Named[ConstantSays]{Name: prefix + name}
		if !saysShape().read(r, value, p, &e.Value) {
			ok = false
			return
		}
		if e.Value == (ConstantSays{}) {
			r.complain(diag.Diagnostic{Code: "empty-mapping", Position: r.at(kn),
				Problem:  fmt.Sprintf("nothing is said of %s", name),
				Remedies: []diag.Remedy{{Write: name + ": {start: 1}"}}})
			ok = false
			return
		}
		*v = append(*v, e)
	})
	return ok && whole
}

// isGroup tells the constants of an effector from what is said of a constant.
func isGroup(n *yaml.Node) bool {
	if n.Kind != yaml.MappingNode || len(n.Content) == 0 {
		return false
	}
	words := []string{"start", "range", "fixed", "value"}
	for i := 0; i+1 < len(n.Content); i += 2 {
		name, value := n.Content[i].Value, n.Content[i+1]
		if value.Kind == yaml.MappingNode {
			return true
		}
		if head, _, _ := strings.Cut(name, ":"); diag.Nearest(head, words) != "" {
			return false
		}
	}
	return true
}

func (constantsShape) schema(s *schemata) object {
	one := saysShape().schema(s)
	return object{"type": "object", "additionalProperties": object{"anyOf": []object{one,
		{"type": "object", "additionalProperties": object{"anyOf": []object{one, {"type": "object",
			"additionalProperties": one}}}}}}}
}

// rateShape reads one rate constant, a list of them (one per ligation), or what
// is known of one.
type rateShape struct{}

func (rateShape) read(r *reader, n *yaml.Node, path string, v *Rate) bool {
	if n.Kind == yaml.MappingNode {
		return saysShape().read(r, n, path, &v.Says)
	}
	return listShape[units.Quantity]{of: quantityShape{}, form: "a rate constant with its unit",
		least: 1, most: 64, single: true}.read(r, n, path, &v.Each)
}

func (rateShape) schema(s *schemata) object {
	return object{"anyOf": []object{saysShape().schema(s), {"type": "array",
		"items": quantityShape{}.schema(s), "minItems": 1, "maxItems": 64}}}
}
