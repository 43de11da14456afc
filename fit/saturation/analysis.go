// Package saturation is where the domain meets the engine: data sets, a
// response, a noise model and a mechanism become a least-squares problem;
// candidates stand side by side; the outcome is plain data.
//
// No YAML, no files, no terminal: concentrations arrive in the ligand's unit.
package saturation

import "ligancy/mechanisms"

// Analysis is everything that a fit needs.
type Analysis struct {
	Title, Origin string
	Ligand        Substance
	Effectors     []Substance
	Conditions    map[string]string // as the study writes them; objections read them
	Kelvin        float64           // temperature; NaN where it is not stated
	Data          []Dataset
	Candidates    []Candidate
	Contrasts     []Contrast
	Settings      Settings
	Curve         *CurveRequest  // nil where the study has no such block
	Course        *CourseRequest // likewise
	Plan          *PlanRequest   // likewise
}

// Substance is a ligand or effector.
type Substance struct{ Name, Symbol, Unit string }

// Dataset is one table read for one response.
type Dataset struct {
	Name, File   string
	Factors      []string // names, e.g. "pH": columns that tell curves apart
	Points       []Point
	Response     Response
	Total        bool // ligand axis is total, not free, concentration
	SitesPresent SitesPresent
	Noise        Noise
	Incubation   float64  // seconds; NaN where it is not stated
	Notes        []string // what the reader did silently: decimal commas, byte-order mark

	SHA256     string            // of the file, in hexadecimal
	Conditions map[string]string // that hold for this table, beside those of the study
	Trace      bool              // points are followed in time: Point.Seconds counts
	Phases     []Phase           // of a trace
}

// Point is one measurement.
type Point struct {
	X           float64 // ligand, in its unit, on a linear axis; 0 is allowed
	Y           float64
	Sigma       float64 // standard deviation; 0 where it is not given
	Weight      float64 // relative weight on the squared residual; 0 means 1
	Preparation string
	Levels      []string  // one per Dataset.Factors
	Effectors   []float64 // one per Analysis.Effectors
	Blocked     bool      // sees only nonspecific binding and low
	LeftOut     string    // reason; "" = kept
	Row         int       // line in the file
	Seconds     float64   // of a trace, since the first phase began
}

// Response says what y is.
type Response struct {
	Kind    string // "saturation", "bound", "velocity", "signal"
	Unit    string
	Percent bool // y and its ends are in percent (kept so; a saturation of 1 is 100)
	// Low and High are the ends; High is V of a velocity and Bmax of bound.
	Low, High, Nonspecific Setting
	SitesPerMolecule       bool              // bound, in mol per mol: High is the number of sites; fixed at 0, that of each mechanism
	Differs                map[string]string // "Bmax" → factor or "preparation"
	Of                     string            // another ligand whose binding is counted
}

// Setting is a number, or free.
type Setting struct {
	Free  bool
	Value float64
}

// SitesPresent is the total concentration of sites, in the ligand's unit; where
// that is no concentration (a gas), in the unit that the study writes.
type SitesPresent struct {
	Value    float64 // 0 where it is not given
	Unit     string  // of Value
	FromBmax float64 // factor from fitted Bmax to concentration; 0 where not asked for
}

// Noise is a scatter model.
type Noise string

const (
	Constant     Noise = "constant"
	Proportional Noise = "proportional"
	Mixed        Noise = "mixed"
	GivenSigma   Noise = "given"
	Replicates   Noise = "replicates"
	StudentT     Noise = "student"
)

// Candidate is one mechanism to try.
type Candidate struct {
	Name, Family string
	Mechanism    mechanisms.Mechanism
	// Differs: constant name (or "all") → factor, effector, "preparation" or "data".
	Differs map[string]string
	// Given: starts, ranges and fixed values by constant name.
	Given map[string]mechanisms.Given
	// ShiftByPreparation: a random shift of ln K per preparation.
	ShiftByPreparation bool
	// Ends are numbers of the response ("low", "Bmax", "nonspecific", …) as this
	// candidate has them, where they are not those of the data sets.
	Ends map[string]Setting
	// Rates of a mechanism with kinetics, by name: "k_on", "exchange".
	Rates map[string]Rate
}

// Contrast asks for ratios or differences between the levels of a factor.
type Contrast struct {
	Of      []string // "x_half", "n_H", "L"
	Between string   // factor
}

// Settings of a fit, as the study says them.
type Settings struct {
	Starts    int
	Seed      uint64
	Level     float64 // 0.95
	Method    string  // "profile" | "covariance"
	Draws     int     // of the deciding bootstrap; 199
	Bootstrap Bootstrap
	Workers   int    // never changes a digit
	Limits    Limits // of the objections
}

// Bootstrap asks for bootstrap intervals.
type Bootstrap struct {
	Draws int
	By    string // "parametric", "residual", "preparation"
}
