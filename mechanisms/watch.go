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
	w := &watch{factored: c, view: v, ensemble: e, of: of,
		o: make([]float64, p.n+1), do: make([]float64, (p.n+1)*p.k),
		f: make([]float64, p.n+1), df: make([]float64, (p.n+1)*p.k),
		theta: make([]float64, p.k), jets: newJet(p.k)}
	w.raw, w.share = newAverage(p, w.o, w.do), newAverage(p, w.f, w.df)
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

	theta      []float64
	fresh      bool // o and f are written for the bound θ
	o, do      []float64
	f, df      []float64
	raw, share *average
	jets       jet
	low, span  float64
	top        int // the fullest ligation
}

// Bind settles binding and response.
func (w *watch) Bind(theta []float64, env Environment) {
	w.factored.Bind(theta, env)
	copy(w.theta, theta)
	w.fresh = false
}

// refresh writes the observables of the bound θ.
func (w *watch) refresh() {
	if w.fresh {
		return
	}
	w.fresh = true
	c := w.polynomial()
	w.view.observe(w.ensemble, w.of, w.theta, c.n)
	w.ensemble.observe(w.o, w.do)
	w.raw.rebind()
	w.top = c.highest()
	w.low, w.span = w.o[0], w.o[w.top]-w.o[0]
	dLow, dTop := w.do[:c.k], w.do[w.top*c.k:(w.top+1)*c.k]
	for i := range w.f {
		w.f[i] = (w.o[i] - w.low) / w.span
		for k := range dLow {
			w.df[i*c.k+k] = (w.do[i*c.k+k] - dLow[k] - w.f[i]*(dTop[k]-dLow[k])) / w.span
		}
	}
}

// observe writes the observable of every state.
func (v *view) observe(e *ensemble, of []int, theta []float64, n int) {
	clear(e.do)
	for s, c := range of {
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
	w.refresh()
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
	w.refresh()
	k := len(w.theta)
	copy(gradLow, w.do[:k])
	copy(gradHigh, w.do[w.top*k:(w.top+1)*k])
	return w.o[0], w.o[w.top]
}

func (w *watch) jet(lnx float64, j *jet, to depth) {
	w.refresh()
	w.share.jet(lnx, j, to)
}

func (w *watch) ceiling() float64 { return 1 }

// endSlopes are the ligations at which the response first leaves its lower
// limit and last falls short of the upper one.
func (w *watch) endSlopes() (low, high float64) {
	w.refresh()
	c := w.polynomial()
	low, high = math.NaN(), math.NaN()
	for i := w.top; i > 0; i-- {
		if w.f[i] != 0 && !math.IsInf(c.lnB[i], -1) {
			low = float64(i)
		}
	}
	for i := 0; i < w.top; i++ {
		if w.f[i] != 1 && !math.IsInf(c.lnB[i], -1) {
			high = float64(w.top - i)
		}
	}
	return low, high
}

// flaw says why the response has no Hill coefficient; "" where it has one.
func (w *watch) flaw() string {
	w.refresh()
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
