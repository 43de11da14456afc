package saturation

import (
	"context"
	"fmt"
	"math"
	"sort"
	"strconv"
	"strings"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// What the data fix of tied constants is a product of powers. Two kinds are
// listed, of constants that are fitted as logarithms:
//
//   - the stiffest and the loosest combination, eigenvectors of the information
//     matrix with all else free to follow;
//   - for the loosest constant, the partner tied most closely to it: K_R·L^(1/4),
//     say, held to a few percent where L alone is held within a factor of forty.
const (
	tieCorrelation = 0.95 // a correlation from which a pair is listed as tied
	largestRoot    = 6    // powers are rounded to fractions with such denominators
)

// combinationRows lists stiff, loose and tied combinations of a fit.
func (f *fitted) combinationRows(ctx context.Context) []QuantityRow {
	which := f.logConstants()
	if !f.answered() || len(which) < 2 || f.result.Cov == nil {
		return nil
	}
	pr := f.profiler(f.m.a.Settings.Level)
	var rows []QuantityRow
	all, err := fit.Combinations(f.problem, f.result, which)
	if err == nil && len(all) > 1 {
		rows = append(rows, f.combinationRow(ctx, pr, "stiffest: ", which, all[0].Weights),
			f.combinationRow(ctx, pr, "loosest: ", which, all[len(all)-1].Weights))
	}
	if w := f.tied(which); w != nil {
		rows = append(rows, f.combinationRow(ctx, pr, "", which, w))
	}
	return rows
}

// logConstants are the places in Θ of free constants on a logarithmic scale.
func (f *fitted) logConstants() []int {
	var which []int
	for i, p := range f.m.params {
		if p.kind == ofConstant && !p.fixed && f.result != nil && f.result.Edges[i] == fit.Inside &&
			f.m.consts[p.constant].Scale == mechanisms.Log {
			which = append(which, i)
		}
	}
	return which
}

// tied is the weights of the loosest constant's closest tie, rounded to small
// fractions; nil where nothing is tied closely.
func (f *fitted) tied(which []int) []float64 {
	cov := f.result.Cov
	loosest := 0
	for n, j := range which {
		if cov.At(j, j) > cov.At(which[loosest], which[loosest]) {
			loosest = n
		}
	}
	l := which[loosest]
	best, partner := tieCorrelation, -1
	for n, j := range which {
		if r := math.Abs(correlationOf(cov, l, j)); n != loosest && r > best && f.m.params[j].constant != f.m.params[l].constant {
			best, partner = r, n
		}
	}
	if partner < 0 {
		return nil
	}
	power := fraction(-cov.At(which[partner], l)/cov.At(l, l), largestRoot)
	if power == 0 {
		return nil
	}
	w := make([]float64, len(which))
	w[partner], w[loosest] = 1, power
	return w
}

// fraction is the nearest fraction with a denominator up to most.
func fraction(v float64, most int) float64 {
	best := math.Round(v)
	for d := 2; d <= most; d++ {
		if c := math.Round(v*float64(d)) / float64(d); math.Abs(c-v) < math.Abs(best-v)-1e-9 {
			best = c
		}
	}
	return best
}

// combinationRow is Π constant^w with its interval.
func (f *fitted) combinationRow(ctx context.Context, pr *fit.Profiler, prefix string, which []int, w []float64) QuantityRow {
	row := QuantityRow{Mechanism: f.row.Name, Curve: "all", Of: "combination", Name: prefix + f.productName(which, w), Unit: f.productUnit(which, w)}
	q := wanted{index: -1, back: math.Exp, row: row, make: func() fit.Quantity {
		return func(theta, grad []float64) float64 {
			clear(grad)
			v := 0.0
			for n, j := range which {
				grad[j] += w[n]
				v += w[n] * theta[j]
			}
			return v
		}
	}}
	return f.withInterval(ctx, q, pr)
}

// smallestPower is the power below which a factor is left out of a name.
const smallestPower = 0.05

// productName writes "K_R · L^(1/4)", the greatest power first.
func (f *fitted) productName(which []int, w []float64) string {
	order := make([]int, len(which))
	for n := range order {
		order[n] = n
	}
	sort.SliceStable(order, func(a, b int) bool { return math.Abs(w[order[a]]) > math.Abs(w[order[b]])+1e-9 })
	var parts []string
	for _, n := range order {
		if math.Abs(w[n]) < smallestPower {
			continue
		}
		name := f.m.params[which[n]].title()
		if p := powerWords(w[n]); p != "" && strings.Contains(name, ",") {
			name = "(" + name + ")" + p
		} else {
			name += p
		}
		parts = append(parts, name)
	}
	return strings.Join(parts, " · ")
}

// powerWords writes a power: nothing for 1, a fraction where it is one.
func powerWords(w float64) string {
	if w == 1 {
		return ""
	}
	for d := 1; d <= largestRoot; d++ {
		if n := w * float64(d); math.Abs(n-math.Round(n)) < 1e-9 {
			if d == 1 {
				return "^" + strconv.Itoa(int(math.Round(n)))
			}
			return fmt.Sprintf("^(%d/%d)", int(math.Round(n)), d)
		}
	}
	return "^" + strconv.FormatFloat(w, 'f', 2, 64)
}

// productUnit is the unit of a product, "1" where it has none, and "" where its
// powers make none that could be written.
func (f *fitted) productUnit(which []int, w []float64) string {
	d := 0.0
	for n, j := range which {
		c := f.m.consts[f.m.params[j].constant]
		if c.Ligand != "" || c.Protomers != 0 {
			if math.Abs(w[n]) >= smallestPower {
				return ""
			}
			continue
		}
		d += w[n] * float64(c.Dimension)
	}
	if r := math.Round(d); math.Abs(d-r) < 1e-9 {
		return power(f.m.a.Ligand.Unit, int(r))
	}
	return ""
}

// correlationOf two places in Θ.
func correlationOf(cov mat.Symmetric, i, j int) float64 {
	return cov.At(i, j) / math.Sqrt(cov.At(i, i)*cov.At(j, j))
}

// tiedWords says in the verdict what the leader's loosest constant is tied to.
func (w *verdictWriter) tiedWords() string {
	for i := range w.out.Quantities {
		q := &w.out.Quantities[i]
		if q.Mechanism != w.lead.row.Name || q.Of != "combination" || strings.Contains(q.Name, ":") || q.Name == spreadName || q.Held != "both" || !(q.Low > 0) {
			continue
		}
		k := math.Sqrt(float64(q.High / q.Low))
		loosest := q.Name[strings.LastIndex(q.Name, "· ")+len("· "):]
		if at := strings.Index(loosest, "^"); at >= 0 {
			loosest = strings.Trim(loosest[:at], "()")
		}
		alone := w.aloneWithin(loosest)
		if !(alone > k*1.2) {
			continue
		}
		return fmt.Sprintf("The data fix %s within a factor of %s; %s alone only within a factor of %s.", q.Name, figures(k, 3), loosest, figures(alone, 2))
	}
	return ""
}

// aloneWithin is the factor within which the leader's constant of that title is
// held; 0 where it has no two ends.
func (w *verdictWriter) aloneWithin(title string) float64 {
	for i := range w.out.Quantities {
		q := &w.out.Quantities[i]
		if q.Mechanism != w.lead.row.Name || q.Of != "constant" || q.Held != "both" || !(q.Low > 0) {
			continue
		}
		if name := w.constantTitle(q); name == title {
			return math.Sqrt(float64(q.High / q.Low))
		}
	}
	return 0
}

// constantTitle names a constant row as combinations do.
func (w *verdictWriter) constantTitle(q *QuantityRow) string {
	name := q.Name
	switch {
	case q.Ligand != nil && *q.Ligand != w.a.Ligand.Name:
		name += " of " + *q.Ligand
	case q.Site != nil && *q.Site != q.Name:
		name += " of " + *q.Site
	}
	if q.Curve != "all" {
		name += ", " + q.Curve
	}
	return name
}
