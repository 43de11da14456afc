package saturation

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
)

// studentFreedom is the degrees of freedom of the t law: heavy enough tails for
// a wild point in twenty, light enough to cost little without one (Lange,
// Little & Taylor 1989, J Am Stat Assoc 84:881, from memory).
const studentFreedom = 4

// studentScatter has errors σ·t with studentFreedom degrees of freedom. It is
// fitted by iterative reweighting, which is the EM algorithm for this law:
//
//	w_i = (ν+1)/(ν + e_i²/σ²) ,   σ² = Σ w_i e_i²/N ,
//
// until the weights settle. Intervals hold the weights at their final values.
type studentScatter struct {
	w     []float64
	sigma float64
}

func newStudentScatter(b *block) *studentScatter {
	s := &studentScatter{w: make([]float64, len(b.pts))}
	for i := range s.w {
		s.w[i] = 1
	}
	return s
}

func (s *studentScatter) scatter() fit.Scatter { return fit.Unknown }

func (s *studentScatter) residualCount(b *block) int { return len(b.pts) }

func (s *studentScatter) gather(*block) pool { return pool{} }

func (s *studentScatter) residuals(b *block, res []float64, jac *mat.Dense, _ []float64) {
	for i := range b.pts {
		w := math.Sqrt(s.w[i])
		res[i] = (b.predicted(i) - b.y[i]) * w
		if jac == nil {
			continue
		}
		row := jac.RawRowView(i)
		for k, g := range b.work.jHat.RawRowView(b.pts[i].row) {
			row[k] = g * w
		}
	}
}

func (s *studentScatter) deviations(_ *block, dst, _ []float64) {
	for i, w := range s.w {
		dst[i] = 1 / math.Sqrt(w)
	}
}

func (s *studentScatter) lnJacobian(*block) float64 { return 0 }

// reweigh runs σ and the weights to their joint fixed point at the predictions.
func (s *studentScatter) reweigh(b *block) float64 {
	n := float64(len(b.pts))
	old := append([]float64(nil), s.w...)
	e2 := make([]float64, len(b.pts))
	sum := 0.0
	for i := range b.pts {
		e := b.predicted(i) - b.y[i]
		e2[i] = e * e
		sum += e2[i]
	}
	if sum == 0 {
		s.sigma = 0
		return 0
	}
	v := sum / n
	for range 500 {
		next := 0.0
		for i := range e2 {
			s.w[i] = (studentFreedom + 1) / (studentFreedom + e2[i]/v)
			next += s.w[i] * e2[i]
		}
		next /= n
		if math.Abs(next-v) <= 1e-14*v {
			break
		}
		v = next
	}
	s.sigma = math.Sqrt(v)
	change := 0.0
	for i := range old {
		change = math.Max(change, math.Abs(s.w[i]-old[i]))
	}
	return change
}

// lnLikelihood of the t law at the predictions.
func (s *studentScatter) lnLikelihood(b *block) float64 {
	const nu = studentFreedom
	a, _ := math.Lgamma((nu + 1) / 2.0)
	c, _ := math.Lgamma(nu / 2.0)
	each := a - c - 0.5*math.Log(nu*math.Pi) - math.Log(s.sigma)
	sum := 0.0
	for i := range b.pts {
		z := (b.predicted(i) - b.y[i]) / s.sigma
		sum += each - (nu+1)/2.0*math.Log1p(z*z/nu)
	}
	return sum
}
