package fit

import (
	"context"
	"errors"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Ratio is a likelihood-ratio test of a model that is a special case of another.
type Ratio struct {
	Statistic float64 // 2·(ln L of the freer − ln L of the special)
	Freedom   int     // by how many constants they differ
	// ChiSquare is the probability of a greater statistic under χ² with Freedom
	// degrees of freedom. It has no meaning where the special case lies on a
	// bound of the freer model, or where a constant vanishes in it (one class of
	// sites against two): then use Draws.
	ChiSquare float64
	// Draws is the same probability from replicate data of the special case,
	// (1 + number greater)/(1 + Drawn): 1 where none were drawn.
	Draws float64
	Drawn int
}

// LikelihoodRatio compares results of two models, the second the freer one.
func LikelihoodRatio(special, freer Likelihood) (Ratio, error) {
	d := freer.K - special.K
	if d <= 0 {
		return Ratio{}, errors.New("fit: the freer model has to have more constants")
	}
	if special.N != freer.N {
		return Ratio{}, errors.New("fit: the models were fitted to different data")
	}
	s := max(2*(freer.LnL-special.LnL), 0)
	chi := distuv.ChiSquared{K: float64(d)}
	return Ratio{Statistic: s, Freedom: d, ChiSquare: chi.Survival(s), Draws: 1}, nil
}

// Contest is two models of the same rows: a special case and the freer model.
type Contest struct {
	Special, Freer             *Problem
	SpecialResult, FreerResult *Result
	// FreerStarts are where refits of the freer model start beside its own
	// estimate: the special case in its terms, as a rule.
	FreerStarts [][]float64
}

// LikelihoodRatio tests with a reference distribution from replicate data of
// the special case, to which both models are refitted.
//
// The probability cannot be below 1/(1 + draws). Davison AC & Hinkley DV (1997)
// Bootstrap Methods and their Application, ch. 4.
func (c *Contest) LikelihoodRatio(ctx context.Context, seed uint64,
	set RefitSettings) (Ratio, error) {

	a, okA := c.SpecialResult.Likelihood(c.Special)
	b, okB := c.FreerResult.Likelihood(c.Freer)
	if !okA || !okB {
		return Ratio{}, errors.New("fit: a perfect fit has no likelihood")
	}
	r, err := LikelihoodRatio(a, b)
	if err != nil {
		return r, err
	}
	data, err := Parametric(c.Special, c.SpecialResult, seed)
	if err != nil {
		return r, err
	}
	special, err := Refit(ctx, c.Special, [][]float64{c.SpecialResult.Theta}, data, set)
	if err != nil {
		return r, err
	}
	starts := append([][]float64{c.FreerResult.Theta}, c.FreerStarts...)
	freer, err := Refit(ctx, c.Freer, starts, data, set)
	if err != nil {
		return r, err
	}
	greater := 0
	for i := range special.Status {
		if special.Status[i] == NoAnswer || freer.Status[i] == NoAnswer {
			continue
		}
		r.Drawn++
		if c.statistic(special.Objective[i], freer.Objective[i]) >= r.Statistic {
			greater++
		}
	}
	r.Draws = float64(1+greater) / float64(1+r.Drawn)
	return r, nil
}

// statistic is the likelihood-ratio statistic of two objectives.
func (c *Contest) statistic(special, freer float64) float64 {
	if c.Special.sumOfOneUnknown() {
		return float64(c.SpecialResult.N) * math.Log(special/freer)
	}
	return special - freer
}

// sumOfOneUnknown says whether the objective is a sum of squares of unknown σ.
func (p *Problem) sumOfOneUnknown() bool {
	return len(p.Blocks) == 1 && (p.Scatter == nil || p.Scatter[0] == Unknown)
}
