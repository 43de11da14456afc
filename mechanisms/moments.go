package mechanisms

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// depthFor is how deep a whole curve goes.
func depthFor(grad *mat.Dense) depth {
	if grad == nil {
		return values
	}
	return saturated
}

// terms writes ln P, the populations p_i at ln x and ε_ik = p_i ∂ln B_i/∂θ_k.
func (a *average) terms(lnx float64, grad bool) {
	if math.IsInf(lnx, 0) {
		a.limit(lnx < 0)
		return
	}
	if t := lnx - a.s; a.scaled && math.Abs(t)*float64(a.c.n) <= 400 {
		a.powers(t, grad)
		return
	}
	c := a.c
	top := math.Inf(-1)
	for i, l := range c.lnB {
		a.term[i] = l + float64(i)*lnx
		top = math.Max(top, a.term[i])
	}
	var z float64
	for i, l := range a.term {
		a.p[i] = math.Exp(l - top)
		z += a.p[i]
	}
	a.lnP = top + math.Log(z)
	for i := range a.p {
		a.p[i] /= z
		if !grad {
			continue
		}
		unit := a.p[i]
		if math.IsInf(c.lnB[i], -1) {
			unit = math.Exp(float64(i)*lnx-top) / z
		}
		e := a.eps[i*c.k : (i+1)*c.k]
		for k, d := range c.row(i) {
			e[k] = unit * d
		}
	}
}

// powers is terms by powers of z = eᵗ, t = ln x − s, or of 1/z where that is
// smaller: one exponential for all.
func (a *average) powers(t float64, grad bool) {
	n, z := a.c.n, math.Exp(-math.Abs(t))
	a.lnP = a.mu
	if t > 0 {
		a.lnP += float64(n) * t
	}
	w, sum := 1.0, 0.0
	for j := range a.p {
		i := j
		if t > 0 {
			i = n - j
		}
		a.term[i] = w
		a.p[i] = a.b[i] * w
		sum += a.p[i]
		w *= z
	}
	a.lnP += math.Log(sum)
	k := a.c.k
	for i := range a.p {
		a.p[i] /= sum
		if !grad {
			continue
		}
		w := a.term[i] / sum
		eps := a.eps[i*k : (i+1)*k]
		for m, e := range a.e[i*k : (i+1)*k] {
			eps[m] = w * e
		}
	}
}

// limit is terms at x = 0 or x → ∞; there ln P leaves out its power of x.
func (a *average) limit(zero bool) {
	clear(a.p)
	clear(a.eps)
	i := 0
	if !zero {
		i = a.c.highest()
	}
	a.p[i], a.lnP = 1, a.c.lnB[i]
	copy(a.eps[i*a.c.k:(i+1)*a.c.k], a.c.row(i))
}

// jet writes ⟨o⟩ with its derivatives. With π = p_i p_j over pairs i < j,
// δ = j − i, ω = o_j − o_i, ε = i + j − 2⟨i⟩ and V = Σ π δ² the variance of i,
//
//	d⟨o⟩ = Σ π δ ω ,  d²⟨o⟩ = Σ π δ ω ε ,  d³⟨o⟩ = Σ π δ ω (ε² − 2V) ,
//
// and in the gradients each π brings ∂ln π = D_i + D_j − 2⟨D⟩, with
// ∂ε = −2 Cov(i, D).
func (a *average) jet(lnx float64, j *jet, to depth) {
	a.terms(lnx, to > values)
	j.zero()
	var mean, variance float64
	n := a.c.n
	for i, p := range a.p {
		mean += float64(i) * p
		j.y += p * a.o[i]
		j.e += p * a.rest[i]
		for l := i + 1; l <= n; l++ {
			variance += p * a.p[l] * float64((l-i)*(l-i))
		}
	}
	for i := 0; i <= n; i++ {
		for l := i + 1; l <= n; l++ {
			w := a.p[i] * a.p[l] * float64(l-i) * a.rise(i, l)
			e := float64(i+l) - 2*mean
			j.y1 += w
			j.y2 += w * e
			j.y3 += w * (e*e - 2*variance)
		}
	}
	switch to {
	case saturated:
		a.gradient(j)
	case whole:
		a.gradients(j, mean)
	}
}

// gradient adds the gradient of ⟨o⟩ alone, and writes ∂ln P; terms has been written.
func (a *average) gradient(j *jet) {
	n, k := a.c.n, a.c.k
	clear(a.dMean)
	for i := 0; i <= n; i++ {
		ei := a.eps[i*k : (i+1)*k]
		for m, e := range ei {
			a.dMean[m] += e
		}
		for l := i + 1; l <= n; l++ {
			o, pi, pl := a.rise(i, l), a.p[i], a.p[l]
			for m, e := range a.eps[l*k : (l+1)*k] {
				j.g[m] += o * (pi*e - pl*ei[m])
			}
		}
		if a.do != nil {
			for m, d := range a.do[i*k : (i+1)*k] {
				j.g[m] += a.p[i] * d
			}
		}
	}
}

// gradients adds the gradients of a jet; terms has been written.
func (a *average) gradients(j *jet, mean float64) {
	n, k := a.c.n, a.c.k
	clear(a.dMean)
	clear(a.dCov)
	for i := 0; i <= n; i++ {
		ei := a.eps[i*k : (i+1)*k]
		for m, e := range ei {
			a.dMean[m] += e
		}
		for l := i + 1; l <= n; l++ {
			el := a.eps[l*k : (l+1)*k]
			for m := range el {
				a.dCov[m] += float64(l-i) * (a.p[i]*el[m] - a.p[l]*ei[m])
			}
		}
	}
	for i := 0; i <= n; i++ {
		ei := a.eps[i*k : (i+1)*k]
		for l := i + 1; l <= n; l++ {
			el := a.eps[l*k : (l+1)*k]
			pi, pl := a.p[i], a.p[l]
			d, o, e := float64(l-i), a.rise(i, l), float64(i+l)-2*mean
			for m := range el {
				up, down := pi*el[m], pl*ei[m]
				both := up + down - 2*pi*pl*a.dMean[m]
				j.g[m] += o * (up - down)
				j.g1[m] += d * o * both
				j.g2[m] += d * o * (both*e - 2*pi*pl*a.dCov[m])
			}
		}
	}
	if a.do != nil {
		a.ownGradients(j, mean)
	}
}

// ownGradients adds what comes from the observable's own constants.
func (a *average) ownGradients(j *jet, mean float64) {
	n, k := a.c.n, a.c.k
	for i := 0; i <= n; i++ {
		di := a.do[i*k : (i+1)*k]
		for m, d := range di {
			j.g[m] += a.p[i] * d
		}
		for l := i + 1; l <= n; l++ {
			dl := a.do[l*k : (l+1)*k]
			w := a.p[i] * a.p[l] * float64(l-i)
			e := float64(i+l) - 2*mean
			for m := range dl {
				j.g1[m] += w * (dl[m] - di[m])
				j.g2[m] += w * (dl[m] - di[m]) * e
			}
		}
	}
}
