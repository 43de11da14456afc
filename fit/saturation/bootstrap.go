package saturation

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"sort"
	"strings"

	"ligancy/fit"
)

// How studies are drawn anew. The unit of replication is the preparation: a
// bootstrap over points speaks of repeated readings only.
const (
	byParametric = "parametric"
	byResidual   = "residual"
)

// enoughDraws is the share of draws that must have an answer before their
// quantiles are printed.
const enoughDraws = 0.9

// bootstrap adds bootstrap rows to the mechanisms that are not out.
func (a *Analysis) bootstrap(ctx context.Context, fits []*fitted, rows [][]QuantityRow, rec Recorder) {
	if a.Settings.Bootstrap.Draws <= 0 {
		return
	}
	for i, f := range fits {
		if rec != nil {
			rec.Progress("drawing studies anew from "+f.row.Name, i, len(fits))
		}
		if f.row.Standing != "out" {
			rows[i] = append(rows[i], f.bootstrapRows(ctx)...)
		}
	}
}

// bootstrapRows gives every number of a fit a bootstrap interval (percentiles;
// Efron & Tibshirani 1993), where the study asks for one. Draw k depends on the
// study's number and on k alone.
func (f *fitted) bootstrapRows(ctx context.Context) []QuantityRow {
	b := f.m.a.Settings.Bootstrap
	if b.Draws <= 0 || f.result == nil || !f.answered() {
		return nil
	}
	var list []wanted
	for _, w := range f.wantedRows() {
		if v := w.make()(f.result.Theta, make([]float64, len(f.m.params))); math.IsNaN(v) {
			continue
		}
		if b.By == byPreparation && strings.Contains(w.row.Curve, byPreparation+" ") {
			continue // a preparation's own numbers say nothing beyond it
		}
		list = append(list, w)
	}
	values := make([][]float64, b.Draws)
	drawer, why := f.drawers(b.By)
	if why == "" {
		f.m.a.sideBySide(b.Draws, func() worker {
			draw := drawer()
			return worker{
				do: func(k int) {
					if ctx.Err() == nil {
						values[k] = draw(ctx, k, list)
					}
				},
				better: func() []float64 { return nil },
			}
		})
	}
	rows := make([]QuantityRow, 0, len(list))
	for i, w := range list {
		rows = append(rows, bootstrapRow(w, f.m.a.Settings.Level, column(values, i), b, why))
	}
	return rows
}

// drawer makes one draw: values of the wanted numbers, or nil without an
// answer. It is for one goroutine.
type drawer func(ctx context.Context, k int, list []wanted) []float64

// drawers is how a study is drawn anew: something that makes drawers, or why not.
func (f *fitted) drawers(by string) (func() drawer, string) {
	switch by {
	case byParametric, byResidual, "":
		return f.drawPoints(by == byResidual), ""
	case byPreparation:
		if n := len(f.m.a.levels(byPreparation)); n < 2 {
			return nil, "a bootstrap by preparation needs at least two preparations"
		}
		return func() drawer { return f.drawPreparations }, ""
	}
	return nil, fmt.Sprintf("a bootstrap by %q is not known", by)
}

// drawPoints draws new values at the same places: from the scatter model, or
// from the fit's own residuals with replacement, inflated by √(N/(N−p)).
func (f *fitted) drawPoints(residual bool) func() drawer {
	s := f.simulated()
	if residual {
		s.residuals = f.residualPools()
	}
	return func() drawer {
		r := newRefitter(f)
		return func(ctx context.Context, k int, list []wanted) []float64 {
			if r == nil {
				return nil
			}
			r.observe(s.draw(rand.New(rand.NewPCG(f.m.a.Settings.Seed, 1<<40|uint64(k)))))
			if math.IsInf(r.from(ctx, f.result.Theta), -1) {
				return nil
			}
			return valuesAt(list, r.theta)
		}
	}
}

// simulated is the predictions and absolute deviations of a fit, block by
// block; with residuals, draws take theirs from them.
type simulated struct {
	mean, sd  [][]float64
	residuals [][]float64 // in units of sd
}

func (f *fitted) simulated() *simulated {
	s := &simulated{}
	for bi, b := range f.m.blocks {
		dev := f.deviations(b)
		sigma := f.blockSigma(bi)
		mean := make([]float64, len(b.pts))
		for i := range mean {
			mean[i] = b.predicted(i)
			dev[i] *= sigma
		}
		s.mean, s.sd = append(s.mean, mean), append(s.sd, dev)
	}
	return s
}

// residualPools are the fit's own residuals in units of their deviations.
func (f *fitted) residualPools() [][]float64 {
	n, p := float64(f.row.Points), float64(f.m.free())
	inflate := math.Sqrt(n / math.Max(1, n-p))
	pools := make([][]float64, len(f.m.blocks))
	for bi, b := range f.m.blocks {
		dev, sigma := f.deviations(b), f.blockSigma(bi)
		for i := range b.pts {
			pools[bi] = append(pools[bi], inflate*(b.y[i]-b.predicted(i))/(sigma*dev[i]))
		}
	}
	return pools
}

// draw is one study's values.
func (s *simulated) draw(rng *rand.Rand) [][]float64 {
	y := make([][]float64, len(s.mean))
	for bi := range y {
		y[bi] = make([]float64, len(s.mean[bi]))
		for i := range y[bi] {
			z := 0.0
			if s.residuals != nil {
				z = s.residuals[bi][rng.IntN(len(s.residuals[bi]))]
			} else {
				z = rng.NormFloat64()
			}
			y[bi][i] = s.mean[bi][i] + s.sd[bi][i]*z
		}
	}
	return y
}

// valuesAt evaluates the wanted numbers on the printed scale.
func valuesAt(list []wanted, theta []float64) []float64 {
	out := make([]float64, len(list))
	grad := make([]float64, len(theta))
	for i := range list {
		out[i] = list[i].back(list[i].make()(theta, grad))
	}
	return out
}

// drawPreparations draws as many preparations as there are, with replacement,
// all points of one together, and fits them.
func (f *fitted) drawPreparations(ctx context.Context, k int, list []wanted) []float64 {
	names := f.m.a.levels(byPreparation)
	rng := rand.New(rand.NewPCG(f.m.a.Settings.Seed, 1<<41|uint64(k)))
	times := map[string]int{}
	for range names {
		times[names[rng.IntN(len(names))]]++
	}
	a := *f.m.a
	a.Data = slices.Clone(f.m.a.Data)
	for di := range a.Data {
		var pts []Point
		for _, p := range f.m.a.Data[di].Points {
			for range times[p.Preparation] {
				pts = append(pts, p)
			}
		}
		a.Data[di].Points = pts
	}
	m, err := newModel(&a, f.m.c)
	if err != nil {
		return nil
	}
	g := &fitted{m: m, twinOf: -1}
	g.problem = m.problem()
	g.problem.Starts = [][]float64{f.m.carry(f.result.Theta, m)}
	for i := range g.problem.Parameters {
		g.problem.Parameters[i].StartLow, g.problem.Parameters[i].StartHigh = math.NaN(), math.NaN()
	}
	r, err := g.solve(ctx, fit.Settings{Starts: 1, Workers: 1})
	if err != nil || r == nil || r.Status == fit.NoAnswer || r.Status == fit.Stopped {
		return nil
	}
	g.result = r
	return matched(list, g.wantedRows(), r.Theta)
}

// carry brings θ into another layout of the same candidate; what the other has
// and this has not starts in the middle of its range.
func (m *model) carry(theta []float64, to *model) []float64 {
	out := to.firstStarts()[0]
	for i, p := range to.params {
		for j, q := range m.params {
			if p.kind == q.kind && p.constant == q.constant && p.quantity == q.quantity && p.data == q.data && p.curve == q.curve {
				out[i] = theta[j]
			}
		}
	}
	return out
}

// matched evaluates the numbers of another layout in the order of list; what is
// not there is NaN.
func matched(list, other []wanted, theta []float64) []float64 {
	at := map[string]int{}
	for i := range other {
		at[other[i].key()] = i
	}
	out := make([]float64, len(list))
	grad := make([]float64, len(theta))
	for i := range list {
		out[i] = math.NaN()
		if j, ok := at[list[i].key()]; ok {
			out[i] = other[j].back(other[j].make()(theta, grad))
		}
	}
	return out
}

// key tells the numbers of one mechanism apart.
func (w *wanted) key() string {
	s := w.row.Of + "\x00" + w.row.Name + "\x00" + w.row.Curve
	for _, p := range []*string{w.row.Ligand, w.row.Site} {
		s += "\x00"
		if p != nil {
			s += *p
		}
	}
	return s
}

// column gathers number i of all draws, sorted; draws without an answer and
// values that do not exist are left out.
func column(values [][]float64, i int) []float64 {
	var out []float64
	for _, v := range values {
		if v != nil && !math.IsNaN(v[i]) {
			out = append(out, v[i])
		}
	}
	sort.Float64s(out)
	return out
}

// bootstrapRow is one number with its percentile interval.
func bootstrapRow(w wanted, level float64, sorted []float64, b Bootstrap, why string) QuantityRow {
	row := w.row
	row.Value, row.Low, row.High, row.Level = nan, nan, nan, nan
	row.Interval, row.Held = "bootstrap", "neither"
	if why == "" && float64(len(sorted)) < enoughDraws*float64(b.Draws) {
		why = fmt.Sprintf("only %d of %d draws have an answer", len(sorted), b.Draws)
	}
	if why != "" {
		row.Why = text(why)
		return row
	}
	low, high := quantile(sorted, (1-level)/2), quantile(sorted, (1+level)/2)
	row.Value, row.Low, row.High, row.Level = finite(quantile(sorted, 0.5)), finite(low), finite(high), Real(level)
	row.Held = held(math.IsInf(low, 0), math.IsInf(high, 0))
	return row
}

// quantile interpolates linearly between order statistics (Hyndman & Fan 1996, type 7).
func quantile(sorted []float64, p float64) float64 {
	if len(sorted) == 0 {
		return math.NaN()
	}
	h := p * float64(len(sorted)-1)
	i := int(h)
	if i+1 >= len(sorted) || sorted[i] == sorted[i+1] {
		return sorted[i]
	}
	return sorted[i] + (h-float64(i))*(sorted[i+1]-sorted[i])
}
