package saturation

import (
	"context"
	"math"

	"ligancy/fit"
)

const (
	// drawOffset is the relative offset at which a refit of simulated values
	// ends: its sum of squares is then good to about a part in a million.
	drawOffset = 1e-3
	// drawSteps bounds the steps of one such refit.
	drawSteps = 60
)

// refitter fits one candidate over and over to other values at the same
// places, in a workspace of its own. It is for one goroutine.
type refitter struct {
	f        *fitted // shares all but model, problem and result with the candidate
	again    *fit.Again
	theta    []float64 // of the last fit
	lnLambda float64   // of a shift by preparation, at the data's own fit
}

// newRefitter makes the workspace; nil where the candidate cannot be fitted.
func newRefitter(f *fitted) *refitter {
	g := *f
	g.problem = replaced(f, nil, nil)
	g.m = f.m.over(g.problem.Blocks)
	again, err := fit.NewAgain(g.problem, drawOffset)
	if err != nil {
		return nil
	}
	r := &refitter{f: &g, again: again, theta: make([]float64, len(f.m.params))}
	if f.m.shift != nil {
		r.lnLambda = math.Log(f.m.shift.lambda)
	}
	return r
}

// replaced is a candidate's problem over blocks of its own, with other values in
// the place of y (the same ones where y is nil) and no starts but these.
func replaced(f *fitted, y [][]float64, starts [][]float64) *fit.Problem {
	p := *f.problem
	p.Blocks = nil
	for bi, b := range f.m.blocks {
		values := b.y
		if y != nil {
			values = y[bi]
		}
		p.Blocks = append(p.Blocks, b.withY(values))
	}
	p.Starts = starts
	p.Parameters = append([]fit.Parameter(nil), p.Parameters...)
	for i := range p.Parameters {
		p.Parameters[i].StartLow, p.Parameters[i].StartHigh = math.NaN(), math.NaN()
	}
	return &p
}

// observe takes other values in the place of those measured, block by block.
func (r *refitter) observe(y [][]float64) {
	for bi, b := range r.f.m.blocks {
		b.y = y[bi]
		if _, ok := b.noise.(reweighted); ok {
			b.noise = newScatterModel(b)
		}
		b.pool = b.noise.gather(b)
	}
}

// from is ln L of the fit reached from theta; −Inf where it cannot be evaluated.
func (r *refitter) from(ctx context.Context, theta []float64) float64 {
	if r.f.m.shift != nil {
		return r.shifted(ctx, theta)
	}
	if r.again.From(ctx, theta, drawSteps) == fit.NoAnswer {
		return math.Inf(-1)
	}
	copy(r.theta, r.again.Theta())
	for range reweighings {
		change := 0.0
		for _, b := range r.f.m.blocks {
			if w, ok := b.noise.(reweighted); ok {
				b.predict(r.theta, false)
				change = math.Max(change, w.reweigh(b))
				b.pool = w.gather(b)
			}
		}
		if change < drawOffset || r.again.From(ctx, r.theta, drawSteps) == fit.NoAnswer {
			break
		}
		copy(r.theta, r.again.Theta())
	}
	return r.f.lnLikelihood(r.theta, r.again.SS())
}

// lnLikelihood is ln L at θ, where the blocks have these sums of squares, but
// for the integral over shifts by preparation.
func (f *fitted) lnLikelihood(theta, ss []float64) float64 {
	lnL := 0.0
	for bi, b := range f.m.blocks {
		n := float64(len(b.pts))
		switch w, again := b.noise.(reweighted); {
		case again:
			b.predict(theta, false)
			lnL += w.lnLikelihood(b)
		case b.noise.scatter() == fit.Known:
			lnL -= ss[bi]/2 + b.noise.lnJacobian(b) + n/2*math.Log(2*math.Pi)
		default:
			lnL -= n/2*(math.Log(2*math.Pi*ss[bi]/n)+1) + b.noise.lnJacobian(b)
		}
	}
	return lnL
}

// shifted is ln L of a candidate with a shift by preparation: ln λ is followed
// from where the data put it, by steps of the parabola through three of its
// values.
func (r *refitter) shifted(ctx context.Context, theta []float64) float64 {
	s := r.f.m.shift
	n := float64(r.f.m.points())
	best := math.Inf(1)
	at := func(u float64, from []float64) float64 {
		s.lambda = math.Exp(u)
		if r.again.From(ctx, from, drawSteps) == fit.NoAnswer {
			return math.Inf(1)
		}
		cost := n*math.Log(r.again.SS()[0]) + r.f.shiftLnDet(&fit.Result{Theta: r.again.Theta()})
		if cost < best {
			best = cost
			copy(r.theta, r.again.Theta())
		}
		return cost
	}
	least(func(u float64) float64 { return at(u, theta) }, r.lnLambda, lnLambdaLow, lnLambdaHigh)
	return -(best + n*(math.Log(2*math.Pi/n)+1)) / 2
}

// least follows a smooth function of one variable down from u, within bounds,
// to where the parabola through three of its values promises nothing more.
func least(f func(float64) float64, u, low, high float64) {
	const step, enough, near, most = 0.5, 1e-4, 0.1, 16
	clamp := func(v float64) float64 { return math.Min(math.Max(v, low), high) }
	a, b, c := clamp(u-step), u, clamp(u+step)
	fa, fb, fc := f(a), f(b), f(c)
	for range most {
		switch {
		case fa < fb && fa <= fc && a > low: // downhill to the left
			b, fb, c, fc = a, fa, b, fb
			a = clamp(b - 2*(c-b))
			fa = f(a)
		case fc < fb && fc < fa && c < high:
			a, fa, b, fb = b, fb, c, fc
			c = clamp(b + 2*(b-a))
			fc = f(c)
		case fa < fb || fc < fb: // downhill to a bound, or to before it
			v := (a + b) / 2
			if fc < fa {
				v = (b + c) / 2
			}
			if math.Abs(v-b) < near {
				return
			}
			if fv := f(v); v < b {
				b, fb, c, fc = v, fv, b, fb
			} else {
				a, fa, b, fb = b, fb, v, fv
			}
		default:
			v, gain := vertex(a, b, c, fa, fb, fc)
			if !(gain > enough) {
				return
			}
			fv := f(v)
			switch {
			case v < b && fv < fb:
				c, fc, b, fb = b, fb, v, fv
			case v < b:
				a, fa = v, fv
			case fv < fb:
				a, fa, b, fb = b, fb, v, fv
			default:
				c, fc = v, fv
			}
		}
	}
}

// vertex is the lowest point of the parabola through three points and how far
// below the middle one it lies.
func vertex(a, b, c, fa, fb, fc float64) (v, gain float64) {
	p, q := (fa-fb)/(a-b), (fc-fb)/(c-b)
	curvature := (q - p) / (c - a)
	if !(curvature > 0) {
		return b, 0
	}
	slope := p + curvature*(b-a)
	v = b - slope/(2*curvature)
	return v, slope * slope / (4 * curvature)
}
