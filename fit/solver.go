package fit

import "slices"

// solver is the workspace of one worker: nothing in it is allocated after
// newSolver, however many fits it makes.
type solver struct {
	prob   *Problem
	blocks []Block
	p      int   // parameters
	rows   []int // first row of each block, and N
	known  []bool
	within []float64 // per block: sum of squares within collapsed rows
	count  []float64 // per block: N_b, collapsed rows counted in full
	floor  []float64 // per block: the least SS that its logarithm takes
	joint  bool      // the objective is Σ N ln SS

	low, high []float64
	linear    []int // free parameters that are solved for
	curved    []int // free parameters that are searched

	shift, weight []float64 // replicate data: added to residuals, and on rows

	cur, try *point
	span     []float64 // D: the longest that each column has been
	width    []float64 // a quarter of each start box, 0 where there is none
	hits     []int     // of each parameter: steps in a row that ended on its bound
	step     *boxedStep
	brisk    brisk
	change   []float64 // of the parameters of the current point's columns
	gain     float64   // what the proposed change promises

	left, offset float64 // ‖z‖ of the current point; relative to its residuals
	evals        int
	fault        error // of a block
}

const (
	perfect = 1e-28  // a sum of squares below this share of the first is zero
	least   = 1e-290 // and so is one below this
)

// newSolver lays out the workspace. clone asks for copies of the blocks; it is
// an error of the caller to ask it of blocks that cannot be cloned.
func newSolver(p *Problem, clone bool) *solver {
	s := &solver{prob: p, p: len(p.Parameters)}
	s.blocks = append(s.blocks, p.Blocks...)
	if clone {
		for i, b := range s.blocks {
			s.blocks[i] = b.(Cloner).Clone()
		}
	}
	s.layRows()
	s.layParameters()
	m := len(s.linear) + len(s.curved)
	s.cur, s.try = newPoint(s.rows, s.p, m), newPoint(s.rows, s.p, m)
	s.span, s.change = make([]float64, s.p), make([]float64, s.p)
	s.step = newBoxedStep(m)
	s.hits = make([]int, s.p)
	return s
}

// layRows counts the residuals and says what is known of their scatter.
func (s *solver) layRows() {
	n := len(s.blocks)
	s.rows = make([]int, n+1)
	s.known, s.within = make([]bool, n), make([]float64, n)
	s.count, s.floor = make([]float64, n), make([]float64, n)
	for i, b := range s.blocks {
		s.rows[i+1] = s.rows[i] + b.Len()
		s.count[i] = float64(b.Len())
		if q, ok := b.(Pooled); ok {
			ss, more := q.Pooled()
			s.within[i] = ss
			s.count[i] += float64(more)
		}
		s.floor[i] = least
		s.known[i] = s.prob.Scatter != nil && s.prob.Scatter[i] == Known
	}
	s.joint = n > 1 && slices.Contains(s.known, false)
}

// layParameters tells fixed, linear and curved parameters apart.
func (s *solver) layParameters() {
	s.low, s.high, s.width = make([]float64, s.p), make([]float64, s.p), make([]float64, s.p)
	for j, q := range s.prob.Parameters {
		s.low[j], s.high[j] = q.Low, q.High
		if q.StartLow < q.StartHigh && !q.Linear {
			s.width[j] = (q.StartHigh - q.StartLow) / 4
		}
		switch {
		case q.Low == q.High:
		case q.Linear:
			s.linear = append(s.linear, j)
		default:
			s.curved = append(s.curved, j)
		}
	}
}

// allKnown says whether the scatter of every block is known.
func (s *solver) allKnown() bool { return !slices.Contains(s.known, false) }
