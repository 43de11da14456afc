package report

import (
	"slices"
	"strings"

	"ligancy/fit/saturation"
)

// key finds one quantity.
type key struct{ mechanism, curve, of, name string }

// index of quantities by key; the first row of a key counts.
func (d *Document) index() map[key]*saturation.QuantityRow {
	m := make(map[key]*saturation.QuantityRow, len(d.Quantities))
	for i := range d.Quantities {
		q := &d.Quantities[i]
		k := key{q.Mechanism, q.Curve, q.Of, q.Name}
		if _, ok := m[k]; !ok {
			m[k] = q
		}
	}
	return m
}

// curvesOf lists the curves of a mechanism that have a half saturation, in order.
func (d *Document) curvesOf(mechanism string) []string {
	var names []string
	for i := range d.Quantities {
		q := &d.Quantities[i]
		if q.Mechanism == mechanism && q.Name == "x_half" && q.Of == "position" {
			names = append(names, q.Curve)
		}
	}
	return names
}

// contrastsOf lists the rows that compare one number of a mechanism between curves.
func (d *Document) contrastsOf(mechanism, name string) []*saturation.QuantityRow {
	var rows []*saturation.QuantityRow
	for i := range d.Quantities {
		q := &d.Quantities[i]
		if q.Mechanism == mechanism && q.Of == "contrast" && q.Name == name {
			rows = append(rows, q)
		}
	}
	return rows
}

// row of a mechanism, or nil.
func (d *Document) mechanism(name string) *saturation.MechanismRow {
	for i := range d.Mechanisms {
		if d.Mechanisms[i].Name == name {
			return &d.Mechanisms[i]
		}
	}
	return nil
}

// pressures are units in which a half saturation is called p50.
var pressures = []string{"torr", "mmHg", "mm[Hg]", "kPa", "Pa", "hPa", "bar", "mbar", "atm"}

// halfSymbol is how the trade writes half saturation for this study: p50 for a
// gas, EC50 for a signal, else K_0.5.
func (d *Document) halfSymbol() string {
	if slices.Contains(pressures, d.analysis.Ligand.Unit) {
		return "p50"
	}
	for i := range d.analysis.Data {
		if d.analysis.Data[i].Response.Kind == "signal" {
			return "EC50"
		}
	}
	return "K_0.5"
}

// shortContrast writes "pH 7.0 / pH 7.6" as "7.0 / 7.6": what both sides share
// in front is said by the rows above.
func shortContrast(pair string) string {
	for _, sign := range []string{" / ", " − "} {
		a, b, ok := strings.Cut(pair, sign)
		if i := strings.LastIndex(a, " ") + 1; ok && i > 0 && len(b) > i && a[:i] == b[:i] {
			return a[i:] + sign + b[i:]
		}
	}
	return pair
}

// belongs says whether a measurement lies on a curve: the curve's name lists
// levels ("pH 7.6, preparation A"), and every one of them is the point's.
func belongs(r *saturation.PointRow, curve string) bool {
	if curve == "all" || curve == r.Curve {
		return true
	}
	of := strings.Split(r.Curve, ", ")
	of = append(of, r.Data)
	if r.Preparation != nil {
		of = append(of, "preparation "+*r.Preparation)
	}
	for _, level := range strings.Split(curve, ", ") {
		if !slices.Contains(of, level) {
			return false
		}
	}
	return true
}

// shortList writes "pH 7.6", "pH 7.0" as "pH 7.6, 7.0".
func shortList(labels []string) string {
	if len(labels) == 0 {
		return ""
	}
	first := labels[0]
	i := strings.LastIndex(first, " ") + 1
	short := []string{first}
	for _, l := range labels[1:] {
		if i > 0 && len(l) > i && l[:i] == first[:i] {
			l = l[i:]
		}
		short = append(short, l)
	}
	return strings.Join(short, ", ")
}
