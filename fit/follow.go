package fit

import (
	"context"
	"math"
	"strconv"

	"gonum.org/v1/gonum/mat"
)

// guide leads a fit along a profile: at each value of its dial it minimises the
// objective and says what the quantity and the objective came to.
type guide interface {
	// turn refits from theta at that value of the dial. ok is false where
	// nothing finite was found.
	turn(ctx context.Context, dial float64, theta []float64) (at station, ok bool)
	// range of the dial
	bounds() (low, high float64)
}

// station is a point of a profile.
type station struct {
	dial      float64 // what the guide was turned to
	value     float64 // of the quantity
	objective float64
	theta     []float64
}

// hold is the guide of a parameter: it is held at the dial.
type hold struct {
	s         *solver
	j         int
	low, high float64
}

func (f *Profiler) hold(j int) *hold {
	p := *f.original
	p.Blocks = f.s.blocks
	p.Parameters = append([]Parameter(nil), p.Parameters...)
	q := p.Parameters[j]
	p.Parameters[j].Low, p.Parameters[j].High = 0, 0
	return &hold{s: newSolver(&p, false), j: j, low: q.Low, high: q.High}
}

func (h *hold) bounds() (low, high float64) { return h.low, h.high }

func (h *hold) turn(ctx context.Context, dial float64, theta []float64) (station, bool) {
	h.s.low[h.j], h.s.high[h.j] = dial, dial
	if !h.s.begun(theta) {
		return station{}, false
	}
	h.s.descend(ctx.Done(), 1e-7, 300)
	return h.s.station(dial, dial, h.s.cur.obj), true
}

func (s *solver) station(dial, value, objective float64) station {
	return station{dial, value, objective, append([]float64(nil), s.cur.theta...)}
}

// pull is the guide of a quantity g: a further residual κ·(g(θ) − dial) draws it
// towards the dial. Wherever that ends, ∇objective is along ∇g: the point lies
// on the profile of g exactly, at the value that g then has.
type pull struct {
	s     *solver
	block *tether
}

// tether is the block of the further residual.
type tether struct {
	g     Quantity
	kappa float64
	dial  float64
	grad  []float64
	value float64
}

func (t *tether) Len() int { return 1 }

func (t *tether) Eval(res []float64, jac *mat.Dense, theta []float64) error {
	t.value = t.g(theta, t.grad)
	res[0] = t.kappa * (t.value - t.dial)
	if jac != nil {
		for j, v := range t.grad {
			jac.Set(0, j, t.kappa*v)
		}
	}
	return nil
}

// pull makes the guide; stiffness κ² is in units of the objective.
func (f *Profiler) pull(g Quantity, stiffness float64) *pull {
	b := &tether{g: g, kappa: math.Sqrt(stiffness), grad: make([]float64, len(f.grad))}
	p := *f.problem
	p.Blocks = append(append([]Block(nil), f.s.blocks...), b)
	p.Scatter = make([]Scatter, len(p.Blocks))
	for i, known := range f.s.known {
		if known || !f.s.joint {
			p.Scatter[i] = Known
		}
	}
	p.Scatter[len(p.Blocks)-1] = Known
	return &pull{newSolver(&p, false), b}
}

func (p *pull) bounds() (low, high float64) { return math.Inf(-1), math.Inf(1) }

func (p *pull) turn(ctx context.Context, dial float64, theta []float64) (station, bool) {
	p.block.dial = dial
	if !p.s.begun(theta) {
		return station{}, false
	}
	p.s.descend(ctx.Done(), 1e-7, 300)
	r := p.s.cur.res[len(p.s.cur.res)-1]
	value := p.block.g(p.s.cur.theta, p.block.grad)
	return p.s.station(dial, value, p.s.cur.obj-r*r), true
}

// follow walks along the profile from the estimate until it meets the limit, a
// bound, or nothing any more.
func (f *Profiler) follow(ctx context.Context, t target, v, d float64) end {
	first, stiffness := f.scale(t, v, d)
	step := first
	var g guide
	if t.parameter >= 0 {
		g = f.hold(t.parameter)
	} else {
		g = f.pull(t.value, stiffness)
	}
	low, high := g.bounds()
	last := station{v, v, f.result.Objective, f.result.Theta}
	before := last
	still := 0
	for range 80 {
		if ctx.Err() != nil {
			return end{value: last.value, open: true, why: "interrupted"}
		}
		dial := min(max(last.dial+d*step, low), high)
		next, ok := f.advance(ctx, g, before, last, dial)
		if !ok {
			if step /= 4; step < 1e-6*(math.Abs(last.dial)+step) {
				return end{value: last.value, open: true, why: "nothing finite lies beyond"}
			}
			continue
		}
		f.meet(next.objective, next.theta)
		if next.objective >= f.limit {
			return f.between(ctx, t, g, last, next, d)
		}
		if dial == low || dial == high {
			return end{value: dial, edge: true, why: "reaches a bound below the limit"}
		}
		if still++; math.Abs(next.value-last.value) > 1e-3*math.Abs(next.dial-last.dial) {
			still = 0
		}
		if still > 6 {
			return end{value: next.value, open: true, why: "goes no further, below the limit"}
		}
		if f.flat(last, next, math.Abs(next.dial-v)/first) {
			return end{value: next.value, open: true, why: "levels off below the limit"}
		}
		step = f.stride(last, next, step)
		before, last = last, next
	}
	return end{value: last.value, open: true,
		why: "stays below the limit as far as " + strconv.FormatFloat(last.value, 'g', 6, 64)}
}

// flat says whether a profile that has been followed so many times further than
// where its limit was expected has all but ceased to rise.
func (f *Profiler) flat(last, next station, times float64) bool {
	rise, rest := f.root(next)-f.root(last), math.Sqrt(f.limit-f.result.Objective)-f.root(next)
	return times > 1e4 && rise < 1e-3*rest
}

// advance turns the guide to the next dial: from where the last two stations
// point to, and, should that end above the limit, from the last one too.
func (f *Profiler) advance(ctx context.Context, g guide, before, last station, dial float64) (station, bool) {
	f.ahead = append(f.ahead[:0], last.theta...)
	if last.dial != before.dial {
		share := (dial - last.dial) / (last.dial - before.dial)
		for j, v := range last.theta {
			f.ahead[j] += share * (v - before.theta[j])
		}
	}
	next, ok := g.turn(ctx, dial, f.ahead)
	if ok && next.objective < f.limit {
		return next, true
	}
	again, okAgain := g.turn(ctx, dial, last.theta)
	if okAgain && (!ok || again.objective < next.objective) {
		return again, true
	}
	return next, ok
}

// meet keeps a θ whose objective is below all before.
func (f *Profiler) meet(objective float64, theta []float64) {
	if objective < f.lowest-f.s.slack(f.lowest)/100 {
		f.lowest = objective
		f.better = append(f.better[:0], theta...)
	}
}

// root is √(objective − minimum), which is nearly linear along a profile.
func (f *Profiler) root(at station) float64 {
	return math.Sqrt(max(at.objective-f.result.Objective, 0))
}

// stride is the next step: twice the last, or what remains by extrapolation.
func (f *Profiler) stride(last, next station, step float64) float64 {
	a, b, c := f.root(last), f.root(next), math.Sqrt(f.limit-f.result.Objective)
	if b > 0.05*c && b > a {
		return min(2*step, max(1.1*(c-b)/(b-a)*math.Abs(next.dial-last.dial), step/10))
	}
	return 2 * step
}

// scale is the distance on the dial at which the limit is expected, and the
// stiffness of a pull that suits it.
func (f *Profiler) scale(t target, v, d float64) (step, stiffness float64) {
	f.s.restart(f.result)
	t.value(f.s.cur.theta, f.grad)
	f.e.solve(len(f.free), f.linearise(f.limit), d)
	for i, j := range f.free {
		step += f.grad[j] * f.e.s[i]
	}
	step = math.Abs(step)
	if j := t.parameter; j >= 0 && f.s.width[j] > 0 {
		step = min(step, f.s.width[j])
	}
	if !(step > 0) || math.IsInf(step, 0) || f.e.loose {
		step = 0.1 * max(math.Abs(v), 1e-3)
		if j := t.parameter; j >= 0 && f.s.width[j] > 0 {
			step = f.s.width[j] / 4
		}
	}
	return step, 100 * (f.limit - f.result.Objective) / (step * step)
}

// between finds the end between a station below and one above the limit: by a
// leap from the nearer one, else by regula falsi on the dial (the Illinois
// variant) with a refit at each.
func (f *Profiler) between(ctx context.Context, t target, g guide, below, above station, d float64) end {
	goal := math.Sqrt(f.limit - f.result.Objective)
	a, b := f.root(below)-goal, f.root(above)-goal
	nearest := above
	for n, side := 0, 0; n < 100; n++ {
		if n == 2 || n == 12 {
			if value, ok := f.land(t, d, nearest); ok && d*(value-below.value) >= 0 && d*(above.value-value) >= 0 {
				return end{value: value}
			}
		}
		if math.Abs(above.dial-below.dial) <= 1e-12*(math.Abs(above.dial)+math.Abs(below.dial)) || ctx.Err() != nil {
			break
		}
		dial := (below.dial*b - above.dial*a) / (b - a)
		at, ok := g.turn(ctx, dial, below.theta)
		if !ok {
			break
		}
		f.meet(at.objective, at.theta)
		c := f.root(at) - goal
		nearest = at
		if math.Abs(c) <= 1e-10*goal {
			break
		}
		if c > 0 {
			above, b = at, c
			if side == 1 {
				a /= 2
			}
			side = 1
		} else {
			below, a = at, c
			if side == -1 {
				b /= 2
			}
			side = -1
		}
	}
	if f.root(below) < 0.999*goal {
		return end{value: below.value, open: true, why: "breaks off below the limit"}
	}
	return end{value: nearest.value}
}

// land iterates the linearised problem from a station near the end.
func (f *Profiler) land(t target, d float64, at station) (float64, bool) {
	copy(f.s.cur.theta, at.theta)
	if !f.s.evaluate(f.s.cur) {
		return 0, false
	}
	return f.settleAt(t, d, f.limit, 1e-5, 40)
}
