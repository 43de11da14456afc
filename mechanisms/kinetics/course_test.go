package kinetics_test

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"pgregory.net/rapid"

	"ligancy/mechanisms"
	"ligancy/mechanisms/kinetics"
	"ligancy/mechanisms/mechtest"
)

// networks draws random mechanisms that have a network.
func networks() *rapid.Generator[mechtest.Case] {
	return rapid.OneOf(mechtest.Molecules(3), rapid.Map(rapid.SliceOfN(mechtest.Molecules(2), 2, 2), func(list []mechtest.Case) mechtest.Case {
		d := mechanisms.Definition{}
		for i, c := range list {
			c.Definition.Turnover, c.Definition.Sees = nil, nil
			own := c.Definition
			d.Parts = append(d.Parts, mechanisms.Part{Name: fmt.Sprintf("p%d", i), Family: c.Family, Definition: &own})
		}
		return mechtest.Case{Family: "mixture", Definition: d}
	}))
}

// drawn is a random mechanism bound to random constants and rates; ok is false where
// some state has no weight at these constants.
func drawn(rt *rapid.T) (b *kinetics.Bound, m *kinetics.Model, theta, phi []float64, env mechanisms.Environment, ok bool) {
	c := networks().Draw(rt, "mechanism")
	mech := c.Build()
	m, err := kinetics.New(mech, usualRates(mech))
	if err != nil {
		rt.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(rapid.Uint64().Draw(rt, "seed"), 0))
	theta, env = mechtest.Draw(rng, mech), mechtest.DrawEnvironment(rng, mech)
	phi = drawRates(rng, m)
	b = m.Bound()
	return b, m, theta, phi, env, b.Bind(theta, phi, env) == nil
}

// The exact and the integrated solution agree; shares are never negative and sum to 1.
func TestExactIsIntegrated(t *testing.T) {
	worst := 0.0
	rapid.Check(t, func(rt *rapid.T) {
		b, _, _, _, _, ok := drawn(rt)
		if !ok {
			return
		}
		x := math.Exp(rapid.Float64Range(-2, 2).Draw(rt, "ln x"))
		times := []float64{0, 0.01, 0.02, 0.03, 0.3, 1, 1.5, 4}
		p := &kinetics.Program{Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: x, Seconds: 1}, {Action: kinetics.Dilute, Amount: 5, Seconds: 2},
			{Action: kinetics.Wash, Seconds: 1}}}
		exact, err := b.Run(context.Background(), p, times, false)
		if err != nil {
			rt.Fatal(err)
		}
		other, err := b.Integrated(context.Background(), p, times, 1e-11)
		if err != nil {
			rt.Fatal(err)
		}
		for i := range times {
			sum := 0.0
			for s, q := range exact.Shares[i] {
				if q < 0 || other.Shares[i][s] < 0 {
					rt.Errorf("share %g or %g", q, other.Shares[i][s])
				}
				sum += q
				worst = math.Max(worst, math.Abs(q-other.Shares[i][s]))
				near(rt, fmt.Sprintf("share of state %d at %g s", s, times[i]), other.Shares[i][s], q, 1e-9)
			}
			near(rt, "sum of shares", sum, 1, 1e-13)
			near(rt, "saturation", other.Saturation[i], exact.Saturation[i], 1e-9)
		}
	})
	t.Logf("at most %.2g apart", worst)
}

// Long times reach the equilibrium of the mechanism's own curve, whichever the rates.
func TestLongTimesReachEquilibrium(t *testing.T) {
	worst := 0.0
	rapid.Check(t, func(rt *rapid.T) {
		b, m, theta, _, env, ok := drawn(rt)
		if !ok {
			return
		}
		lnx := rapid.Float64Range(-4, 4).Draw(rt, "ln x")
		p := &kinetics.Program{Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: math.Exp(lnx), Seconds: 1e12}}}
		c, err := b.Run(context.Background(), p, []float64{1e12}, false)
		if err != nil {
			rt.Fatal(err)
		}
		curve := m.Mechanism().Curve()
		curve.Bind(theta, env)
		var want [1]float64
		curve.Saturation(want[:], []float64{lnx}, nil)
		worst = math.Max(worst, math.Abs(want[0]-c.Saturation[0]))
		near(rt, "saturation after a long time", c.Saturation[0], want[0], 1e-10)
		if w, ok := curve.(mechanisms.Watched); ok {
			w.Watch().Saturation(want[:], []float64{lnx}, nil)
			near(rt, "response after a long time", c.Seen[0], want[0], 1e-10*math.Max(1, math.Abs(want[0])))
		}
	})
	t.Logf("at most %.2g off", worst)
}

// The gradient of a course against differences, with and without depletion.
func TestGradients(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		b, m, theta, phi, env, ok := drawn(rt)
		if !ok {
			return
		}
		p := &kinetics.Program{Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: 1.5, Seconds: 1}, {Action: kinetics.Dilute, Amount: 5, Seconds: 1}}}
		if rapid.Bool().Draw(rt, "at rest first") {
			p.Phases[0].Action = kinetics.Wait
			p.Loaded = 1.5
		}
		within := 2e-6
		switch rapid.IntRange(0, 2).Draw(rt, "kind") {
		case 1:
			p.Sites, p.Tolerance, within = 0.7, 1e-10, 3e-5
		case 2:
			p.Phases[1] = kinetics.Phase{Action: kinetics.Block, Amount: 3, Seconds: 1}
			p.Tolerance, within = 1e-10, 3e-5
		}
		times := []float64{0, 0.25, 0.5, 0.75, 1.2, 2}
		c, err := b.Run(context.Background(), p, times, true)
		if err != nil {
			rt.Fatal(err)
		}
		all := append(append([]float64(nil), theta...), phi...)
		at := func(k int, h float64) []float64 {
			q := append([]float64(nil), all...)
			q[k] += h
			o := m.Bound()
			if err := o.Bind(q[:len(theta)], q[len(theta):], env); err != nil {
				rt.Fatal(err)
			}
			c, err := o.Run(context.Background(), p, times, false)
			if err != nil {
				rt.Fatal(err)
			}
			return c.Seen
		}
		k := rapid.IntRange(0, len(all)-1).Draw(rt, "constant")
		h := 1e-4 * math.Max(1, math.Abs(all[k]))
		if k < len(theta) && m.Mechanism().Constants()[k].Scale == mechanisms.Linear {
			h = 1e-4 * math.Abs(all[k])
		}
		if h == 0 {
			return
		}
		up, down := at(k, h), at(k, -h)
		for i := range times {
			want := (up[i] - down[i]) / (2 * h)
			near(rt, fmt.Sprintf("gradient by constant %d at %g s", k, times[i]), c.Grad.At(i, k), want, within*math.Max(1, math.Abs(want)))
		}
	})
}

// One site binds and leaves as textbooks have it: the rate is k_on x + k_off.
func TestOneSite(t *testing.T) {
	const kd, kOn, x = 2e-9, 1e6, 5e-9
	b := bound(t, build(t, site), []float64{kd}, []float64{kOn})
	kOff := kOn * kd
	y := x / (x + kd)
	p := &kinetics.Program{Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: x, Seconds: 1000}, {Action: kinetics.Wash, Seconds: 1000}}}
	times := []float64{0, 10, 20, 30, 100, 777, 1000, 1100, 1500, 2000}
	c := run(t, b, p, times)
	full := y * -math.Expm1(-1000*(kOn*x+kOff))
	for i, s := range times {
		want := y * -math.Expm1(-s*(kOn*x+kOff))
		if s > 1000 {
			want = full * math.Exp(-(s-1000)*kOff)
		}
		near(t, fmt.Sprintf("saturation at %g s", s), c.Saturation[i], want, 1e-14)
	}
	tau, err := b.Relaxations(x)
	if err != nil || len(tau) != 1 {
		t.Fatal(tau, err)
	}
	near(t, "relaxation time", tau[0]*(kOn*x+kOff), 1, 1e-14)
	tau, _ = b.Relaxations(0)
	near(t, "relaxation time without ligand", tau[0]*kOff, 1, 1e-14)
}

// One site that uses up its ligand: with a, b the roots of the quadratic of
// equilibrium, bound = a b (1 − e^(−k(b−a)t))/(b − a e^(−k(b−a)t)), the closed form of
// second-order binding.
func TestOneSiteUsesUpLigand(t *testing.T) {
	const kd, kOn, total, sites = 2.0, 0.03, 3.0, 4.0
	b := bound(t, build(t, site), []float64{kd}, []float64{kOn})
	s := total + sites + kd
	root := math.Sqrt(s*s - 4*total*sites)
	low, high := (s-root)/2, (s+root)/2
	p := &kinetics.Program{Sites: sites, Tolerance: 1e-11, Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: total, Seconds: 100}}}
	times := []float64{0, 0.1, 1, 5, 20, 100}
	c := run(t, b, p, times)
	for i, sec := range times {
		e := math.Exp(-kOn * root * sec)
		want := low * high * (1 - e) / (high - low*e)
		near(t, fmt.Sprintf("bound at %g s", sec), c.Saturation[i]*sites, want, 1e-9)
		near(t, fmt.Sprintf("free at %g s", sec), c.Free[i], total-want, 1e-9)
	}
}

// Unlabelled ligand does not change what is bound in all, where it is added to a
// sample at the same total; of one site, label leaves with k_off alone once swamped.
func TestBlockedSiteLosesLabel(t *testing.T) {
	const kd, kOn = 1.0, 0.2
	b := bound(t, build(t, site), []float64{kd}, []float64{kOn})
	p := &kinetics.Program{Loaded: 2, Tolerance: 1e-11, Phases: []kinetics.Phase{{Action: kinetics.Block, Amount: 2e6, Seconds: 20}}}
	c := run(t, b, p, []float64{0, 1, 5, 20})
	for i, s := range c.Seconds {
		// At most a millionth binds again.
		near(t, fmt.Sprintf("label at %g s", s), c.Labelled[i], 2./3*math.Exp(-kOn*kd*s), 2e-6)
		near(t, "what is seen", c.Seen[i], c.Labelled[i], 0)
	}
}

// Where unlabelled ligand is added as labelled ligand is there, of any mechanism at
// rest the label at last is its share of all ligand.
func TestLabelIsShared(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		b, _, _, _, _, ok := drawn(rt)
		if !ok {
			return
		}
		tau, err := b.Relaxations(0)
		if err != nil {
			rt.Fatal(err)
		}
		long := 1.
		if len(tau) > 0 {
			long = 40 * tau[0]
		}
		if long > 1e5 {
			return
		}
		p := &kinetics.Program{Loaded: 1, Phases: []kinetics.Phase{{Action: kinetics.Block, Amount: 3, Seconds: long}}}
		if rapid.Bool().Draw(rt, "used up") {
			p.Sites = 0.5
		}
		c, err := b.Run(context.Background(), p, []float64{0, long / 2, long}, false)
		if err != nil {
			rt.Fatal(err)
		}
		if math.Abs(c.Labelled[1]-c.Labelled[2]) > 1e-7 {
			return // label leaves still more slowly
		}
		near(rt, "label at the start", c.Labelled[0], c.Saturation[0], 1e-12)
		near(rt, "label at last", c.Labelled[2], c.Saturation[2]*c.Free[2]/(c.Free[2]+c.Unlabelled[2]), 1e-6)
		if p.Sites > 0 {
			near(rt, "all labelled ligand", c.Free[2]+p.Sites*c.Labelled[2], 1, 1e-7)
			near(rt, "all unlabelled ligand", c.Unlabelled[2]+p.Sites*(c.Saturation[2]-c.Labelled[2]), 3, 3e-7)
		}
	})
}

// A change of conformation alone, then two steps: binding to what has changed.
func TestTwoSteps(t *testing.T) {
	c := mechtest.Case{Family: "conformations", Definition: mechanisms.Definition{Differs: true, Conformations: []mechanisms.Conformation{
		{Name: "closed"}, {Name: "open", Sites: 1, K: "K", Weight: "L"}}}}
	const l, k, kOn, open, x = 0.25, 1.0, 2.0, 0.3, 3.0
	m := build(t, c)
	var theta []float64
	for _, q := range m.Mechanism().Constants() {
		theta = append(theta, map[string]float64{"K": k, "L": l}[q.Name])
	}
	var phi []float64
	for _, q := range m.Rates() {
		phi = append(phi, map[string]float64{"k_on": kOn, "exchange": open}[q.Name])
	}
	b := bound(t, m, theta, phi)
	// closed ⇌ open ⇌ open·x: the eigenvalues are roots of λ² − sλ + p.
	sum := open + open/l + kOn*x + kOn*k
	product := open*(kOn*x+kOn*k) + open/l*kOn*k
	root := math.Sqrt(sum*sum - 4*product)
	tau, err := b.Relaxations(x)
	if err != nil || len(tau) != 2 {
		t.Fatal(tau, err)
	}
	near(t, "slow", 1/tau[0], (sum-root)/2, 1e-13)
	near(t, "fast", 1/tau[1], (sum+root)/2, 1e-13)
	fast, slow := (sum+root)/2, (sum-root)/2
	// y(t) = ȳ + A e^(−fast t) + B e^(−slow t), y(0) = 0, y′(0) = kOn x·share open.
	rest := x / k * l / (1 + l + l*x/k)
	begin := kOn * x * l / (1 + l)
	aFast := (-begin + rest*slow) / (fast - slow)
	aSlow := -rest - aFast
	p := &kinetics.Program{Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: x, Seconds: 10}}}
	got := run(t, b, p, []float64{0, 0.1, 0.4, 1, 5, 10})
	for i, s := range got.Seconds {
		near(t, fmt.Sprintf("bound at %g s", s), got.Saturation[i], rest+aFast*math.Exp(-fast*s)+aSlow*math.Exp(-slow*s), 1e-13)
	}
}
