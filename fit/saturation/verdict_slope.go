package saturation

import (
	"context"
	"math"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// slopeLevel is the level of the interval that must exclude 1 before n_H is
// called different from 1 (a 95 % interval rejects one in twenty one-site truths).
const slopeLevel = 0.99

// slopeWide is the factor beyond which an interval of n_H that holds 1 is too
// wide to say that n_H is 1.
const slopeWide = 1.5

// What a verdict may say of n_H at half saturation: Verdict.Slope.
const (
	slopeAbove  = "above 1"
	slopeBelow  = "below 1"
	slopeOne    = "1"
	slopeOpen   = "open"
	slopeDiffer = "differs between curves"
)

// slope is n_H at half saturation of one curve, with its interval at slopeLevel.
type slope struct {
	curve            string
	value, low, high float64
	built            bool // 1 by construction: no constant moves it
}

// slopes finds the intervals of n_H at half saturation that decide whether it
// may be called different from 1.
func (a *Analysis) slopes(ctx context.Context, fits []*fitted, order []int) {
	for _, i := range order {
		f := fits[i]
		if f.row.Standing == "out" || ctx.Err() != nil {
			continue
		}
		pr, err := fit.NewProfiler(f.problem, f.result, slopeLevel)
		if err != nil {
			continue
		}
		for _, c := range f.m.curveCells() {
			f.slopes = append(f.slopes, f.slopeOf(ctx, pr, c))
		}
	}
}

// slopeOf is n_H of one curve; an end that does not exist is infinite.
func (f *fitted) slopeOf(ctx context.Context, pr *fit.Profiler, cell int) slope {
	q := f.m.measured(cell, mechanisms.HillAtHalf)()
	grad := make([]float64, len(f.m.params))
	s := slope{curve: f.m.cells[cell].label, value: q(f.result.Theta, grad)}
	s.built = math.Abs(s.value-1) < 1e-9 && still(grad) && f.row.Sites == 1
	if s.built {
		s.low, s.high = 1, 1
		return s
	}
	iv := pr.Quantity(ctx, q)
	s.low, s.high = iv.Low, iv.High
	if iv.LowOpen || math.IsNaN(s.low) {
		s.low = math.Inf(-1)
	}
	if iv.HighOpen || math.IsNaN(s.high) {
		s.high = math.Inf(1)
	}
	return s
}

// builtOn says whether n_H is 1 by construction on a curve.
func (f *fitted) builtOn(label string) bool {
	for _, s := range f.slopes {
		if s.curve == label && s.built {
			return true
		}
	}
	return false
}

// still says whether a gradient is zero but for rounding.
func still(grad []float64) bool {
	for _, g := range grad {
		if math.Abs(g) > 1e-9 {
			return false
		}
	}
	return true
}

// decidingRows are the intervals of n_H that decide what it is called.
func decidingRows(fits []*fitted) []QuantityRow {
	var rows []QuantityRow
	for _, f := range fits {
		for _, s := range f.slopes {
			row := QuantityRow{Mechanism: f.row.Name, Curve: s.curve, Of: "hill", Name: "n_H_half_99", Unit: "1",
				Value: finite(s.value), Low: finite(s.low), High: finite(s.high), Level: slopeLevel,
				Interval: "profile", Held: held(math.IsInf(s.low, 0), math.IsInf(s.high, 0))}
			if s.built {
				row.Interval, row.Held, row.Why = "none", "fixed", text("1 by construction: one site")
			}
			rows = append(rows, row)
		}
	}
	return rows
}

// slope is what may be said of n_H by all mechanisms that are not out, together.
func (w *verdictWriter) slope() string {
	if w.nothing() != "" {
		return ""
	}
	said := ""
	for _, c := range w.curves() {
		s := w.slopeOn(c)
		if said != "" && s != said {
			return slopeDiffer
		}
		said = s
	}
	return said
}

// curves are the labels of the curves that any mechanism tells apart.
func (w *verdictWriter) curves() []string {
	var labels []string
	seen := map[string]bool{}
	for _, f := range w.kept {
		for _, s := range f.slopes {
			if s.curve != "all" && !seen[s.curve] {
				seen[s.curve] = true
				labels = append(labels, s.curve)
			}
		}
	}
	if len(labels) == 0 {
		return []string{"all"}
	}
	return labels
}

// on lists the mechanisms' n_H on one curve.
func (w *verdictWriter) on(curve string) (fits []*fitted, list []slope) {
	for _, f := range w.kept {
		for _, s := range f.slopes {
			if s.curve == curve || s.curve == "all" {
				fits, list = append(fits, f), append(list, s)
			}
		}
	}
	return fits, list
}

// slopeOn is what may be said of n_H on one curve.
func (w *verdictWriter) slopeOn(curve string) string {
	above, below, tight, free := 0, 0, false, 0
	_, list := w.on(curve)
	for _, s := range list {
		switch {
		case s.low > 1:
			above++
		case s.high < 1:
			below++
		}
		if !s.built {
			free++
			tight = tight || s.low > 1/slopeWide && s.low <= 1 && s.high >= 1 && s.high < slopeWide
		}
	}
	switch {
	case len(list) == 0 || free == 0:
		return ""
	case above == len(list):
		return slopeAbove
	case below == len(list):
		return slopeBelow
	case above > 0 && below > 0 || !tight || w.unfilled() != nil:
		return slopeOpen
	}
	return slopeOne
}
