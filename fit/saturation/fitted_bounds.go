package saturation

import (
	"context"
	"math"

	"ligancy/fit"
)

// boundSlack is by how much, relative to its size, an objective on a bound may
// lie above that of a descent which never arrived.
const boundSlack = 1e-5

// ontoBounds finishes a descent that creeps towards a bound without arriving:
// where the sum of squares falls for ever as a constant grows or shrinks, the
// least of it lies on that constant's bound, and is an answer like any other.
// The lowest minimum found with one constant started on one of its bounds is
// taken, if it is as low; else r itself is returned.
func (f *fitted) ontoBounds(ctx context.Context, r *fit.Result) *fit.Result {
	best := r
	limit := r.Objective + boundSlack*f.objectiveUnit(r)
	for i, q := range f.problem.Parameters {
		if q.Linear || q.Low == q.High {
			continue
		}
		for _, v := range []float64{q.Low, q.High} {
			if math.IsInf(v, 0) || ctx.Err() != nil {
				continue
			}
			s := f.throughBound(ctx, r.Theta, i, v)
			if s == nil || s.Status != fit.Converged && s.Status != fit.AtEdge {
				continue
			}
			if s.Objective <= limit {
				limit = s.Objective
				s.Starts, s.Agreeing = r.Starts, r.Agreeing
				best = s
			}
		}
	}
	return best
}

// throughBound fits everything else with one constant held at v, then all from there.
func (f *fitted) throughBound(ctx context.Context, theta []float64, i int, v float64) *fit.Result {
	once := fit.Settings{Starts: 1, Workers: 1, MaxIter: 200}
	start := append([]float64(nil), theta...)
	start[i] = v
	p := *f.problem
	p.Starts = [][]float64{start}
	p.Parameters = append([]fit.Parameter(nil), p.Parameters...)
	p.Parameters[i].Low, p.Parameters[i].High = v, v
	r, err := fit.Solve(ctx, &p, once)
	if err != nil || r == nil || r.Status == fit.NoAnswer {
		return nil
	}
	p.Parameters = f.problem.Parameters
	p.Starts = [][]float64{r.Theta}
	r, err = fit.Solve(ctx, &p, once)
	if err != nil {
		return nil
	}
	return r
}

// objectiveUnit is the size against which a change of the objective is small:
// its own where it is a sum of squares, else the number of points.
func (f *fitted) objectiveUnit(r *fit.Result) float64 {
	if len(f.problem.Blocks) == 1 {
		return math.Abs(r.Objective)
	}
	return float64(r.N)
}
