package fit

import "math"

// AICc is Akaike's criterion corrected for few data,
//
//	−2 ln L + 2K + 2K(K+1)/(N−K−1) .
//
// It does not exist at N ≤ K+1: ok is false.
//
// Hurvich CM & Tsai C-L (1989) Biometrika 76, 297–307.
func (l Likelihood) AICc() (v float64, ok bool) {
	if l.N <= l.K+1 {
		return 0, false
	}
	k := float64(l.K)
	return -2*l.LnL + 2*k + 2*k*(k+1)/float64(l.N-l.K-1), true
}

// BIC is −2 ln L + K·ln N (Schwarz G 1978, Ann Stat 6, 461–464).
func (l Likelihood) BIC() float64 {
	return -2*l.LnL + float64(l.K)*math.Log(float64(l.N))
}

// Weights are exp(−Δ/2), scaled to add up to 1, of criteria that lie Δ above the
// least. NaN marks a criterion that does not exist; its weight is 0.
//
// Akaike H (1978) J R Stat Soc D 27, 217–235.
func Weights(criteria []float64) []float64 {
	least := math.Inf(1)
	for _, c := range criteria {
		if c < least {
			least = c
		}
	}
	w := make([]float64, len(criteria))
	var total float64
	for i, c := range criteria {
		if !math.IsNaN(c) && !math.IsInf(least, 0) {
			w[i] = math.Exp(-(c - least) / 2)
			total += w[i]
		}
	}
	if total > 0 {
		for i := range w {
			w[i] /= total
		}
	}
	return w
}
