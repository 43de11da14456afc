package report

import (
	"fmt"
	"math"
	"strconv"

	"ligancy/fit/saturation"
)

const mostPreparations = 24

// preparations writes PREPARATION BY PREPARATION: half saturation and n_H of
// each one fitted alone, then the mean of the logarithms and of n_H with their
// standard deviations over preparations.
func (p *page) preparations() {
	rows := p.d.Preparations
	if len(rows) == 0 {
		return
	}
	p.heading("PREPARATION BY PREPARATION", "each fitted alone by a Hill equation; SD over preparations")
	half := p.d.halfSymbol()
	if unit := p.d.analysis.Ligand.Unit; unit != "" {
		half += " / " + cut(unit, 12)
	}
	g := &grid{gap: 2, right: []bool{false, false, true, false, false}}
	g.add("", "", "points", half, "n_H")
	curve := ""
	for i := range rows[:min(len(rows), mostPreparations)] {
		r := &rows[i]
		label := ""
		if r.Curve != curve {
			curve = r.Curve
			label = cut(curveLabel(curve), labelColumns)
		}
		g.add(append([]string{label}, preparationCells(r)...)...)
	}
	for _, l := range g.lines(Width - 2) {
		p.line("  %s", l)
	}
	if n := len(rows) - mostPreparations; n > 0 {
		p.line("  and %d more rows: preparations.csv", n)
	}
	p.line("")
}

// preparationCells writes one preparation, or the mean of several: "5.44 × 1.02"
// where one standard deviation is a factor of 1.02, "2.65 ± 0.05".
func preparationCells(r *saturation.PreparationRow) []string {
	name := cut(r.Preparation, 16)
	if r.Why != nil {
		return []string{name, strconv.Itoa(r.Points), "–", cut(*r.Why, 50)}
	}
	x, h := significant(float64(r.XHalf), 3), significant(float64(r.NH), 3)
	if r.N > 1 {
		name += fmt.Sprintf(", n %d", r.N)
		if sd := float64(r.SDLnXHalf); finite(sd) {
			x += " ×/÷ " + factor(math.Exp(-sd), math.Exp(sd))
		}
		if sd := float64(r.SDNH); finite(sd) {
			place := lastPlace(sd, 0)
			h = atPlace(float64(r.NH), place, false) + " ± " + atPlace(sd, place, false)
		}
	}
	return []string{name, strconv.Itoa(r.Points), x, h}
}
