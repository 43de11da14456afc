package saturation

import (
	"math"
	"strconv"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// gasConstant in kJ/(mol K) (CODATA 2018, exact: 8.314462618 J/(mol K)).
const gasConstant = 8.314462618e-3

// wanted is one number of a result before it has an interval: the row as far
// as it is known, the number as a function of Θ, and how the fitted scale goes
// back to the printed one.
type wanted struct {
	row   QuantityRow
	index int                          // of a parameter that is the number itself; −1
	make  func() fit.Quantity          // fresh workspace: quantities are profiled side by side
	back  func(float64) float64        // increasing
	quick bool                         // covariance interval only
	why   func(theta []float64) string // why the number does not exist at Θ; may be nil
}

func same(v float64) float64 { return v }

// parameterWanted is a fitted number itself.
func (m *model) parameterWanted(i int) wanted {
	p := &m.params[i]
	w := wanted{index: i, back: same, row: QuantityRow{Mechanism: m.c.Name, Curve: p.curve, Name: p.Name}}
	w.make = func() fit.Quantity {
		return func(theta, grad []float64) float64 {
			clear(grad)
			grad[i] = 1
			return theta[i]
		}
	}
	switch p.kind {
	case ofConstant:
		c := m.consts[p.constant]
		w.constantRow(m, c)
		w.back = func(t float64) float64 { return unscaled(c, t) }
	case ofRate:
		c := m.timing.rates[p.constant]
		w.constantRow(m, c)
		w.row.Unit, w.back = m.a.rateUnit(c), math.Exp
	case ofResponse:
		w.row.Of = "response"
		w.row.Unit = m.responseUnit(p.data, p.quantity)
	case ofNoise:
		w.row.Of = "noise"
		w.back = math.Exp
	}
	return w
}

// constantRow fills what the constant itself says.
func (w *wanted) constantRow(m *model, c mechanisms.Constant) {
	w.row.Of, w.row.Name = "constant", c.Name
	w.row.Ligand = text(m.a.Ligand.Name)
	unit := m.a.Ligand.Unit
	if c.Ligand != "" {
		w.row.Ligand = text(c.Ligand)
		for _, e := range m.a.Effectors {
			if e.Name == c.Ligand || e.Symbol == c.Ligand {
				unit = e.Unit
			}
		}
	}
	if c.Site != "" {
		w.row.Site = text(c.Site)
	}
	w.row.Unit = power(unit, c.Dimension)
	if c.Protomers != 0 {
		w.row.Unit = power(m.proteinUnit(), c.Protomers)
	}
	if _, ok := m.c.Mechanism.(mechanisms.Driven); ok {
		w.row.Unit = rateUnit(unit, -c.Dimension)
	}
}

// power writes a unit to a whole power: "torr", "torr^-2", "1".
func power(unit string, d int) string {
	switch {
	case d == 0:
		return "1"
	case d == 1:
		return unit
	}
	return unit + "^" + strconv.Itoa(d)
}

// proteinUnit is the unit in which the study says how much of the
// macromolecule there is.
func (m *model) proteinUnit() string {
	for i := range m.a.Data {
		if u := m.a.Data[i].SitesPresent.Unit; u != "" {
			return u
		}
	}
	return m.a.Ligand.Unit
}

// responseUnit is the unit of an end of a response.
func (m *model) responseUnit(data int, quantity string) string {
	u := m.a.Data[data].Response.Unit
	if quantity == "nonspecific" {
		return u + " per " + m.a.Ligand.Unit
	}
	return u
}

// measured turns a measure of one cell's curve into a function of Θ.
func (m *model) measured(cell int, f func(mechanisms.Curve) mechanisms.Measure) func() fit.Quantity {
	return func() fit.Quantity {
		curve := m.seen().Curve()
		seen := watch(curve)
		local := make([]float64, len(m.consts))
		return func(theta, grad []float64) float64 {
			for k, j := range m.cells[cell].theta {
				local[k] = theta[j]
			}
			curve.Bind(local, m.cells[cell].env)
			v := f(seen)
			clear(grad)
			if v.Why != "" {
				return math.NaN()
			}
			for k, j := range m.cells[cell].theta {
				grad[j] += v.Grad[k]
			}
			return v.Value
		}
	}
}

// watch is what a response sees of a curve.
func watch(c mechanisms.Curve) mechanisms.Curve {
	if v, ok := c.(mechanisms.Watched); ok {
		return v.Watch()
	}
	return c
}

// whyNot asks a measure of one cell why it does not exist at Θ.
func (m *model) whyNot(cell int, theta []float64, f func(mechanisms.Curve) mechanisms.Measure) string {
	return f(watch(m.boundCurve(cell, theta))).Why
}

// boundCurve is a cell's binding curve at Θ.
func (m *model) boundCurve(cell int, theta []float64) mechanisms.Curve {
	curve := m.seen().Curve()
	local := make([]float64, len(m.consts))
	for k, j := range m.cells[cell].theta {
		local[k] = theta[j]
	}
	curve.Bind(local, m.cells[cell].env)
	return curve
}

// slopeMeasure is one derived number of a curve that results list by name.
type slopeMeasure struct {
	of, name string
	unit     func(m *model) string
	f        func(mechanisms.Curve) mechanisms.Measure
	back     func(m *model) func(float64) float64
}

func unitOne(*model) string                    { return "1" }
func unitLigand(m *model) string               { return m.a.Ligand.Unit }
func keep(*model) func(float64) float64        { return same }
func exponential(*model) func(float64) float64 { return math.Exp }

// slopeMeasures are the Hill coefficients, each under its own name, the
// positions and the interaction energy of a curve (theory: section 2).
var slopeMeasures = []slopeMeasure{
	{"hill", "n_H_half", unitOne, mechanisms.HillAtHalf, keep},
	{"hill", "n_H_max", unitOne, func(c mechanisms.Curve) mechanisms.Measure { n, _ := mechanisms.HillMax(c); return n }, keep},
	{"position", "n_H_max_at", unitOne, func(c mechanisms.Curve) mechanisms.Measure { _, at := mechanisms.HillMax(c); return at }, keep},
	{"hill", "n_H_10_90", unitOne, mechanisms.Hill1090, keep},
	{"hill", "n_H_1_99", unitOne, func(c mechanisms.Curve) mechanisms.Measure { n, _ := mechanisms.Hill0199(c); return n }, keep},
	{"hill", "width_1_99", func(*model) string { return "decades" }, func(c mechanisms.Curve) mechanisms.Measure { _, w := mechanisms.Hill0199(c); return w }, keep},
	{"position", "x_half", unitLigand, at(0.5), exponential},
	{"position", "x_10", unitLigand, at(0.1), exponential},
	{"position", "x_90", unitLigand, at(0.9), exponential},
	{"position", "x_01", unitLigand, at(0.01), exponential},
	{"position", "x_99", unitLigand, at(0.99), exponential},
	{"position", "x_median", unitLigand, mechanisms.Median, exponential},
	{"position", "x_first", unitLigand, func(c mechanisms.Curve) mechanisms.Measure { first, _ := mechanisms.Asymptotes(c); return first }, exponential},
	{"position", "x_last", unitLigand, func(c mechanisms.Curve) mechanisms.Measure { _, last := mechanisms.Asymptotes(c); return last }, exponential},
	{"energy", "dG_interaction", energyUnit, mechanisms.InteractionEnergy, energyScale},
}

func at(y float64) func(mechanisms.Curve) mechanisms.Measure {
	return func(c mechanisms.Curve) mechanisms.Measure { return mechanisms.XAt(c, y) }
}

// energyUnit is kJ/mol where the temperature is stated, else multiples of RT.
func energyUnit(m *model) string {
	if math.IsNaN(m.a.Kelvin) {
		return "RT"
	}
	return "kJ/mol"
}

func energyScale(m *model) func(float64) float64 {
	rt := 1.0
	if !math.IsNaN(m.a.Kelvin) {
		rt = gasConstant * m.a.Kelvin
	}
	return func(v float64) float64 { return rt * v }
}

// curveWanted lists the derived numbers of one cell.
func (m *model) curveWanted(cell int) []wanted {
	var out []wanted
	for _, s := range slopeMeasures {
		w := wanted{index: -1, make: m.measured(cell, s.f), back: s.back(m)}
		w.why = func(theta []float64) string { return m.whyNot(cell, theta, s.f) }
		w.quick = s.name == "x_01" || s.name == "x_99" || s.name == "n_H_max_at" || s.name == "width_1_99" || s.name == "x_first" || s.name == "x_last"
		w.row = QuantityRow{Mechanism: m.c.Name, Curve: m.cells[cell].label, Of: s.of, Name: s.name, Unit: s.unit(m)}
		if s.of == "position" && s.name != "n_H_max_at" {
			w.row.Ligand = text(m.a.Ligand.Name)
		}
		out = append(out, w)
	}
	return out
}

// restated lists the constants as the trade quotes them, where those are not
// the fitted ones: one row per constant and set of levels.
func (m *model) restated(theta []float64) []wanted {
	re, ok := m.c.Mechanism.(mechanisms.Restated)
	if !ok {
		return nil
	}
	var out []wanted
	done := map[string]bool{}
	for _, ci := range m.curveCells() {
		local := make([]float64, len(m.consts))
		for k, j := range m.cells[ci].theta {
			local[k] = theta[j]
		}
		for _, s := range re.Restate(local) {
			label := m.cells[ci].label
			if done[label+"\x00"+s.Constant.Key()] {
				continue
			}
			done[label+"\x00"+s.Constant.Key()] = true
			w := wanted{index: -1, back: math.Exp, make: m.restatement(re, ci, s.Constant.Key())}
			w.row = QuantityRow{Mechanism: m.c.Name, Curve: label}
			w.constantRow(m, s.Constant)
			if s.Why != "" {
				w.row.Why = text(s.Why)
			}
			out = append(out, w)
		}
	}
	return out
}

// restatement is ln of one restated constant as a function of Θ.
func (m *model) restatement(re mechanisms.Restated, cell int, key string) func() fit.Quantity {
	return func() fit.Quantity {
		local := make([]float64, len(m.consts))
		return func(theta, grad []float64) float64 {
			for k, j := range m.cells[cell].theta {
				local[k] = theta[j]
			}
			clear(grad)
			s, ok := re.Quote(key, local)
			if !ok {
				return math.NaN()
			}
			if s.GradLn == nil {
				return math.Log(s.Value)
			}
			for k, j := range m.cells[cell].theta {
				grad[j] += s.GradLn[k]
			}
			return math.Log(s.Value)
		}
	}
}

// covarianceInterval is the quick look: value ± t·√(gᵀ Σ g).
func covarianceInterval(q fit.Quantity, r *fit.Result, t float64) (value, low, high float64) {
	g := make([]float64, len(r.Theta))
	value = q(r.Theta, g)
	if r.Cov == nil || math.IsNaN(value) {
		return value, math.NaN(), math.NaN()
	}
	v := mat.NewVecDense(len(g), g)
	se := math.Sqrt(mat.Inner(v, r.Cov, v))
	return value, value - t*se, value + t*se
}
