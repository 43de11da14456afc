package sbml

import (
	"bytes"
	"encoding/xml"
	"fmt"
	"maps"
	"math"
	"slices"
	"strconv"
	"strings"

	"ligancy/mechanisms"
)

// Bytes writes the document.
func (m *Model) Bytes() []byte {
	var b bytes.Buffer
	line := func(format string, args ...any) { fmt.Fprintf(&b, format+"\n", args...) }
	line(`<?xml version="1.0" encoding="UTF-8"?>`)
	line(`<sbml xmlns="http://www.sbml.org/sbml/level3/version1/core" level="3" version="1">`)
	units := ""
	if m.Mole > 0 {
		units = ` substanceUnits="amount" extentUnits="amount" volumeUnits="litre"`
	}
	line(` <model id="mechanism" name="%s" timeUnits="second"%s>`, escaped(m.Name), units)
	line(`  <notes><body xmlns="http://www.w3.org/1999/xhtml">`)
	for _, n := range m.Notes {
		line(`   <p>%s</p>`, escaped(n))
	}
	line(`  </body></notes>`)
	m.writeUnits(line)
	line(`  <listOfCompartments>`)
	line(`   <compartment id="cell" spatialDimensions="3" size="1" constant="true"/>`)
	line(`  </listOfCompartments>`)
	m.writeSpecies(line)
	m.writeParameters(line)
	m.writeAssignments(line)
	m.writeSaturation(line)
	m.writeReactions(line)
	line(` </model>`)
	line(`</sbml>`)
	return b.Bytes()
}

// writeUnits defines an amount so that amount per litre is the ligand's unit.
func (m *Model) writeUnits(line func(string, ...any)) {
	if !(m.Mole > 0) {
		return
	}
	line(`  <listOfUnitDefinitions>`)
	line(`   <unitDefinition id="amount" name="%s × L"><listOfUnits>`, escaped(m.Unit))
	line(`    <unit kind="mole" exponent="1" scale="0" multiplier="%s"/>`, plain(m.Mole))
	line(`   </listOfUnits></unitDefinition>`)
	line(`  </listOfUnitDefinitions>`)
}

// Terms of the Systems Biology Ontology.
const (
	massActionLaw  = "SBO:0000012"
	binding        = "SBO:0000177"
	conformational = "SBO:0000181"
	macromolecule  = "SBO:0000245"
	simpleChemical = "SBO:0000247"
	complexOf      = "SBO:0000253"
)

func (m *Model) writeSpecies(line func(string, ...any)) {
	const end = `hasOnlySubstanceUnits="false" boundaryCondition="%t" constant="false" sboTerm="%s"/>`
	line(`  <listOfSpecies>`)
	line(`   <species id="%s" name="free ligand" compartment="cell" initialConcentration="%s" `+end,
		LigandID, plain(m.Ligand), !m.UsedUp, simpleChemical)
	for _, s := range m.States {
		term := macromolecule
		if s.Ligands > 0 {
			term = complexOf
		}
		line(`   <species id="%s" name="%s" compartment="cell" initialConcentration="%s" `+end, s.ID, escaped(s.Name), plain(s.Initial), false, term)
	}
	line(`  </listOfSpecies>`)
}

func (m *Model) writeParameters(line func(string, ...any)) {
	line(`  <listOfParameters>`)
	for _, p := range m.Parameters {
		if p.ID != "" {
			line(`   <parameter id="%s" name="%s" value="%s" constant="true"/>`, p.ID, escaped(p.Name), plain(p.Value))
		}
	}
	for _, r := range m.rates() {
		line(`   <parameter id="%s" value="%s" constant="true"/>`, r.ID, plain(r.Value))
	}
	line(`   <parameter id="Y" name="saturation" value="0" constant="false"/>`)
	line(`  </listOfParameters>`)
}

func (m *Model) rates() []Rate {
	var all []Rate
	for _, r := range m.Reactions {
		all = append(all, r.Up, r.Down)
	}
	return all
}

// writeAssignments are the rate constants as products of powers.
func (m *Model) writeAssignments(line func(string, ...any)) {
	var all []Rate
	for _, r := range m.rates() {
		if len(r.Powers) > 0 {
			all = append(all, r)
		}
	}
	if len(all) == 0 {
		return
	}
	line(`  <listOfInitialAssignments>`)
	for _, r := range all {
		factors := []string{number(r.Factor)}
		for _, id := range slices.Sorted(maps.Keys(r.Powers)) {
			factors = append(factors, apply("power", symbol(id), number(r.Powers[id])))
		}
		line(`   <initialAssignment symbol="%s">%s</initialAssignment>`, r.ID, inMath(apply("times", factors...)))
	}
	line(`  </listOfInitialAssignments>`)
}

// writeSaturation is Y = Σ i_s [s] / Σ n_s [s].
func (m *Model) writeSaturation(line func(string, ...any)) {
	var bound, sites []string
	for _, s := range m.States {
		bound = append(bound, apply("times", number(float64(s.Ligands)), symbol(s.ID)))
		sites = append(sites, apply("times", number(float64(s.Sites)), symbol(s.ID)))
	}
	line(`  <listOfRules>`)
	line(`   <assignmentRule variable="Y">%s</assignmentRule>`,
		inMath(apply("divide", apply("plus", bound...), apply("plus", sites...))))
	line(`  </listOfRules>`)
}

func (m *Model) writeReactions(line func(string, ...any)) {
	line(`  <listOfReactions>`)
	for _, r := range m.Reactions {
		term := binding
		if r.Kind == mechanisms.Exchange {
			term = conformational
		}
		line(`   <reaction id="%s" name="%s" reversible="true" fast="false" sboTerm="%s">`, r.ID, escaped(r.Name), term)
		up := []string{symbol(r.Up.ID), symbol(r.From)}
		reactants := []string{r.From}
		if r.Kind == mechanisms.Binding {
			up, reactants = append(up, symbol(LigandID)), append(reactants, LigandID)
		}
		references(line, "listOfReactants", reactants)
		references(line, "listOfProducts", []string{r.To})
		law := apply("times", symbol("cell"), apply("minus", apply("times", up...), apply("times", symbol(r.Down.ID), symbol(r.To))))
		line(`    <kineticLaw sboTerm="%s">%s</kineticLaw>`, massActionLaw, inMath(law))
		line(`   </reaction>`)
	}
	line(`  </listOfReactions>`)
}

func references(line func(string, ...any), list string, species []string) {
	line(`    <%s>`, list)
	for _, s := range species {
		line(`     <speciesReference species="%s" stoichiometry="1" constant="true"/>`, s)
	}
	line(`    </%s>`, list)
}

// MathML.

func inMath(s string) string {
	return `<math xmlns="http://www.w3.org/1998/Math/MathML">` + s + `</math>`
}

func apply(operator string, of ...string) string {
	return "<apply><" + operator + "/>" + strings.Join(of, "") + "</apply>"
}

func symbol(id string) string { return "<ci> " + id + " </ci>" }

// number writes a number as MathML does: mantissa and exponent apart.
func number(x float64) string {
	if x == math.Trunc(x) && math.Abs(x) < 1e9 {
		return `<cn type="integer"> ` + strconv.FormatFloat(x, 'f', 0, 64) + ` </cn>`
	}
	mantissa, exponent, _ := strings.Cut(strconv.FormatFloat(x, 'e', -1, 64), "e")
	n, err := strconv.Atoi(exponent)
	if err != nil {
		panic("sbml: a number without an exponent")
	}
	return fmt.Sprintf(`<cn type="e-notation"> %s <sep/> %d </cn>`, mantissa, n)
}

// plain writes a number of an attribute.
func plain(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }

// escaped makes a text safe within XML; what XML cannot hold becomes a mark.
func escaped(s string) string {
	var b bytes.Buffer
	if err := xml.EscapeText(&b, []byte(s)); err != nil {
		panic("sbml: a text that cannot be written")
	}
	return b.String()
}
