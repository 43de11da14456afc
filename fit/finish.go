package fit

import (
	"fmt"
	"math"
)

// result reports the current point.
func (s *solver) result(end ending) *Result {
	pt := s.cur
	r := &Result{
		Theta:     append([]float64(nil), pt.theta...),
		Edges:     make([]Edge, s.p),
		Objective: pt.obj,
		SS:        append([]float64(nil), pt.ss...),
		Residuals: append([]float64(nil), pt.res...),
		Offset:    s.offset,
		Evals:     s.evals,
	}
	for _, c := range s.count {
		r.N += int(c)
	}
	for j := range r.Edges {
		switch {
		case s.low[j] == s.high[j]:
			continue
		case pt.theta[j] == s.low[j]:
			r.Edges[j] = OnLow
		case pt.theta[j] == s.high[j]:
			r.Edges[j] = OnHigh
		default:
			r.Free++
		}
		r.Constants++
	}
	r.Status = s.status(end)
	switch end {
	case stalled:
		r.warn("no step lowers the objective, yet it is not stationary (relative offset %.2g)", r.Offset)
	case exhausted:
		r.warn("out of iterations (relative offset %.2g)", r.Offset)
	case interrupted:
		r.warn("interrupted: the best so far")
	}
	s.scatter(r)
	s.covariance(r)
	return r
}

// scatter estimates the standard deviation of each block.
func (s *solver) scatter(r *Result) {
	r.Sigma = make([]float64, len(s.blocks))
	n := float64(r.N)
	nu := n - float64(r.Constants)
	for b := range s.blocks {
		switch {
		case s.known[b]:
			r.Sigma[b] = 1
		case nu > 0 && s.count[b] > 0:
			r.Sigma[b] = math.Sqrt(r.SS[b] / s.count[b] * n / nu)
		}
	}
	if nu <= 0 {
		r.warn("as many parameters as residuals: the scatter cannot be estimated")
		return
	}
	for b, ss := range r.SS {
		if !s.known[b] && ss <= s.floor[b] && s.count[b] > 0 {
			r.warn("block %d is fitted perfectly: its scatter cannot be estimated", b+1)
		}
	}
}

func (r *Result) warn(format string, a ...any) {
	r.Warnings = append(r.Warnings, fmt.Sprintf(format, a...))
}

// count says how many runs reached the minimum of r, up to slack.
func (r *Result) count(runs []*run, slack float64) {
	r.Evals = 0
	for _, a := range runs {
		if a.end == failed && a.evals == 0 {
			continue
		}
		r.Starts++
		r.Evals += a.evals
		if a.end != failed && a.obj-r.Objective <= slack {
			r.Agreeing++
		}
	}
	if r.Starts >= 10 && r.Agreeing <= r.Starts/20 {
		r.warn("only %d of %d starts reached this minimum: there may be a lower one",
			r.Agreeing, r.Starts)
	}
}

// slack is by how much an objective may lie above that of a minimum and still
// be called the same: 1e-6 of the sums of squares.
func (s *solver) slack(obj float64) float64 {
	if !s.joint {
		return 1e-6 * math.Abs(obj)
	}
	return 1e-6 * sum(s.count)
}

func sum(v []float64) float64 {
	var t float64
	for _, x := range v {
		t += x
	}
	return t
}
