package mechanisms_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
	"pgregory.net/rapid"

	"ligancy/mechanisms"
	"ligancy/mechanisms/mechtest"
)

// same checks that two curves agree in saturation and n_H from 1e-8 to 1e8.
func same(t interface{ Errorf(string, ...any) }, what string, a, b mechanisms.Curve, within float64) {
	var p, q mechanisms.Point
	for l := -18.0; l <= 18; l += 1.5 {
		a.At(l, &p)
		b.At(l, &q)
		near(t, what+": Ȳ", p.Y, q.Y, within*q.Y)
		near(t, what+": 1 − Ȳ", p.Empty, q.Empty, within*q.Empty)
		near(t, what+": n_H", p.NH, q.NH, within*math.Max(1, q.NH))
	}
}

// Limits collapse to the simpler family.
func TestLimits(t *testing.T) {
	sites := func(n int, k float64) mechanisms.Curve {
		return bound(t, "independent", mechanisms.Definition{Classes: []mechanisms.Count{{Name: "only", Sites: n}}}, k)
	}
	four := mechanisms.Definition{Sites: 4}
	same(t, "mwc, c = 1", bound(t, "mwc", four, 77, 1, 3), sites(4, 3), 1e-13)
	same(t, "mwc, L → 0", bound(t, "mwc", four, 1e-18, 0.01, 3), sites(4, 3), 1e-13)
	same(t, "mwc, L → ∞", bound(t, "mwc", four, 1e60, 0.01, 3), sites(4, 300), 1e-12)
	same(t, "mwc, c → 0", bound(t, "mwc", four, 50, 1e-30, 3),
		bound(t, "mwc", mechanisms.Definition{Sites: 4, Constants: fixed("c", 0)}, 50, 3), 1e-12)
	for _, layout := range []string{"pair", "triangle", "square", "tetrahedral", "octahedral"} {
		c := bound(t, "sequential", mechanisms.Definition{Contacts: layout}, 3, 1)
		same(t, layout+", K_BB = 1", c, sites(2, 3), 1e-13)
	}
	same(t, "classes alike", bound(t, "independent", mechanisms.Definition{Classes: twoClasses}, 3, 1), sites(2, 3), 1e-13)
	same(t, "parts alike", bound(t, "mixture", every["simple parts"].Definition, 3, 1, 0.3), sites(2, 3), 1e-13)
	same(t, "Hill, h = 1", bound(t, "hill", mechanisms.Definition{}, 3, 1), sites(2, 3), 1e-13)
	same(t, "adair of equal sites", bound(t, "adair", four, 4, 6, 4, 1), sites(4, 1), 1e-13)
	same(t, "all or none", bound(t, "adair", four, 0, 0, 0, 16), bound(t, "hill", mechanisms.Definition{}, 0.5, 4), 1e-12)
	dimer := mechanisms.Definition{Contacts: "pair"}
	same(t, "pair as adair", bound(t, "sequential", dimer, 2, 7), pairOf(t, 0.5, 3.5), 1e-13)
}

// Effectors at zero leave nothing behind, and the exact limit is met from above.
func TestNoEffector(t *testing.T) {
	for _, name := range []string{"mwc 4, effectors", "mwc 3, competitor", "mwc 3, two rivals", "conformations", "states", "three parts"} {
		m := every[name].Build()
		theta := mechtest.Draw(rand.New(rand.NewPCG(9, 9)), m)
		none, trace := m.Curve(), m.Curve()
		env, little := make([]float64, len(m.Effectors())), make([]float64, len(m.Effectors()))
		for i := range little {
			little[i] = 1e-30
		}
		none.Bind(theta, mechanisms.Environment{Effectors: env})
		trace.Bind(theta, mechanisms.Environment{Effectors: little})
		same(t, name, none, trace, 1e-13)
	}
	plain := bound(t, "mwc", mechanisms.Definition{Sites: 4}, 900, 0.02, 3)
	m := every["mwc 4, effectors"].Build()
	with := m.Curve()
	with.Bind([]float64{math.Log(900), math.Log(0.02), math.Log(3), 0, 0, 0}, mechanisms.Environment{Effectors: []float64{0, 0}})
	same(t, "mwc without effectors", with, plain, 1e-14)
}

// R and T are labels: (L, K_R, K_T) and (1/L, K_T, K_R) give one curve.
func TestConcertedLabels(t *testing.T) {
	d := mechanisms.Definition{Conformations: []mechanisms.Conformation{
		{Name: "R", Sites: 4, K: "K_R"}, {Name: "T", Sites: 4, K: "K_T", Weight: "L"}}}
	a := bound(t, "conformations", d, 0.5, 9000, 40)
	b := bound(t, "conformations", d, 40, 1.0/9000, 0.5)
	same(t, "labels exchanged", a, b, 1e-12)
	same(t, "mwc as two conformations", bound(t, "mwc", mechanisms.Definition{Sites: 4}, 9000, 0.5/40, 0.5), a, 1e-13)
}

// mwc with effectors and views is the two-conformation case of conformations.
func TestConcertedAsConformations(t *testing.T) {
	for _, at := range []bool{false, true} {
		effectors := []mechanisms.Effector{{Name: "y", Binds: "both", AtLigandSite: at}}
		mwc := mechtest.Case{Family: "mwc", Definition: mechanisms.Definition{Sites: 3, Effectors: effectors, Turnover: view("R", "T")}}.Build()
		conf := mechtest.Case{Family: "conformations", Definition: mechanisms.Definition{
			Effectors: []mechanisms.Effector{{Name: "y", AtLigandSite: at}},
			Conformations: []mechanisms.Conformation{
				{Name: "R", Sites: 3, K: "K_R", Ligands: map[string]string{"y": "Y_R"}},
				{Name: "T", Sites: 3, K: "K_T", Weight: "L", Ligands: map[string]string{"y": "Y_T"}}},
			Turnover: view("R", "T")}}.Build()
		env := mechanisms.Environment{Effectors: []float64{2.5}}
		a, b := mwc.Curve().(mechanisms.Watched), conf.Curve().(mechanisms.Watched)
		a.Bind([]float64{7, -4, 0.2, 1, -1, 0.3}, env)  // L, c, K_R, y.K_R, y.K_T, turnover_T
		b.Bind([]float64{0.2, 1, 7, 4.2, -1, 0.3}, env) // K_R, Y_R, L, K_T, Y_T, turnover_T
		same(t, "binding", a, b, 1e-13)
		same(t, "response", a.Watch(), b.Watch(), 1e-12)
		lnx := []float64{-3, 0, 1, 4}
		u, v := make([]float64, 4), make([]float64, 4)
		a.Watch().Saturation(u, lnx, nil)
		b.Watch().Saturation(v, lnx, nil)
		for i := range u {
			near(t, "turnover", u[i], v[i], 1e-14)
		}
	}
}

// K system, V system: with T idle the velocity is R̄Ȳ_R; with both alike it is Ȳ.
func TestTurnover(t *testing.T) {
	d := mechanisms.Definition{Sites: 4, Turnover: view("R", "T")}
	c := bound(t, "mwc", d, 900, 0.02, 3, 1).(mechanisms.Watched)
	lnx, y, v := []float64{-2, 0, 2, 5}, make([]float64, 4), make([]float64, 4)
	c.Saturation(y, lnx, nil)
	c.Watch().Saturation(v, lnx, nil)
	for i := range y {
		near(t, "both turn over alike", v[i], y[i], 1e-15)
	}
	c = bound(t, "mwc", d, 900, 0.02, 3, 0).(mechanisms.Watched)
	c.Watch().Saturation(v, lnx, nil)
	for i, l := range lnx {
		a := math.Exp(l) / 3
		z := math.Pow(1+a, 4) + 900*math.Pow(1+0.02*a, 4)
		near(t, "R alone turns over", v[i], a*math.Pow(1+a, 3)/z, 1e-14)
	}
	low, high := c.Watch().(interface {
		Limits(a, b []float64) (low, high float64)
	}).Limits(nil, nil)
	near(t, "lower limit", low, 0, 0)
	near(t, "upper limit", high, 1/(1+900*math.Pow(0.02, 4)), 1e-15)
}

// Numbering the sites of a contact graph anew changes nothing.
func TestRelabelledGraph(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		n := rapid.IntRange(3, 7).Draw(rt, "sites")
		list := rapid.SliceOfNDistinct(rapid.Custom(func(rt *rapid.T) [2]int {
			a := rapid.IntRange(1, n-1).Draw(rt, "a")
			return [2]int{a, rapid.IntRange(a+1, n).Draw(rt, "b")}
		}), n-1, 2*n, rapid.ID[[2]int]).Draw(rt, "contacts")
		order := rapid.Permutation(list).Draw(rt, "order")
		number := rapid.Permutation([]int{1, 2, 3, 4, 5, 6, 7}[:n]).Draw(rt, "numbers")
		renamed := make([][2]int, len(order))
		for i, e := range order {
			renamed[i] = [2]int{number[e[1]-1], number[e[0]-1]}
		}
		f, _ := mechanisms.Lookup("sequential")
		a, errA := f.Build(mechanisms.Definition{Graph: list, Sites: n})
		b, errB := f.Build(mechanisms.Definition{Graph: renamed, Sites: n})
		if (errA == nil) != (errB == nil) {
			rt.Fatalf("one is refused: %v; %v", errA, errB)
		}
		if errA != nil {
			return
		}
		ca, cb := a.Curve(), b.Curve()
		theta := []float64{0.4, rapid.Float64Range(-3, 3).Draw(rt, "ln K_BB")}
		ca.Bind(theta, mechanisms.Environment{})
		cb.Bind(theta, mechanisms.Environment{})
		same(rt, "relabelled", ca, cb, 1e-12)
	})
}

// The order of classes and parts is a name only.
func TestRelabelledClasses(t *testing.T) {
	d := func(a, b mechanisms.Count) mechanisms.Definition {
		return mechanisms.Definition{Classes: []mechanisms.Count{a, b}, SiteScale: true}
	}
	a, b := mechanisms.Count{Name: "a", Sites: 2}, mechanisms.Count{Name: "b", Sites: 3}
	same(t, "classes", bound(t, "independent", d(a, b), 2, 30), bound(t, "independent", d(b, a), 30, 2), 1e-14)
	chainsAgain := []mechanisms.Count{{Name: "beta", Sites: 2}, {Name: "alpha", Sites: 2}}
	same(t, "chains", bound(t, "mwc", mechanisms.Definition{SiteClasses: chains, Differs: true}, 500, 0.02, 1, 0.1, 4),
		bound(t, "mwc", mechanisms.Definition{SiteClasses: chainsAgain, Differs: true}, 500, 0.1, 4, 0.02, 1), 1e-13)
	same(t, "chains alike", bound(t, "mwc", mechanisms.Definition{SiteClasses: chains, Differs: true}, 500, 0.02, 1, 0.02, 1),
		bound(t, "mwc", mechanisms.Definition{Sites: 4}, 500, 0.02, 1), 1e-13)
}

// Random mechanisms: 0 < n_H ≤ n against free ligand, saturation rises, and
// everything stays finite from x = 1e-30 to 1e30.
func TestRandomMechanisms(t *testing.T) {
	lnx := make([]float64, 121)
	for i := range lnx {
		lnx[i] = float64(i-60) * math.Ln10 / 2
	}
	rapid.Check(t, func(rt *rapid.T) {
		c := mechtest.Cases(16).Draw(rt, "mechanism")
		m := c.Build()
		rng := rand.New(rand.NewPCG(rapid.Uint64().Draw(rt, "draw"), 0))
		curve := m.Curve()
		theta := mechtest.Draw(rng, m)
		curve.Bind(theta, mechtest.DrawEnvironment(rng, m))
		y, grad := make([]float64, len(lnx)), mat.NewDense(len(lnx), len(theta), nil)
		curve.Saturation(y, lnx, grad)
		var p mechanisms.Point
		for i, l := range lnx {
			curve.At(l, &p)
			if i > 0 && y[i] < y[i-1]-1e-15 || !(y[i] >= 0 && y[i] <= 1+1e-15) {
				rt.Errorf("saturation %g after %g at ln x = %g", y[i], y[i-1], l)
			}
			n := float64(m.Sites())
			if n == 0 {
				n = 16
			}
			if !(p.NH > 0 && p.NH <= n*(1+1e-12)) && c.Family != "assembly" {
				rt.Errorf("n_H is %g of %g sites at ln x = %g", p.NH, n, l)
			}
			for k := range theta {
				if g := grad.At(i, k); math.IsNaN(g) || math.IsInf(g, 0) {
					rt.Errorf("gradient %g at ln x = %g", g, l)
				}
			}
		}
	})
}

// Weights over 600 decades neither overflow nor lose the answer.
func TestExtremeWeights(t *testing.T) {
	for _, c := range []struct {
		name  string
		theta []float64
		lnx   []float64
	}{
		{"mwc 4", []float64{690, -460, 0}, []float64{-60, 0, 150, 172, 175, 200}},
		{"mwc 4", []float64{-690, -18, 60}, []float64{-69, 0, 59, 60, 69}},
		{"mwc 2 + 2", []float64{400, -300, -20, -200, 30}, []float64{-60, 10, 77, 100}},
		{"adair 4, ln Kd", []float64{-345, 345, -345, 345}, []float64{-345, -340, -100, 0, 0.1, 60}},
		{"two classes", []float64{-345, 690}, []float64{-400, -345, -340, 0, 344, 346, 400}},
		{"square", []float64{0, 345}, []float64{-400, -346, -345, -344, -320}},
		{"conformations", []float64{3, 2, 1, -600, 60, 2, 600, 1}, []float64{-69, 0, 3, 69}},
		{"dimer, tetramer", []float64{200, -3, 2, 1e-8, 1e-300, 1e-280}, []float64{-30, 0, 2, 60}},
		{"dimer, tetramer", []float64{-200, -3, 2, 1, 4, 5}, []float64{-30, 0, 2, 60}},
	} {
		m := every[c.name].Build()
		env := mechanisms.Environment{Effectors: []float64{0.5, 2}[:len(m.Effectors())], Protomers: 1}
		compareLoosely(t, m, every[c.name], c.theta, env, c.lnx)
	}
}

// compareLoosely holds saturation and n_H to what ln x and θ of hundreds leave
// of a float64.
func compareLoosely(t *testing.T, m mechanisms.Mechanism, c mechtest.Case, theta []float64, env mechanisms.Environment, lnx []float64) {
	ref := mechtest.Reference{Family: c.Family, Definition: c.Definition, Mechanism: m}
	curve := m.Curve()
	curve.Bind(theta, env)
	var p mechanisms.Point
	y := make([]float64, 1)
	for _, l := range lnx {
		want := ref.Point(theta, env, l)
		curve.At(l, &p)
		curve.Saturation(y, []float64{l}, nil)
		near(t, "Ȳ", p.Y, want.Y, 2e-12*want.Y)
		near(t, "Ȳ of the whole curve", y[0], want.Y, 2e-12*want.Y)
		near(t, "1 − Ȳ", p.Empty, want.Empty, 2e-12*want.Empty)
		near(t, "n_H", p.NH, want.NH, 2e-12*math.Max(1, want.NH))
		for i, g := range p.GradNH {
			if k := m.Constants()[i]; k.Scale == mechanisms.Linear && theta[i] < 1e-6 {
				continue // smaller than the reference's step
			}
			near(t, "∂n_H", g, want.GradNH[i], 1e-9*math.Max(1, math.Abs(want.GradNH[i])))
		}
		if t.Failed() {
			t.Fatalf("%s, θ = %v, ln x = %g", c.Family, theta, l)
		}
	}
}

// An Adair β of exactly zero: gradients are those met from above.
func TestZeroBeta(t *testing.T) {
	m := every["adair 4"].Build()
	zero, small := []float64{0.3, 0, 0, 2}, []float64{0.3, 1e-9, 1e-9, 2}
	a, b := m.Curve(), m.Curve()
	a.Bind(zero, mechanisms.Environment{})
	b.Bind(small, mechanisms.Environment{})
	var p, q mechanisms.Point
	lnx := []float64{-3, 0, 1}
	y, grad := make([]float64, 3), mat.NewDense(3, 4, nil)
	a.Saturation(y, lnx, grad)
	for r, l := range lnx {
		a.At(l, &p)
		b.At(l, &q)
		for i := range zero {
			near(t, "∂Ȳ", p.GradY[i], q.GradY[i], 1e-8)
			near(t, "∂Ȳ of the whole curve", grad.At(r, i), p.GradY[i], 1e-14)
			near(t, "∂n_H", p.GradNH[i], q.GradNH[i], 1e-7)
		}
	}
}

// A dimer–tetramer of invented constants: the slope at half saturation falls with
// dilution, from the tetramer's to the dimer's, to the closed form for m = 2.
func TestAssemblyDilution(t *testing.T) {
	d := mechanisms.Definition{Small: &mechanisms.Part{Sites: 2},
		Large: &mechanisms.Part{Family: "mwc", Definition: &mechanisms.Definition{Sites: 4}}}
	m := mechtest.Case{Family: "assembly", Definition: d}.Build()
	theta := []float64{math.Log(1e3), 0.5, 8, -4, -0.5} // K_assembly, dimer's Kd, L, c, K_R
	c := m.Curve()
	before := math.Inf(1)
	for _, protomers := range []float64{1e9, 1e2, 1, 1e-2, 1e-4, 1e-12, 0} {
		c.Bind(theta, mechanisms.Environment{Protomers: protomers})
		n := mechanisms.HillAtHalf(c).Value
		if n > before+1e-12 {
			t.Errorf("at %g protomers n_H rises to %g", protomers, n)
		}
		before = n
	}
	closeTo(t, "dimer alone", before, 1, 1e-12)
	tetramer := bound(t, "mwc", mechanisms.Definition{Sites: 4}, math.Exp(8), math.Exp(-4), math.Exp(-0.5))
	c.Bind(theta, mechanisms.Environment{Protomers: 1e12})
	closeTo(t, "tetramer alone", mechanisms.HillAtHalf(c).Value, mechanisms.HillAtHalf(tetramer).Value, 1e-6)
	closedForm(t, c, theta)
}

// closedForm solves [D] from the quadratic 4K[D]²r + 2[D] = P by the stable root.
func closedForm(t *testing.T, c mechanisms.Curve, theta []float64) {
	tetramer := bound(t, "mwc", mechanisms.Definition{Sites: 4}, math.Exp(8), math.Exp(-4), math.Exp(-0.5))
	const protomers = 0.02
	c.Bind(theta, mechanisms.Environment{Protomers: protomers})
	var p, large mechanisms.Point
	for _, l := range []float64{-4, -1, 0.5, 2, 5} {
		x := math.Exp(l)
		a, cc := x/math.Exp(-0.5), math.Exp(-4)
		zD := math.Pow(1+x/math.Exp(0.5), 2)
		zT := (math.Pow(1+a, 4) + math.Exp(8)*math.Pow(1+cc*a, 4)) / (1 + math.Exp(8))
		k := 1e3 * zT / (zD * zD)
		dimer := protomers / (1 + math.Sqrt(1+4*k*protomers))
		share := 4 * k * dimer * dimer / protomers
		closeTo(t, "mass balance", 2*dimer+4*k*dimer*dimer, protomers, 1e-14)
		tetramer.At(l, &large)
		yD := x / (math.Exp(0.5) + x)
		y := (1-share)*yD + share*large.Y
		delta := large.Y - yD
		dy := (1-share)*yD*(1-yD) + share*large.DY + 4*delta*delta*share*(1-share)/(1+share)
		c.At(l, &p)
		closeTo(t, "Ȳ", p.Y, y, 1e-12)
		closeTo(t, "dȲ/d ln x", p.DY, dy, 1e-12)
		closeTo(t, "n_H", p.NH, dy/(y*(1-y)), 1e-11)
	}
}
