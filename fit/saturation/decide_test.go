package saturation

import (
	"context"
	"fmt"
	"math"
	"testing"

	"ligancy/fit"
)

// A refit of other values gives the likelihood that a whole fit of them gives,
// for every scatter model and with a shift by preparation.
func TestRefitIsAFit(t *testing.T) {
	for _, noise := range []Noise{Constant, Proportional, Mixed, GivenSigma, Replicates, StudentT, "shift"} {
		t.Run(string(noise), func(t *testing.T) {
			a := shiftStudy(t, 3, "hill", 0.5)
			a.Candidates = a.Candidates[:1]
			d := &a.Data[0]
			d.Noise = noise
			if noise == "shift" {
				d.Noise = Constant
				a.Candidates[0].ShiftByPreparation = true
			}
			for i := range d.Points {
				d.Points[i].Sigma = 0.02
			}
			f := a.fitCandidate(context.Background(), &a.Candidates[0], fit.Settings{Starts: 5, Seed: 1, Workers: 1})
			if !f.answered() {
				t.Fatal(f.row.Status, f.err)
			}
			r, s := newRefitter(f), newSimulation(f, 4)
			y := s.values()
			for k := range 3 {
				s.draw(k, y)
				r.observe(y)
				got := r.from(context.Background(), f.result.Theta)
				want := f.wholeFit(t, y)
				if !(math.Abs(got-want) < 0.01) {
					t.Errorf("draw %d: ln L %v, a whole fit's %v", k, got, want)
				}
			}
		})
	}
}

// wholeFit is ln L of a candidate fitted to other values by the ordinary way.
func (f *fitted) wholeFit(t *testing.T, y [][]float64) float64 {
	t.Helper()
	g := *f
	g.problem = replaced(f, y, [][]float64{f.result.Theta})
	g.m = f.m.over(g.problem.Blocks)
	r, err := g.solve(context.Background(), fit.Settings{Starts: 1, Workers: 1})
	if err != nil {
		t.Fatal(err)
	}
	g.result = r
	g.likelihood()
	return g.lnL
}

// Draws have the predictions as mean and the scatter as deviation, the same for
// the same number whatever was drawn before.
func TestDrawsAreThoseOfTheScatterModel(t *testing.T) {
	for _, noise := range []Noise{Constant, Proportional, StudentT} {
		a := truths(t)[0].study(t, 0)
		a.Data[0].Noise = noise
		a.Candidates = among("one site")(t)
		f := a.fitCandidate(context.Background(), &a.Candidates[0], fit.Settings{Starts: 3, Seed: 1, Workers: 1})
		s := newSimulation(f, 11)
		y, again := s.values(), s.values()
		const n = 4000
		i := len(s.mean[0]) / 2
		sum, square := 0.0, 0.0
		for k := range n {
			s.draw(k, y)
			e := (y[0][i] - s.mean[0][i]) / s.sd[0][i]
			sum, square = sum+e, square+e*e
		}
		s.draw(n-1, again)
		if again[0][i] != y[0][i] {
			t.Errorf("%s: draw %d is not the same again", noise, n-1)
		}
		variance := 1.0
		if noise == StudentT {
			variance = studentFreedom / (studentFreedom - 2)
		}
		if math.Abs(sum/n) > 0.08 || math.Abs(square/n-variance) > 0.25*variance {
			t.Errorf("%s: mean %v, variance %v of %v", noise, sum/n, square/n, variance)
		}
	}
}

// standingOfAll lists the standings of a study's mechanisms, in the order of the study.
func standingOfAll(a *Analysis) string {
	a = a.withDefaults()
	fits := a.fitAll(context.Background(), nil)
	a.compare(context.Background(), fits, nil)
	s := ""
	for _, f := range fits {
		s += f.row.Name + ": " + f.row.Standing + "\n"
	}
	return s
}

// The number of workers changes nothing.
func TestWorkersChangeNoStanding(t *testing.T) {
	for _, tr := range truths(t) {
		if tr.number%2 == 0 && testing.Short() {
			continue
		}
		one, four := tr.study(t, 3), tr.study(t, 3)
		one.Settings.Workers, four.Settings.Workers = 1, 4
		if a, b := standingOfAll(one), standingOfAll(four); a != b {
			t.Errorf("truth %d: one worker\n%sfour workers\n%s", tr.number, a, b)
		}
	}
}

// Leaving out rivals that others hold, or that cannot win, and skipping the
// draws of mechanisms hopelessly behind, changes no decision: the same as with
// every candidate refitted to every draw.
func TestShortcutsChangeNoDecision(t *testing.T) {
	numbers := []int{1, 2, 5, 7}
	if testing.Short() {
		numbers = numbers[1:2]
	}
	for _, number := range numbers {
		tr := truths(t)[number-1]
		a := tr.study(t, 1).withDefaults()
		ctx := context.Background()
		fits := a.fitAll(ctx, nil)
		c := newCurves(a, fits)
		order := rank(fits, c)
		stand(fits, order)
		d := &decider{a: a, fits: fits, order: order, draws: 199, curves: c}
		for n, i := range order {
			if n == 0 || fits[i].row.Standing != "open" {
				continue
			}
			if d.observed(i) <= noLead {
				continue
			}
			short, whole := d.out(ctx, i), d.outByAll(ctx, i)
			if short != whole {
				t.Errorf("truth %d, %s: out %v, with every rival %v", number, fits[i].row.Name, short, whole)
			}
		}
	}
}

// outByAll decides a candidate without shortcuts.
func (d *decider) outByAll(ctx context.Context, i int) bool {
	observed := d.observed(i)
	sim := newSimulation(d.fits[i], d.a.Settings.Seed<<8^uint64(i))
	own := newRefitter(d.fits[i])
	var rivals []*refitter
	var starts [][]float64
	for _, j := range d.order {
		if j == i {
			continue
		}
		r := newRefitter(d.fits[j])
		r.observe(sim.mean)
		_, theta := r.misfit(ctx, sim, d.fits[j].result.Theta, d.fits[j].m.firstStarts()[0])
		rivals, starts = append(rivals, r), append(starts, theta)
	}
	y := sim.values()
	wins := 0
	for k := range d.draws {
		sim.draw(k, y)
		own.observe(y)
		lnL, best := own.from(ctx, d.fits[i].result.Theta), math.Inf(-1)
		for n, r := range rivals {
			r.observe(y)
			best = math.Max(best, r.from(ctx, starts[n]))
		}
		if 2*(best-lnL) >= observed {
			wins++
		}
	}
	return wins <= int(outShare*float64(d.draws+1))-1
}

// Candidates that hold all curves of one that is not out are not out either.
func TestHoldersOfTheKeptAreKept(t *testing.T) {
	a := truths(t)[11].study(t, 0).withDefaults()
	fits := a.fitAll(context.Background(), nil)
	c := newCurves(a, fits)
	order := rank(fits, c)
	stand(fits, order)
	d := &decider{a: a, fits: fits, order: order, draws: 199, curves: c}
	d.decide(context.Background())
	for _, i := range order {
		for _, j := range order {
			if fits[i].row.Standing == "out" && fits[j].row.Standing != "out" && c.hold(i, j) {
				t.Errorf("%s is out, though it holds %s, which is not", fits[i].row.Name, fits[j].row.Name)
			}
		}
	}
}

// least finds the least of smooth functions, and stops at bounds.
func TestLeast(t *testing.T) {
	for _, want := range []float64{-2, 0.3, 5, 11} {
		at, best := 0.0, math.Inf(1)
		least(func(u float64) float64 {
			f := math.Cosh(u-want) + 0.1*math.Pow(u-want, 3)/(1+math.Pow(u-want, 2))
			if f < best {
				at, best = u, f
			}
			return f
		}, 1, lnLambdaLow, lnLambdaHigh)
		if math.Abs(at-want) > 0.05 {
			t.Errorf("least at %v, want %v", at, want)
		}
	}
	at, best := 0.0, math.Inf(1)
	least(func(u float64) float64 {
		if u < best {
			at, best = u, u
		}
		return u
	}, 1, -3, 12)
	if at != -3 {
		t.Errorf("least of a falling line at %v", at)
	}
}

// BenchmarkDeciding is the deciding bootstrap alone, of 199 draws from each
// mechanism behind the leader, one study of every constructed truth at a time.
func BenchmarkDeciding(b *testing.B) {
	for _, tr := range truths(b) {
		b.Run(fmt.Sprint(tr.number), func(b *testing.B) {
			type prepared struct {
				d     *decider
				fits  []*fitted
				order []int
			}
			var list []prepared
			for k := range 4 {
				a := tr.study(b, k).withDefaults()
				fits := a.fitAll(context.Background(), nil)
				c := newCurves(a, fits)
				order := rank(fits, c)
				list = append(list, prepared{&decider{a: a, fits: fits, order: order, draws: 199, curves: c}, fits, order})
			}
			n := 0
			for b.Loop() {
				p := list[n%len(list)]
				n++
				for _, f := range p.fits {
					f.decided = false
				}
				stand(p.fits, p.order)
				p.d.rivals = nil
				p.d.curves.held = map[[2]int]bool{}
				p.d.decide(context.Background())
			}
		})
	}
}
