// Package specs reads studies: one YAML file with its tables becomes a typed
// Study and a list of every complaint with its place; a Study without errors
// builds what an analysis needs. Units and YAML stop here.
//
// A study's keys are tables (keys_*.go): each key has the shape that reads its
// value, a sentence and an example. The JSON Schema is made from the same tables.
package specs

import (
	"ligancy/fit/saturation"
	"ligancy/specs/diag"
	"ligancy/specs/table"
	"ligancy/specs/units"
)

// Study is a study as it was read, its tables included. Quantities are as the
// author wrote them; Build converts them to the ligand's unit.
type Study struct {
	File          string // name in the file system it was read from
	SHA256        string // of the study file, in hexadecimal
	Title, Origin string
	Conditions    []Named[string]
	Ligand        Substance
	Effectors     []Substance
	Data          []Data
	Mechanisms    []Mechanism
	Contrasts     []Contrast
	Fit           Fit
	Curve         *Curve  // nil where there is no such block
	Course        *Course // likewise
	Plan          *Plan   // likewise
	// Defaults are the settings in force that the study does not say, by
	// their place: "data.curves.response.low" → "0".
	Defaults map[string]string

	format     string
	text       diag.Text
	places     map[string]place
	complaints diag.List
	analysis   *saturation.Analysis
}

// Substance is a ligand or effector.
type Substance struct {
	Name, Symbol string
	Unit         units.Unit
}

// Data is one table, or part of one, read for one response.
type Data struct {
	Name, File   string
	Sheet        string // of a workbook
	Decimal      string // "comma", "point", or "" to find out
	Columns      Columns
	Factors      []Named[string] // factor → column
	At           []Named[string] // what holds for the whole table
	Rows         []Named[table.Match]
	BlockedWhen  string
	Response     Response
	LigandAxis   string // "free" or "total"
	SitesPresent SitesPresent
	Noise        string
	Incubation   *units.Quantity
	Phases       []Phase // of traces

	table  *table.Table
	sha    string
	faulty bool // something in the table could not be read
}

// Column is a column of a table, with its unit where the study says one.
type Column struct {
	Name string
	Unit *units.Unit
}

// Columns says which column holds what. The zero Column is none.
type Columns struct {
	Ligand, Sigma, SEM, N, Weight       Column
	Preparation, Blocked, LeftOut, Time Column
	Response                            []Column        // several are replicates
	Others                              []Named[Column] // effectors and factors
}

// Response says what was measured.
type Response struct {
	Kind               string
	Unit               *units.Unit
	Low, High, V, Bmax Setting
	Nonspecific, Sites Setting
	Differs            []Named[string] // "Bmax" → factor, "preparation" or "data"
	Of                 string          // another ligand whose binding is counted
}

// SitesPresent is the concentration of sites: said, or made from Bmax.
type SitesPresent struct {
	Amount *units.Quantity
	From   string          // "Bmax"
	At     *units.Quantity // what one unit of Bmax is multiplied by
}

// Mechanism is one candidate.
type Mechanism struct {
	Name, Family  string
	Differs       []Named[string]
	Sites         *SiteCount
	Classes       []Named[int]
	Contacts      *Contacts
	Effectors     []Named[EffectorBinding]
	Turnover      []Named[Setting]
	Sees          []Named[Setting]
	Parts         []Named[Part]
	Small, Large  *Part
	Conformations []Named[Conformation]
	States        []State
	Steps         []Step
	Constants     []Named[ConstantSays]
	Rates         []Named[Rate]
	Response      []Named[Setting] // its own ends, where they are not those of the data
	Preparation   string           // "shift"
}

// SiteCount is a number of sites, or one per class of sites.
type SiteCount struct {
	Number  int
	Classes []Named[int]
}

// Contacts is a named arrangement of sites, or the pairs that touch.
type Contacts struct {
	Name  string
	Pairs [][2]int
}

// EffectorBinding says how another ligand binds.
type EffectorBinding struct {
	Binds string // "R", "T", "both"
	At    string // "ligand site", or ""
}

// Part is a population of a mixture, or a species of an assembly: a number of
// equal sites, or a mechanism.
type Part struct {
	Sites     int
	Mechanism *Mechanism
}

// Conformation is one conformation of a macromolecule.
type Conformation struct {
	Sites           int
	K, Weight, Like string
	Ligands         []Named[ConformationLigand]
}

// ConformationLigand is how an effector binds to a conformation.
type ConformationLigand struct {
	K     string
	Sites int
}

// State is one listed state, of an equilibrium or of a cycle.
type State struct {
	Name          string
	Ligands, Ways int
	Effectors     []Named[int]
	Constants     []Named[float64]
}

// Step is one step of a cycle.
type Step struct {
	From, To   string
	Ligand     int
	Effector   string
	Rate, Back string
	Yields     string
}

// ConstantSays is what a study says of one constant; nil where it says nothing.
type ConstantSays struct{ Start, Fixed, Value, Low, High *units.Quantity }

// Rate is a rate constant: one number, one per ligation, or what is said of it.
type Rate struct {
	Each []units.Quantity
	Says ConstantSays
}

// Contrast asks for ratios and differences between the levels of a factor.
type Contrast struct {
	Of      []string
	Between string
}

// Fit says how to fit.
type Fit struct {
	Starts    int
	Seed      int
	Interval  Interval
	Bootstrap Bootstrap
	Decide    Decide
}

// Interval says which intervals to give.
type Interval struct {
	Level  float64
	Method string
}

// Bootstrap asks for bootstrap intervals.
type Bootstrap struct {
	Draws int
	By    string
}

// Decide says how many studies are simulated to rule a mechanism out.
type Decide struct{ Draws int }

// Curve asks for curves from given constants.
type Curve struct {
	From, To *units.Quantity
	Points   int
	At       []Named[[]string]
}

// Course asks for binding against time.
type Course struct {
	Phases []Phase
	Points int
	At     []Named[string]
}

// Phase is one stretch of time, and what is done at its beginning.
type Phase struct {
	Add, Block *units.Quantity
	Dilute     float64
	Wash       bool
	For        *units.Quantity
}

// Plan asks for the next measurement.
type Plan struct {
	Range      []units.Quantity
	Points     int
	Replicates int
	Series     string
	Aim        string
	At         []Named[string]
}
