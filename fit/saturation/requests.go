package saturation

import "ligancy/mechanisms"

// Held is what holds for one curve of a request: a value or several of an
// effector, in its unit, or levels of a factor.
type Held struct {
	Name   string
	Levels []string  // as written
	Values []float64 // of an effector; nil for a factor
}

// CurveRequest asks for curves from given constants.
type CurveRequest struct {
	From, To float64 // in the ligand's unit; 0 where the study leaves it open
	Points   int     // 0 where the study leaves it open
	At       []Held
}

// Phase is one stretch of time and what is done at its beginning; one of Add,
// Dilute, Block and Wash is set.
type Phase struct {
	Add     float64 // ligand, total concentration afterwards, in the ligand's unit
	Dilute  float64 // factor above 1
	Block   float64 // unlabelled ligand, in the ligand's unit
	Wash    bool
	Seconds float64
}

// CourseRequest asks for binding against time.
type CourseRequest struct {
	Phases []Phase
	Points int // per phase; 0 where the study leaves it open
	At     []Held
}

// PlanRequest asks for the next measurement.
type PlanRequest struct {
	Low, High  float64 // ligand values that can be reached; 0 where the study leaves it open
	Points     int
	Replicates int
	Series     float64 // factor of a dilution series: 2 for 2-fold; 0 for none
	Aim        string  // "discriminate", "constants"
	At         []Held
}

// Rate is what a study says of one rate constant: one value, one per ligation,
// or start, range and fixed value. Seconds, and the ligand's unit (of the
// effector's, for "alanine.k_on") where it is of second order.
type Rate struct {
	Each  []float64
	Given mechanisms.Given
	Order int // 1 or 2
}
