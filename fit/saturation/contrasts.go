package saturation

import (
	"math"
	"strconv"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// contrastsWanted are the ratios and differences that the study asks for
// between the levels of a factor: every later level against the first. Positive
// constants and positions give ratios, Hill coefficients differences; for pH the
// Bohr coefficient Δ log10 x_half / ΔpH follows.
func (m *model) contrastsWanted() []wanted {
	var out []wanted
	for _, c := range m.a.Contrasts {
		levels := m.a.levels(c.Between)
		for i := 1; i < len(levels); i++ {
			for _, name := range c.Of {
				out = append(out, m.contrast(c.Between, name, levels[i], levels[0])...)
			}
		}
	}
	return out
}

// contrast is one name between two levels, for every pair of curves that
// differ in nothing else.
func (m *model) contrast(key, name, level, against string) []wanted {
	la, lb := m.a.label(key, level), m.a.label(key, against)
	if w, ok := m.constantContrast(name, la, lb); ok {
		return w
	}
	measure, ratio := contrastMeasure(name)
	if measure == nil {
		return nil
	}
	var out []wanted
	for _, pair := range m.cellPairs(key, level, against) {
		out = append(out, m.measureContrast(name, measure, ratio, pair, la, lb)...)
		if isPH(key) && name == "x_half" {
			out = append(out, m.bohr(pair, level, against, la, lb)...)
		}
	}
	return out
}

// contrastMeasure finds a derived number by the name contrasts use.
func contrastMeasure(name string) (f func(mechanisms.Curve) mechanisms.Measure, ratio bool) {
	if name == "n_H" {
		name = "n_H_half"
	}
	for _, s := range slopeMeasures {
		if s.name == name {
			return s.f, s.of == "position" && s.name != "n_H_max_at"
		}
	}
	return nil, false
}

// isPH says whether a factor is an acidity.
func isPH(key string) bool { return key == "pH" || key == "ph" || key == "PH" }

// constantContrast is the ratio of a constant that differs between two levels.
func (m *model) constantContrast(name, la, lb string) ([]wanted, bool) {
	var out []wanted
	known := false
	for k, c := range m.consts {
		if c.Name != name && c.Key() != name {
			continue
		}
		known = true
		ia, ib := m.paramOf(k, la), m.paramOf(k, lb)
		if ia < 0 || ib < 0 || ia == ib || c.Scale == mechanisms.Logit {
			continue
		}
		w := wanted{index: -1, back: math.Exp, make: func() fit.Quantity { return lnRatio(c, ia, ib) }}
		w.constantRow(m, c)
		w.row.Mechanism, w.row.Of, w.row.Unit = m.c.Name, "contrast", "1"
		w.row.Curve = la + " / " + lb
		out = append(out, w)
	}
	return out, known
}

// lnRatio is ln of the ratio of one constant at two places of Θ.
func lnRatio(c mechanisms.Constant, ia, ib int) fit.Quantity {
	return func(theta, grad []float64) float64 {
		clear(grad)
		if c.Scale == mechanisms.Log {
			grad[ia], grad[ib] = 1, -1
			return theta[ia] - theta[ib]
		}
		grad[ia], grad[ib] = 1/theta[ia], -1/theta[ib]
		return math.Log(theta[ia] / theta[ib])
	}
}

// paramOf is the parameter of constant k at a labelled level; −1 if none.
func (m *model) paramOf(k int, label string) int {
	for i, p := range m.params {
		if p.kind == ofConstant && p.constant == k && p.curve == label {
			return i
		}
	}
	return -1
}

// cellPairs lists the pairs of cells at two levels of a key that agree in all
// other levels.
func (m *model) cellPairs(key, level, against string) [][2]int {
	var out [][2]int
	la, lb := m.a.label(key, level), m.a.label(key, against)
	for i := range m.cells {
		for j := range m.cells {
			if replaceLabel(m.cells[i].label, la, lb) == m.cells[j].label && m.cells[i].label != m.cells[j].label {
				out = append(out, [2]int{i, j})
			}
		}
	}
	return out
}

// measureContrast is a ratio or difference of one derived number.
func (m *model) measureContrast(name string, f func(mechanisms.Curve) mechanisms.Measure, ratio bool, pair [2]int, la, lb string) []wanted {
	w := wanted{index: -1, back: same, make: m.difference(pair, f)}
	w.row = QuantityRow{Mechanism: m.c.Name, Of: "contrast", Name: name, Unit: "1", Curve: m.pairLabel(pair, la, lb, " − ")}
	if ratio {
		w.back = math.Exp
		w.row.Curve = m.pairLabel(pair, la, lb, " / ")
	}
	if name == "n_H" {
		w.row.Name = "n_H_half"
	}
	return []wanted{w}
}

// difference is a measure of one cell minus that of another.
func (m *model) difference(pair [2]int, f func(mechanisms.Curve) mechanisms.Measure) func() fit.Quantity {
	return func() fit.Quantity {
		a, b := m.measured(pair[0], f)(), m.measured(pair[1], f)()
		gb := make([]float64, len(m.params))
		return func(theta, grad []float64) float64 {
			v := a(theta, grad) - b(theta, gb)
			for i := range grad {
				grad[i] -= gb[i]
			}
			return v
		}
	}
}

// bohr is the Bohr coefficient Δ log10 x_half / ΔpH.
func (m *model) bohr(pair [2]int, level, against, la, lb string) []wanted {
	pa, errA := strconv.ParseFloat(level, 64)
	pb, errB := strconv.ParseFloat(against, 64)
	if errA != nil || errB != nil || pa == pb {
		return nil
	}
	scale := 1 / (math.Ln10 * (pa - pb))
	w := wanted{index: -1, make: m.difference(pair, at(0.5)), back: func(v float64) float64 { return scale * v }}
	w.row = QuantityRow{Mechanism: m.c.Name, Of: "contrast", Name: "Bohr_coefficient", Unit: "1", Curve: m.pairLabel(pair, la, lb, " / ")}
	return []wanted{w}
}

// pairLabel names a pair of curves.
func (m *model) pairLabel(pair [2]int, la, lb, join string) string {
	if m.cells[pair[0]].label == la {
		return la + join + lb
	}
	return m.cells[pair[0]].label + join + m.cells[pair[1]].label
}
