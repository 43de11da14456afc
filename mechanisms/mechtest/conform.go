// Package mechtest holds the conformance test that every family of mechanisms
// passes, a brute-force reference in extended precision, and random mechanisms
// for properties.
package mechtest

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/mechanisms"
)

// Draw draws constants within their start ranges.
func Draw(rng *rand.Rand, m mechanisms.Mechanism) []float64 {
	list := m.Constants()
	theta := make([]float64, len(list))
	for i, c := range list {
		u := rng.Float64()
		switch c.Scale {
		case mechanisms.Log:
			a, b := math.Log(c.StartLow), math.Log(c.StartHigh)
			theta[i] = a + u*(b-a)
		case mechanisms.Linear:
			theta[i] = c.StartLow + u*(c.StartHigh-c.StartLow)
		case mechanisms.Logit:
			a, b := logit(c.StartLow), logit(c.StartHigh)
			theta[i] = a + u*(b-a)
		}
	}
	return theta
}

func logit(v float64) float64 { return math.Log(v / (1 - v)) }

// DrawEnvironment draws concentrations around 1; some effectors are absent.
func DrawEnvironment(rng *rand.Rand, m mechanisms.Mechanism) mechanisms.Environment {
	env := mechanisms.Environment{Effectors: make([]float64, len(m.Effectors())), Protomers: math.Exp(4*rng.Float64() - 2)}
	for i := range env.Effectors {
		if rng.IntN(4) > 0 {
			env.Effectors[i] = math.Exp(6*rng.Float64() - 3)
		}
	}
	return env
}

// Conform runs the conformance test: what every mechanism must hold at any
// constants, whatever it means.
func Conform(t *testing.T, m mechanisms.Mechanism) {
	t.Helper()
	constants(t, m)
	rng := rand.New(rand.NewPCG(1, 2))
	for range 12 {
		theta, env := Draw(rng, m), DrawEnvironment(rng, m)
		c := m.Curve()
		c.Bind(theta, env)
		saturation(t, m, c, len(theta))
		populations(t, c)
		differences(t, c, theta, env)
		unit(t, m, theta, env)
		if w, ok := c.(mechanisms.Watched); ok {
			differences(t, w.Watch(), theta, env)
			raw(t, w, theta, env)
		}
	}
	allocations(t, m, Draw(rng, m), DrawEnvironment(rng, m))
	steady(t, m, rng)
}

// constants checks the descriptions of the constants.
func constants(t *testing.T, m mechanisms.Mechanism) {
	seen := map[string]bool{}
	for i, c := range m.Constants() {
		if seen[c.Key()] {
			t.Errorf("constant %s stands twice", c.Key())
		}
		seen[c.Key()] = true
		if mechanisms.Find(m.Constants(), c.Key()) != i {
			t.Errorf("%s is not found by its key", c.Key())
		}
		if !(c.Low < c.High) || !(c.Low <= c.StartLow && c.StartLow < c.StartHigh && c.StartHigh <= c.High) {
			t.Errorf("%s: bounds %g … %g do not hold the starts %g … %g", c.Key(), c.Low, c.High, c.StartLow, c.StartHigh)
		}
		if c.Scale != mechanisms.Linear && !(c.Low > 0) || c.Scale == mechanisms.Logit && c.High >= 1 {
			t.Errorf("%s: bounds %g … %g do not suit its scale", c.Key(), c.Low, c.High)
		}
		if c.Meaning == "" {
			t.Errorf("%s has no meaning", c.Key())
		}
	}
}

// grid is ln x from 10⁻³⁰ to 10³⁰.
func grid() []float64 {
	lnx := []float64{math.Inf(-1)}
	for l := -30.0; l <= 30; l += 0.5 {
		lnx = append(lnx, l*math.Ln10)
	}
	return lnx
}

// saturation checks that Ȳ rises from 0, agrees with At, and is finite.
func saturation(t *testing.T, m mechanisms.Mechanism, c mechanisms.Curve, k int) {
	lnx := grid()
	y, plain := make([]float64, len(lnx)), make([]float64, len(lnx))
	grad := mat.NewDense(len(lnx), k, nil)
	c.Saturation(y, lnx, grad)
	c.Saturation(plain, lnx, nil)
	if y[0] != 0 {
		t.Errorf("without ligand saturation is %g", y[0])
	}
	n := float64(m.Sites())
	var p mechanisms.Point
	for r, l := range lnx {
		c.At(l, &p)
		if math.Abs(y[r]-plain[r]) > 1e-15 || !(y[r] >= 0 && y[r] <= 1+1e-15) {
			t.Errorf("ln x = %g: saturation %g with gradient, %g without", l, y[r], plain[r])
		}
		if r > 0 && y[r] < y[r-1]-1e-15 {
			t.Errorf("ln x = %g: saturation falls from %g to %g", l, y[r-1], y[r])
		}
		if diff := math.Abs(p.Y - y[r]); diff > 1e-12*y[r] && y[r] > 1e-250 {
			t.Errorf("ln x = %g: saturation %g, At %g", l, y[r], p.Y)
		}
		if math.Abs(p.Y+p.Empty-1) > 1e-14 {
			t.Errorf("ln x = %g: Y + Empty = 1 + %g", l, p.Y+p.Empty-1)
		}
		if _, driven := m.(mechanisms.Balanced); !driven && n > 0 && (!(p.NH > -1e-12) || p.NH > n*(1+1e-12)) {
			t.Errorf("ln x = %g: n_H = %g of %g sites", l, p.NH, n)
		}
		for i := range k {
			g := grad.At(r, i)
			if math.IsNaN(g) || math.IsInf(g, 0) || math.IsNaN(p.GradNH[i]) {
				t.Errorf("ln x = %g: gradient %g, of n_H %g", l, g, p.GradNH[i])
			}
			if math.Abs(g-p.GradY[i]) > 1e-12*(1+math.Abs(g)) {
				t.Errorf("ln x = %g: gradient %g, At %g", l, g, p.GradY[i])
			}
		}
	}
}

// populations checks that they sum to 1 and are none of them negative.
func populations(t *testing.T, c mechanisms.Curve) {
	p, ok := c.(mechanisms.Populated)
	if !ok {
		return
	}
	names := p.StateNames()
	for _, l := range []float64{math.Inf(-1), -60, -3, 0, 2, 60} {
		dst := p.Populations(nil, l)
		if len(dst) != len(names) {
			t.Fatalf("%d populations, %d names", len(dst), len(names))
		}
		sum := 0.0
		for _, v := range dst {
			if !(v >= 0) {
				t.Errorf("ln x = %g: a population of %g", l, v)
			}
			sum += v
		}
		if math.Abs(sum-1) > 1e-13 {
			t.Errorf("ln x = %g: populations sum to 1 + %g", l, sum-1)
		}
	}
}

// central is the sixth-order central difference of f at 0.
func central(f func(h float64) float64, h float64) float64 {
	return (45*(f(h)-f(-h)) - 9*(f(2*h)-f(-2*h)) + (f(3*h) - f(-3*h))) / (60 * h)
}

// differences checks every derivative against high-order differences.
func differences(t *testing.T, c mechanisms.Curve, theta []float64, env mechanisms.Environment) {
	moved := append([]float64(nil), theta...)
	var p, q mechanisms.Point
	for _, l := range []float64{-6, -2.3, -0.4, 0.9, 3.1, 7} {
		c.Bind(theta, env)
		c.At(l, &p)
		if math.IsNaN(p.NH) || p.Y < 1e-9 || p.Empty < 1e-9 {
			continue
		}
		near := func(what string, got, want, scale float64) {
			if !(math.Abs(got-want) <= 2e-7*(1+scale)) {
				t.Errorf("ln x = %g, θ = %v: %s is %.12g, by differences %.12g", l, theta, what, got, want)
			}
		}
		at := func(h float64) *mechanisms.Point { c.At(l+h, &q); return &q }
		const h = 1e-3
		near("n_H", p.NH, central(func(h float64) float64 { q := at(h); return math.Log(q.Y / q.Empty) }, h), p.NH)
		near("dY", p.DY, central(func(h float64) float64 { return at(h).Y }, h), p.DY)
		near("dn_H", p.DNH, central(func(h float64) float64 { return at(h).NH }, h), p.NH)
		near("d²n_H", p.D2NH, central(func(h float64) float64 { return at(h).DNH }, h), math.Abs(p.D2NH)+p.NH)
		for i := range theta {
			step := 1e-3
			if size := math.Abs(theta[i]); size < 0.1 && size > 0 {
				step *= size
			}
			at := func(h float64) *mechanisms.Point {
				moved[i] = theta[i] + h
				c.Bind(moved, env)
				moved[i] = theta[i]
				c.At(l, &q)
				return &q
			}
			near("∂Y", p.GradY[i], central(func(h float64) float64 { return at(h).Y }, step), math.Abs(p.GradY[i]))
			near("∂n_H", p.GradNH[i], central(func(h float64) float64 { return at(h).NH }, step), math.Abs(p.GradNH[i])+p.NH)
			near("∂dn_H", p.GradDNH[i], central(func(h float64) float64 { return at(h).DNH }, step),
				math.Abs(p.GradDNH[i])+math.Abs(p.GradNH[i])+p.NH)
		}
	}
}

// raw checks the gradient of the response itself.
func raw(t *testing.T, w mechanisms.Watched, theta []float64, env mechanisms.Environment) {
	lnx := []float64{math.Inf(-1), -4, -1, 0, 1.5, 4}
	o, moved := make([]float64, len(lnx)), append([]float64(nil), theta...)
	grad := mat.NewDense(len(lnx), len(theta), nil)
	w.Bind(theta, env)
	w.Watch().Saturation(o, lnx, grad)
	for r := range lnx {
		for i := range theta {
			want := central(func(h float64) float64 {
				moved[i] = theta[i] + h
				w.Bind(moved, env)
				moved[i] = theta[i]
				w.Watch().Saturation(o, lnx, nil)
				return o[r]
			}, 1e-3)
			if math.Abs(grad.At(r, i)-want) > 1e-9*(1+math.Abs(want)) {
				t.Errorf("ln x = %g: ∂⟨o⟩ is %.12g, by differences %.12g", lnx[r], grad.At(r, i), want)
			}
		}
	}
	w.Bind(theta, env)
}

// unit checks that a change of unit changes nothing.
func unit(t *testing.T, m mechanisms.Mechanism, theta []float64, env mechanisms.Environment) {
	const ligand, effector, protomer = 1e-6, 37.0, 2e3
	other := append([]float64(nil), theta...)
	for i, c := range m.Constants() {
		factor := math.Pow(ligand, float64(c.Dimension))
		if c.Ligand != "" {
			factor = math.Pow(effector, float64(c.Dimension))
		}
		factor *= math.Pow(protomer, float64(c.Protomers))
		if c.Scale == mechanisms.Linear {
			other[i] *= factor
		} else {
			other[i] += math.Log(factor)
		}
	}
	env2 := mechanisms.Environment{Protomers: env.Protomers * protomer}
	for _, y := range env.Effectors {
		env2.Effectors = append(env2.Effectors, y*effector)
	}
	a, b := m.Curve(), m.Curve()
	a.Bind(theta, env)
	b.Bind(other, env2)
	var p, q mechanisms.Point
	for _, l := range []float64{-40, -5, 0, 3, 40} {
		a.At(l, &p)
		b.At(l+math.Log(ligand), &q)
		if math.Abs(p.Y-q.Y) > 1e-11*p.Y || math.Abs(p.NH-q.NH) > 1e-10 {
			t.Errorf("ln x = %g: another unit moves saturation from %g to %g, n_H from %g to %g", l, p.Y, q.Y, p.NH, q.NH)
		}
	}
}

// allocations checks that a bound curve makes no garbage.
func allocations(t *testing.T, m mechanisms.Mechanism, theta []float64, env mechanisms.Environment) {
	curves := []mechanisms.Curve{m.Curve()}
	if w, ok := curves[0].(mechanisms.Watched); ok {
		curves = append(curves, w.Watch())
	}
	lnx := []float64{-3, -2, -1, 0, 1, 2, 3}
	dst, grad := make([]float64, len(lnx)), mat.NewDense(len(lnx), len(theta), nil)
	for _, c := range curves {
		var p mechanisms.Point
		run := func() {
			c.Bind(theta, env)
			c.Saturation(dst, lnx, grad)
			c.Saturation(dst, lnx, nil)
			c.At(0.5, &p)
		}
		if n := testing.AllocsPerRun(20, run); n != 0 {
			t.Errorf("%g allocations a run", n)
		}
	}
}

// steady checks that a curve forgets what it was bound to before.
func steady(t *testing.T, m mechanisms.Mechanism, rng *rand.Rand) {
	first, second := Draw(rng, m), Draw(rng, m)
	env, env2 := DrawEnvironment(rng, m), DrawEnvironment(rng, m)
	a, b := m.Curve(), m.Curve()
	lnx := []float64{-2, 0, 2}
	used, fresh := make([]float64, 3), make([]float64, 3)
	a.Bind(first, env)
	a.Saturation(used, []float64{1}, nil)
	a.Bind(second, env2)
	b.Bind(second, env2)
	a.Saturation(used, lnx, nil)
	b.Saturation(fresh, lnx, nil)
	for i := range used {
		if used[i] != fresh[i] {
			t.Errorf("a used curve gives %v, a fresh one %v", used, fresh)
			return
		}
	}
}
