package saturation

import (
	"context"
	"math"
	"math/rand/v2"

	"ligancy/fit"
)

// NestedRow compares a mechanism with a freer one that contains it. The χ² law
// does not hold where the special case lies on a bound of the freer one or a
// constant vanishes in it; the draws, studies simulated from the special case
// and refitted by both, hold there too.
type NestedRow struct {
	Special    string `json:"special"`
	Freer      string `json:"freer"`
	Statistic  Real   `json:"statistic"` // 2 (ln L_freer − ln L_special)
	Freedom    int    `json:"freedom"`
	PChiSquare Real   `json:"p_chi_square"`
	PDraws     Real   `json:"p_draws"`
	Draws      int    `json:"draws"`
}

// nestedRows tests every pair of answered candidates of which one is the other
// with more of its constants allowed to differ.
func (a *Analysis) nestedRows(ctx context.Context, fits []*fitted, order []int) []NestedRow {
	var out []NestedRow
	for _, i := range order {
		for _, j := range order {
			if i != j && fits[i].k > fits[j].k && freerThan(fits[i], fits[j]) && fits[j].row.Standing != "out" {
				out = append(out, a.nestedRow(ctx, fits[j], fits[i]))
			}
		}
	}
	return out
}

func (a *Analysis) nestedRow(ctx context.Context, special, freer *fitted) NestedRow {
	row := NestedRow{Special: special.row.Name, Freer: freer.row.Name, PChiSquare: nan, PDraws: nan}
	r, err := fit.LikelihoodRatio(fit.Likelihood{LnL: special.lnL, K: special.k, N: special.row.Points},
		fit.Likelihood{LnL: freer.lnL, K: freer.k, N: freer.row.Points})
	if err != nil {
		return row
	}
	row.Statistic, row.Freedom, row.PChiSquare = Real(r.Statistic), r.Freedom, Real(r.ChiSquare)
	if row.Draws = a.Settings.Draws; row.Draws <= 0 {
		return row
	}
	greater := make([]int, row.Draws) // 1 as great, −1 without an answer
	s := special.simulated()
	start := special.m.carry(special.result.Theta, freer.m)
	a.sideBySide(row.Draws, func() worker {
		one, two := newRefitter(special), newRefitter(freer)
		return worker{better: func() []float64 { return nil }, do: func(k int) {
			if one == nil || two == nil || ctx.Err() != nil {
				greater[k] = -1
				return
			}
			y := s.draw(rand.New(rand.NewPCG(a.Settings.Seed, 1<<42|uint64(k))))
			one.observe(y)
			two.observe(y)
			l1 := one.from(ctx, special.result.Theta)
			l2 := math.Max(two.from(ctx, freer.result.Theta), two.from(ctx, start))
			if 2*(l2-l1) >= r.Statistic {
				greater[k] = 1
			}
		}}
	})
	n, wins := 0, 0
	for _, g := range greater {
		if g >= 0 {
			n++
			wins += g
		}
	}
	row.Draws, row.PDraws = n, Real(float64(1+wins)/float64(1+n))
	return row
}
