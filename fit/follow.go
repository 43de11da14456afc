package fit

import (
	"context"
	"math"
	"strconv"
)

// follow walks along the profile from the estimate until it meets the limit, a
// bound, or nothing any more.
func (f *Profiler) follow(ctx context.Context, t target, v, d float64) end {
	last := station{v, v, f.result.Objective, f.result.Theta}
	first, before := f.scale(t, last, d)
	step := first
	g := f.guide(t, first)
	low, high := g.bounds()
	still := 0
	for range 80 {
		dial := min(max(last.dial+d*step, low), high)
		next, ok := f.advance(ctx, g, before, last, dial)
		switch {
		case ctx.Err() != nil:
			return last.open("interrupted")
		case !ok && step < 1e-6*math.Abs(last.dial)+math.SmallestNonzeroFloat64:
			return last.open("nothing finite lies beyond")
		case !ok:
			step /= 4
			continue
		}
		f.meet(next.objective, next.theta)
		if still++; math.Abs(next.value-last.value) > 1e-3*math.Abs(next.dial-last.dial) {
			still = 0
		}
		switch {
		case next.objective >= f.limit:
			return f.between(ctx, t, g, last, next, d)
		case dial == low || dial == high:
			return end{value: dial, edge: true, why: "reaches a bound below the limit"}
		case still > 6:
			return next.open("goes no further, below the limit")
		case f.flat(last, next, math.Abs(next.dial-v)/first):
			return next.open("levels off below the limit")
		}
		step = f.stride(last, next, step)
		before, last = last, next
	}
	return last.open("stays below the limit as far as " + strconv.FormatFloat(last.value, 'g', 6, 64))
}

// open is the end of a profile that has none, followed as far as s.
func (s station) open(why string) end { return end{value: s.value, open: true, why: why} }

// flat says whether a profile that has been followed so many times further than
// where its limit was expected has all but ceased to rise.
func (f *Profiler) flat(last, next station, times float64) bool {
	rise, rest := f.root(next)-f.root(last), math.Sqrt(f.limit-f.result.Objective)-f.root(next)
	return times > 1e4 && rise < 1e-3*rest
}

// advance turns the guide to the next dial, from where the last two stations
// point to and from the last one, and keeps the lower of the two: with the
// parameter held there may be several minima.
func (f *Profiler) advance(ctx context.Context, g guide, before, last station,
	dial float64) (station, bool) {

	f.ahead = append(f.ahead[:0], last.theta...)
	if last.dial != before.dial {
		share := (dial - last.dial) / (last.dial - before.dial)
		for j, v := range last.theta {
			f.ahead[j] += share * (v - before.theta[j])
		}
	}
	a, okA := g.turn(ctx, dial, f.ahead)
	b, okB := g.turn(ctx, dial, last.theta)
	if okA && (!okB || a.objective <= b.objective) {
		return a, true
	}
	return b, okB
}

// meet keeps a θ whose objective is below all before.
func (f *Profiler) meet(objective float64, theta []float64) {
	if objective < f.lowest-f.s.slack(f.lowest)/100 {
		f.lowest = objective
		f.better = append(f.better[:0], theta...)
	}
}

// root is √(objective − minimum), which is nearly linear along a profile.
func (f *Profiler) root(at station) float64 {
	return math.Sqrt(max(at.objective-f.result.Objective, 0))
}

// stride is the next step: twice the last, or what remains by extrapolation.
func (f *Profiler) stride(last, next station, step float64) float64 {
	a, b, c := f.root(last), f.root(next), math.Sqrt(f.limit-f.result.Objective)
	if b > 0.05*c && b > a {
		return min(2*step, max(1.1*(c-b)/(b-a)*math.Abs(next.dial-last.dial), step/10))
	}
	return 2 * step
}

// scale is the distance on the dial at which the limit is expected, and a
// station behind the estimate, on the tangent of the profile.
func (f *Profiler) scale(t target, at station, d float64) (step float64, behind station) {
	f.s.restart(f.result)
	t.value(f.s.cur.theta, f.grad)
	f.e.solve(len(f.free), f.linearise(f.limit), d)
	theta := append([]float64(nil), at.theta...)
	var change float64
	for i, j := range f.free {
		change += f.grad[j] * f.e.s[i]
		theta[j] -= f.e.s[i]
	}
	behind = station{dial: at.dial - change, theta: theta}
	step = math.Abs(change)
	width := 0.0
	if t.parameter >= 0 {
		width = f.s.width[t.parameter]
	}
	if !(step > 0) || math.IsInf(step, 0) || f.e.loose {
		behind = at
		if step = 0.1 * max(math.Abs(at.value), 1e-3); width > 0 {
			step = width / 4
		}
	}
	if width > 0 {
		step = min(step, width)
	}
	return step, behind
}

// between finds the end between a station below and one above the limit: by
// regula falsi on the dial (the Illinois variant) with a refit at each, and a
// leap once that is near.
func (f *Profiler) between(ctx context.Context, t target, g guide, below, above station,
	d float64) end {

	goal := math.Sqrt(f.limit - f.result.Objective)
	a, b := f.root(below)-goal, f.root(above)-goal
	for n, side := 0, 0.0; n < 100 && ctx.Err() == nil; n++ {
		dial := (below.dial*b - above.dial*a) / (b - a)
		at, ok := f.advance(ctx, g, above, below, dial)
		if !ok {
			break
		}
		f.meet(at.objective, at.theta)
		c := f.root(at) - goal
		if math.Abs(c) <= 1e-10*goal {
			return end{value: at.value}
		}
		if n == 1 || n == 11 {
			value, ok := f.land(t, d, at)
			if ok && d*(value-below.value) >= 0 && d*(above.value-value) >= 0 {
				return end{value: value}
			}
		}
		if c > 0 {
			above, b = at, c
			if side > 0 {
				a /= 2
			}
		} else {
			below, a = at, c
			if side < 0 {
				b /= 2
			}
		}
		side = c
		if math.Abs(above.dial-below.dial) <= 1e-12*(math.Abs(above.dial)+math.Abs(below.dial)) {
			break
		}
	}
	switch {
	case ctx.Err() != nil:
		return below.open("interrupted")
	case f.root(below) < 0.999*goal:
		return below.open("breaks off below the limit")
	}
	return end{value: below.value}
}

// land iterates the linearised problem from a station near the end.
func (f *Profiler) land(t target, d float64, at station) (float64, bool) {
	copy(f.s.cur.theta, at.theta)
	if !f.s.evaluate(f.s.cur) {
		return 0, false
	}
	return f.settleAt(t, d, f.limit, 1e-5, 40)
}
