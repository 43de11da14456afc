package saturation

import (
	"cmp"
	"context"
	"maps"
	"math"
	"slices"
	"sort"

	"ligancy/fit"
)

// assess judges one fit by itself: against its replicates, by the runs of its
// residuals, and by how well it foretells concentrations that are left out.
func (f *fitted) assess(ctx context.Context) {
	if !f.answered() {
		return
	}
	e, group := f.standardised()
	pure, groups := fit.PureError(e, group)
	ss := 0.0
	for _, v := range e {
		ss += v * v
	}
	if t, ok := fit.TestLackOfFit(ss, len(e), f.m.free(), pure, groups); ok {
		f.row.LackOfFitP = Real(t.P)
	}
	if t, ok := fit.Runs(f.rowResiduals(e, group)); ok {
		f.row.RunsP = Real(t.Few)
	}
	f.row.PredictionError = f.predictionError(ctx)
}

// standardised are the residuals in relative units, and the number of the
// prediction that each shares with its replicates.
func (f *fitted) standardised() (e []float64, group []int) {
	first := 0
	for _, b := range f.m.blocks {
		dev := f.deviations(b)
		for i, q := range b.pts {
			e = append(e, (b.y[i]-b.predicted(i))/dev[i])
			group = append(group, first+q.row)
		}
		first += len(b.rows)
	}
	return e, group
}

// rowResiduals are the mean residuals of every prediction, curve by curve in
// the order of the ligand.
func (f *fitted) rowResiduals(e []float64, group []int) []float64 {
	type place struct {
		cell int
		x    float64
		sum  float64
	}
	var rows []place
	for _, b := range f.m.blocks {
		for _, q := range b.rows {
			rows = append(rows, place{cell: q.cell, x: q.x})
		}
	}
	for i, g := range group {
		rows[g].sum += e[i]
	}
	sort.SliceStable(rows, func(i, j int) bool {
		if rows[i].cell != rows[j].cell {
			return rows[i].cell < rows[j].cell
		}
		return rows[i].x < rows[j].x
	})
	out := make([]float64, len(rows))
	for i, r := range rows {
		out[i] = r.sum
	}
	return out
}

// predictionError is the root mean square residual of concentrations that the
// constants were not fitted to, each left out in turn from its curve (of a long
// recording, each stretch of neighbours), in the units of the scatter. It does not exist with a shift by preparation, nor with
// two data sets, whose scatters have no common unit.
func (f *fitted) predictionError(ctx context.Context) Real {
	if f.m.shift != nil || len(f.m.blocks) != 1 {
		return nan
	}
	b := f.m.blocks[0]
	at := map[[2]float64]int{}
	group := make([]int, 0, b.Len())
	number := func(q part, x float64) {
		key := [2]float64{float64(q.cell), x}
		if _, ok := at[key]; !ok {
			at[key] = len(at)
		}
		group = append(group, at[key])
	}
	if b.noise.residualCount(b) == len(b.rows) {
		for _, q := range b.rows {
			number(q.part, q.x)
		}
	} else {
		for _, q := range b.pts {
			number(q.part, b.rows[q.row].x)
		}
	}
	stretches(group, at)
	out, err := fit.LeaveOut(ctx, f.problem, f.result, group, fit.RefitSettings{Workers: 1})
	if err != nil || out.N == 0 {
		return nan
	}
	return Real(out.RootMeanSquare() * math.Sqrt(f.relativeSS(b)/f.result.SS[0]))
}

// mostLeftOut bounds how often a mechanism is refitted to ask how it foretells.
const mostLeftOut = 100

// stretches joins neighbouring concentrations of one curve where there are more
// groups than mostLeftOut, so that each is left out with its neighbours. at
// holds the group of each cell and concentration.
func stretches(group []int, at map[[2]float64]int) {
	if len(at) <= mostLeftOut {
		return
	}
	keys := slices.SortedFunc(maps.Keys(at), func(a, b [2]float64) int {
		return cmp.Or(cmp.Compare(a[0], b[0]), cmp.Compare(a[1], b[1]))
	})
	joined := make([]int, len(at))
	for rank, key := range keys {
		joined[at[key]] = rank * mostLeftOut / len(keys)
	}
	for i, g := range group {
		group[i] = joined[g]
	}
}
