package saturation

import (
	"context"
	"math"

	"ligancy/fit"
)

// fitted is one candidate with its best fit.
type fitted struct {
	m         *model
	problem   *fit.Problem
	result    *fit.Result // nil where there is no answer
	err       error
	row       MechanismRow
	lnL       float64
	k         int // numbers estimated, scatters counted
	ss        float64
	scatter   float64
	slopes    []slope
	twinOf    int  // index of the first candidate with the same curves; −1
	decided   bool // the bootstrap has settled whether it is out
	holdsLead bool // its curves hold all those of the leader
}

// fitCandidate lays a candidate over the data and fits it.
func (a *Analysis) fitCandidate(ctx context.Context, c *Candidate, s fit.Settings) *fitted {
	f := &fitted{twinOf: -1, row: MechanismRow{Name: c.Name, Family: c.Family, Sites: c.Mechanism.Sites(), Status: "no answer"}}
	f.row.SumOfSquares, f.row.Scatter, f.row.LogLikelihood = nan, nan, nan
	f.row.LackOfFitP, f.row.RunsP, f.row.PredictionError = nan, nan, nan
	f.row.AICc, f.row.AICcBehind, f.row.AICcWeight, f.row.BIC = nan, nan, nan, nan
	f.lnL, f.ss, f.scatter = math.NaN(), math.NaN(), math.NaN()
	f.m, f.err = newModel(a, c)
	if f.m != nil {
		f.row.Constants, f.row.Points = f.m.free(), f.m.points()
	}
	if f.err != nil {
		f.row.Why = text(f.err.Error())
		return f
	}
	f.problem = f.m.problem()
	f.result, f.err = f.solve(ctx, s)
	if f.err != nil || f.result == nil || len(f.result.Theta) == 0 {
		switch {
		case f.err != nil:
			f.row.Why = text(f.err.Error())
		case ctx.Err() != nil:
			f.row.Why = text("stopped before its first start had ended")
		}
		f.result = nil
		return f
	}
	f.describe()
	return f
}

var nan = Real(math.NaN())

// text is a pointer to a string, for rows whose null is nil.
func text(s string) *string { return &s }

// free counts the parameters that are neither fixed nor drawn (shifts).
func (m *model) free() int {
	n := 0
	for _, p := range m.params {
		if !p.fixed && p.kind != ofShift {
			n++
		}
	}
	return n
}

// points counts the kept points.
func (m *model) points() int {
	n := 0
	for _, b := range m.blocks {
		n += len(b.pts)
	}
	return n
}

// reweighings bounds the rounds of a scatter model that weighs by residuals.
const reweighings = 100

// solve fits from many starts and, where weights follow from residuals, again
// from the optimum until the weights settle.
func (f *fitted) solve(ctx context.Context, s fit.Settings) (*fit.Result, error) {
	r, err := fit.Solve(ctx, f.problem, s)
	if err == nil && r != nil && r.Status == fit.Stopped && ctx.Err() == nil {
		r = f.ontoBounds(ctx, r)
	}
	if f.m.shift != nil && err == nil && r != nil && r.Status != fit.NoAnswer && r.Status != fit.Stopped {
		return f.settleShift(ctx, r)
	}
	for range reweighings {
		if err != nil || r == nil || r.Status == fit.NoAnswer || r.Status == fit.Stopped {
			return r, err
		}
		change := 0.0
		for _, b := range f.m.blocks {
			if w, ok := b.noise.(reweighted); ok {
				b.predict(r.Theta, false)
				change = math.Max(change, w.reweigh(b))
				b.pool = w.gather(b)
			}
		}
		if change < 1e-9 {
			return r, nil
		}
		p := *f.problem
		p.Starts = [][]float64{r.Theta}
		starts, agreeing := r.Starts, r.Agreeing
		r, err = fit.Solve(ctx, &p, fit.Settings{Starts: 1, Workers: 1})
		if r != nil {
			r.Starts, r.Agreeing = starts, agreeing
		}
		if err == nil && r != nil && r.Status == fit.Stopped && ctx.Err() == nil {
			r = f.ontoBounds(ctx, r)
		}
	}
	return r, err
}

// describe turns the engine's result into the row of the mechanism.
func (f *fitted) describe() {
	r := f.result
	f.row.Status = statusWord(r.Status)
	f.row.Starts, f.row.StartsAgreeing = r.Starts, r.Agreeing
	f.row.Edge = f.m.edgeWords(r)
	f.likelihood()
	n := f.row.Points
	f.row.SumOfSquares, f.row.Scatter = Real(f.ss), Real(f.scatter)
	f.row.LogLikelihood = Real(f.lnL)
	if aicc, ok := akaike(f.lnL, f.k, n); ok {
		f.row.AICc = Real(aicc)
	} else {
		f.row.Why = text("AICc does not exist: too few points for this many constants")
	}
	f.row.BIC = Real(-2*f.lnL + float64(f.k)*math.Log(float64(n)))
}

// statusWord is the word of results for a fit's end.
func statusWord(s fit.Status) string {
	switch s {
	case fit.Converged:
		return "converged"
	case fit.AtEdge:
		return "at an edge"
	case fit.Stopped:
		return "stopped"
	}
	return "no answer"
}

// edgeWords says which constants lie on a bound, and what that means.
func (m *model) edgeWords(r *fit.Result) *string {
	out := ""
	for i, e := range r.Edges {
		p := &m.params[i]
		if e == fit.Inside || p.fixed {
			continue
		}
		words := p.Name
		if p.curve != "all" {
			words += " (" + p.curve + ")"
		}
		meaning, _ := m.edgeMeaning(i, e)
		words += " on its " + map[fit.Edge]string{fit.OnLow: "lower", fit.OnHigh: "upper"}[e] + " bound"
		if meaning != "" {
			words += ": " + meaning
		}
		if out != "" {
			out += "; "
		}
		out += words
	}
	if out == "" {
		return nil
	}
	return &out
}

// likelihood evaluates ln L, the sum of squares as results define it, and the
// scatter, at the fit.
func (f *fitted) likelihood() {
	f.lnL, f.ss, f.k = 0, 0, f.m.free()
	if f.m.shift != nil {
		f.k++ // τ
		f.lnL -= f.shiftLnDet(f.result) / 2
	}
	all, nAll := 0.0, 0
	for bi, b := range f.m.blocks {
		n := float64(len(b.pts))
		rel := f.relativeSS(b)
		f.ss += rel
		all += rel
		nAll += len(b.pts)
		if w, ok := b.noise.(reweighted); ok {
			b.predict(f.result.Theta, false)
			f.k++
			f.lnL += w.lnLikelihood(b)
			continue
		}
		ss := f.result.SS[bi]
		lnJ := b.noise.lnJacobian(b)
		if b.noise.scatter() == fit.Known {
			f.lnL -= ss/2 + lnJ + n/2*math.Log(2*math.Pi)
		} else {
			f.k++
			f.lnL -= n/2*(math.Log(2*math.Pi*ss/n)+1) + lnJ
		}
	}
	if dof := nAll - f.m.free(); dof > 0 {
		f.scatter = math.Sqrt(all / float64(dof))
	}
}

// relativeSS is Σ((y−ŷ)/s)² with s the relative standard deviations of the
// scatter model (1 for constant scatter).
func (f *fitted) relativeSS(b *block) float64 {
	s := f.deviations(b)
	ss := 0.0
	for i := range b.pts {
		e := (b.y[i] - b.predicted(i)) / s[i]
		ss += e * e
	}
	return ss
}

// deviations predicts at the fit and returns each point's relative (or known)
// standard deviation.
func (f *fitted) deviations(b *block) []float64 {
	b.predict(f.result.Theta, false)
	s := make([]float64, len(b.pts))
	b.noise.deviations(b, s, f.result.Theta)
	return s
}

// akaike is AICc = −2 ln L + 2K + 2K(K+1)/(N−K−1), K counting the scatters;
// it does not exist at N ≤ K + 1 (Hurvich & Tsai 1989).
func akaike(lnL float64, k, n int) (float64, bool) {
	if n <= k+1 {
		return math.NaN(), false
	}
	return -2*lnL + 2*float64(k) + 2*float64(k)*float64(k+1)/float64(n-k-1), true
}
