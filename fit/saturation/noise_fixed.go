package saturation

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
)

// fixedScatter has standard deviations s that do not depend on the constants:
// r = (ŷ − y)/s, measurements of one prediction pooled into their mean.
type fixedScatter struct {
	s    []float64 // per point
	lnS  float64
	kind fit.Scatter
}

// givenDeviation is the deviation that the table gives.
func givenDeviation(p *Point) float64 { return p.Sigma }

// weightDeviation is 1, or what a relative weight on the squared residual says.
func weightDeviation(p *Point) float64 {
	if p.Weight > 0 {
		return 1 / math.Sqrt(p.Weight)
	}
	return 1
}

func newFixedScatter(b *block, s func(*Point) float64, kind fit.Scatter) *fixedScatter {
	f := &fixedScatter{s: make([]float64, len(b.pts)), kind: kind}
	for i, q := range b.pts {
		f.s[i] = s(&b.m.a.Data[b.data].Points[q.index])
		f.lnS += math.Log(f.s[i])
	}
	return f
}

func (f *fixedScatter) scatter() fit.Scatter { return f.kind }

func (f *fixedScatter) residualCount(b *block) int { return len(b.rows) }

func (f *fixedScatter) gather(b *block) pool {
	p := pool{mean: make([]float64, len(b.rows)), weight: make([]float64, len(b.rows))}
	for i, q := range b.pts {
		w := 1 / (f.s[i] * f.s[i])
		p.mean[q.row] += w * b.y[i]
		p.weight[q.row] += w
	}
	for r := range p.mean {
		p.mean[r] /= p.weight[r]
		p.weight[r] = math.Sqrt(p.weight[r])
	}
	for i, q := range b.pts {
		e := (b.y[i] - p.mean[q.row]) / f.s[i]
		p.within += e * e
	}
	return p
}

func (f *fixedScatter) residuals(b *block, res []float64, jac *mat.Dense, _ []float64) {
	for i, y := range b.work.yHat {
		w := b.pool.weight[i]
		res[i] = (y - b.pool.mean[i]) * w
		if jac == nil {
			continue
		}
		row := jac.RawRowView(i)
		for k, g := range b.work.jHat.RawRowView(i) {
			row[k] = g * w
		}
	}
}

func (f *fixedScatter) deviations(_ *block, dst, _ []float64) { copy(dst, f.s) }

func (f *fixedScatter) lnJacobian(*block) float64 { return f.lnS }
