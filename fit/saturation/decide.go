package saturation

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"runtime"
	"sync"

	"ligancy/fit"
)

// A mechanism is out when at most one in a hundred of the studies simulated
// from it lets the best candidate win by as much as it did.
const outShare = 0.01

// decider settles which candidates behind the leader are out.
//
// For a candidate m, studies are simulated from m at its own fit and refitted
// with all candidates; the statistic is T = 2 (ln L_best − ln L_m), which is
// N·ln(SS_m/SS_best) for constant scatter of one data set.
type decider struct {
	a     *Analysis
	fits  []*fitted
	order []int
	draws int
	rec   Recorder
}

// decide marks candidates `out`.
func (d *decider) decide(ctx context.Context) {
	for n, i := range d.order {
		if n == 0 || d.fits[i].row.Standing != "open" || ctx.Err() != nil {
			continue
		}
		d.progress(n)
		if d.out(ctx, i) {
			d.fits[i].row.Standing = "out"
		}
	}
}

func (d *decider) progress(n int) {
	if d.rec != nil {
		d.rec.Progress("asking which mechanisms are out", n, len(d.order))
	}
}

// out decides one candidate. It stops at the draw that settles the answer.
func (d *decider) out(ctx context.Context, i int) bool {
	observed := d.observed(i)
	if d.hopeless(i, observed) {
		return true
	}
	if d.draws <= 0 || observed <= 0 { // nothing wins by less than nothing
		return false
	}
	sim := d.simulation(ctx, i, observed)
	if sim == nil {
		return false
	}
	allowed := int(outShare*float64(d.draws+1)) - 1 // wins besides the data's own
	wins, batch := 0, 16
	for from := 0; from < d.draws; from += batch {
		wins += sim.wins(ctx, from, min(from+batch, d.draws))
		if wins > allowed || ctx.Err() != nil {
			return false
		}
	}
	return true
}

// observed is T of candidate i in the data.
func (d *decider) observed(i int) float64 {
	best := math.Inf(-1)
	for _, j := range d.order {
		best = math.Max(best, d.fits[j].lnL)
	}
	return 2 * (best - d.fits[i].lnL)
}

// hopeless says whether T is so large that no simulation is needed: far
// beyond any χ² of as many constants as the freest candidate has, with points
// to spare.
func (d *decider) hopeless(i int, observed float64) bool {
	k := 0
	for _, j := range d.order {
		k = max(k, d.fits[j].k)
	}
	return d.fits[i].row.Points >= 3*k+3 && observed > 50+8*float64(k)
}

// simulation holds what is shared by the draws of one candidate.
type simulation struct {
	d        *decider
	truth    int
	observed float64
	mean     [][]float64 // per block
	sd       [][]float64
	starts   [][][]float64 // per candidate in order
}

// simulation prepares the draws of candidate i: its predictions and scatter,
// and where each candidate's fit to the predictions themselves lies.
func (d *decider) simulation(ctx context.Context, i int, observed float64) *simulation {
	f := d.fits[i]
	s := &simulation{d: d, truth: i, observed: observed}
	for bi, b := range f.m.blocks {
		dev := f.deviations(b)
		sigma := f.blockSigma(bi)
		for k := range dev {
			dev[k] *= sigma
		}
		mean := make([]float64, len(b.pts))
		for k := range mean {
			mean[k] = b.predicted(k)
		}
		s.mean = append(s.mean, mean)
		s.sd = append(s.sd, dev)
	}
	for _, j := range d.order {
		g := d.fits[j]
		starts := [][]float64{g.result.Theta}
		if j == i {
			s.starts = append(s.starts, starts)
			continue
		}
		r, err := fit.Solve(ctx, s.replaced(g, s.mean, starts), fit.Settings{Starts: 1, Workers: 1})
		if err == nil && r != nil && r.Status != fit.NoAnswer {
			starts = [][]float64{r.Theta, g.result.Theta}
		}
		s.starts = append(s.starts, starts)
	}
	return s
}

// blockSigma is the scatter of one block as draws need it: absolute σ for
// relative deviations, 1 where the deviations are the data's own.
func (f *fitted) blockSigma(bi int) float64 {
	b := f.m.blocks[bi]
	if b.noise.scatter() == fit.Known {
		return 1
	}
	n := len(b.pts)
	dof := n - f.m.free()*n/max(f.row.Points, 1)
	return math.Sqrt(f.relativeSS(b) / float64(max(dof, 1)))
}

// replaced is a candidate's problem with other values in the place of y.
func (s *simulation) replaced(g *fitted, y [][]float64, starts [][]float64) *fit.Problem {
	p := *g.problem
	p.Blocks = nil
	for bi, b := range g.m.blocks {
		p.Blocks = append(p.Blocks, b.withY(y[bi]))
	}
	p.Starts = starts
	p.Parameters = append([]fit.Parameter(nil), p.Parameters...)
	for i := range p.Parameters {
		p.Parameters[i].StartLow, p.Parameters[i].StartHigh = math.NaN(), math.NaN()
	}
	return &p
}

// wins counts the draws in [from, to) in which the best candidate wins by as
// much as observed; draws run side by side, each with its own seed.
func (s *simulation) wins(ctx context.Context, from, to int) int {
	won := make([]bool, to-from)
	var wg sync.WaitGroup
	next := make(chan int)
	for range min(s.d.workers(), to-from) {
		wg.Go(func() {
			for draw := range next {
				won[draw-from] = s.draw(ctx, draw)
			}
		})
	}
	for draw := from; draw < to; draw++ {
		next <- draw
	}
	close(next)
	wg.Wait()
	n := 0
	for _, w := range won {
		if w {
			n++
		}
	}
	return n
}

func (d *decider) workers() int {
	if d.a.Settings.Workers > 0 {
		return d.a.Settings.Workers
	}
	return runtime.GOMAXPROCS(0)
}

// draw simulates one study and says whether the best candidate wins by as much.
func (s *simulation) draw(ctx context.Context, draw int) bool {
	rng := rand.New(rand.NewPCG(s.d.a.Settings.Seed, uint64(draw)<<8|uint64(s.truth)))
	y := make([][]float64, len(s.mean))
	for bi := range y {
		y[bi] = make([]float64, len(s.mean[bi]))
		for k := range y[bi] {
			y[bi][k] = s.mean[bi][k] + s.sd[bi][k]*rng.NormFloat64()
		}
	}
	var own float64
	for n, j := range s.d.order {
		if j == s.truth {
			own = s.refit(ctx, n, y)
		}
	}
	for n, j := range s.d.order {
		if j != s.truth && 2*(s.refit(ctx, n, y)-own) >= s.observed {
			return true
		}
	}
	return false
}

// refit is ln L of candidate order[n] on simulated values; −Inf without an answer.
func (s *simulation) refit(ctx context.Context, n int, y [][]float64) float64 {
	g := *s.d.fits[s.d.order[n]]
	g.problem = s.replaced(&g, y, s.starts[n])
	g.m = g.m.over(g.problem.Blocks)
	r, err := g.solve(ctx, fit.Settings{Starts: 1, Workers: 1})
	if err != nil || r == nil || r.Status == fit.NoAnswer {
		return math.Inf(-1)
	}
	g.result = r
	g.likelihood()
	return g.lnL
}

// draws of the deciding bootstrap, as a sentence of the settings.
func drawsWords(n int) string {
	if n <= 0 {
		return "no deciding bootstrap: nothing is called out that is not hopelessly behind"
	}
	return fmt.Sprintf("%d studies simulated from each mechanism behind the leader", n)
}
