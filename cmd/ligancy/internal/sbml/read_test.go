package sbml

import (
	"encoding/xml"
	"math"
	"strconv"
	"strings"
	"testing"
)

// element is any element of a document, read without knowledge of the writer.
type element struct {
	XMLName xml.Name
	Attrs   []xml.Attr `xml:",any,attr"`
	Inner   []element  `xml:",any"`
	Text    string     `xml:",chardata"`
}

func (e *element) attr(name string) string {
	for _, a := range e.Attrs {
		if a.Name.Local == name {
			return a.Value
		}
	}
	return ""
}

// all elements of a name, at any depth.
func (e *element) all(name string) []*element {
	var found []*element
	for i := range e.Inner {
		if e.Inner[i].XMLName.Local == name {
			found = append(found, &e.Inner[i])
		}
		found = append(found, e.Inner[i].all(name)...)
	}
	return found
}

// document is a model as it was read back.
type document struct {
	t       *testing.T
	values  map[string]float64 // parameters, compartments, species
	held    map[string]bool    // by boundary conditions
	species []string
	rules   map[string]*element
	steps   []step
}

type step struct {
	change map[string]float64
	law    *element
}

// read reads a document back as a solver of SBML would.
func read(t *testing.T, data []byte) *document {
	t.Helper()
	var root element
	if err := xml.Unmarshal(data, &root); err != nil {
		t.Fatal(err)
	}
	if root.XMLName.Space != "http://www.sbml.org/sbml/level3/version1/core" || root.attr("level") != "3" || root.attr("version") != "1" {
		t.Fatalf("%v", root.XMLName)
	}
	d := &document{t: t, values: map[string]float64{}, held: map[string]bool{}, rules: map[string]*element{}}
	take := func(e *element, attribute string) {
		id := e.attr("id")
		if _, twice := d.values[id]; twice || id == "" {
			t.Errorf("the identifier %q is no one's own", id)
		}
		v, err := strconv.ParseFloat(e.attr(attribute), 64)
		if err != nil {
			t.Errorf("%s: %v", id, err)
		}
		d.values[id] = v
	}
	for _, e := range root.all("compartment") {
		take(e, "size")
	}
	for _, e := range root.all("species") {
		take(e, "initialConcentration")
		d.species = append(d.species, e.attr("id"))
		d.held[e.attr("id")] = e.attr("boundaryCondition") == "true"
	}
	for _, e := range root.all("parameter") {
		take(e, "value")
	}
	for _, e := range root.all("initialAssignment") {
		id := e.attr("symbol")
		stated := d.values[id]
		d.values[id] = d.value(&e.Inner[0].Inner[0])
		if math.Abs(d.values[id]-stated) > 1e-9*math.Abs(stated) {
			t.Errorf("%s is assigned %g and stated %g", id, d.values[id], stated)
		}
	}
	for _, e := range root.all("assignmentRule") {
		d.rules[e.attr("variable")] = &e.Inner[0].Inner[0]
	}
	for _, e := range root.all("reaction") {
		d.steps = append(d.steps, d.reaction(e))
	}
	return d
}

func (d *document) reaction(e *element) step {
	s := step{change: map[string]float64{}}
	for list, sign := range map[string]float64{"listOfReactants": -1, "listOfProducts": 1} {
		for _, l := range e.all(list) {
			for _, r := range l.all("speciesReference") {
				n, err := strconv.ParseFloat(r.attr("stoichiometry"), 64)
				if err != nil {
					d.t.Error(err)
				}
				s.change[r.attr("species")] += sign * n
			}
		}
	}
	s.law = &e.all("math")[0].Inner[0]
	return s
}

// value of an expression of MathML.
func (d *document) value(e *element) float64 {
	switch e.XMLName.Local {
	case "ci":
		v, ok := d.values[strings.TrimSpace(e.Text)]
		if !ok {
			d.t.Fatalf("nothing is called %q", e.Text)
		}
		return v
	case "cn":
		parts := strings.Fields(e.Text)
		v, err := strconv.ParseFloat(parts[0], 64)
		if err != nil {
			d.t.Fatal(err)
		}
		if e.attr("type") == "e-notation" {
			n, err := strconv.Atoi(parts[1])
			if err != nil {
				d.t.Fatal(err)
			}
			v, _ = strconv.ParseFloat(parts[0]+"e"+strconv.Itoa(n), 64)
		}
		return v
	}
	v := d.value(&e.Inner[1])
	for i := 2; i < len(e.Inner); i++ {
		w := d.value(&e.Inner[i])
		switch e.Inner[0].XMLName.Local {
		case "plus":
			v += w
		case "minus":
			v -= w
		case "times":
			v *= w
		case "divide":
			v /= w
		case "power":
			v = math.Pow(v, w)
		default:
			d.t.Fatalf("no operator of ours: %s", e.Inner[0].XMLName.Local)
		}
	}
	return v
}

// Dim and Derivs make the document a system of package ode.
func (d *document) Dim() int { return len(d.species) }

func (d *document) Derivs(dst []float64, _ float64, y []float64) error {
	for i, s := range d.species {
		d.values[s], dst[i] = y[i], 0
	}
	for _, r := range d.steps {
		v := d.value(r.law)
		for i, s := range d.species {
			if !d.held[s] {
				dst[i] += r.change[s] * v / d.values["cell"]
			}
		}
	}
	return nil
}
