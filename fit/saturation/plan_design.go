package saturation

import (
	"context"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
)

// choices is how many times a site is chosen, each for p.each readings.
func (p *planner) choices() int {
	if n := p.a.Plan.Points; n > 0 {
		return n
	}
	return planPoints
}

// free are the numbers of the leader that are neither fixed nor on an edge.
func (p *planner) free() []int {
	var all []int
	for j := range p.grid.params {
		if !p.grid.params[j].fixed && p.right.result.Edges[j] == fit.Inside {
			all = append(all, j)
		}
	}
	return all
}

// information is M = Σ g gᵀ/σ² of the readings there are, and g/σ of one at each site.
func (p *planner) information(theta []float64, free []int) (m *mat.SymDense, at []*mat.VecDense) {
	n := len(free)
	m = mat.NewSymDense(n, nil)
	at = make([]*mat.VecDense, len(p.sites))
	isNew := map[[2]int]int{}
	for _, q := range p.added(p.grid, p.everywhere()) {
		isNew[[2]int{q.block, q.point}] = q.site
	}
	for bi, b := range p.grid.blocks {
		b.predict(theta, true)
		for k := range b.pts {
			row := b.work.jHat.RawRowView(b.pts[k].row)
			g := mat.NewVecDense(n, nil)
			i, added := isNew[[2]int{bi, k}]
			sd := p.a.Data[b.data].pointSigma(b.pts[k].index)
			if added {
				sd = p.sites[i].sd
			}
			for c, j := range free {
				g.SetVec(c, row[j]/sd)
			}
			if added {
				at[i] = g
			} else {
				m.SymRankOne(m, 1, g)
			}
		}
	}
	return m, at
}

// pointSigma is the standard deviation of a point; 1 of one that is not there.
func (d *Dataset) pointSigma(index int) float64 {
	if index < len(d.Points) && d.Points[index].Sigma > 0 {
		return d.Points[index].Sigma
	}
	return 1
}

// holdConstants chooses sites one by one, each that which raises the mean of ln det M
// over the draws most, then exchanges until no exchange raises it (Fedorov 1972).
func (p *planner) holdConstants(ctx context.Context) error {
	free := p.free()
	var ms []*mat.SymDense
	var gs [][]*mat.VecDense
	for _, theta := range p.draws {
		m, g := p.information(theta, free)
		for j := range free { // so that a design that holds nothing yet can be begun
			m.SetSym(j, j, m.At(j, j)*(1+1e-12)+1e-12)
		}
		ms, gs = append(ms, m), append(gs, g)
	}
	gain := func(i int, sign float64) float64 { return meanGain(ms, gs, i, sign*float64(p.each)) }
	change := func(i, by int) {
		p.chosen[i] += by * p.each
		for d := range ms {
			ms[d].SymRankOne(ms[d], float64(by*p.each), gs[d][i])
		}
	}
	for range p.choices() {
		change(best(len(p.sites), func(i int) float64 { return gain(i, 1) }), 1)
	}
	for range 10 * p.choices() {
		if ctx.Err() != nil {
			return ctx.Err()
		}
		out := best(len(p.sites), func(i int) float64 {
			if p.chosen[i] == 0 {
				return math.Inf(-1)
			}
			return gain(i, -1)
		})
		loss := gain(out, -1)
		change(out, -1)
		in := best(len(p.sites), func(i int) float64 { return gain(i, 1) })
		if gain(in, 1)+loss < 1e-9 {
			change(out, 1)
			return nil
		}
		change(in, 1)
	}
	return nil
}

// meanGain is the mean over the draws of ln(1 + r gᵀM⁻¹g), what r readings add to ln det M.
func meanGain(ms []*mat.SymDense, gs [][]*mat.VecDense, i int, r float64) float64 {
	sum := 0.0
	for d := range ms {
		var chol mat.Cholesky
		if !chol.Factorize(ms[d]) {
			return math.Inf(-1)
		}
		var v mat.VecDense
		if chol.SolveVecTo(&v, gs[d][i]) != nil && r < 0 {
			return math.Inf(-1)
		}
		sum += math.Log(math.Max(1+r*mat.Dot(gs[d][i], &v), 1e-300))
	}
	return sum / float64(len(ms))
}

// best is the first of n with the greatest worth.
func best(n int, worth func(int) float64) int {
	at, most := 0, math.Inf(-1)
	for i := range n {
		if w := worth(i); w > most {
			at, most = i, w
		}
	}
	return at
}

// discriminate chooses sites one by one, each where the leader's curve and the refitted
// rival's lie furthest apart, on average over the draws, and refits the rival to what the
// leader foretells of all readings so far.
func (p *planner) discriminate(ctx context.Context, rival *fitted, rec Recorder) error {
	p.rival = rival
	grid, err := newModel(p.with(p.everywhere()), rival.m.c)
	if err != nil {
		return err
	}
	p.rivals, p.starts = make([][]float64, len(p.draws)), make([][]float64, len(p.draws))
	n := p.choices()
	for step := 0; ; step++ {
		for d := range p.draws {
			if err := p.refitRival(ctx, grid, d); err != nil {
				return err
			}
		}
		if step == n {
			return nil
		}
		if rec != nil {
			rec.Progress("telling "+rival.row.Name+" apart", step, n)
		}
		i := best(len(p.sites), func(i int) float64 {
			sum := 0.0
			for d := range p.draws {
				apart := (p.leads[d][i] - p.rivals[d][i]) / p.sites[i].sd
				sum += apart * apart
			}
			return sum
		})
		p.chosen[i] += p.each
	}
}

// refitRival fits the rival to the leader's curve at draw d.
func (p *planner) refitRival(ctx context.Context, grid *model, d int) error {
	a := p.with(p.chosen)
	lead, err := newModel(a, p.right.m.c)
	if err != nil {
		return err
	}
	for _, b := range lead.blocks {
		b.predict(p.draws[d], false)
		for k := range b.pts {
			a.Data[b.data].Points[b.pts[k].index].Y = b.predicted(k)
		}
	}
	m, err := newModel(a, p.rival.m.c)
	if err != nil {
		return err
	}
	starts := [][]float64{slices.Clone(p.rival.result.Theta[:len(m.params)])}
	if p.starts[d] != nil {
		starts = append(starts, p.starts[d])
	}
	r, err := refit(ctx, m, starts...)
	if err != nil {
		return err
	}
	p.starts[d], p.rivals[d] = r.Theta, p.responses(grid, r.Theta)
	return nil
}
