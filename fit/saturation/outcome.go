package saturation

import (
	"encoding/json"
	"math"
)

// Real is a number of a result; what is not finite is written as null.
type Real float64

// MarshalJSON writes null for NaN and infinities.
func (r Real) MarshalJSON() ([]byte, error) {
	if math.IsNaN(float64(r)) || math.IsInf(float64(r), 0) {
		return []byte("null"), nil
	}
	return json.Marshal(float64(r))
}

// Outcome is everything that an analysis found, as rows of plain data.
type Outcome struct {
	Mechanisms   []MechanismRow   `json:"mechanisms"`
	Quantities   []QuantityRow    `json:"quantities"`
	Points       []PointRow       `json:"points"`
	Curves       []CurveRow       `json:"curves"`
	Correlations []CorrelationRow `json:"correlations"`
	Populations  []PopulationRow  `json:"populations"`
	Nested       []NestedRow      `json:"nested"`
	Preparations []PreparationRow `json:"preparations"`
	Factors      []FactorRow      `json:"factors"`
	Profiles     []ProfileRow     `json:"profiles"` // of the leader's constants
	Conditions   []ConditionRow   `json:"conditions"`
	Objections   []Objection      `json:"objections"`
	Explanations []ExplanationRow `json:"explanations"`
	Verdict      Verdict          `json:"verdict"`

	// Defaults are the settings in force that the study did not say.
	Defaults map[string]string `json:"-"`
	// Interrupted: the run was stopped; what is here is whole, but not all.
	Interrupted bool `json:"-"`
}

// MechanismRow is how one mechanism stands.
type MechanismRow struct {
	Name           string  `json:"name"`
	Family         string  `json:"family"`
	Sites          int     `json:"sites"`
	Status         string  `json:"status"`    // "converged", "at an edge", "stopped", "no answer", "given"
	Edge           *string `json:"edge"`      // which constants lie on which edge, and what that means
	Constants      int     `json:"constants"` // fitted numbers, ends of the response included, σ not
	Points         int     `json:"points"`
	SumOfSquares   Real    `json:"sum_of_squares"`
	Scatter        Real    `json:"scatter"`
	LogLikelihood  Real    `json:"log_likelihood"`
	AICc           Real    `json:"aicc"`
	AICcBehind     Real    `json:"aicc_behind"`
	AICcWeight     Real    `json:"aicc_weight"`
	BIC            Real    `json:"bic"`
	Starts         int     `json:"starts"`
	StartsAgreeing int     `json:"starts_agreeing"`
	// LackOfFitP is the probability of so great a misfit beyond the replicates'
	// own scatter, RunsP that of so few runs of residuals of one sign, and
	// PredictionError the scatter about concentrations left out in turn.
	LackOfFitP      Real    `json:"lack_of_fit_p"`
	RunsP           Real    `json:"runs_p"`
	PredictionError Real    `json:"prediction_error"`
	Standing        string  `json:"standing"` // "leads", "ties", "open", "open: leader, freer", "out", ""
	Why             *string `json:"why"`
}

// QuantityRow is one number with its interval.
type QuantityRow struct {
	Mechanism string  `json:"mechanism"`
	Curve     string  `json:"curve"` // "all", "pH 7.0", "pH 7.0 / pH 7.6"
	Of        string  `json:"of"`    // constant, response, noise, hill, position, energy, contrast, combination
	Name      string  `json:"name"`
	Ligand    *string `json:"ligand"`
	Site      *string `json:"site"`
	Value     Real    `json:"value"`
	Unit      string  `json:"unit"`
	Low       Real    `json:"low"`
	High      Real    `json:"high"`
	Level     Real    `json:"level"`
	Interval  string  `json:"interval"` // "profile", "covariance", "bootstrap", "none"
	Held      string  `json:"held"`     // "both", "low end only", "high end only", "neither", "fixed"
	Why       *string `json:"why"`
}

// PointRow is one measurement beside one mechanism.
type PointRow struct {
	Data        string  `json:"data"`
	Row         int     `json:"row"`
	Curve       string  `json:"curve"`
	Preparation *string `json:"preparation"`
	X           Real    `json:"x"`
	Y           Real    `json:"y"`
	LeftOut     *string `json:"left_out"`
	Mechanism   string  `json:"mechanism"`
	Fitted      Real    `json:"fitted"`
	Residual    Real    `json:"residual"` // in units of the scatter
}

// CurveRow is one mechanism's curve at one ligand value.
type CurveRow struct {
	Mechanism  string `json:"mechanism"`
	Curve      string `json:"curve"`
	X          Real   `json:"x"`
	Saturation Real   `json:"saturation"`
	Response   Real   `json:"response"`
	NH         Real   `json:"n_H"`
	Low        Real   `json:"low"` // interval of the saturation, from the covariance
	High       Real   `json:"high"`
	NHLow      Real   `json:"n_H_low"` // interval of n_H, from the covariance
	NHHigh     Real   `json:"n_H_high"`
}

// CorrelationRow is the correlation of two estimates.
type CorrelationRow struct {
	Mechanism string `json:"mechanism"`
	A         string `json:"a"`
	B         string `json:"b"`
	R         Real   `json:"r"`
}

// Objection is one thing that a careful reviewer will ask.
type Objection struct {
	ID     string  `json:"id"`
	Group  string  `json:"group"` // "settle first", "say in the paper", "for completeness", "asked and found good"
	Text   string  `json:"text"`
	Remedy *string `json:"remedy"`
	Effect *string `json:"effect"` // size of its effect on n_H
	Source *string `json:"source"`
}

// ConditionRow is one condition of a study: of those that STRENDA level 1A asks
// for, adapted to binding, or another that the study states; null is not stated.
type ConditionRow struct {
	Condition string  `json:"condition"`
	Asked     bool    `json:"asked"`
	Stated    *string `json:"stated"`
}

// Verdict is the answer in words.
type Verdict struct {
	Text  string     `json:"text"`
	Leads string     `json:"leads"`
	Ties  []string   `json:"ties"`
	Open  []string   `json:"open"`
	Out   []string   `json:"out"`
	Twins [][]string `json:"twins"`
	// Slope is what may be said of n_H at half saturation by all mechanisms that
	// are not out, together: "above 1", "below 1", "1", or "open"; "" where
	// nothing may be said.
	Slope string `json:"slope"`
}

// Recorder hears how a run gets on. Its methods may be called from any goroutine.
type Recorder interface {
	// Progress of one stage ("fitting concerted, L differs"), done of total steps.
	Progress(stage string, done, of int)
}
