package mechanisms

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// watchedCurve is a binding curve with a response of its own.
type watchedCurve struct {
	factored
	seen *watch
}

// watch makes a curve watched where there is a view. of says which conformation
// each state of the ensemble has.
func (v *view) watch(c factored, e *ensemble, of []int) Curve {
	if v == nil {
		return c
	}
	p := c.polynomial()
	n, k := p.n, p.k
	w := &watch{factored: c, view: v, ensemble: e, of: of,
		o: make([]float64, n+1), do: make([]float64, (n+1)*k), f: make([]float64, n+1), rest: make([]float64, n+1),
		df: make([]float64, (n+1)*k), theta: make([]float64, k), dSpan: make([]float64, k), jets: newJet(k)}
	w.raw, w.share = newAverage(p, w.o, make([]float64, n+1), w.do), newAverage(p, w.f, w.rest, w.df)
	return &watchedCurve{c, w}
}

// Bind settles binding and response.
func (w *watchedCurve) Bind(theta []float64, env Environment) { w.seen.Bind(theta, env) }

// Watch returns what the response sees.
func (w *watchedCurve) Watch() Curve { return w.seen }

// watch is the response ⟨o⟩ of a binding curve, and its share between its own
// limits,
//
//	F = (⟨o⟩ − o_0)/(o_∞ − o_0) = Σ p_i f_i ,  f_i = (ō_i − o_0)/(o_∞ − o_0) ,
//
// with o_0 = ō_0 and o_∞ = ō of the fullest ligation.
type watch struct {
	factored
	view     *view
	ensemble *ensemble
	of       []int

	theta       []float64
	seen        bool // o is written for the bound θ
	shared      bool // and f
	o, do       []float64
	f, rest, df []float64 // f_i, 1 − f_i, ∂f_i/∂θ
	raw, share  *average
	jets        jet
	span        float64 // o_∞ − o_0
	dSpan       []float64
	top         int // the fullest ligation
}

// Bind settles binding and response.
func (w *watch) Bind(theta []float64, env Environment) {
	w.factored.Bind(theta, env)
	copy(w.theta, theta)
	w.seen, w.shared = false, false
}

// look writes the response of every ligation at the bound θ.
func (w *watch) look() {
	if w.seen {
		return
	}
	w.seen = true
	c := w.polynomial()
	w.view.observe(w.ensemble, w.of, w.theta, c.n)
	w.ensemble.observe(w.o, w.do)
	for i, o := range w.o {
		w.raw.rest[i] = 1 - o
	}
	w.raw.rebind()
	w.top = c.highest()
	w.span = w.ensemble.rise(c, 0, w.top, w.dSpan)
}

// scale writes the share of the response at every ligation: from its lower
// limit, or from the upper one where that is nearer.
func (w *watch) scale() {
	w.look()
	if w.shared {
		return
	}
	w.shared = true
	c := w.polynomial()
	for i := range w.f {
		d := w.df[i*c.k : (i+1)*c.k]
		w.f[i] = w.ensemble.rise(c, 0, i, d) / w.span
		w.rest[i] = 1 - w.f[i]
		sign, part := 1.0, w.f[i]
		if w.f[i] > 0.5 {
			w.rest[i] = w.ensemble.rise(c, i, w.top, d) / w.span
			w.f[i] = 1 - w.rest[i]
			sign, part = -1, w.rest[i]
		}
		for k := range d {
			d[k] = sign * (d[k] - part*w.dSpan[k]) / w.span
		}
	}
	w.share.rebind()
}

// observe writes the observable of every state.
func (v *view) observe(e *ensemble, of []int, theta []float64, n int) {
	clear(e.do)
	for s, c := range of {
		if v.rates != nil {
			e.o[s] = 0
			for _, k := range v.rates[c] {
				rate := math.Exp(theta[k])
				e.o[s] += rate
				e.do[s*e.k+k] += rate
			}
			continue
		}
		unit := 1.0
		if v.turnover {
			unit = float64(e.ligation[s]) / float64(n)
		}
		weight := v.weight[c]
		if k := v.constant[c]; k >= 0 {
			weight = theta[k]
			e.do[s*e.k+k] = unit
		}
		e.o[s] = weight * unit
	}
}

// Saturation writes ⟨o⟩ and its gradient at each ln x.
func (w *watch) Saturation(dst, lnx []float64, grad *mat.Dense) {
	w.look()
	w.raw.curve(dst, lnx, grad)
}

// At writes the share F of the response between its limits in the place of Ȳ,
// and its Hill coefficient.
func (w *watch) At(lnx float64, p *Point) {
	w.jet(lnx, &w.jets, whole)
	low, high := w.endSlopes()
	w.jets.point(p, low, high)
}

// Limits returns the response at x → 0 and x → ∞ and writes their gradients.
func (w *watch) Limits(gradLow, gradHigh []float64) (low, high float64) {
	w.look()
	k := len(w.theta)
	copy(gradLow, w.do[:k])
	copy(gradHigh, w.do[w.top*k:(w.top+1)*k])
	return w.o[0], w.o[w.top]
}

func (w *watch) jet(lnx float64, j *jet, to depth) {
	w.scale()
	w.share.jet(lnx, j, to)
}

func (w *watch) ceiling() float64 { return 1 }

// endSlopes are the ligations at which the response first leaves its lower
// limit and last falls short of the upper one.
func (w *watch) endSlopes() (low, high float64) {
	w.scale()
	c := w.polynomial()
	low, high = math.NaN(), math.NaN()
	for i := w.top; i > 0; i-- {
		if w.f[i] != 0 && !math.IsInf(c.lnB[i], -1) {
			low = float64(i)
		}
	}
	for i := 0; i < w.top; i++ {
		if w.rest[i] != 0 && !math.IsInf(c.lnB[i], -1) {
			high = float64(w.top - i)
		}
	}
	return low, high
}

// flaw says why the response has no Hill coefficient; "" where it has one.
func (w *watch) flaw() string {
	w.look()
	rises := w.span > 0
	falls := w.span < 0
	for i := 1; i <= w.top; i++ {
		rises = rises && w.o[i] >= w.o[i-1]
		falls = falls && w.o[i] <= w.o[i-1]
	}
	if rises || falls {
		return ""
	}
	if lnx, turns := w.turning(); turns {
		return fmt.Sprintf("the response is not monotonic (as with substrate inhibition): it turns back near x = %.3g", math.Exp(lnx))
	}
	if w.span == 0 || math.IsNaN(w.span) {
		return "the response does not depend on the ligand"
	}
	return ""
}

// turning looks for a ln x at which the response turns back, on a grid over
// all that the curve does.
func (w *watch) turning() (lnx float64, found bool) {
	first, last := w.turns()
	const steps, beyond = 400, 15.0
	at := func(s int) float64 { return first - beyond + (last-first+2*beyond)*float64(s)/steps }
	var up, down float64 // steepest rise and fall
	var sign [steps + 1]float64
	for s := range sign {
		w.raw.jet(at(s), &w.jets, values)
		sign[s] = w.jets.y1
		up, down = max(up, w.jets.y1), max(down, -w.jets.y1)
	}
	none := 1e-9 * max(up, down)
	if min(up, down) <= none {
		return 0, false
	}
	before := 0.0
	for s, d := range sign {
		if math.Abs(d) <= none {
			continue
		}
		if before*d < 0 {
			return at(s), true
		}
		before = d
	}
	return 0, false
}
