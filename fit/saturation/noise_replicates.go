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

// bestShare is the λ in [0, 1] of greatest likelihood, by golden section after
// a coarse scan; 0 without replicates.
func bestShare(groups []replicates, l mixedLaw) float64 {
	if len(groups) == 0 {
		return 0
	}
	cost := func(lambda float64) float64 {
		nu, ratio, lnG := 0.0, 0.0, 0.0
		for _, g := range groups {
			g2 := l.square(g.mean, lambda)
			nu += g.freedom
			ratio += g.freedom * g.variance / g2
			lnG += g.freedom * math.Log(g2)
		}
		return nu*math.Log(ratio/nu) + lnG
	}
	const scan = 64
	best := 0
	for i := 1; i <= scan; i++ {
		if cost(float64(i)/scan) < cost(float64(best)/scan) {
			best = i
		}
	}
	low, high := math.Max(0, float64(best-1)/scan), math.Min(1, float64(best+1)/scan)
	const ratio = 0.6180339887498949
	for range 60 {
		a, b := high-ratio*(high-low), low+ratio*(high-low)
		if cost(a) < cost(b) {
			high = b
		} else {
			low = a
		}
	}
	return (low + high) / 2
}
