package fit

import "context"

// Again is the workspace of a problem that is fitted over and over, each time
// to other measured values at the same places. It allocates nothing after its
// making. It is for one goroutine.
type Again struct {
	s   *solver
	tol float64
}

// NewAgain prepares repeated fits of p that end at a relative offset of tol: the
// sum of squares is then above its minimum by about a part tol².
func NewAgain(p *Problem, tol float64) (*Again, error) {
	if err := p.Check(); err != nil {
		return nil, err
	}
	return &Again{s: newSolver(p, false), tol: tol}, nil
}

// From descends from theta in at most so many steps, with what the blocks now
// hold, and says how that ended: NoAnswer where theta cannot be evaluated.
func (a *Again) From(ctx context.Context, theta []float64, most int) Status {
	s := a.s
	s.renew()
	s.place(theta)
	end, ok := s.again(ctx.Done(), RefitSettings{Offset: a.tol, MaxIter: most})
	switch {
	case !ok:
		return NoAnswer
	case end == stationary || end == rounding:
		return Converged
	}
	return Stopped
}

// Theta is where the last descent ended. It holds until the next.
func (a *Again) Theta() []float64 { return a.s.cur.theta }

// SS is the sum of squares of each block there, and Objective their sum as
// Problem defines it.
func (a *Again) SS() []float64      { return a.s.cur.ss }
func (a *Again) Objective() float64 { return a.s.cur.obj }

// renew asks the blocks again for what lies within collapsed rows.
func (s *solver) renew() {
	for i, b := range s.blocks {
		if q, ok := b.(Pooled); ok {
			s.within[i], _ = q.Pooled()
		}
	}
}
