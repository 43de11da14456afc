package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"slices"
	"sync"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"

	"ligancy/mechanisms"
)

// odds simulates the planned readings from the leader and from the rival, adds them to
// the readings there are, refits both and counts how often the right one has the lower
// AICc.
func (p *planner) odds(ctx context.Context, rec Recorder) ([]OddsRow, error) {
	var rows []OddsRow
	for n, truth := range []*fitted{p.right, p.rival} {
		other := p.rival
		if n == 1 {
			other = p.right
		}
		if rec != nil {
			rec.Progress("carrying the plan out on paper", n, 2)
		}
		right := make([]bool, planStudies)
		faults := make([]error, planStudies)
		var wait sync.WaitGroup
		workers := max(1, p.a.Settings.Workers)
		for w := range workers {
			wait.Go(func() {
				for k := w; k < planStudies && ctx.Err() == nil; k += workers {
					right[k], faults[k] = p.study(ctx, truth, other, uint64(2*k+n))
				}
			})
		}
		wait.Wait()
		if ctx.Err() != nil {
			return nil, ctx.Err()
		}
		row := OddsRow{Right: truth.row.Name}
		won := 0
		for k := range right {
			if faults[k] == nil {
				row.Studies++
				if right[k] {
					won++
				}
			}
		}
		row.Chosen = Real(float64(won) / float64(row.Studies))
		rows = append(rows, row)
	}
	return rows, nil
}

// study draws one set of new readings from truth and says whether it then has the lower AICc.
func (p *planner) study(ctx context.Context, truth, other *fitted, k uint64) (bool, error) {
	rng := rand.New(rand.NewPCG(p.a.Settings.Seed+1, k))
	a := p.with(p.chosen)
	m, err := newModel(a, truth.m.c)
	if err != nil {
		return false, err
	}
	theta := slices.Clone(truth.result.Theta[:len(m.params)])
	if root := covarianceRoot(truth.result); root != nil {
		theta = drawn(m, theta, root, rng)
	}
	for _, b := range m.blocks {
		b.predict(theta, false)
	}
	for _, q := range p.added(m, p.chosen) {
		b := m.blocks[q.block]
		a.Data[b.data].Points[b.pts[q.point].index].Y = b.predicted(q.point) + p.sites[q.site].sd*rng.NormFloat64()
	}
	mine, err := p.criterion(ctx, a, truth, theta)
	if err != nil {
		return false, err
	}
	theirs, err := p.criterion(ctx, a, other, nil)
	return mine < theirs, err
}

// criterion is AICc of a mechanism fitted to an analysis whose standard deviations are known.
func (p *planner) criterion(ctx context.Context, a *Analysis, f *fitted, start []float64) (float64, error) {
	m, err := newModel(a, f.m.c)
	if err != nil {
		return math.NaN(), err
	}
	starts := [][]float64{slices.Clone(f.result.Theta[:len(m.params)])}
	if start != nil {
		starts = append(starts, start)
	}
	r, err := refit(ctx, m, starts...)
	if err != nil {
		return math.NaN(), err
	}
	chi2 := 0.0
	for _, ss := range r.SS {
		chi2 += ss
	}
	aicc, ok := akaike(-chi2/2, m.free(), m.points())
	if !ok {
		return chi2 + 2*float64(m.free()), nil // both mechanisms then lack the correction, or have it
	}
	return aicc, nil
}

// precision is how firmly each free number of the leader is held, now and once the plan
// is carried out: by the covariance at the best constants.
func (p *planner) precision() []PrecisionRow {
	free := p.free()
	now, at := p.information(p.draws[0], free)
	after := mat.NewSymDense(len(free), nil)
	after.CopySym(now)
	for i, n := range p.chosen {
		if n > 0 {
			after.SymRankOne(after, float64(n), at[i])
		}
	}
	z := distuv.UnitNormal.Quantile((1 + p.a.Settings.Level) / 2)
	before, then := halfWidths(now, z), halfWidths(after, z)
	rows := []PrecisionRow{}
	for c, j := range free {
		q := &p.grid.params[j]
		row := PrecisionRow{Name: q.Name, Curve: q.curve, Now: Real(before[c]), After: Real(then[c])}
		if q.kind == ofConstant && p.grid.consts[q.constant].Scale == mechanisms.Log {
			row.Factor = true
			row.Now, row.After = Real(math.Exp(before[c])), Real(math.Exp(then[c]))
		}
		rows = append(rows, row)
	}
	return rows
}

// halfWidths are z standard errors; NaN where the information has no inverse.
func halfWidths(m *mat.SymDense, z float64) []float64 {
	n := m.SymmetricDim()
	out := make([]float64, n)
	var chol mat.Cholesky
	if !chol.Factorize(m) {
		for i := range out {
			out[i] = math.NaN()
		}
		return out
	}
	var inverse mat.SymDense
	if err := chol.InverseTo(&inverse); err != nil {
		return out
	}
	for i := range out {
		out[i] = z * math.Sqrt(inverse.At(i, i))
	}
	return out
}
