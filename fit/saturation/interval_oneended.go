package saturation

import (
	"context"
	"math"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// vanishing is what stands for a fitted constant that is exactly zero, relative
// to where its starts are drawn: small enough that no prediction feels it.
const vanishing = 1e-12

// oneEnded gives a constant that is infinite or zero at the fit (β_j = 0) the
// end that it has: the profile of its reciprocal, or of itself, from zero up.
func (f *fitted) oneEnded(ctx context.Context, row QuantityRow, w wanted, pr *fit.Profiler, infinite bool) QuantityRow {
	iv := pr.Quantity(ctx, f.fromZero(w, infinite))
	row.Value = nan
	noLow, noHigh := f.zeroWithin(ctx, w, pr)
	if iv.HighOpen || !(iv.High > 0) || noLow && noHigh {
		return row
	}
	row.Interval, row.Level = iv.Method, Real(iv.Level)
	if infinite {
		row.Low, row.Held = Real(1/iv.High), held(false, true)
	} else {
		row.High, row.Held = Real(iv.High), held(true, false)
	}
	return row
}

// fromZero is the constant, or its reciprocal where it is infinite, as a number
// that is zero at the fit.
func (f *fitted) fromZero(w wanted, reciprocal bool) fit.Quantity {
	lnK := w.make()
	sign := 1.0
	if reciprocal {
		sign = -1
	}
	return func(theta, grad []float64) float64 {
		v := math.Exp(sign * lnK(f.offZero(theta), grad))
		for j := range grad {
			grad[j] *= sign * v
		}
		return v
	}
}

// offZero is θ with what is exactly zero on a linear scale put just off it.
func (f *fitted) offZero(theta []float64) []float64 {
	at := append([]float64(nil), theta...)
	for j, p := range f.m.params {
		if p.kind == ofConstant && f.m.consts[p.constant].Scale == mechanisms.Linear && at[j] == 0 {
			at[j] = vanishing * p.StartHigh
		}
	}
	return at
}
