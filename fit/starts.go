package fit

import (
	"math/rand/v2"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/spatial/r1"
	"gonum.org/v1/gonum/stat/distmv"
	"gonum.org/v1/gonum/stat/samplemv"
)

// starts lays out the θ at which Solve begins: those of the problem first, then
// points of Halton's sequence, scrambled after Owen by the number that
// Settings.Seed gives, in the box of those parameters that have one. The others
// stand where the problem's first start has them, else in the middle.
//
// Halton JH (1960) Numer Math 2, 84–90; Owen AB (2017) arXiv 1706.02808.
func starts(p *Problem, number int, seed uint64) [][]float64 {
	all := append([][]float64(nil), p.Starts...)
	base := middle(p)
	if len(all) > 0 {
		base = all[0]
	}
	var boxed []int
	var box []r1.Interval
	for j, q := range p.Parameters {
		if q.Low < q.High && !q.Linear && q.StartLow < q.StartHigh {
			boxed = append(boxed, j)
			box = append(box, r1.Interval{Min: q.StartLow, Max: q.StartHigh})
		}
	}
	drawn := number - len(all)
	if len(boxed) == 0 {
		drawn = 0
		if len(all) == 0 {
			all = append(all, base)
		}
	}
	if drawn <= 0 {
		return all
	}
	u := mat.NewDense(drawn, len(boxed), nil)
	samplemv.Halton{
		Kind: samplemv.Owen,
		Q:    distmv.NewUniform(box, nil),
		Src:  rand.NewPCG(seed, 0),
	}.Sample(u)
	for i := range drawn {
		theta := append([]float64(nil), base...)
		for k, j := range boxed {
			theta[j] = u.At(i, k)
		}
		all = append(all, theta)
	}
	return all
}

// middle is a θ inside every box: the middle of the start box, where there is
// one, else what lies nearest to zero.
func middle(p *Problem) []float64 {
	theta := make([]float64, len(p.Parameters))
	for j, q := range p.Parameters {
		if q.StartLow <= q.StartHigh {
			theta[j] = q.StartLow + (q.StartHigh-q.StartLow)/2
		}
		theta[j] = min(max(theta[j], q.Low), q.High)
	}
	return theta
}
