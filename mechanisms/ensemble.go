package mechanisms

import (
	"math"
	"slices"
)

// ensemble is a list of states in order of ligation. State s has a weight that
// is log-linear in ln x,
//
//	w_s = exp(ln w_s + i_s ln x) ,
//
// with A_sk = ∂ln w_s/∂θ_k. Merged by ligation it is a binding polynomial,
//
//	B_i = Σ_{s: i_s = i} w_s ,  ∂ln B_i/∂θ_k = ⟨A_k⟩_i ,
//
// where ⟨·⟩_i is the average over the states of ligation i.
type ensemble struct {
	k        int
	ligation []int     // i_s, ascending
	lnW      []float64 // ln w_s; −Inf for a state that cannot be
	a        []float64 // S×k
	share    []float64 // S: w_s/B_i, written by merge

	// o is an observable per state and do its derivatives (S×k); nil where
	// saturation is all there is to see.
	o, do []float64
}

func newEnsemble(ligation []int, k int, watched bool) ensemble {
	s := len(ligation)
	e := ensemble{k: k, ligation: ligation, lnW: make([]float64, s), a: make([]float64, s*k), share: make([]float64, s)}
	if watched {
		e.o, e.do = make([]float64, s), make([]float64, s*k)
	}
	return e
}

// row is A_s.
func (e *ensemble) row(s int) []float64 { return e.a[s*e.k : (s+1)*e.k] }

// merge writes the coefficients. Ligations without a state have B_i = 0 and no
// derivative.
func (e *ensemble) merge(c *coefficients) {
	first := 0
	for i := 0; i <= c.n; i++ {
		last := first
		for last < len(e.ligation) && e.ligation[last] == i {
			last++
		}
		c.lnB[i] = e.sum(first, last)
		d := c.row(i)
		clear(d)
		for s := first; s < last; s++ {
			t := e.share[s]
			if t == 0 {
				continue
			}
			for k, a := range e.row(s) {
				d[k] += t * a
			}
		}
		first = last
	}
}

// sum is ln Σ w over states [first, last) and writes their shares.
func (e *ensemble) sum(first, last int) float64 {
	switch last - first {
	case 0:
		return math.Inf(-1)
	case 1:
		e.share[first] = 1
		return e.lnW[first]
	}
	top := slices.Max(e.lnW[first:last])
	if math.IsInf(top, -1) {
		clear(e.share[first:last])
		return top
	}
	var z float64
	for s := first; s < last; s++ {
		e.share[s] = math.Exp(e.lnW[s] - top)
		z += e.share[s]
	}
	for s := first; s < last; s++ {
		e.share[s] /= z
	}
	return top + math.Log(z)
}

// observe writes the mean observable ō_i of each ligation and its derivatives,
//
//	∂ō_i/∂θ_k = Cov_i(o, A_k) + ⟨∂o/∂θ_k⟩_i ;
//
// merge has run. Ligations without a state get ō = 0.
func (e *ensemble) observe(o, do []float64) {
	clear(o)
	clear(do)
	for s, i := range e.ligation {
		o[i] += e.share[s] * e.o[s]
	}
	for s, i := range e.ligation {
		t := e.share[s]
		if t == 0 {
			continue
		}
		row, own, a := do[i*e.k:(i+1)*e.k], e.do[s*e.k:(s+1)*e.k], e.row(s)
		for k := range row {
			row[k] += t * (own[k] + (e.o[s]-o[i])*a[k])
		}
	}
}

// rise is ō_j − ō_i between two ligations, as a sum over pairs of states so that
// it keeps its digits where ō hardly changes, and writes its derivatives:
//
//	ō_j − ō_i = Σ_{s∈i, t∈j} τ_s τ_t (o_t − o_s) ,  ∂τ_s = τ_s (A_s − ⟨A⟩_i) .
//
// merge and observe have run.
func (e *ensemble) rise(c *coefficients, i, j int, grad []float64) (rise float64) {
	clear(grad)
	if i == j {
		return 0
	}
	di, dj := c.row(i), c.row(j)
	s0, s1 := e.states(i)
	t0, t1 := e.states(j)
	for s := s0; s < s1; s++ {
		as, os := e.row(s), e.do[s*e.k:(s+1)*e.k]
		for t := t0; t < t1; t++ {
			w := e.share[s] * e.share[t]
			if w == 0 {
				continue
			}
			at, ot := e.row(t), e.do[t*e.k:(t+1)*e.k]
			step := e.o[t] - e.o[s]
			rise += w * step
			for k := range grad {
				grad[k] += w * (step*(as[k]-di[k]+at[k]-dj[k]) + ot[k] - os[k])
			}
		}
	}
	return rise
}

// states is the range of states of ligation i.
func (e *ensemble) states(i int) (first, last int) {
	for first < len(e.ligation) && e.ligation[first] < i {
		first++
	}
	for last = first; last < len(e.ligation) && e.ligation[last] == i; last++ {
	}
	return first, last
}

// logLinear is an ensemble whose exponents are fixed numbers:
// ln w_s = ln g_s + Σ A_sk θ_k + Σ m_sj ln y_j.
type logLinear struct {
	ensemble
	lnG   []float64
	count [][]float64 // per effector, m_sj of each state; nil without effectors
}

func (l *logLinear) bind(c *coefficients, theta []float64, env Environment) {
	for s, g := range l.lnG {
		w := g
		for k, a := range l.row(s) {
			w += a * theta[k]
		}
		l.lnW[s] = w
	}
	for j, counts := range l.count {
		lnY := math.Log(env.Effectors[j])
		for s, m := range counts {
			if m != 0 {
				l.lnW[s] += m * lnY
			}
		}
	}
	l.merge(c)
}
