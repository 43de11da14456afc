package saturation

import (
	"errors"
	"fmt"
	"math"
	"strings"

	"ligancy/mechanisms"
)

// PopulationRow is the share of one state on one curve at one ligand value.
type PopulationRow struct {
	Mechanism string `json:"mechanism"`
	Curve     string `json:"curve"`
	X         Real   `json:"x"`
	State     string `json:"state"`
	Share     Real   `json:"share"`
}

// Bounds of a request for curves.
const (
	mostGridPoints  = 10_000
	mostGivenCurves = 64
)

// Given evaluates the curves of every mechanism whose constants all have a
// value in the study, against free ligand: nothing is fitted. Each mechanism's
// status is "given", or "no answer" with what it lacks. It is an error where
// none has all of its constants.
func (a *Analysis) Given() (*Outcome, []PopulationRow, error) {
	environments, err := a.environments()
	if err != nil {
		return nil, nil, err
	}
	out := &Outcome{Defaults: map[string]string{}}
	var bound []*givenCurve
	var lacking []string
	for i := range a.Candidates {
		c := &a.Candidates[i]
		row := MechanismRow{Name: c.Name, Family: c.Family, Sites: c.Mechanism.Sites(), Status: "given"}
		row.SumOfSquares, row.Scatter, row.LogLikelihood = nan, nan, nan
		row.AICc, row.AICcBehind, row.AICcWeight, row.BIC = nan, nan, nan, nan
		theta, missing := givenTheta(c)
		if len(missing) > 0 {
			row.Status = "no answer"
			row.Why = text("no value for " + strings.Join(missing, ", "))
			lacking = append(lacking, fmt.Sprintf("%q lacks %s", c.Name, strings.Join(missing, ", ")))
		} else {
			bound = append(bound, a.bindGiven(c, theta, environments)...)
			out.Quantities = append(out.Quantities, a.givenConstants(c, theta)...)
		}
		out.Mechanisms = append(out.Mechanisms, row)
	}
	if len(bound) == 0 {
		return nil, nil, errors.New("no mechanism has a value for every constant: " + strings.Join(lacking, "; "))
	}
	grid, err := a.curveGrid(bound, out.Defaults)
	if err != nil {
		return nil, nil, err
	}
	var populations []PopulationRow
	for _, g := range bound {
		out.Quantities = append(out.Quantities, g.quantities()...)
		out.Curves = append(out.Curves, g.curveRows(grid)...)
		populations = append(populations, g.populationRows(grid)...)
	}
	return out, populations, nil
}

// givenTheta is a candidate's constants on their fitted scales, and the names
// of those that have no value.
func givenTheta(c *Candidate) (theta []float64, missing []string) {
	m := &model{c: c, consts: c.Mechanism.Constants()}
	for k, constant := range m.consts {
		g := m.given(k)
		v := g.Value
		if v == nil {
			v = g.Fixed
		}
		if v == nil {
			missing = append(missing, constant.Key())
			continue
		}
		theta = append(theta, scaled(constant, *v))
	}
	return theta, missing
}

// namedEnvironment is what holds on one curve, by name of effector.
type namedEnvironment struct {
	label     string
	effectors map[string]float64
}

// environments is every combination of the effector values asked for.
func (a *Analysis) environments() ([]namedEnvironment, error) {
	all := []namedEnvironment{{effectors: map[string]float64{}}}
	if a.Curve == nil {
		return all, nil
	}
	for _, h := range a.Curve.At {
		if len(h.Values) == 0 {
			continue
		}
		var next []namedEnvironment
		for _, e := range all {
			for _, v := range h.Values {
				n := namedEnvironment{effectors: map[string]float64{h.Name: v}}
				for name, w := range e.effectors {
					n.effectors[name] = w
				}
				n.label = strings.TrimPrefix(e.label+", "+a.label(h.Name, number(v)), ", ")
				next = append(next, n)
			}
		}
		if all = next; len(all) > mostGivenCurves {
			return nil, fmt.Errorf("curve: more than %d combinations under at", mostGivenCurves)
		}
	}
	return all, nil
}

// givenCurve is one curve at given constants.
type givenCurve struct {
	m     *model
	label string
	curve mechanisms.Curve // binding
	seen  mechanisms.Curve // what the response sees of it
}

// bindGiven binds a candidate in every environment; curves that its effectors
// do not set apart are one.
func (a *Analysis) bindGiven(c *Candidate, theta []float64, environments []namedEnvironment) []*givenCurve {
	var out []*givenCurve
	names := c.Mechanism.Effectors()
	if len(names) == 0 {
		environments = []namedEnvironment{{}}
	}
	for _, e := range environments {
		env := mechanisms.Environment{Protomers: a.protomers()}
		for _, name := range names {
			env.Effectors = append(env.Effectors, a.effectorValue(e, name))
		}
		g := &givenCurve{m: &model{a: a, c: c, consts: c.Mechanism.Constants()}, label: e.label, curve: c.Mechanism.Curve()}
		if g.label == "" {
			g.label = "all"
		}
		g.curve.Bind(theta, env)
		g.seen = watch(g.curve)
		out = append(out, g)
	}
	return out
}

// effectorValue is the concentration of an effector, known by name or symbol;
// 0 where the request does not say.
func (a *Analysis) effectorValue(e namedEnvironment, name string) float64 {
	if v, ok := e.effectors[name]; ok {
		return v
	}
	for _, s := range a.Effectors {
		if s.Name == name || s.Symbol == name {
			return e.effectors[s.Name] + e.effectors[s.Symbol]
		}
	}
	return 0
}

// protomers is the first concentration of sites that a data set states.
func (a *Analysis) protomers() float64 {
	for i := range a.Data {
		if v := a.Data[i].SitesPresent.Value; v > 0 {
			return v
		}
	}
	return 0
}

// givenConstants lists the constants in force.
func (a *Analysis) givenConstants(c *Candidate, theta []float64) []QuantityRow {
	m := &model{a: a, c: c, consts: c.Mechanism.Constants()}
	var rows []QuantityRow
	for k, constant := range m.consts {
		w := wanted{row: QuantityRow{Mechanism: c.Name, Curve: "all"}}
		w.constantRow(m, constant)
		w.row.settle(unscaled(constant, theta[k]), "")
		rows = append(rows, w.row)
	}
	return rows
}

// settle fills a row that has no interval: its number follows from given constants.
func (q *QuantityRow) settle(v float64, why string) {
	q.Value, q.Low, q.High, q.Level = finite(v), nan, nan, nan
	q.Interval, q.Held = "none", "fixed"
	if why != "" {
		q.Why = text(why)
	}
}

// quantities lists Hill coefficients, positions and energy of the curve.
func (g *givenCurve) quantities() []QuantityRow {
	var rows []QuantityRow
	for _, s := range slopeMeasures {
		row := QuantityRow{Mechanism: g.m.c.Name, Curve: g.label, Of: s.of, Name: s.name, Unit: s.unit(g.m)}
		if s.of == "position" && s.name != "n_H_max_at" {
			row.Ligand = text(g.m.a.Ligand.Name)
		}
		measured := s.f(g.seen)
		if measured.Why != "" {
			row.settle(math.NaN(), measured.Why)
		} else {
			row.settle(s.back(g.m)(measured.Value), "")
		}
		rows = append(rows, row)
	}
	return rows
}

// curveGrid is the ligand values asked for, spaced evenly on the logarithm.
// Where the study leaves an end open it lies a decade beyond the 10 or 90 %
// point of the outermost curve.
func (a *Analysis) curveGrid(bound []*givenCurve, defaults map[string]string) ([]float64, error) {
	r := CurveRequest{}
	if a.Curve != nil {
		r = *a.Curve
	}
	if r.Points == 0 {
		r.Points = gridPoints
		defaults["curve.points"] = number(gridPoints)
	}
	low, high := math.Inf(1), math.Inf(-1)
	for _, g := range bound {
		if x := mechanisms.XAt(g.seen, 0.1); x.Why == "" {
			low = min(low, x.Value-math.Ln10)
		}
		if x := mechanisms.XAt(g.seen, 0.9); x.Why == "" {
			high = max(high, x.Value+math.Ln10)
		}
	}
	if r.From > 0 {
		low = math.Log(r.From)
	} else {
		defaults["curve.from"] = "a decade below the lowest x_10"
	}
	if r.To > 0 {
		high = math.Log(r.To)
	} else {
		defaults["curve.to"] = "a decade above the highest x_90"
	}
	switch {
	case r.Points < 2 || r.Points > mostGridPoints:
		return nil, fmt.Errorf("curve: points must lie between 2 and %d", mostGridPoints)
	case math.IsInf(low, 0) || math.IsInf(high, 0):
		return nil, errors.New("curve: no half saturation to place the ends by: write   curve: {from: …, to: …}")
	case !(low < high):
		return nil, errors.New("curve: from must lie below to")
	}
	grid := make([]float64, r.Points)
	for i := range grid {
		grid[i] = low + (high-low)*float64(i)/float64(r.Points-1)
	}
	return grid, nil
}

// curveRows samples the curve at values of ln x.
func (g *givenCurve) curveRows(grid []float64) []CurveRow {
	rows := make([]CurveRow, len(grid))
	p := newPoint(len(g.m.consts))
	for i, lnx := range grid {
		g.seen.At(lnx, p)
		rows[i] = CurveRow{Mechanism: g.m.c.Name, Curve: g.label, X: Real(math.Exp(lnx)), Saturation: Real(p.Y), NH: Real(p.NH),
			Response: nan, Low: nan, High: nan, NHLow: nan, NHHigh: nan}
	}
	return rows
}

// populationRows lists which states are filled; none where the mechanism has no states.
func (g *givenCurve) populationRows(grid []float64) []PopulationRow {
	c, ok := g.curve.(mechanisms.Populated)
	if !ok {
		return nil
	}
	names := c.StateNames()
	var rows []PopulationRow
	var shares []float64
	for _, lnx := range grid {
		shares = c.Populations(shares, lnx)
		for s, name := range names {
			rows = append(rows, PopulationRow{Mechanism: g.m.c.Name, Curve: g.label, X: Real(math.Exp(lnx)), State: name, Share: Real(shares[s])})
		}
	}
	return rows
}
