package saturation

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// block is one data set beside one mechanism: a fit.Block whose residuals are
// (ŷ − y)·w, with ŷ = low + (high − low)·s(x) + nonspecific·x.
//
// Measurements that see the same prediction share a row; where the scatter
// model allows, a row is their weighted mean (fit.Pooled).
type block struct {
	m      *model
	data   int
	ends   ends
	mech   mechanisms.Mechanism // whose response is that of the data set
	tracer int                  // the effector that the response counts, in displacement; −1
	resp   Response             // with what the mechanism settles of it
	pts    []datum
	rows   []row
	y      []float64 // per point: what was measured, or simulated in its place

	curves  []curveAt // curves that this data set visits
	traces  []trace   // of a data set that is followed in time
	noise   scatterModel
	noiseAt int // place in Θ of a scatter model's own number
	pool    pool
	work    *workspace
}

// datum is one kept measurement.
type datum struct {
	index int // in Dataset.Points
	row   int
	part
}

// row is one prediction.
type row struct {
	x float64
	part
}

// part says which parts of Θ and of the curves a prediction sees.
type part struct {
	cell          int // in model.cells
	curve, at     int // in block.curves and its lnx
	low, high, ns int // in Θ; −1 where the number is fixed
	blocked       bool
}

// curveAt is one cell with the distinct ligand values at which it is wanted.
type curveAt struct {
	cell int
	lnx  []float64
	byX  map[float64]int

	moments  []moment // of traces
	byMoment map[moment]int
}

// workspace is what one goroutine needs to evaluate a block.
type workspace struct {
	curve mechanisms.Curve
	seen  mechanisms.Curve
	theta []float64
	s     [][]float64  // per curve, per ligand value
	grad  []*mat.Dense // per curve, ligand values × constants
	yHat  []float64    // per row
	jHat  *mat.Dense   // rows × Θ
	mean  []float64    // Θ: mean gradient of ln g

	point, seenPoint    *mechanisms.Point      // of the curve and of what is seen
	env                 mechanisms.Environment // with the free tracer of a tube
	oneX, oneY          [1]float64             // one point of what is seen
	oneGrad             *mat.Dense
	limitLow, limitHigh []float64

	clock *clock // of traces; nil without
}

// linear says whether residuals are linear in the ends of the response.
func (b *block) linear() bool {
	switch b.m.a.Data[b.data].Noise {
	case Constant, GivenSigma, Replicates, "":
		return true
	}
	return false
}

// add takes one kept point.
func (b *block) add(index int, p *Point, cell int) {
	ci := -1
	for i := range b.curves {
		if b.curves[i].cell == cell {
			ci = i
		}
	}
	if ci < 0 {
		ci = len(b.curves)
		b.curves = append(b.curves, curveAt{cell: cell, byX: map[float64]int{}})
	}
	c := &b.curves[ci]
	at, ok := c.byX[p.X]
	switch d := &b.m.a.Data[b.data]; {
	case d.Trace:
		at = c.addMoment(d, p)
	case !ok:
		at = len(c.lnx)
		c.byX[p.X] = at
		c.lnx = append(c.lnx, math.Log(p.X))
	}
	b.pts = append(b.pts, datum{index: index, part: part{cell: cell, curve: ci, at: at, low: -1, high: -1, ns: -1, blocked: p.Blocked}})
}

// prepare gathers the rows, settles the scatter model and makes the first workspace.
func (b *block) prepare() {
	d := &b.m.a.Data[b.data]
	byPart := map[part]int{}
	b.y = make([]float64, len(b.pts))
	for i := range b.pts {
		q := &b.pts[i]
		b.y[i] = d.Points[q.index].Y
		r, ok := byPart[q.part]
		if !ok {
			r = len(b.rows)
			byPart[q.part] = r
			b.rows = append(b.rows, row{x: d.atLigand(q.index).X, part: q.part})
		}
		q.row = r
	}
	b.noise = newScatterModel(b)
	b.pool = b.noise.gather(b)
	b.work = b.newWorkspace()
}

func (b *block) newWorkspace() *workspace {
	k, p := len(b.m.consts), len(b.m.params)
	w := &workspace{curve: b.mech.Curve(), theta: make([]float64, k),
		yHat: make([]float64, len(b.rows)), jHat: mat.NewDense(max(len(b.rows), 1), p, nil), mean: make([]float64, p)}
	w.seen = watch(w.curve)
	w.point = newPoint(k)
	w.seenPoint = w.point
	if w.seen != w.curve {
		w.seenPoint = newPoint(k)
		w.oneGrad = mat.NewDense(1, k, nil)
		w.limitLow, w.limitHigh = make([]float64, k), make([]float64, k)
	}
	w.clock = b.newClock()
	for _, c := range b.curves {
		w.s = append(w.s, make([]float64, len(c.lnx)))
		w.grad = append(w.grad, mat.NewDense(len(c.lnx), k, nil))
	}
	return w
}

// Len is the number of residuals, those of a shift by preparation included.
func (b *block) Len() int {
	n := b.noise.residualCount(b)
	if b.m.shift != nil {
		n += len(b.m.shift.at)
	}
	return n
}

// Pooled implements fit.Pooled.
func (b *block) Pooled() (ss float64, more int) {
	return b.pool.within, len(b.pts) - b.noise.residualCount(b)
}

// Clone shares everything but the workspace.
func (b *block) Clone() fit.Block {
	c := *b
	c.work = b.newWorkspace()
	return &c
}

// withY is a clone that fits other values at the same places.
func (b *block) withY(y []float64) *block {
	c := b.Clone().(*block)
	c.y = y
	if _, ok := c.noise.(reweighted); ok {
		c.noise = newScatterModel(c)
	}
	c.pool = c.noise.gather(c)
	return c
}

// Eval implements fit.Block.
func (b *block) Eval(res []float64, jac *mat.Dense, theta []float64) error {
	b.predict(theta, jac != nil)
	if c := b.work.clock; c != nil && c.fault != nil {
		return c.fault
	}
	b.noise.residuals(b, res, jac, theta)
	if b.m.shift != nil {
		b.penalty(res, jac, theta)
	}
	return nil
}

// predict fills yHat and, where wanted, its gradient jHat.
func (b *block) predict(theta []float64, gradient bool) {
	w := b.work
	switch {
	case w.clock != nil:
		b.follow(theta, gradient)
	case b.m.a.Data[b.data].Total:
		if b.tracer >= 0 {
			b.predictDisplaced(theta, gradient)
		} else {
			b.predictTotal(theta, gradient)
		}
		return
	default:
		b.predictFree(theta, gradient)
	}
	b.respond(theta, gradient)
}

// predictFree is what is seen on every curve at its free ligand values.
func (b *block) predictFree(theta []float64, gradient bool) {
	w := b.work
	for i := range b.curves {
		b.bind(theta, b.curves[i].cell)
		g := w.grad[i]
		if !gradient {
			g = nil
		}
		w.seen.Saturation(w.s[i], b.curves[i].lnx, g)
	}
}

// respond turns what is seen into the response of every row.
func (b *block) respond(theta []float64, gradient bool) {
	w, d := b.work, &b.resp
	for i := range b.rows {
		q := &b.rows[i]
		low, span, ns := value(theta, q.low, d.Low), value(theta, q.high, d.High), value(theta, q.ns, d.Nonspecific)
		if !b.ends.span {
			span -= low
		}
		s := w.s[q.curve][q.at]
		if q.blocked {
			s = 0
		}
		w.yHat[i] = low + span*s + ns*b.counted(q)
		if gradient {
			b.gradient(i, s, span, theta)
		}
	}
}

// gradient fills row i of jHat.
func (b *block) gradient(i int, s, span float64, theta []float64) {
	w, q := b.work, &b.rows[i]
	row := w.jHat.RawRowView(i)
	clear(row)
	if !q.blocked {
		b.m.chain(row, w.grad[q.curve].RawRowView(q.at), span, q.cell, theta)
		if w.clock != nil {
			b.chainRates(row, q, span)
		}
	}
	b.endsGradient(row, q, s, b.counted(q))
}

// bind sets the workspace's curve to the constants of a cell.
func (b *block) bind(theta []float64, cell int) {
	b.settle(theta, cell)
	b.work.curve.Bind(b.work.theta, b.m.cells[cell].env)
}

// chain adds w times a gradient by a cell's constants to one by Θ.
func (m *model) chain(out, g []float64, w float64, cell int, theta []float64) {
	c := &m.cells[cell]
	if c.shift >= 0 {
		m.shiftChain(out, g, w, c, theta)
		return
	}
	for k, j := range c.theta {
		out[j] += w * g[k]
	}
}

// predicted is ŷ of point i, after predict.
func (b *block) predicted(i int) float64 { return b.work.yHat[b.pts[i].row] }

// value is a number of the response: fitted, or as set.
func value(theta []float64, i int, s Setting) float64 {
	if i >= 0 {
		return theta[i]
	}
	return s.Value
}

// scatter says what fit knows of the block's standard deviation.
func (b *block) scatter() fit.Scatter { return b.noise.scatter() }
