package report

import (
	"math"
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

// numbers are the quantities of a mechanism, each once: where a number has
// several kinds of interval the first row counts.
func (d *Document) numbers(mechanism string) []*saturation.QuantityRow {
	type number struct{ curve, of, name, ligand, site string }
	seen := map[number]bool{}
	var rows []*saturation.QuantityRow
	for i := range d.Quantities {
		q := &d.Quantities[i]
		n := number{curve: q.Curve, of: q.Of, name: q.Name}
		if q.Ligand != nil {
			n.ligand = *q.Ligand
		}
		if q.Site != nil {
			n.site = *q.Site
		}
		if q.Mechanism == mechanism && !seen[n] {
			seen[n] = true
			rows = append(rows, q)
		}
	}
	return rows
}

// curvesOf lists the curves of a mechanism that have a half saturation, in order.
func (d *Document) curvesOf(mechanism string) []string {
	var names []string
	for _, q := range d.numbers(mechanism) {
		if q.Name == "x_half" && q.Of == "position" {
			names = append(names, q.Curve)
		}
	}
	return names
}

// contrastsOf lists the rows that compare one number of a mechanism between curves.
func (d *Document) contrastsOf(mechanism, name string) []*saturation.QuantityRow {
	var rows []*saturation.QuantityRow
	for _, q := range d.numbers(mechanism) {
		if q.Of == "contrast" && q.Name == name {
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

// shortContrast writes "pH 7.0 / pH 7.6" as "7.0 / 7.6" and "alanine 5 mM /
// alanine 0 mM" as "5 / 0 mM": what both sides share in front is said by the
// rows above, what they share behind once.
func shortContrast(pair string) string {
	for _, sign := range []string{" / ", " − "} {
		if a, b, ok := strings.Cut(pair, sign); ok {
			_, parts, behind := shared([]string{a, b})
			return parts[0] + sign + parts[1] + behind
		}
	}
	return pair
}

// shortList writes "pH 7.6", "pH 7.0" as "pH 7.6, 7.0", and "alanine 0 mM",
// "alanine 5 mM" as "alanine 0, 5 mM".
func shortList(labels []string) string {
	if len(labels) < 2 {
		return strings.Join(labels, ", ")
	}
	front, parts, behind := shared(labels)
	return strings.TrimSpace(front + " " + strings.Join(parts, ", ") + behind)
}

// shared splits labels into the words that all of them share in front, what
// sets each apart (never nothing), and the words that all share behind, with
// the blank or comma before them.
func shared(labels []string) (front string, parts []string, behind string) {
	words := make([][]string, len(labels))
	least := math.MaxInt
	for i, l := range labels {
		words[i] = strings.Fields(l)
		least = min(least, len(words[i]))
	}
	alike := func(at func([]string) string) bool {
		return !slices.ContainsFunc(words, func(w []string) bool { return at(w) != at(words[0]) })
	}
	n, m := 0, 0
	for n < least-1 && alike(func(w []string) string { return w[n] }) {
		n++
	}
	for m < least-1-n && alike(func(w []string) string { return w[len(w)-1-m] }) {
		m++
	}
	comma := ""
	for _, w := range words {
		part := strings.Join(w[min(n, len(w)):max(len(w)-m, 0)], " ")
		if m > 0 && strings.HasSuffix(part, ",") {
			comma, part = ",", part[:len(part)-1]
		}
		parts = append(parts, part)
	}
	if m > 0 {
		behind = comma + " " + strings.Join(words[0][len(words[0])-m:], " ")
	}
	return strings.Join(words[0][:min(n, len(words[0]))], " "), parts, behind
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
