package saturation

import (
	"context"
	"math"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// withInterval fills the row of one number: value, interval, and how firmly it is held.
func (f *fitted) withInterval(ctx context.Context, w wanted, pr *fit.Profiler) QuantityRow {
	level := f.m.a.Settings.Level
	row := w.row
	row.Value, row.Low, row.High, row.Level = nan, nan, nan, nan
	row.Interval, row.Held = "none", "neither"
	if w.index >= 0 && f.m.params[w.index].fixed {
		row.Value, row.Held = Real(w.back(f.result.Theta[w.index])), "fixed"
		return row
	}
	q := w.make()
	grad := make([]float64, len(f.m.params))
	v := q(f.result.Theta, grad)
	row.Value = finite(w.back(v))
	if math.IsNaN(v) || math.IsInf(v, 0) {
		if row.Why == nil {
			row.Why = text(w.whyNot(f.result.Theta))
		}
		if math.IsNaN(v) {
			return row
		}
	}
	if f.row.Status == "stopped" || ctx.Err() != nil {
		row.Why = text("stopped before its interval was sought")
		return row
	}
	if w.quick || pr == nil {
		return f.covarianceRow(row, w, q, level)
	}
	if math.IsInf(v, 0) {
		return f.oneEnded(ctx, row, w, pr, v > 0)
	}
	return f.profileRow(ctx, row, w, pr)
}

// whyNot says why a number does not exist at Θ.
func (w *wanted) whyNot(theta []float64) string {
	if w.why != nil {
		if s := w.why(theta); s != "" {
			return s
		}
	}
	return "does not exist at this fit"
}

// finite is a number, or null.
func finite(v float64) Real {
	if math.IsInf(v, 0) {
		return nan
	}
	return Real(v)
}

// covarianceRow gives a number its quick interval.
func (f *fitted) covarianceRow(row QuantityRow, w wanted, q fit.Quantity, level float64) QuantityRow {
	_, low, high := covarianceInterval(q, f.result, f.critical(level))
	if math.IsNaN(low) {
		return row
	}
	low, high = ordered(w.back(low), w.back(high))
	row.Low, row.High, row.Level = finite(low), finite(high), Real(level)
	row.Interval, row.Held = "covariance", "both"
	return row
}

// profileRow gives a number its profile-likelihood interval.
func (f *fitted) profileRow(ctx context.Context, row QuantityRow, w wanted, pr *fit.Profiler) QuantityRow {
	var iv fit.Interval
	if w.index >= 0 {
		iv = pr.Parameter(ctx, w.index)
	} else {
		iv = pr.Quantity(ctx, w.make())
		if w.row.Of == "constant" {
			f.openAtZero(ctx, w, pr, &iv)
		}
	}
	if w.index < 0 && w.back(0) == 1 { // found as a logarithm, and no constant with bounds of its own
		f.openFarOff(ctx, w, pr, &iv)
	}
	row.Interval, row.Level = iv.Method, Real(iv.Level)
	low := endOf{value: w.back(iv.Low), open: iv.LowOpen, edge: iv.LowEdge, tried: w.back(iv.Low), side: "lower"}
	high := endOf{value: w.back(iv.High), open: iv.HighOpen, edge: iv.HighEdge, tried: w.back(iv.High), side: "upper"}
	if w.index >= 0 {
		low.meaning, low.linear = f.m.edgeMeaning(w.index, fit.OnLow)
		high.meaning, high.linear = f.m.edgeMeaning(w.index, fit.OnHigh)
	}
	if low.value > high.value { // the printed scale runs the other way
		low, high = high, low
		low.side, high.side = "lower", "upper"
	}
	row.Low, row.High = low.number(), high.number()
	row.Held = held(low.loose(), high.loose())
	if why := joinWhy(low.why(), high.why()); why != "" && row.Why == nil {
		row.Why = text(why)
	}
	return row
}

// openAtZero takes back ends of a restated constant that lie where rounding puts
// them: where a fitted constant that it is divided by may be zero, it has no
// upper end, and where one that it is a multiple of may be zero, no lower end.
func (f *fitted) openAtZero(ctx context.Context, w wanted, pr *fit.Profiler, iv *fit.Interval) {
	low, high := f.zeroWithin(ctx, w, pr)
	if low {
		iv.Low, iv.LowOpen = math.Inf(-1), true
	}
	if high {
		iv.High, iv.HighOpen = math.Inf(1), true
	}
}

// openFarOff takes back ends that only the box of the search makes: an end more
// than farOff-fold away, where the data let a constant run to its own bound.
func (f *fitted) openFarOff(ctx context.Context, w wanted, pr *fit.Profiler, iv *fit.Interval) {
	v := w.make()(f.result.Theta, make([]float64, len(f.m.params)))
	low, high := v-iv.Low > math.Log(farOff), iv.High-v > math.Log(farOff)
	if !low && !high || !f.runsToABound(ctx, pr) {
		return
	}
	iv.LowOpen, iv.HighOpen = iv.LowOpen || low, iv.HighOpen || high
}

// runsToABound says whether the profile of any logarithmic constant reaches a
// bound that the study did not set.
func (f *fitted) runsToABound(ctx context.Context, pr *fit.Profiler) bool {
	for j, p := range f.m.params {
		if p.kind != ofConstant || p.fixed || f.m.consts[p.constant].Scale == mechanisms.Linear {
			continue
		}
		if g := f.m.given(p.constant); g.Low != nil || g.High != nil {
			continue
		}
		if iv := pr.Parameter(ctx, j); iv.LowEdge || iv.HighEdge || iv.LowOpen || iv.HighOpen {
			return true
		}
	}
	return false
}

// zeroWithin says whether fitted constants that may be zero, as far as the data
// go, leave a restated constant without a lower and without an upper end.
func (f *fitted) zeroWithin(ctx context.Context, w wanted, pr *fit.Profiler) (noLow, noHigh bool) {
	at, grad := f.offZero(f.result.Theta), make([]float64, len(f.m.params))
	w.make()(at, grad)
	for j, p := range f.m.params {
		power := grad[j] * at[j]
		if p.kind != ofConstant || f.m.consts[p.constant].Scale != mechanisms.Linear || !(math.Abs(power) > 0.5) {
			continue
		}
		if f.result.Theta[j] > 0 && !pr.Parameter(ctx, j).LowEdge {
			continue
		}
		noLow, noHigh = noLow || power > 0, noHigh || power < 0
	}
	return noLow, noHigh
}

// endOf is one end of an interval on the printed scale.
type endOf struct {
	value, tried float64
	open, edge   bool
	linear       bool // the bound is a value like any other (zero)
	side         string
	meaning      string // of the bound
}

// loose says whether the end does not hold the number.
func (e endOf) loose() bool { return e.open || e.edge || math.IsNaN(e.value) }

// number is the end as results give it: null where there is none.
func (e endOf) number() Real {
	if e.open || e.edge && !e.linear {
		return nan
	}
	return finite(e.value)
}

// why says why the end is missing.
func (e endOf) why() string {
	switch {
	case e.edge && e.meaning != "":
		return "no " + e.side + " end: its bound is reached (" + e.meaning + ")"
	case e.edge:
		return "no " + e.side + " end: its bound, " + figures(e.value, 3) + ", is reached"
	case e.open && !math.IsNaN(e.tried) && !math.IsInf(e.tried, 0):
		return "no " + e.side + " end: compatible as far as " + figures(e.tried, 2)
	case e.open:
		return "no " + e.side + " end"
	}
	return ""
}

func joinWhy(a, b string) string {
	if a == "" || b == "" {
		return a + b
	}
	return a + "; " + b
}

// edgeMeaning says what a parameter's bound means, and whether it is a value
// like any other on the fitted scale.
func (m *model) edgeMeaning(i int, e fit.Edge) (meaning string, linear bool) {
	p := &m.params[i]
	if p.kind != ofConstant {
		return "", p.kind == ofResponse
	}
	c := m.consts[p.constant]
	if e == fit.OnHigh {
		return c.EdgeHigh, c.Scale == mechanisms.Linear
	}
	return c.EdgeLow, c.Scale == mechanisms.Linear
}

// held says which ends an interval has.
func held(lowLoose, highLoose bool) string {
	switch {
	case lowLoose && highLoose:
		return "neither"
	case lowLoose:
		return "high end only"
	case highLoose:
		return "low end only"
	}
	return "both"
}

func ordered(a, b float64) (low, high float64) {
	if a > b {
		return b, a
	}
	return a, b
}

// profiler is a workspace for profile intervals; nil where the study asks for
// covariance intervals, or the fit has no answer to start from.
func (f *fitted) profiler(level float64) *fit.Profiler {
	if f.m.a.Settings.Method == "covariance" {
		return nil
	}
	pr, err := fit.NewProfiler(f.problem, f.result, level)
	if err != nil {
		return nil
	}
	return pr
}
