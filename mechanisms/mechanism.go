// Package mechanisms holds the physical mechanisms of ligand binding: their
// constants, the curves they imply, the Hill coefficients of those curves, and
// the exact derivatives of all of it.
//
// Everything is in the ligand's own unit or dimensionless; units, files and
// fitting are other packages' business.
package mechanisms

import "gonum.org/v1/gonum/mat"

// Scale is the axis on which a constant is fitted.
type Scale uint8

const (
	// Log fits θ = ln v of a positive constant v.
	Log Scale = iota
	// Linear fits θ = v ≥ 0, so that v may be exactly zero.
	Linear
	// Logit fits θ = ln(v/(1−v)) of a share 0 < v < 1.
	Logit
)

// Constant describes one constant of a mechanism.
type Constant struct {
	Name   string // symbol of the trade: "K_R", "L", "Kd1", "n_H"
	Site   string // class of site, species or part it belongs to; "" where there is only one
	Ligand string // effector it belongs to; "" for the varied ligand

	Scale     Scale
	Dimension int // power of the ligand's unit (of the effector's, if Ligand is set): K_R 1, L 0, β_i −i

	// Protomers is the power of the unit of Environment.Protomers: −1 for an
	// association constant of two species. Reduced units then are the constant
	// divided by (protomers)^Protomers.
	Protomers int

	// Low and High bound the constant in reduced units: the constant divided by
	// (ligand at half response)^Dimension. They are wide; an optimum on one of
	// them is a result (exclusive binding, β = 0), named by Edge.
	Low, High float64
	// StartLow and StartHigh is the range, in reduced units, in which starts are drawn.
	StartLow, StartHigh float64
	// EdgeLow and EdgeHigh say in words what the mechanism becomes on a bound
	// ("exclusive binding: only R binds"); "" where a bound means nothing but itself.
	EdgeLow, EdgeHigh string

	Meaning string // one phrase for tables: "dissociation constant of conformation R"
}

// Key is the name by which a study speaks of the constant: its class or part,
// its effector and its symbol, joined by full stops ("alpha.K_R",
// "alanine.K_T", "large.alanine.K_T").
func (c Constant) Key() string {
	key := c.Name
	if c.Ligand != "" {
		key = c.Ligand + "." + key
	}
	if c.Site != "" {
		key = c.Site + "." + key
	}
	return key
}

// Find is the index of the constant of that key in a list, or of the only one
// whose symbol is key; −1 where there is none.
func Find(constants []Constant, key string) int {
	found := -1
	for i, c := range constants {
		switch {
		case c.Key() == key:
			return i
		case c.Name == key && found == -1:
			found = i
		case c.Name == key:
			found = -2
		}
	}
	return max(found, -1)
}

// Environment is what holds for one curve beside the varied ligand.
type Environment struct {
	Effectors []float64 // concentrations, in the order of Mechanism.Effectors; zero is allowed
	Protomers float64   // total concentration of protomers (sites), for mechanisms that assemble
}

// Mechanism is a family with its numbers of sites, classes and contacts settled.
// It is immutable and safe for concurrent use.
type Mechanism interface {
	Family() string        // "mwc"
	Sites() int            // sites on one molecule; 0 where the word has no meaning (Hill equation)
	Constants() []Constant // their order fixes the layout of θ
	Effectors() []string   // names, in the order Environment.Effectors expects
	Curve() Curve          // a fresh workspace, for one goroutine
}

// Curve is a mechanism at given constants: a workspace that is bound to θ once
// and then evaluated at many ligand activities without allocating.
type Curve interface {
	// Bind settles everything that depends on θ and the environment alone.
	Bind(theta []float64, env Environment)
	// Saturation writes Ȳ at each ln x into dst and, where grad is not nil
	// (len(lnx) × len(θ)), ∂Ȳ/∂θ.
	Saturation(dst, lnx []float64, grad *mat.Dense)
	// At writes saturation, Hill coefficient and their derivatives at one ln x.
	// It makes the slices of p where they have the wrong length, else reuses them.
	At(lnx float64, p *Point)
}

// Watched is a Curve whose response is not its saturation: a velocity with a
// turnover per conformation, a signal from some states.
type Watched interface {
	Curve
	// Watch returns what the response sees, sharing the bound state. Its
	// Saturation is the raw average ⟨o⟩; its At writes, in the place of Ȳ, the
	// share F of the response between its own limits at x → 0 and x → ∞, and n_H
	// of F (NaN where F leaves 0 … 1). It has a method
	// Limits(gradLow, gradHigh []float64) (low, high float64) for those limits.
	Watch() Curve
}

// Point is a curve at one ligand activity.
type Point struct {
	Y      float64 // saturation Ȳ
	Empty  float64 // 1 − Ȳ, summed directly so that it keeps its digits near full saturation
	DY     float64 // dȲ/d ln x
	NH     float64 // Hill coefficient d ln[Ȳ/(1−Ȳ)]/d ln x
	DNH    float64 // dn_H/d ln x
	GradY  []float64
	GradNH []float64

	// D2NH and GradDNH, d²n_H/d(ln x)² and ∂(dn_H/d ln x)/∂θ: what the place
	// of a steepest slope needs.
	D2NH    float64
	GradDNH []float64
}

// Restated is a mechanism whose constants, as the trade quotes them, are not
// those that are fitted (Adair: intrinsic dissociation constants of fitted β).
type Restated interface {
	Mechanism
	Restate(theta []float64) []Restatement
	// Quote gives one restated constant by its key, at any θ: also one that
	// Restate lists at some θ only (the product "Kd3·Kd4" where β_3 is zero).
	Quote(key string, theta []float64) (Restatement, bool)
}

// Restatement is one quoted constant.
type Restatement struct {
	Constant Constant
	// Value is the constant; +Inf, 0 or NaN where it does not exist at these θ.
	Value float64
	// GradLn is ∂ ln Value/∂θ; nil where Value does not exist.
	GradLn []float64
	// Why says why Value does not exist, or what else is to be known of it.
	Why string
}

// Measure is a number derived from a bound curve, with its gradient.
type Measure struct {
	Value float64
	Grad  []float64
	Why   string // not empty: the number does not exist, and why (Value is NaN)
}
