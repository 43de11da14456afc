package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"slices"

	"ligancy/fit"
)

const (
	// sameCurve is the largest root sum of squared differences, relative to the
	// range of the response, between curves that are one and the same.
	sameCurve = 1e-7
	// imitationSteps bounds the steps of one imitation.
	imitationSteps = 200
)

// curves asks of candidates, laid over the study's own ligand values, which of
// them can draw the curves of which. It knows nothing of families: a candidate
// holds the curves of another where it can be fitted to them, free of scatter,
// to within rounding. It is for one goroutine.
type curves struct {
	a    *Analysis
	fits []*fitted
	of   []*imitation // per candidate, made when asked for
	held map[[2]int]bool
}

func newCurves(a *Analysis, fits []*fitted) *curves {
	c := &curves{fits: fits, of: make([]*imitation, len(fits)), held: map[[2]int]bool{}}
	plain := *a
	plain.Data = slices.Clone(a.Data)
	for i := range plain.Data {
		d := &plain.Data[i]
		d.Noise = Constant
		d.Points = slices.Clone(d.Points)
		low, high := math.Inf(1), math.Inf(-1)
		for _, p := range d.Points {
			if p.LeftOut == "" {
				low, high = math.Min(low, p.Y), math.Max(high, p.Y)
			}
		}
		for k := range d.Points {
			d.Points[k].Weight = 1
			if span := high - low; span > 0 {
				d.Points[k].Weight = 1 / (span * span)
			}
		}
	}
	c.a = &plain
	return c
}

// imitation is one candidate fitted to curves without scatter. Residuals are
// relative to the range of the response.
type imitation struct {
	m     *model
	again *fit.Again
	theta []float64 // the candidate's estimate; numbers of a scatter model left out
	last  []float64 // where it last drew other curves
	rank  int       // of the curves' change with the constants; 0: not asked
}

// imitation of candidate i; nil where it cannot be laid over the data.
func (c *curves) imitation(i int) *imitation {
	if c.of[i] != nil {
		return c.of[i]
	}
	f := c.fits[i]
	m, err := newModel(c.a, f.m.c)
	if err != nil || f.result == nil {
		return nil
	}
	if m.shift != nil {
		m.shift.lambda = 1e9
	}
	p := m.problem()
	for bi := range p.Scatter {
		p.Scatter[bi] = fit.Known
	}
	again, err := fit.NewAgain(p, 1e-9)
	if err != nil {
		return nil
	}
	c.of[i] = &imitation{m: m, again: again, theta: f.result.Theta[:len(m.params)]}
	return c.of[i]
}

// curve is what the candidate predicts at θ, point by point.
func (t *imitation) curve(theta []float64) [][]float64 {
	y := make([][]float64, len(t.m.blocks))
	for bi, b := range t.m.blocks {
		b.predict(theta, false)
		y[bi] = make([]float64, len(b.pts))
		for k := range b.pts {
			y[bi][k] = b.predicted(k)
		}
	}
	return y
}

// draws says whether the candidate draws these curves to within rounding, from
// one of the starts.
func (t *imitation) draws(y [][]float64, starts ...[]float64) bool {
	for bi, b := range t.m.blocks {
		b.y = y[bi]
		b.pool = b.noise.gather(b)
	}
	for _, theta := range starts {
		if t.again.From(context.Background(), theta, imitationSteps) == fit.NoAnswer {
			continue
		}
		ss := 0.0
		for _, v := range t.again.SS() {
			ss += v
		}
		if ss <= sameCurve*sameCurve {
			t.last = slices.Clone(t.again.Theta())
			return true
		}
	}
	return false
}

// hold says whether candidate j can draw every curve of candidate i: at its
// estimate, near it, and wherever its fits start.
func (c *curves) hold(j, i int) bool {
	if i == j {
		return true
	}
	key := [2]int{j, i}
	if held, asked := c.held[key]; asked {
		return held
	}
	c.held[key] = c.holds(j, i)
	return c.held[key]
}

func (c *curves) holds(j, i int) bool {
	to, from := c.imitation(j), c.imitation(i)
	if to == nil || from == nil {
		return false
	}
	if c.fits[j].lnL < c.fits[i].lnL-twinLikelihood || to.freedom() < from.freedom() {
		return false // what holds the curves of i fits no worse, and is no less free
	}
	starts := append([][]float64{to.theta}, to.boxed(4, 1)...)
	if !to.draws(from.curve(from.theta), starts...) {
		return false
	}
	elsewhere := append(from.near(c.fits[i], 1, 2), from.boxed(4, 2)...)
	for _, theta := range elsewhere {
		if !to.draws(from.curve(theta), append([][]float64{to.last}, starts...)...) {
			return false
		}
	}
	return true
}

// twins says whether each of two candidates draws the curves of the other, at
// its estimate and around it. Where one is freer elsewhere (a pair of sites that
// may also cooperate positively), it is the constants near the estimate that
// count: those that the data allow. A neighbourhood that crosses to where the
// other cannot follow is made smaller, but not given up.
func (c *curves) twins(i, j int) bool {
	a, b := c.imitation(i), c.imitation(j)
	return a != nil && b != nil && c.follows(a, b, j) && a.freedom() == b.freedom() && c.follows(b, a, i)
}

// follows says whether a draws the curves of b, candidate j, around its estimate.
func (c *curves) follows(a, b *imitation, j int) bool {
	if !a.draws(b.curve(b.theta), a.theta) {
		return false
	}
	from := a.last
	for _, size := range []float64{0.1, 0.02, 0.004} {
		all := true
		for _, theta := range b.near(c.fits[j], size, 3) {
			if !a.draws(b.curve(theta), from) {
				all = false
				break
			}
		}
		if all {
			return true
		}
	}
	return false
}

// near is n constants around the estimate, size standard errors away in the
// directions that the data leave open; inward from an edge.
func (t *imitation) near(f *fitted, size float64, n int) [][]float64 {
	rng := rand.New(rand.NewPCG(7, uint64(len(t.theta))))
	root := f.rootCovariance(len(t.theta))
	out := make([][]float64, n)
	for k := range out {
		theta := slices.Clone(t.theta)
		z := make([]float64, len(theta))
		for i := range z {
			z[i] = rng.NormFloat64()
		}
		for i := range theta {
			p := &t.m.params[i]
			switch {
			case p.Low == p.High:
			case f.result.Edges[i] == fit.OnLow:
				theta[i] += size * t.unit(i)
			case f.result.Edges[i] == fit.OnHigh:
				theta[i] -= size * t.unit(i)
			case root == nil:
				theta[i] += size * z[i] * t.unit(i)
			default:
				for l := range i + 1 {
					theta[i] += size * root.At(i, l) * z[l]
				}
			}
			theta[i] = math.Min(math.Max(theta[i], p.Low), p.High)
		}
		out[k] = theta
	}
	return out
}

// unit is a step of parameter i where the data give none: a part of its starts.
func (t *imitation) unit(i int) float64 {
	p := &t.m.params[i]
	if w := p.StartHigh - p.StartLow; w > 0 {
		return 0.2 * w
	}
	return 0.1 * math.Max(math.Abs(t.theta[i]), 1)
}

// boxed is n constants drawn from where the candidate's fits start.
func (t *imitation) boxed(n int, seed uint64) [][]float64 {
	rng := rand.New(rand.NewPCG(seed, uint64(len(t.theta))))
	out := make([][]float64, n)
	for k := range out {
		out[k] = slices.Clone(t.theta)
		for i := range out[k] {
			if p := &t.m.params[i]; p.Low < p.High && p.StartLow < p.StartHigh {
				out[k][i] = p.StartLow + (p.StartHigh-p.StartLow)*rng.Float64()
			}
		}
	}
	return out
}
