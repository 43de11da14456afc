package kinetics

import (
	"context"
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/ode"
)

const defaultTolerance = 1e-9

// integrate follows a sample by the equations of mass action, phase by phase.
func (b *Bound) integrate(ctx context.Context, p *Program, times []float64, gradient bool) (*Course, error) {
	tagged := p.blocks()
	m := newMassAction(b, p.Sites, tagged)
	y, sens, err := m.start(p.Loaded, gradient)
	if err != nil {
		return nil, err
	}
	r := &run{b: b, m: m, c: newCourse(times, m.s, b.m.Size(), gradient), y: y, sens: sens}
	r.solver.Options = m.options(p, gradient)
	phases := r.phases(p, times)
	var parts []*ode.Solution
	parts, err = r.solver.SolvePhases(ctx, nil, phases, 0, y)
	if err != nil {
		return nil, r.blame(err)
	}
	for k := range times {
		sol, at := parts[r.c.Phase[k]], r.place[k]
		var sens *mat.Dense
		if gradient {
			sens = sol.Sensitivities[at]
		}
		if err := r.show(k, sol.Times[at], sol.States[at], sens); err != nil {
			return nil, err
		}
	}
	return r.c, nil
}

// run is one integration on its way.
type run struct {
	b      *Bound
	m      *massAction
	c      *Course
	y      []float64
	sens   *mat.Dense
	solver ode.Solver
	place  []int // of each time wanted, in the solution of its phase
}

// options of the integration: a tolerance of its own for shares and for ligand.
func (m *massAction) options(p *Program, gradient bool) ode.Options {
	rtol := p.Tolerance
	if rtol == 0 {
		rtol = defaultTolerance
	}
	most := math.Max(p.Loaded, p.Sites)
	for _, ph := range p.Phases {
		if ph.Action == Add || ph.Action == Block {
			most = math.Max(most, ph.Amount)
		}
	}
	o := ode.Options{Rtol: rtol, AtolEach: make([]float64, m.Dim()), Names: make([]string, m.Dim())}
	for i := range o.AtolEach {
		o.AtolEach[i] = rtol * 1e-3
		switch {
		case i < m.s:
			o.Names[i] = fmt.Sprintf("%q", m.b.m.net.States[i].Name)
			o.NonNegative = append(o.NonNegative, i)
		case i >= m.free():
			o.Names[i] = "free ligand"
			o.AtolEach[i] = math.Max(most, 1e-300) * rtol * 1e-6
			if i > m.free() {
				o.Names[i] = "free unlabelled ligand"
			}
		default:
			o.Names[i] = fmt.Sprintf("labelled ligand in %q", m.b.m.net.States[m.b.m.net.Tags[i-m.s].State].Name)
		}
	}
	if gradient {
		o.Sensitivity = &ode.Sensitivity{}
	}
	return o
}

// phases lays the program out for the integrator.
func (r *run) phases(p *Program, times []float64) []ode.Phase {
	plan := schedule(r.c, p, times)
	r.place = plan.place
	if r.sens != nil {
		r.solver.Options.Sensitivity.Start = r.sens
	}
	sites := p.Sites
	list := make([]ode.Phase, len(p.Phases))
	for i := range p.Phases {
		ph := p.Phases[i]
		if ph.Action == Dilute {
			sites /= ph.Amount
		}
		m := newMassAction(r.b, sites, r.m.tagged)
		list[i] = ode.Phase{System: m, Times: plan.times[i]}
		if ph.Action != Wait {
			list[i].Enter = func(y []float64, sens *mat.Dense) error { return m.enter(&ph, y, sens) }
		}
	}
	return list
}

// plan is where the times wanted lie among those of the integrator.
type plan struct {
	times [][]float64 // of each phase, after its start; the last ends it
	place []int       // of each time wanted, in the solution of its phase
}

// schedule lays the times out over the phases, and writes in which each lies.
func schedule(c *Course, p *Program, times []float64) plan {
	out := plan{place: make([]int, len(times))}
	begin, next := 0.0, 0
	for i, ph := range p.Phases {
		end := begin + ph.Seconds
		var list []float64
		for ; next < len(times) && (times[next] <= end || i == len(p.Phases)-1); next++ {
			c.Phase[next] = i
			t := math.Min(times[next], end)
			if t > begin+rounding(begin) && (len(list) == 0 || t > list[len(list)-1]) {
				list = append(list, t)
			}
			out.place[next] = len(list)
		}
		if len(list) == 0 || list[len(list)-1] < end {
			list = append(list, end)
		}
		out.times = append(out.times, list)
		begin = end
	}
	return out
}

// enter changes the free ligand at the beginning of a phase. What is bound stays.
func (m *massAction) enter(ph *Phase, y []float64, sens *mat.Dense) error {
	at := m.free()
	scale := func(place int, f float64) {
		y[place] *= f
		if sens != nil {
			row := sens.RawRowView(place)
			for k := range row {
				row[k] *= f
			}
		}
	}
	switch ph.Action {
	case Dilute:
		scale(at, 1/ph.Amount)
		if m.tagged {
			scale(at+1, 1/ph.Amount)
		}
	case Wash:
		scale(at, 0)
		if m.tagged {
			scale(at+1, 0)
		}
	case Block:
		y[at+1] += ph.Amount
	case Add:
		return m.add(ph.Amount, y, sens)
	}
	return nil
}

// add brings the total of labelled ligand to an amount.
func (m *massAction) add(amount float64, y []float64, sens *mat.Dense) error {
	at := m.free()
	if m.sites == 0 {
		y[at] = amount
		if sens != nil {
			clear(sens.RawRowView(at))
		}
		return nil
	}
	bound := m.labelled(y)
	y[at] = amount - bound*m.sites
	if y[at] < 0 {
		return fmt.Errorf("a total of %g is less than the %g that is bound already", amount, bound*m.sites)
	}
	if sens == nil {
		return nil
	}
	row := sens.RawRowView(at)
	clear(row)
	m.each(func(place int, w float64) {
		for k, d := range sens.RawRowView(place) {
			row[k] -= m.sites * w * d
		}
	})
	return nil
}

// labelled is the share of all sites with labelled ligand.
func (m *massAction) labelled(y []float64) (sum float64) {
	m.each(func(place int, w float64) { sum += w * y[place] })
	return sum
}

// each calls f with every place that holds labelled ligand, and its weight.
func (m *massAction) each(f func(place int, w float64)) {
	net := m.b.m.net
	if m.tagged {
		for t, tag := range net.Tags {
			f(m.s+t, 1/float64(net.States[tag.State].Sites))
		}
		return
	}
	for s, state := range net.States {
		if state.Ligands > 0 {
			f(s, float64(state.Ligands)/float64(state.Sites))
		}
	}
}

// show writes one time.
func (r *run) show(k int, t float64, y []float64, sens *mat.Dense) error {
	m, c := r.m, r.c
	if i := finite(y); i >= 0 {
		return fmt.Errorf("the integration met a value that is no number at %g s", t)
	}
	r.b.record(c, k, y[:m.s])
	c.Free[k] = y[m.free()]
	seesLabel := m.tagged && r.b.m.net.SeesBinding()
	if m.tagged {
		c.Unlabelled[k] = y[m.free()+1]
		c.Labelled[k] = m.labelled(y)
		if seesLabel {
			c.Seen[k] = c.Labelled[k]
		}
	}
	if sens == nil {
		return nil
	}
	row := c.Grad.RawRowView(k)
	if seesLabel {
		m.each(func(place int, w float64) {
			for q, d := range sens.RawRowView(place) {
				row[q] += w * d
			}
		})
		return nil
	}
	for s := range m.s {
		for q, d := range sens.RawRowView(s) {
			row[q] += r.b.o[s] * d
		}
		for q := range r.b.m.k {
			row[q] += y[s] * r.b.do.At(s, q)
		}
	}
	return nil
}

// blame says in the words of the bench what stopped an integration.
func (r *run) blame(err error) error {
	var f *ode.Failure
	if errors.As(err, &f) && f.Reason == ode.Cancelled {
		return err
	}
	return fmt.Errorf("the course cannot be followed: %w", err)
}

// Integrated is Run by the equations of mass action, also where an exact solution
// would do, at a relative tolerance: the two hold each other to account.
func (b *Bound) Integrated(ctx context.Context, p *Program, times []float64, tolerance float64) (*Course, error) {
	if err := p.Check(times); err != nil {
		return nil, err
	}
	q := *p
	q.Tolerance = tolerance
	return b.integrate(ctx, &q, times, false)
}
