package specs

import (
	"encoding/json"
	"strings"
)

// schemata collects the definitions of a schema.
type schemata struct{ definitions object }

// define describes a record once and returns a reference to it.
func (s *schemata) define(name string, describe func() object) object {
	name = strings.ReplaceAll(strings.TrimPrefix(strings.TrimPrefix(name, "a "), "an "), " ", "_")
	if _, ok := s.definitions[name]; !ok {
		s.definitions[name] = nil // holds the place while it describes itself
		s.definitions[name] = describe()
	}
	return object{"$ref": "#/definitions/" + name}
}

// Schema is the JSON Schema (draft-07) of study files, made from the tables of
// keys by which studies are read.
func Schema() []byte {
	s := &schemata{definitions: object{}}
	root := object{
		"$schema":     "http://json-schema.org/draft-07/schema#",
		"title":       "ligancy study",
		"description": "One study: what was measured, which mechanisms to try, what to report.",
		"allOf":       []object{studyShape().schema(s)},
	}
	root["definitions"] = s.definitions
	b, err := json.MarshalIndent(root, "", "  ")
	if err != nil {
		panic("specs: the schema cannot be written")
	}
	return append(b, '\n')
}
