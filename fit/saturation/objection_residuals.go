package saturation

import "math"

// residuals of the kept points of a data set in units of their scatter, by point;
// NaN for the others. They are those of the leader, or of the Hill equation.
func (r *review) residuals(di int) []float64 {
	f, block := r.fitOf(di)
	out := make([]float64, len(r.a.Data[di].Points))
	for i := range out {
		out[i] = math.NaN()
	}
	if f == nil {
		return out
	}
	b := f.m.blocks[block]
	dev := f.deviations(b)
	sigma := f.blockSigma(block)
	for i := range b.pts {
		out[b.pts[i].index] = (b.y[i] - b.predicted(i)) / (sigma * dev[i])
	}
	return out
}

// fitOf is the leader with the place of the data set among its blocks, or else
// the Hill fit of the data set.
func (r *review) fitOf(di int) (*fitted, int) {
	if r.lead != nil {
		for k, b := range r.lead.m.blocks {
			if b.data == di {
				return r.lead, k
			}
		}
	}
	return r.hills[di].f, 0
}

// spread is the standard deviation of a data set's points at response 1 (or at
// its scatter model's unit), and the predictions, by point.
func (r *review) predictions(di int) (y, sd []float64) {
	f, block := r.fitOf(di)
	n := len(r.a.Data[di].Points)
	y, sd = make([]float64, n), make([]float64, n)
	for i := range y {
		y[i], sd[i] = math.NaN(), math.NaN()
	}
	if f == nil {
		return y, sd
	}
	b := f.m.blocks[block]
	dev := f.deviations(b)
	sigma := f.blockSigma(block)
	for i := range b.pts {
		y[b.pts[i].index], sd[b.pts[i].index] = b.predicted(i), sigma*dev[i]
	}
	return y, sd
}
