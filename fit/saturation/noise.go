package saturation

import (
	"ligancy/fit"

	"gonum.org/v1/gonum/mat"
)

// scatterModel turns predictions into residuals for fit.
type scatterModel interface {
	scatter() fit.Scatter
	// residualCount is the number of residuals: rows where measurements that
	// see one prediction may be pooled, else points.
	residualCount(b *block) int
	// gather prepares what depends on the measured values alone.
	gather(b *block) pool
	// residuals writes r and, where jac is not nil, ∂r/∂Θ from the block's
	// current predictions.
	residuals(b *block, res []float64, jac *mat.Dense, theta []float64)
	// deviations writes the standard deviation of each point relative to the
	// block's σ (or absolute, where scatter is Known), at the predictions.
	deviations(b *block, dst, theta []float64)
	// lnJacobian is Σ ln of those deviations that the residuals do not
	// already contain: −ln L = N ln σ + Σ r²/2σ² + lnJacobian + N/2 ln 2π.
	lnJacobian(b *block) float64
}

// reweighted is a scatter model whose weights follow from the residuals, so
// that the fit is repeated until they settle.
type reweighted interface {
	scatterModel
	// reweigh renews the weights from the predictions and the largest change
	// of a weight is returned.
	reweigh(b *block) float64
	// lnLikelihood is the block's own likelihood at its predictions.
	lnLikelihood(b *block) float64
}

// pool is the measured values of a block, gathered by row.
type pool struct {
	mean   []float64 // weighted mean of a row
	weight []float64 // √Σw of a row
	within float64   // Σw(y − mean)², what no constants can change
}

// newScatterModel chooses the scatter model of a block.
func newScatterModel(b *block) scatterModel {
	switch b.m.a.Data[b.data].Noise {
	case GivenSigma:
		return newFixedScatter(b, givenDeviation, fit.Known)
	case Replicates:
		return newReplicateScatter(b)
	case Proportional:
		return &variableScatter{law: newProportionalLaw(b)}
	case Mixed:
		return &variableScatter{law: newMixedLaw(b)}
	case StudentT:
		return newStudentScatter(b)
	}
	return newFixedScatter(b, weightDeviation, fit.Unknown)
}
