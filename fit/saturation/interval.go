package saturation

import (
	"context"
	"math"

	"ligancy/fit"
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
			row.Why = text("does not exist at this fit")
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
	return profileRow(ctx, row, w, pr)
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
func profileRow(ctx context.Context, row QuantityRow, w wanted, pr *fit.Profiler) QuantityRow {
	var iv fit.Interval
	if w.index >= 0 {
		iv = pr.Parameter(ctx, w.index)
	} else {
		iv = pr.Quantity(ctx, w.make())
	}
	row.Interval, row.Level = iv.Method, Real(iv.Level)
	if iv.Why != "" && row.Why == nil {
		row.Why = text(iv.Why)
	}
	low, high := w.back(iv.Low), w.back(iv.High)
	lowOpen, highOpen := iv.LowOpen, iv.HighOpen
	if low > high {
		low, high, lowOpen, highOpen = high, low, highOpen, lowOpen
	}
	if !lowOpen {
		row.Low = finite(low)
	}
	if !highOpen {
		row.High = finite(high)
	}
	row.Held = held(lowOpen || math.IsNaN(low), highOpen || math.IsNaN(high))
	return row
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

// held says which ends an interval has.
func held(lowOpen, highOpen bool) string {
	switch {
	case lowOpen && highOpen:
		return "neither"
	case lowOpen:
		return "high end only"
	case highOpen:
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
