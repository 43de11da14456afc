package saturation

import (
	"context"
	"errors"
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// A shift by preparation multiplies every constant with the dimension of the
// ligand by e^{d·b}, d its dimension: ln K of preparation p is ln K + b_p, with
// b_p drawn from a normal distribution of mean 0 and deviation τ. It moves the
// curve along the ligand axis and leaves its shape alone.
//
// With λ = τ/σ the b_p are found with the constants, by least squares with a
// residual b_p/λ each, and λ maximises the likelihood of the constants with the
// b_p integrated out to first order (Laplace; Lindstrom & Bates 1990,
// Biometrics 46:673),
//
//	−2 ln L(λ) = N ln SS_pen + Σ_p ln(1 + λ² Σ_{i∈p} (∂r_i/∂b_p)²) + const .
//
// Intervals hold λ at its estimate.
type shift struct {
	levels []string // preparations
	at     []int    // their places in Θ
	lambda float64
	tau    float64
}

// layShift makes the parameters of a shift by preparation.
func (m *model) layShift() {
	if !m.c.ShiftByPreparation {
		return
	}
	s := &shift{levels: m.a.levels(byPreparation), lambda: 1}
	for _, l := range s.levels {
		s.at = append(s.at, len(m.params))
		m.params = append(m.params, parameter{kind: ofShift, curve: m.a.label(byPreparation, l),
			Parameter: fit.Parameter{Name: "shift of ln K", Low: -20, High: 20}})
	}
	m.shift = s
}

// shiftable refuses a shift where it cannot be found.
func (m *model) shiftable() error {
	switch {
	case m.shift == nil:
		return nil
	case len(m.a.Data) != 1:
		return errors.New("a shift by preparation needs a study of one data set")
	case len(m.shift.levels) < 2:
		return errors.New("a shift by preparation needs at least two preparations")
	case m.a.Data[0].Noise == GivenSigma || m.a.Data[0].Noise == StudentT:
		return errors.New("a shift by preparation needs scatter that is constant, proportional, mixed or from replicates")
	}
	return nil
}

// shiftAt is the place in Θ of a preparation's shift; −1 without one.
func (m *model) shiftAt(preparation string) int {
	if m.shift == nil {
		return -1
	}
	for i, l := range m.shift.levels {
		if l == preparation {
			return m.shift.at[i]
		}
	}
	return -1
}

// moved says whether constant c moves with the shift, and by which power.
func moved(c mechanisms.Constant) float64 {
	if c.Ligand != "" {
		return 0
	}
	return float64(c.Dimension)
}

// shiftConstants moves a cell's constants by b.
func (m *model) shiftConstants(local []float64, b float64) {
	for k, c := range m.consts {
		switch d := moved(c); {
		case d == 0:
		case c.Scale == mechanisms.Linear:
			local[k] *= math.Exp(d * b)
		default:
			local[k] += d * b
		}
	}
}

// shiftChain adds w times a gradient by moved constants to one by Θ: constants
// on a linear scale are multiplied by e^{db}, and b collects Σ d·v·∂/∂v.
func (m *model) shiftChain(out, g []float64, w float64, cell *cell, theta []float64) {
	for k, c := range m.consts {
		d, j := moved(c), cell.theta[k]
		if d != 0 && c.Scale == mechanisms.Linear {
			e := math.Exp(d * theta[cell.shift])
			out[j] += w * g[k] * e
			out[cell.shift] += w * g[k] * e * d * theta[j]
			continue
		}
		out[j] += w * g[k]
		out[cell.shift] += w * g[k] * d
	}
}

// penalty is the extra residuals b_p/λ of a block.
func (b *block) penalty(res []float64, jac *mat.Dense, theta []float64) {
	s := b.m.shift
	n := len(res) - len(s.at)
	for i, j := range s.at {
		res[n+i] = theta[j] / s.lambda
		if jac != nil {
			row := jac.RawRowView(n + i)
			clear(row)
			row[j] = 1 / s.lambda
		}
	}
}

// Range of ln λ that is searched, and how finely.
const (
	lnLambdaLow, lnLambdaHigh = -3.0, 12.0
	lambdaScan                = 16
	lambdaSteps               = 40
)

// settleShift finds λ and with it the fit. SS of the result contains the
// penalty, as the likelihood of the constants does.
func (f *fitted) settleShift(ctx context.Context, r *fit.Result) (*fit.Result, error) {
	best, bestCost, bestU := r, math.Inf(1), 0.0
	try := func(u float64, from *fit.Result) float64 {
		f.m.shift.lambda = math.Exp(u)
		p := *f.problem
		p.Starts = [][]float64{from.Theta}
		q, err := fit.Solve(ctx, &p, fit.Settings{Starts: 1, Workers: 1})
		if err != nil || q == nil || q.Status == fit.NoAnswer {
			return math.Inf(1)
		}
		cost := f.shiftCost(q)
		if cost < bestCost {
			q.Starts, q.Agreeing = r.Starts, r.Agreeing
			best, bestCost, bestU = q, cost, u
		}
		return cost
	}
	width := (lnLambdaHigh - lnLambdaLow) / lambdaScan
	for i := range lambdaScan + 1 {
		try(lnLambdaLow+float64(i)*width, r)
	}
	goldenSection(func(u float64) float64 { return try(u, best) }, bestU-width, bestU+width, lambdaSteps)
	f.m.shift.lambda = math.Exp(bestU)
	n := float64(f.m.points())
	f.m.shift.tau = f.m.shift.lambda * math.Sqrt(best.SS[0]/n)
	return best, ctx.Err()
}

// shiftCost is −2 ln L(λ) but for a constant, at a fit with this λ.
func (f *fitted) shiftCost(r *fit.Result) float64 {
	n := float64(f.m.points())
	return n*math.Log(r.SS[0]) + f.shiftLnDet(r)
}

// shiftLnDet is Σ_p ln(1 + λ² Σ (∂r_i/∂b_p)²).
func (f *fitted) shiftLnDet(r *fit.Result) float64 {
	b := f.m.blocks[0]
	res, jac := make([]float64, b.Len()), mat.NewDense(b.Len(), len(f.m.params), nil)
	_ = b.Eval(res, jac, r.Theta)
	sum := 0.0
	for _, j := range f.m.shift.at {
		s := 0.0
		for i := range b.Len() - len(f.m.shift.at) {
			s += jac.At(i, j) * jac.At(i, j)
		}
		sum += math.Log1p(f.m.shift.lambda * f.m.shift.lambda * s)
	}
	return sum
}
