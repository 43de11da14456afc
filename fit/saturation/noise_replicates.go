package saturation

import (
	"math"

	"ligancy/fit"
)

// newReplicateScatter models the scatter between replicates as a smooth law of
// their mean, σ² ∝ (1−λ)·s² + λ·(ȳ² + f²), and weighs every point by it: the
// SD of two or three replicates itself would be no weight (Mannervik et al.
// 1986, Biochem J 235:797). λ maximises the likelihood of the replicate
// variances, (n−1)·v/σ² ~ χ²(n−1). One σ remains to be estimated.
func newReplicateScatter(b *block) *fixedScatter {
	groups := b.replicateGroups()
	law := mixedLaw{s: rootMeanSquare(b.y), floor: proportionalFloor * b.largest()}
	lambda := bestShare(groups, law)
	mean := make([]float64, len(b.rows))
	count := make([]float64, len(b.rows))
	for i, q := range b.pts {
		mean[q.row] += b.y[i]
		count[q.row]++
	}
	f := &fixedScatter{s: make([]float64, len(b.pts)), kind: fit.Unknown}
	for i, q := range b.pts {
		f.s[i] = math.Sqrt(law.square(mean[q.row]/count[q.row], lambda))
		f.lnS += math.Log(f.s[i])
	}
	return f
}

// square is g² at λ.
func (l mixedLaw) square(y, lambda float64) float64 {
	return (1-lambda)*l.s*l.s + lambda*(y*y+l.floor*l.floor)
}

func rootMeanSquare(y []float64) float64 {
	sum := 0.0
	for _, v := range y {
		sum += v * v
	}
	return math.Sqrt(sum / float64(len(y)))
}

// replicates is one group of measurements of the same thing.
type replicates struct{ mean, variance, freedom float64 }

// replicateGroups gathers the rows with at least two measurements.
func (b *block) replicateGroups() []replicates {
	n := make([]float64, len(b.rows))
	sum := make([]float64, len(b.rows))
	sq := make([]float64, len(b.rows))
	for i, q := range b.pts {
		n[q.row]++
		sum[q.row] += b.y[i]
	}
	for i, q := range b.pts {
		e := b.y[i] - sum[q.row]/n[q.row]
		sq[q.row] += e * e
	}
	var out []replicates
	for r := range n {
		if n[r] > 1 {
			out = append(out, replicates{sum[r] / n[r], sq[r] / (n[r] - 1), n[r] - 1})
		}
	}
	return out
}

// bestShare is the λ in [0, 1] of greatest likelihood; 0 without replicates.
func bestShare(groups []replicates, l mixedLaw) float64 {
	if len(groups) == 0 {
		return 0
	}
	return leastShare(func(lambda float64) float64 {
		return replicateCost(len(groups), func(i int) (freedom, variance, square float64) {
			return groups[i].freedom, groups[i].variance, l.square(groups[i].mean, lambda)
		})
	})
}

// replicateCost is −2 ln L, but for a constant, of n replicate variances whose
// expectation is proportional to square: (n−1)·v/σ² ~ χ²(n−1), one σ within.
func replicateCost(n int, group func(i int) (freedom, variance, square float64)) float64 {
	nu, ratio, lnG := 0.0, 0.0, 0.0
	for i := range n {
		freedom, variance, square := group(i)
		nu += freedom
		ratio += freedom * variance / square
		lnG += freedom * math.Log(square)
	}
	return nu*math.Log(ratio/nu) + lnG
}

// leastShare is where a cost is least over shares from 0 to 1, by golden
// section after a coarse scan.
func leastShare(cost func(float64) float64) float64 {
	const scan = 64
	best := 0
	for i := 1; i <= scan; i++ {
		if cost(float64(i)/scan) < cost(float64(best)/scan) {
			best = i
		}
	}
	return goldenSection(cost, math.Max(0, float64(best-1)/scan), math.Min(1, float64(best+1)/scan), goldenSteps)
}
