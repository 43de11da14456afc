package saturation

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"slices"
)

// A mechanism is out when at most one in a hundred of the studies simulated
// from it lets the best candidate win by as much as it did.
const outShare = 0.01

// noLead is the T that rounding may make of none: what holds the curves of all
// others never loses to them, and is not out for the last digit of its fit.
const noLead = 0.1

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

	curves *curves
	rivals []int // candidates whose curves no other candidate holds: one of them is best
}

// decide marks candidates `out`, the nearest to the leader first.
func (d *decider) decide(ctx context.Context) {
	for n, i := range d.order {
		f := d.fits[i]
		if n == 0 || f.row.Standing != "open" || ctx.Err() != nil {
			continue
		}
		d.progress(n)
		if t := f.twinOf; t >= 0 && d.fits[t].decided {
			f.row.Standing, f.decided = d.fits[t].row.Standing, true
			continue
		}
		out := d.out(ctx, i)
		if ctx.Err() != nil {
			return
		}
		f.decided = true
		if out {
			f.row.Standing = "out"
		}
	}
	d.restore()
}

// restore takes back `out` from candidates that hold all curves of one that is
// not out: what is a part of them cannot be right where they are wrong.
func (d *decider) restore() {
	for _, i := range d.order {
		if d.fits[i].row.Standing != "out" {
			continue
		}
		for _, j := range d.order {
			if d.fits[j].row.Standing != "out" && d.curves.hold(i, j) {
				d.fits[i].row.Standing = "open"
				break
			}
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
	if d.draws <= 0 || observed <= noLead {
		return false
	}
	t := d.trial(ctx, i, observed)
	if t == nil {
		return false
	}
	allowed := int(outShare*float64(d.draws+1)) - 1 // wins besides the data's own
	wins, batch := 0, 8
	for from := 0; from < d.draws; {
		to := min(from+batch, d.draws)
		wins += t.wins(ctx, from, to)
		if wins > allowed || ctx.Err() != nil {
			return false
		}
		from, batch = to, min(2*batch, 64)
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
	return d.fits[i].row.Points >= 3*k+3 && observed > 30+6*float64(k)
}

// trial is what is shared by the draws from one candidate.
type trial struct {
	d        *decider
	observed float64
	sim      *simulation
	own      int
	rivals   []int
	starts   [][]float64 // per rival: where its fit to the candidate's own curves lies
	crews    []crew
	won      []bool // per draw
}

// trial prepares the draws from candidate i: which rivals can win at all, and
// from where their fits start.
func (d *decider) trial(ctx context.Context, i int, observed float64) *trial {
	f := d.fits[i]
	t := &trial{d: d, observed: observed, own: i, won: make([]bool, d.draws),
		sim: newSimulation(f, d.a.Settings.Seed<<8^uint64(i))}
	for _, j := range d.maximal() {
		if j == i {
			continue
		}
		r := newRefitter(d.fits[j])
		if r == nil {
			continue
		}
		r.observe(t.sim.mean)
		misfit, theta := r.misfit(ctx, t.sim, d.fits[j].result.Theta, d.fits[j].m.firstStarts()[0])
		if misfit < 0 || !canWin(misfit, observed, d.fits[j].k) {
			continue
		}
		t.rivals, t.starts = append(t.rivals, j), append(t.starts, theta)
	}
	for range min(d.workers(), d.draws) {
		t.crews = append(t.crews, t.crew(ctx))
	}
	return t
}

// maximal are the candidates whose curves no other candidate holds entirely:
// one of them has the greatest likelihood, whatever the data.
func (d *decider) maximal() []int {
	if d.rivals != nil {
		return d.rivals
	}
	byFreedom := slices.Clone(d.order)
	slices.SortStableFunc(byFreedom, func(i, j int) int { return d.fits[j].k - d.fits[i].k })
	for _, i := range byFreedom {
		if !slices.ContainsFunc(d.rivals, func(j int) bool { return d.curves.hold(j, i) }) {
			d.rivals = append(d.rivals, i)
		}
	}
	return d.rivals
}

// canWin says whether a rival with this misfit D², in units of the scatter, to
// the candidate's own curves can win by T. Its lead 2 ln(L_rival/L_own) is then
// about χ² − D² + 2Dz with z standard normal: it wins where
// z ≥ (D² + T − χ²)/2D, which beyond 4 happens in 3 of 100,000 draws.
func canWin(misfit, observed float64, k int) bool {
	return misfit == 0 || (misfit+observed-float64(10+2*k))/(2*math.Sqrt(misfit)) < 4
}

// misfit is the least D² that the candidate's fits to noise-free curves reach
// from these starts, and where; −1 where there is none.
func (r *refitter) misfit(ctx context.Context, s *simulation, starts ...[]float64) (least float64, at []float64) {
	least = -1
	for _, theta := range starts {
		if math.IsInf(r.from(ctx, theta), -1) {
			continue
		}
		sum := 0.0
		for bi, b := range r.f.m.blocks {
			b.predict(r.theta, false)
			for i := range b.pts {
				e := (b.predicted(i) - s.mean[bi][i]) / s.sd[bi][i]
				sum += e * e
			}
		}
		if least < 0 || sum < least {
			least, at = sum, slices.Clone(r.theta)
		}
	}
	return least, at
}

// wins counts the draws in [from, to) in which a rival wins by as much as
// observed.
func (t *trial) wins(ctx context.Context, from, to int) int {
	t.sim.draws(ctx, from, to, t.crews)
	n := 0
	for _, w := range t.won[from:to] {
		if w {
			n++
		}
	}
	return n
}

// crew makes one goroutine's share of the draws.
func (t *trial) crew(ctx context.Context) crew {
	own := newRefitter(t.d.fits[t.own])
	rivals := make([]*refitter, len(t.rivals))
	for n, j := range t.rivals {
		rivals[n] = newRefitter(t.d.fits[j])
	}
	return func(k int, y [][]float64) {
		own.observe(y)
		lnL := own.from(ctx, t.d.fits[t.own].result.Theta)
		for n, r := range rivals {
			r.observe(y)
			if 2*(r.from(ctx, t.starts[n])-lnL) >= t.observed {
				t.won[k] = true
				return
			}
		}
	}
}

func (d *decider) workers() int {
	if d.a.Settings.Workers > 0 {
		return d.a.Settings.Workers
	}
	return runtime.GOMAXPROCS(0)
}

// draws of the deciding bootstrap, as a sentence of the settings.
func drawsWords(n int) string {
	if n <= 0 {
		return "no deciding bootstrap: nothing is called out that is not hopelessly behind"
	}
	return fmt.Sprintf("%d studies simulated from each mechanism behind the leader", n)
}
