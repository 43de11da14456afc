package fit

import (
	"context"
	"math"

	"gonum.org/v1/gonum/mat"
)

// guide leads a fit along a profile: at each value of its dial it minimises the
// objective and says what the quantity and the objective came to.
type guide interface {
	// turn refits from theta at that value of the dial. ok is false where
	// nothing finite was found.
	turn(ctx context.Context, dial float64, theta []float64) (at station, ok bool)
	// bounds of the dial
	bounds() (low, high float64)
}

// station is a point of a profile.
type station struct {
	dial      float64 // what the guide was turned to
	value     float64 // of the quantity
	objective float64
	theta     []float64
}

// guide makes the guide of a target whose end is expected at that distance.
func (f *Profiler) guide(t target, distance float64) guide {
	if t.parameter >= 0 {
		return f.hold(t.parameter)
	}
	return f.pull(t.value, 100*(f.limit-f.result.Objective)/(distance*distance))
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

// pull makes the guide of a quantity; stiffness is κ².
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
