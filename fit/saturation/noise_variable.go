package saturation

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
)

// law is a standard deviation g, relative to one σ, that follows the prediction.
type law interface {
	// at returns g(ŷ), ∂ln g/∂ŷ and, where the law has a number of its own,
	// its place in Θ (else −1) and ∂ln g by it.
	at(yHat float64, theta []float64) (g, byY float64, own int, byOwn float64)
}

// variableScatter has σ_i = σ·g_i with g_i a law of the prediction. Its likelihood
//
//	−2 ln L = N ln Σ(e_i/g_i)² + 2 Σ ln g_i + const
//
// is exactly a sum of squares when every residual is multiplied by the
// geometric mean G of the g_i: r_i = e_i·G/g_i, N ln Σr² = the expression above.
type variableScatter struct{ law law }

func (s *variableScatter) scatter() fit.Scatter { return fit.Unknown }

func (s *variableScatter) residualCount(b *block) int { return len(b.pts) }

func (s *variableScatter) gather(*block) pool { return pool{} }

func (s *variableScatter) deviations(b *block, dst, theta []float64) {
	for i := range b.pts {
		dst[i], _, _, _ = s.law.at(b.predicted(i), theta)
	}
}

func (s *variableScatter) lnJacobian(*block) float64 { return 0 }

func (s *variableScatter) residuals(b *block, res []float64, jac *mat.Dense, theta []float64) {
	n, lnG := float64(len(b.pts)), 0.0
	mean := b.work.mean // ∂ ln G/∂Θ
	clear(mean)
	for i := range b.pts {
		g, byY, own, byOwn := s.law.at(b.predicted(i), theta)
		lnG += math.Log(g)
		if jac == nil {
			continue
		}
		for k, j := range b.work.jHat.RawRowView(b.pts[i].row) {
			mean[k] += byY * j / n
		}
		if own >= 0 {
			mean[own] += byOwn / n
		}
	}
	scale := math.Exp(lnG / n)
	for i := range b.pts {
		y := b.predicted(i)
		g, byY, own, byOwn := s.law.at(y, theta)
		res[i] = (y - b.y[i]) * scale / g
		if jac == nil {
			continue
		}
		row := jac.RawRowView(i)
		for k, j := range b.work.jHat.RawRowView(b.pts[i].row) {
			row[k] = (scale/g-res[i]*byY)*j + res[i]*mean[k]
		}
		if own >= 0 {
			row[own] -= res[i] * byOwn
		}
	}
}

// proportionalFloor is the share of the largest response below which
// proportional scatter no longer shrinks: without it the model is singular at ŷ = 0.
const proportionalFloor = 0.01

// proportionalLaw is g² = ŷ² + f², f the floor.
type proportionalLaw struct{ floor float64 }

func newProportionalLaw(b *block) proportionalLaw {
	return proportionalLaw{floor: proportionalFloor * b.largest()}
}

func (l proportionalLaw) at(y float64, _ []float64) (g, byY float64, own int, byOwn float64) {
	return math.Hypot(y, l.floor), y / (y*y + l.floor*l.floor), -1, 0
}

// mixedLaw is σ² = a² + (bŷ)², written with one number λ between 0 and 1,
//
//	g² = (1 − λ)·s² + λ·(ŷ² + f²) ,
//
// s the root mean square of the measured values: λ = 0 is constant and λ = 1
// proportional scatter. a = σ·s·√(1−λ), b = σ·√λ.
type mixedLaw struct {
	own      int // logit λ in Θ
	s, floor float64
}

func newMixedLaw(b *block) mixedLaw {
	sum := 0.0
	for _, y := range b.y {
		sum += y * y
	}
	return mixedLaw{own: b.noiseAt, s: math.Sqrt(sum / float64(len(b.y))), floor: proportionalFloor * b.largest()}
}

func (l mixedLaw) at(y float64, theta []float64) (g, byY float64, own int, byOwn float64) {
	lambda := 1 / (1 + math.Exp(-theta[l.own]))
	p := y*y + l.floor*l.floor
	g2 := (1-lambda)*l.s*l.s + lambda*p
	return math.Sqrt(g2), lambda * y / g2, l.own, 0.5 * lambda * (1 - lambda) * (p - l.s*l.s) / g2
}

// largest is the largest |y| of a block.
func (b *block) largest() float64 {
	top := 0.0
	for _, y := range b.y {
		top = math.Max(top, math.Abs(y))
	}
	return top
}

// layNoise adds the numbers of scatter models that have some.
func (m *model) layNoise() {
	for _, b := range m.blocks {
		if m.a.Data[b.data].Noise != Mixed {
			continue
		}
		b.noiseAt = len(m.params)
		curve := "all"
		if len(m.a.Data) > 1 {
			curve = m.a.Data[b.data].Name
		}
		m.params = append(m.params, parameter{kind: ofNoise, data: b.data, curve: curve,
			Parameter: fit.Parameter{Name: "proportional share of scatter", Low: -14, High: 14, StartLow: -3, StartHigh: 3}})
	}
}
