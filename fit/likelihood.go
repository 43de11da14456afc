package fit

import "math"

// Likelihood is what a fit has to say in a comparison.
type Likelihood struct {
	LnL float64
	K   int // numbers estimated: constants and one σ for each block of unknown scatter
	N   int // residuals, collapsed ones counted in full
}

// Likelihood of a result of p at its estimate,
//
//	ln L = −Σ_unknown N_b/2·(ln(2π·SS_b/N_b) + 1) − Σ_known (SS_b + N_b·ln 2π)/2 .
//
// Residuals that were divided by a standard deviation each leave −Σ ln σ_i to
// be added by whoever divided. A perfect fit has no likelihood: ok is false.
func (r *Result) Likelihood(p *Problem) (l Likelihood, ok bool) {
	l.K, l.N = r.Constants, r.N
	for b, block := range p.Blocks {
		n := float64(block.Len())
		if q, pooled := block.(Pooled); pooled {
			_, more := q.Pooled()
			n += float64(more)
		}
		ss := r.SS[b]
		if p.Scatter != nil && p.Scatter[b] == Known {
			l.LnL -= (ss + n*math.Log(2*math.Pi)) / 2
			continue
		}
		l.K++
		if n == 0 {
			continue
		}
		if ss == 0 {
			return l, false
		}
		l.LnL -= n / 2 * (math.Log(2*math.Pi*ss/n) + 1)
	}
	return l, true
}
