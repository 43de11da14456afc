package saturation

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"ligancy/mechanisms"
)

// PopulationRow is the share of one state at one ligand value.
type PopulationRow struct {
	Mechanism string `json:"mechanism"`
	Curve     string `json:"curve"`
	X         Real   `json:"x"`
	State     string `json:"state"`
	Share     Real   `json:"share"`
}

// Given evaluates every candidate at the constants that the study gives
// (value, else fixed, else start) without fitting anything.
func (a *Analysis) Given() (*Outcome, error) {
	out := &Outcome{Defaults: map[string]string{}}
	var errs []error
	for i := range a.Candidates {
		if err := a.givenCandidate(&a.Candidates[i], out); err != nil {
			errs = append(errs, err)
		}
	}
	return out, errors.Join(errs...)
}

// givenCandidate adds one candidate's rows.
func (a *Analysis) givenCandidate(c *Candidate, out *Outcome) error {
	theta, err := c.givenTheta()
	if err != nil {
		return err
	}
	row := MechanismRow{Name: c.Name, Family: c.Family, Sites: c.Mechanism.Sites(), Status: "given", SumOfSquares: nan, Scatter: nan,
		LogLikelihood: nan, AICc: nan, AICcBehind: nan, AICcWeight: nan, BIC: nan,
		LackOfFitP: nan, RunsP: nan, PredictionError: nan}
	out.Mechanisms = append(out.Mechanisms, row)
	g := &givenCurve{a: a, c: c, theta: theta, out: out}
	g.constants()
	for _, y := range a.environments(c) {
		g.curve(y)
	}
	return nil
}

// givenTheta is θ from the study's own values.
func (c *Candidate) givenTheta() ([]float64, error) {
	var theta []float64
	var missing []string
	all := c.Mechanism.Constants()
	for i, k := range all {
		var g mechanisms.Given
		for _, name := range constantNames(all, i) {
			if v, ok := c.Given[name]; ok {
				g = v
				break
			}
		}
		switch {
		case g.Value != nil:
			theta = append(theta, scaled(k, *g.Value))
		case g.Fixed != nil:
			theta = append(theta, scaled(k, *g.Fixed))
		case g.Start != nil:
			theta = append(theta, scaled(k, *g.Start))
		default:
			missing = append(missing, displayName(k))
		}
	}
	if len(missing) > 0 {
		return nil, fmt.Errorf("mechanism %q has no value for %s: write constants: {%s: {value: …}}", c.Name, list(missing), missing[0])
	}
	return theta, nil
}

// environments are the effector levels asked for, in the candidate's order:
// every combination of the levels; what is not named is absent (zero).
func (a *Analysis) environments(c *Candidate) [][]float64 {
	names := c.Mechanism.Effectors()
	out := [][]float64{make([]float64, len(names))}
	for i, name := range names {
		var next [][]float64
		for _, v := range a.heldValues(name) {
			for _, y := range out {
				z := slices.Clone(y)
				z[i] = v
				next = append(next, z)
			}
		}
		if next != nil {
			out = next
		}
	}
	return out
}

// heldValues is what a curve request holds an effector at.
func (a *Analysis) heldValues(name string) []float64 {
	if a.Curve == nil {
		return nil
	}
	for _, h := range a.Curve.At {
		if h.Name == name || a.effectorName(h.Name) == name {
			return h.Values
		}
	}
	return nil
}

// effectorName is the name of the effector that a study calls so.
func (a *Analysis) effectorName(called string) string {
	for _, e := range a.Effectors {
		if e.Symbol == called {
			return e.Name
		}
	}
	return called
}

// givenCurve writes the rows of one candidate.
type givenCurve struct {
	a     *Analysis
	c     *Candidate
	theta []float64
	out   *Outcome
}

// constants lists the given constants.
func (g *givenCurve) constants() {
	m := &model{a: g.a, c: g.c}
	for i, k := range g.c.Mechanism.Constants() {
		w := wanted{row: QuantityRow{Mechanism: g.c.Name, Curve: "all"}}
		w.constantRow(m, k)
		g.add(w.row, unscaled(k, g.theta[i]), "")
	}
}

// add appends a row that has a value and no interval.
func (g *givenCurve) add(row QuantityRow, v float64, why string) {
	row.Value, row.Low, row.High, row.Level = finite(v), nan, nan, nan
	row.Interval, row.Held = "none", "fixed"
	if why != "" {
		row.Value, row.Why = nan, text(why)
	}
	g.out.Quantities = append(g.out.Quantities, row)
}

// curve adds one curve: its derived numbers, its points and its populations.
func (g *givenCurve) curve(y []float64) {
	m := &model{a: g.a, c: g.c}
	label := g.label(y)
	curve := g.c.Mechanism.Curve()
	curve.Bind(g.theta, mechanisms.Environment{Effectors: y, Protomers: g.protomers()})
	seen := watch(curve)
	for _, s := range slopeMeasures {
		v := s.f(seen)
		row := QuantityRow{Mechanism: g.c.Name, Curve: label, Of: s.of, Name: s.name, Unit: s.unit(m)}
		g.add(row, s.back(m)(v.Value), v.Why)
	}
	pop, _ := curve.(mechanisms.Populated)
	p := newPoint(len(g.theta))
	for _, lnx := range g.grid() {
		curve.At(lnx, p)
		row := CurveRow{Mechanism: g.c.Name, Curve: label, X: Real(math.Exp(lnx)), Saturation: Real(p.Y),
			Response: Real(raw(seen, lnx)), Low: nan, High: nan, NHLow: nan, NHHigh: nan}
		if seen != curve {
			seen.At(lnx, p)
		}
		row.NH = Real(p.NH)
		g.out.Curves = append(g.out.Curves, row)
		if pop == nil {
			continue
		}
		shares := pop.Populations(nil, lnx)
		for i, name := range pop.StateNames() {
			g.out.Populations = append(g.out.Populations, PopulationRow{g.c.Name, label, Real(math.Exp(lnx)), name, Real(shares[i])})
		}
	}
}

// label names a curve by its effector levels.
func (g *givenCurve) label(y []float64) string {
	var parts []string
	for i, name := range g.c.Mechanism.Effectors() {
		parts = append(parts, g.a.label(name, number(y[i])))
	}
	return joinLabels(parts)
}

// protomers is the concentration that the first data set gives, if any does.
func (g *givenCurve) protomers() float64 {
	for i := range g.a.Data {
		if v := g.a.Data[i].SitesPresent.Value; v > 0 {
			return v
		}
	}
	return 0
}

// grid is the ln x at which curves are asked for.
func (g *givenCurve) grid() []float64 {
	var r CurveRequest
	if g.a.Curve != nil {
		r = *g.a.Curve
	}
	low, high := r.From, r.To
	if !(low > 0) || !(high > low) {
		low, high = g.a.testedRange()
		low, high = low/gridMargin, high*gridMargin
	}
	if !(low > 0) {
		low, high = 1e-3, 1e3
	}
	n := r.Points
	if n < 2 {
		n = gridPoints
	}
	out := make([]float64, n)
	for i := range out {
		out[i] = math.Log(low) + math.Log(high/low)*float64(i)/float64(n-1)
	}
	return out
}
