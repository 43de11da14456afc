package fit

import "math"

// starts lays out the θ at which Solve begins: those of the problem first, then
// points of the additive recurrence
//
//	u_k = frac(u_0 + k·α) ,   α_j = φ^{−j} ,   φ^{d+1} = φ + 1 ,
//
// in the d-dimensional box of those parameters that have one, u_0 drawn from
// the number that Settings.Seed gives. The first points of a longer run are
// those of a shorter one.
//
// Niederreiter H (1992) Random Number Generation and Quasi-Monte Carlo Methods,
// ch. 3 (the recurrence); the generalised golden ratio as α is common practice.
func starts(p *Problem, number int, seed uint64) [][]float64 {
	all := make([][]float64, 0, max(number, len(p.Starts)))
	for _, t := range p.Starts {
		all = append(all, t)
	}
	base := middle(p)
	if len(p.Starts) > 0 {
		base = p.Starts[0]
	}
	var boxed []int
	for j, q := range p.Parameters {
		if q.Low < q.High && !q.Linear && q.StartLow < q.StartHigh {
			boxed = append(boxed, j)
		}
	}
	if len(boxed) == 0 && len(all) == 0 {
		return append(all, base)
	}
	if len(boxed) == 0 {
		return all
	}
	alpha := golden(len(boxed))
	u := make([]float64, len(boxed))
	state := seed
	for i := range u {
		u[i] = uniform(&state)
	}
	for len(all) < number {
		theta := append([]float64(nil), base...)
		for i, j := range boxed {
			q := p.Parameters[j]
			theta[j] = q.StartLow + u[i]*(q.StartHigh-q.StartLow)
			_, u[i] = math.Modf(u[i] + alpha[i])
		}
		all = append(all, theta)
	}
	return all
}

// middle is a θ inside every box: the middle of the start box, where there is
// one, else what lies nearest to zero.
func middle(p *Problem) []float64 {
	theta := make([]float64, len(p.Parameters))
	for j, q := range p.Parameters {
		if q.StartLow <= q.StartHigh {
			theta[j] = q.StartLow + (q.StartHigh-q.StartLow)/2
		}
		theta[j] = min(max(theta[j], q.Low), q.High)
	}
	return theta
}

// golden returns φ^{−1} … φ^{−d} of the real φ > 1 with φ^{d+1} = φ + 1.
func golden(d int) []float64 {
	phi := 1.5
	for range 60 {
		phi = math.Pow(1+phi, 1/float64(d+1))
	}
	alpha := make([]float64, d)
	a := 1.0
	for i := range alpha {
		a /= phi
		alpha[i] = a
	}
	return alpha
}

// uniform is the next number in [0, 1) of the generator of Steele, Lea & Flood
// (2014) OOPSLA, 453–472.
func uniform(state *uint64) float64 {
	*state += 0x9e3779b97f4a7c15
	z := *state
	z = (z ^ z>>30) * 0xbf58476d1ce4e5b9
	z = (z ^ z>>27) * 0x94d049bb133111eb
	z ^= z >> 31
	return float64(z>>11) / (1 << 53)
}
