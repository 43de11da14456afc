package fit

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"sync"
	"sync/atomic"
)

// LeftOut is how well a model foretells rows that it was not fitted to.
type LeftOut struct {
	SS     float64   // Σ of squared residuals, each from a fit without its group
	N      int       // rows that were foretold
	Groups []float64 // each group's share of SS
	Failed []int     // groups without which nothing can be fitted; they have no share
}

// RootMeanSquare is √(SS/N).
func (l LeftOut) RootMeanSquare() float64 { return math.Sqrt(l.SS / max(float64(l.N), 1)) }

// LeaveOut fits p without each group of rows in turn, from the estimate of r,
// and measures the residuals of the rows left out. group holds the number of
// each row's group, counted from 0 without gaps: rows at one concentration, or
// of one preparation.
//
// Groups that the rest cannot foretell (a parameter of their own) are told by
// what stays undetermined there; it keeps its estimate.
//
// Stone M (1974) J R Stat Soc B 36, 111–147.
func LeaveOut(ctx context.Context, p *Problem, r *Result, group []int,
	set RefitSettings) (LeftOut, error) {

	n, groups, err := p.grouped(r, group)
	if err != nil {
		return LeftOut{}, fmt.Errorf("fit: %w", err)
	}
	set = set.filled(p)
	out := LeftOut{Groups: make([]float64, groups)}
	var next atomic.Int64
	var wg sync.WaitGroup
	for range min(set.Workers, groups) {
		wg.Go(func() {
			s := newSolver(p, p.clonable())
			weight := make([]float64, n)
			for g := int(next.Add(1)) - 1; g < groups; g = int(next.Add(1)) - 1 {
				out.Groups[g] = s.without(ctx, g, group, weight, r.Theta, set)
			}
		})
	}
	wg.Wait()
	out.N = n
	for g, ss := range out.Groups {
		if ss < 0 {
			out.Failed, out.Groups[g] = append(out.Failed, g), 0
			continue
		}
		out.SS += ss
	}
	for _, g := range group {
		if slices.Contains(out.Failed, g) {
			out.N--
		}
	}
	return out, ctx.Err()
}

// grouped checks the groups of rows and counts both.
func (p *Problem) grouped(r *Result, group []int) (rows, groups int, err error) {
	if err := p.Check(); err != nil {
		return 0, 0, err
	}
	rows, _ = p.count()
	if len(group) != rows || len(r.Theta) != len(p.Parameters) {
		return 0, 0, errors.New("groups or result do not belong to the problem")
	}
	for _, g := range group {
		if g < 0 || g >= rows {
			return 0, 0, fmt.Errorf("a group of number %d among %d rows", g, rows)
		}
		groups = max(groups, g+1)
	}
	if groups < 2 {
		return 0, 0, errors.New("nothing is left without the only group")
	}
	return rows, groups, nil
}

// without fits all but one group and returns the sum of squares of that group;
// −1 where nothing can be fitted.
func (s *solver) without(ctx context.Context, g int, group []int, weight, theta []float64,
	set RefitSettings) float64 {

	for i, k := range group {
		weight[i] = 1
		if k == g {
			weight[i] = 0
		}
	}
	s.weight = weight
	for b := range s.count {
		w := weight[s.rows[b]:s.rows[b+1]]
		s.count[b] = dot(w, w)
	}
	if !s.begun(theta) || s.descend(ctx.Done(), set.Offset, set.MaxIter) == failed {
		return -1
	}
	s.weight = nil
	if !s.evaluate(s.cur) {
		return -1
	}
	var ss float64
	for i, k := range group {
		if k == g {
			ss += s.cur.res[i] * s.cur.res[i]
		}
	}
	return ss
}
