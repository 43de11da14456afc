package kinetics

import (
	"context"
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/mechanisms"
	"ligancy/ode"
)

// Follower is a mechanism at given constants that can be followed in time: binding
// (Bound) or catalysis (Progress).
type Follower interface {
	Bind(theta, phi []float64, env mechanisms.Environment) error
	Run(ctx context.Context, p *Program, times []float64, gradient bool) (*Course, error)
}

// Progress is a cycle of catalysis followed in time. Its state is the shares of the
// enzyme's states, the free substrate x and the product P:
//
//	dp/dt = Q(x) p ,  dx/dt = −[E] Σ (taken up − given back) ,  dP/dt = [E] Σ k_s p_(from s) .
//
// [E] is the Program's Sites: where it is 0 the substrate does not run out, and P is
// turnovers per enzyme. What is seen is P. A workspace for one goroutine.
type Progress struct {
	m      mechanisms.Driven
	routes []mechanisms.Route
	theta  []float64
	env    mechanisms.Environment
	k      []float64 // rate of every route, the effector contained
}

// NewProgress makes a workspace.
func NewProgress(m mechanisms.Driven) *Progress {
	return &Progress{m: m, routes: m.Routes(), theta: make([]float64, len(m.Constants())), k: make([]float64, len(m.Routes()))}
}

// Bind settles the rates; a cycle has none beside its constants, and φ is empty.
func (g *Progress) Bind(theta, _ []float64, env mechanisms.Environment) error {
	copy(g.theta, theta)
	g.env = env
	names := g.m.StateNames()
	for i, r := range g.routes {
		ln := theta[r.Constant]
		if r.Effector >= 0 {
			ln += math.Log(env.Effectors[r.Effector])
		}
		g.k[i] = math.Exp(ln)
		if math.IsNaN(g.k[i]) || math.IsInf(g.k[i], 0) {
			return fmt.Errorf("the rate from state %q to %q is %g", names[r.From], names[r.To], g.k[i])
		}
	}
	return nil
}

// Run follows the enzyme through a program; see Bound.Run. Labels mean nothing here:
// unlabelled substrate is refused.
func (g *Progress) Run(ctx context.Context, p *Program, times []float64, gradient bool) (*Course, error) {
	if err := p.Check(times); err != nil {
		return nil, err
	}
	if p.blocks() {
		return nil, errors.New("unlabelled ligand in a cycle of catalysis cannot be followed")
	}
	n, k := len(g.m.StateNames()), len(g.theta)
	y, sens := g.start(p.Loaded, gradient)
	solver := ode.Solver{Options: g.options(p)}
	if gradient {
		solver.Options.Sensitivity = &ode.Sensitivity{Start: sens}
	}
	c := newCourse(times, n, k, gradient)
	plan := schedule(c, p, times)
	parts, err := solver.SolvePhases(ctx, nil, g.phases(p, plan), 0, y)
	if err != nil {
		return nil, fmt.Errorf("the progress cannot be followed: %w", err)
	}
	for t := range times {
		sol, at := parts[c.Phase[t]], plan.place[t]
		g.show(c, t, sol.States[at], n)
		if gradient {
			copy(c.Grad.RawRowView(t), sol.Sensitivities[at].RawRowView(n+1))
		}
	}
	return c, nil
}

// start is the enzyme at steady state without substrate, before the loaded one is there.
func (g *Progress) start(loaded float64, gradient bool) (y []float64, sens *mat.Dense) {
	n, k := len(g.m.StateNames()), len(g.theta)
	y = make([]float64, n+2)
	before := mat.NewDense(n, k, nil)
	g.m.Before(y[:n], before, g.theta, g.env)
	y[n] = loaded
	if gradient {
		sens = mat.NewDense(n+2, k, nil)
		sens.Slice(0, n, 0, k).(*mat.Dense).Copy(before)
	}
	return y, sens
}

// phases lays the program out for the integrator.
func (g *Progress) phases(p *Program, plan plan) []ode.Phase {
	n, sites := len(g.m.StateNames()), p.Sites
	list := make([]ode.Phase, len(p.Phases))
	for i := range p.Phases {
		ph := &p.Phases[i]
		if ph.Action == Dilute {
			sites /= ph.Amount
		}
		f := &progressFlow{Progress: g, sites: sites, n: n}
		list[i] = ode.Phase{System: f, Times: plan.times[i],
			Enter: func(y []float64, sens *mat.Dense) error { return f.enter(ph, y, sens) }}
	}
	return list
}

func (g *Progress) show(c *Course, t int, y []float64, n int) {
	copy(c.Shares[t], y[:n])
	c.Free[t], c.Seen[t] = y[n], y[n+1]
	c.Saturation[t], c.Labelled[t] = math.NaN(), math.NaN()
}

func (g *Progress) options(p *Program) ode.Options {
	names := g.m.StateNames()
	o := ode.Options{Rtol: p.Tolerance}
	if o.Rtol == 0 {
		o.Rtol = defaultTolerance
	}
	most := math.Max(p.Loaded, p.Sites)
	for _, ph := range p.Phases {
		if ph.Action == Add {
			most = math.Max(most, ph.Amount)
		}
	}
	for i, s := range names {
		o.Names = append(o.Names, fmt.Sprintf("%q", s))
		o.AtolEach = append(o.AtolEach, o.Rtol*1e-3)
		o.NonNegative = append(o.NonNegative, i)
	}
	o.Names = append(o.Names, "substrate", "product")
	o.AtolEach = append(o.AtolEach, math.Max(most, 1e-300)*o.Rtol*1e-6, math.Max(most, 1e-300)*o.Rtol*1e-6)
	return o
}

// progressFlow is the equations in one phase.
type progressFlow struct {
	*Progress
	sites float64
	n     int
}

// Dim is the number of states, substrate and product.
func (f *progressFlow) Dim() int { return f.n + 2 }

// NumParams is the number of constants.
func (f *progressFlow) NumParams() int { return len(f.theta) }

// each calls change with what every route changes and by how much per flow v = k p x^a,
// with ∂v/∂p and ∂v/∂x.
func (f *progressFlow) each(y []float64, change func(i int, r *mechanisms.Route, v, byP, byX float64)) {
	x := y[f.n]
	for i := range f.routes {
		r := &f.routes[i]
		power := math.Pow(x, math.Max(0, float64(r.Uptake)))
		byP := f.k[i] * power
		byX := 0.0
		if r.Uptake > 0 {
			byX = f.k[i] * y[r.From] * float64(r.Uptake) * math.Pow(x, float64(r.Uptake-1))
		}
		change(i, r, byP*y[r.From], byP, byX)
	}
}

// spread calls add with the places that a route changes, and their weights.
func (f *progressFlow) spread(r *mechanisms.Route, add func(place int, w float64)) {
	add(r.From, -1)
	add(r.To, 1)
	if r.Uptake != 0 && f.sites > 0 {
		add(f.n, -f.sites*float64(r.Uptake))
	}
	switch {
	case r.Product && f.sites > 0:
		add(f.n+1, f.sites)
	case r.Product:
		add(f.n+1, 1)
	}
}

// Derivs writes the rates of change.
func (f *progressFlow) Derivs(dst []float64, _ float64, y []float64) error {
	clear(dst)
	f.each(y, func(_ int, r *mechanisms.Route, v, _, _ float64) {
		f.spread(r, func(place int, w float64) { dst[place] += w * v })
	})
	return nil
}

// Jacobian writes the derivatives by the state.
func (f *progressFlow) Jacobian(dst *mat.Dense, _ float64, y []float64) error {
	f.each(y, func(_ int, r *mechanisms.Route, _, byP, byX float64) {
		f.spread(r, func(place int, w float64) {
			row := dst.RawRowView(place)
			row[r.From] += w * byP
			row[f.n] += w * byX
		})
	})
	return nil
}

// ParamJacobian writes the derivatives by ln of the rates.
func (f *progressFlow) ParamJacobian(dst *mat.Dense, _ float64, y []float64) error {
	f.each(y, func(_ int, r *mechanisms.Route, v, _, _ float64) {
		f.spread(r, func(place int, w float64) { dst.RawRowView(place)[r.Constant] += w * v })
	})
	return nil
}

// enter changes substrate and product at the beginning of a phase. Added substrate is
// free: what is bound already stays.
func (f *progressFlow) enter(ph *Phase, y []float64, sens *mat.Dense) error {
	scale := func(place int, by float64) {
		y[place] *= by
		if sens != nil {
			row := sens.RawRowView(place)
			for k := range row {
				row[k] *= by
			}
		}
	}
	switch ph.Action {
	case Add:
		scale(f.n, 0)
		y[f.n] = ph.Amount
	case Dilute:
		scale(f.n, 1/ph.Amount)
		if f.sites > 0 {
			scale(f.n+1, 1/ph.Amount)
		}
	case Wash:
		scale(f.n, 0)
		scale(f.n+1, 0)
	}
	return nil
}
