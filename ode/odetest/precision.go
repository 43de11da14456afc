package odetest

import (
	"context"
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"time"

	"ligancy/ode"
)

// Row is one integration of a work–precision table.
type Row struct {
	Problem, Solver string
	Rtol, Atol      float64
	Err             error // nil where the end was reached
	// Digits are −log₁₀ of the largest error over components: relative (Scd) or
	// |y − ref|/(floor + |ref|) (Mescd), at the end and the worst of all times.
	ScdEnd, ScdMin, MescdEnd, MescdMin float64
	Stats                              ode.Stats
	Milliseconds                       float64 // of processor time, median
	Final                              []float64
}

// Precision sizes a work–precision table. The zero value works.
type Precision struct {
	Problems []string  // nil: all
	Rtols    []float64 // nil: 1e-3 … 1e-11
	Methods  []ode.Method
	// Repeats is how often each integration is timed; 0 means 9. −1 takes no time.
	Repeats int
	// Options are those of every integration but for method and tolerances.
	Options ode.Options
}

// WorkPrecision integrates the problems with each method and tolerance. Both
// methods are run on problems that are not stiff, Radau alone on the others.
// Cancelling ctx returns the rows done.
func WorkPrecision(ctx context.Context, set Precision) ([]Row, error) {
	if set.Rtols == nil {
		set.Rtols = []float64{1e-3, 1e-4, 1e-5, 1e-6, 1e-7, 1e-8, 1e-9, 1e-10, 1e-11}
	}
	problems := Problems()
	if set.Problems != nil {
		problems = nil
		for _, name := range set.Problems {
			p, err := ByName(name)
			if err != nil {
				return nil, err
			}
			problems = append(problems, p)
		}
	}
	var rows []Row
	for _, p := range problems {
		methods := set.Methods
		if methods == nil {
			methods = []ode.Method{ode.Radau}
			if !p.Stiff {
				methods = append(methods, ode.Explicit)
			}
		}
		for _, m := range methods {
			for _, rtol := range set.Rtols {
				row := set.measure(ctx, p, m, rtol)
				if ctx.Err() != nil {
					return rows, context.Cause(ctx)
				}
				rows = append(rows, row)
			}
		}
	}
	return rows, nil
}

// measure runs one problem at one tolerance.
func (set *Precision) measure(ctx context.Context, p Problem, m ode.Method, rtol float64) Row {
	s := ode.Solver{Options: set.Options}
	s.Options.Method, s.Options.Rtol, s.Options.Atol = m, rtol, rtol*p.Floor
	sys := p.New()
	sol, err := s.Solve(ctx, nil, sys, p.Start, p.Times)
	row := Row{Problem: p.Name, Solver: m.String(), Rtol: rtol, Atol: rtol * p.Floor, Err: err}
	row.Stats = sol.Stats
	if err != nil {
		return row
	}
	row.score(p, sol)
	if set.Repeats < 0 {
		return row
	}
	repeats := set.Repeats
	if repeats == 0 {
		repeats = 9
	}
	again := func() { _, err = s.Solve(ctx, sol, sys, p.Start, p.Times) }
	row.Milliseconds = processorTime(again, repeats)
	return row
}

// processorTime is the median over repeats of the milliseconds of one call. Each
// repeat makes as many calls as fill about four milliseconds.
func processorTime(call func(), repeats int) float64 {
	start := time.Now()
	call()
	calls := int(4*time.Millisecond/max(time.Since(start), time.Microsecond)) + 1
	spent := make([]float64, repeats)
	for i := range spent {
		before := processor()
		for range calls {
			call()
		}
		spent[i] = (processor() - before).Seconds() * 1e3 / float64(calls)
	}
	slices.Sort(spent)
	return spent[len(spent)/2]
}

// score compares a solution with the reference.
func (r *Row) score(p Problem, sol *ode.Solution) {
	var rel, mixed, relEnd, mixedEnd float64
	for k, ref := range p.Reference {
		relEnd, mixedEnd = 0, 0
		for i, v := range ref {
			d, a := math.Abs(sol.States[k+1][i]-v), math.Abs(v)
			e := d / a
			if p.Name == "arenstorf" && a < 1e-10 {
				e = d
			}
			relEnd, mixedEnd = max(relEnd, e), max(mixedEnd, d/(p.Floor+a))
		}
		rel, mixed = max(rel, relEnd), max(mixed, mixedEnd)
	}
	r.ScdEnd, r.ScdMin = -math.Log10(relEnd), -math.Log10(rel)
	r.MescdEnd, r.MescdMin = -math.Log10(mixedEnd), -math.Log10(mixed)
	r.Final = slices.Clone(sol.States[len(sol.States)-1])
}

// WriteRows writes rows as a table of comma-separated values, the final state last.
func WriteRows(w io.Writer, rows []Row) error {
	head := []string{"problem", "solver", "rtol", "atol", "status", "scd_end", "scd_min", "mescd_end",
		"mescd_min", "steps", "rhs", "jac", "lu", "newton", "cpu_ms"}
	most := 0
	for _, r := range rows {
		most = max(most, len(r.Final))
	}
	for i := range most {
		head = append(head, fmt.Sprintf("y%d", i+1))
	}
	c := csv.NewWriter(w)
	if err := c.Write(head); err != nil {
		return err
	}
	for _, r := range rows {
		cells := r.cells()
		for len(cells) < len(head) {
			cells = append(cells, "")
		}
		if err := c.Write(cells); err != nil {
			return err
		}
	}
	c.Flush()
	return c.Error()
}

func (r *Row) cells() []string {
	status := "ok"
	if r.Err != nil {
		status = r.Err.Error()
	}
	cells := []string{r.Problem, r.Solver, fmt.Sprintf("%.0e", r.Rtol), fmt.Sprintf("%.3g", r.Atol), status}
	for _, v := range []float64{r.ScdEnd, r.ScdMin, r.MescdEnd, r.MescdMin} {
		if r.Err != nil {
			cells = append(cells, "")
			continue
		}
		cells = append(cells, strconv.FormatFloat(v, 'f', 2, 64))
	}
	st := r.Stats
	for _, v := range []int{
		st.Steps, st.Evaluations + st.Differences, st.Jacobians, st.Factorisations, st.Iterations,
	} {
		cells = append(cells, strconv.Itoa(v))
	}
	time := ""
	if r.Milliseconds > 0 {
		time = strconv.FormatFloat(r.Milliseconds, 'f', 4, 64)
	}
	cells = append(cells, time)
	for _, v := range r.Final {
		cells = append(cells, strconv.FormatFloat(v, 'g', -1, 64))
	}
	return cells
}
