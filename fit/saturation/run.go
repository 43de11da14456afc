package saturation

import (
	"context"
	"errors"
	"math"
	"runtime"
	"strconv"
	"sync"

	"gonum.org/v1/gonum/stat/distuv"

	"ligancy/fit"
)

// Run fits every candidate, compares them, and says what the data support.
// When ctx ends early, what was found so far is returned, marked Interrupted.
func (a *Analysis) Run(ctx context.Context, rec Recorder) (*Outcome, error) {
	if len(a.Candidates) == 0 {
		return nil, errors.New("no mechanism to try")
	}
	a = a.withDefaults()
	out := &Outcome{Defaults: a.defaults()}
	fits := a.fitAll(ctx, rec)
	rows := a.allQuantities(ctx, fits, rec)
	order := a.compare(ctx, fits, rec)
	a.bootstrap(ctx, fits, rows, rec)
	for _, f := range fits {
		f.assess(ctx)
	}
	out.Nested = a.nestedRows(ctx, fits, order)
	report(out, fits, rows)
	out.Preparations = a.preparationRows(ctx)
	out.Factors = a.factorRows(ctx, fits)
	if len(order) > 0 {
		out.Profiles = a.profileRows(ctx, fits[order[0]])
	}
	out.Quantities = append(out.Quantities, a.verdictRows(ctx, out.Quantities, fits, order)...)
	a.asked(ctx, out, fits, order)
	out.Interrupted = ctx.Err() != nil
	out.Verdict = a.verdict(out, fits, order)
	return out, nil
}

// compare ranks the fits, gives each its standing, and finds the intervals of
// n_H of those that are not out.
func (a *Analysis) compare(ctx context.Context, fits []*fitted, rec Recorder) (order []int) {
	c := newCurves(a, fits)
	order = rank(fits, c)
	stand(fits, order)
	d := &decider{a: a, fits: fits, order: order, draws: a.Settings.Draws, rec: rec, curves: c}
	d.decide(ctx)
	for n, i := range order {
		fits[i].holdsLead = n > 0 && fits[i].row.Standing == "open" && c.hold(i, order[0])
	}
	a.slopes(ctx, fits, order)
	return order
}

// withDefaults is the analysis with every setting settled.
func (a *Analysis) withDefaults() *Analysis {
	b := *a
	if b.Settings.Starts == 0 {
		b.Settings.Starts = 50
	}
	if b.Settings.Seed == 0 {
		b.Settings.Seed = 1
	}
	if b.Settings.Level == 0 {
		b.Settings.Level = 0.95
	}
	if b.Settings.Method == "" {
		b.Settings.Method = "profile"
	}
	if b.Settings.Workers == 0 {
		b.Settings.Workers = runtime.GOMAXPROCS(0)
	}
	return &b
}

// defaults says what is in force beyond the study's own words.
func (a *Analysis) defaults() map[string]string {
	d := map[string]string{
		"tie": "within " + strconv.Itoa(tieWidth) + " of the lowest AICc",
		"out": drawsWords(a.Settings.Draws),
	}
	if a.Settings.Bootstrap.Draws > 0 {
		d["bootstrap"] = "of the mechanisms that are not out"
	}
	for i := range a.Data {
		switch a.Data[i].Noise {
		case Proportional, Mixed:
			d["floor of proportional scatter"] = "1 % of the largest response"
		case StudentT:
			d["degrees of freedom of Student's t"] = number(studentFreedom)
		}
	}
	return d
}

// fitAll fits the candidates one after another, each with all workers.
func (a *Analysis) fitAll(ctx context.Context, rec Recorder) []*fitted {
	fits := make([]*fitted, len(a.Candidates))
	for i := range a.Candidates {
		if rec != nil {
			rec.Progress("fitting "+a.Candidates[i].Name, i, len(a.Candidates))
		}
		fits[i] = a.fitCandidate(ctx, &a.Candidates[i], fit.Settings{
			Starts: a.Settings.Starts, Seed: a.Settings.Seed, Workers: a.Settings.Workers})
	}
	return fits
}

// allQuantities finds the numbers of every fit.
func (a *Analysis) allQuantities(ctx context.Context, fits []*fitted, rec Recorder) [][]QuantityRow {
	rows := make([][]QuantityRow, len(fits))
	for i, f := range fits {
		if rec != nil {
			rec.Progress("intervals of "+f.row.Name, i, len(fits))
		}
		rows[i] = a.quantities(ctx, f)
	}
	return rows
}

// report fills the rows of the outcome.
func report(out *Outcome, fits []*fitted, rows [][]QuantityRow) {
	for i, f := range fits {
		out.Mechanisms = append(out.Mechanisms, f.row)
		out.Quantities = append(out.Quantities, rows[i]...)
		if f.result == nil {
			continue
		}
		out.Points = append(out.Points, f.pointRows()...)
		out.Curves = append(out.Curves, f.curveRows()...)
		out.Correlations = append(out.Correlations, f.correlationRows()...)
		out.Populations = append(out.Populations, f.populationRows()...)
	}
}

// quantities finds every number of one fit with its interval, side by side.
// Where a profile meets a better minimum, the fit moves there and all is found again.
func (a *Analysis) quantities(ctx context.Context, f *fitted) []QuantityRow {
	if f.result == nil {
		return nil
	}
	for range 3 {
		list := f.wantedRows()
		rows := make([]QuantityRow, len(list), len(list)+len(f.m.cells))
		better := a.sideBySide(len(list), func() worker {
			pr := f.profiler(a.Settings.Level)
			return worker{
				do: func(i int) { rows[i] = f.withInterval(ctx, list[i], pr) },
				better: func() []float64 {
					if pr == nil {
						return nil
					}
					return pr.Better()
				},
			}
		})
		if !f.moveTo(ctx, better) {
			return append(append(rows, f.readings(ctx)...), f.combinationRows(ctx)...)
		}
	}
	return nil
}

// worker is one goroutine's share of the intervals.
type worker struct {
	do     func(i int)
	better func() []float64
}

// sideBySide runs n tasks over the workers and returns the better minima that
// they met.
func (a *Analysis) sideBySide(n int, start func() worker) [][]float64 {
	workers := min(a.Settings.Workers, n)
	better := make([][]float64, workers)
	var wg sync.WaitGroup
	next := make(chan int)
	for k := range workers {
		wg.Go(func() {
			w := start()
			for i := range next {
				w.do(i)
			}
			better[k] = w.better()
		})
	}
	for i := range n {
		next <- i
	}
	close(next)
	wg.Wait()
	return better
}

// moveTo refits from better minima and says whether the fit moved.
func (f *fitted) moveTo(ctx context.Context, better [][]float64) bool {
	moved := false
	for _, theta := range better {
		if theta == nil || ctx.Err() != nil {
			continue
		}
		p := *f.problem
		p.Starts = [][]float64{theta}
		r, err := fit.Solve(ctx, &p, fit.Settings{Starts: 1, Workers: 1})
		if err == nil && r != nil && r.Objective < f.result.Objective {
			r.Starts, r.Agreeing = f.result.Starts, 1
			f.result = r
			f.describe()
			moved = true
		}
	}
	return moved
}

// wantedRows lists all numbers of a fit in the order of results: constants,
// response, Hill coefficients, positions and energy per curve, contrasts.
func (f *fitted) wantedRows() []wanted {
	var list []wanted
	restated := f.m.restated(f.result.Theta)
	for i, p := range f.m.params {
		if p.kind == ofShift {
			continue
		}
		if p.kind != ofConstant || restated == nil {
			list = append(list, f.m.parameterWanted(i))
		}
	}
	list = append(restated, list...)
	for _, c := range f.m.curveCells() {
		list = append(list, f.m.curveWanted(c)...)
		list = append(list, f.m.totalWanted(c)...)
		list = append(list, f.m.displacementWanted(c)...)
	}
	return append(list, f.m.contrastsWanted()...)
}

// readings are the rows of what a Hill fit would say, curve by curve.
func (f *fitted) readings(ctx context.Context) []QuantityRow {
	var out []QuantityRow
	if s := f.m.shift; s != nil {
		out = append(out, QuantityRow{Mechanism: f.m.c.Name, Curve: "all", Of: "noise", Name: "SD of ln K between preparations", Unit: "1",
			Value: Real(s.tau), Low: nan, High: nan, Level: nan, Interval: "none", Held: "neither",
			Why: text("no interval: found with the fit, by likelihood (Laplace)")})
	}
	level := f.m.a.Settings.Level
	for _, c := range f.m.curveCells() {
		h := f.hillReadingOf(ctx, c)
		row := QuantityRow{Mechanism: f.m.c.Name, Curve: f.m.cells[c].label, Of: "hill", Name: "n_H_hill_reading", Unit: "1",
			Value: Real(h.h), Low: nan, High: nan, Level: nan, Interval: "none", Held: "neither"}
		switch {
		case h.why != "":
			row.Why = text(h.why)
			if h.h == 0 {
				row.Value = nan
			}
		case !math.IsNaN(h.se):
			t := f.critical(level)
			row.Low, row.High, row.Level = Real(h.h-t*h.se), Real(h.h+t*h.se), Real(level)
			row.Interval, row.Held = "covariance", "both"
		}
		out = append(out, row)
	}
	return out
}

// critical is the two-sided Student quantile at the fit's degrees of freedom
// (normal where the scatter is known).
func (f *fitted) critical(level float64) float64 {
	p := 0.5 + level/2
	known := true
	for _, b := range f.m.blocks {
		known = known && b.noise.scatter() == fit.Known
	}
	if known {
		return distuv.UnitNormal.Quantile(p)
	}
	nu := float64(f.row.Points - f.m.free())
	if nu < 1 {
		return math.NaN()
	}
	return distuv.StudentsT{Mu: 0, Sigma: 1, Nu: nu}.Quantile(p)
}
