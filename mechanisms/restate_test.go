package mechanisms_test

import (
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"ligancy/mechanisms"
	"ligancy/mechanisms/mechtest"
)

// Quoted constants: values by name, gradients against differences.
func TestRestate(t *testing.T) {
	rng := rand.New(rand.NewPCG(15, 16))
	count := 0
	for name, c := range every {
		m, ok := c.Build().(mechanisms.Restated)
		if !ok {
			continue
		}
		count++
		theta := mechtest.Draw(rng, m)
		for _, r := range m.Restate(theta) {
			key := r.Constant.Key()
			again, ok := m.Quote(key, theta)
			if !ok || again.Value != r.Value {
				t.Errorf("%s: %s is %g, quoted as %g", name, key, r.Value, again.Value)
			}
			if r.Constant.Meaning == "" {
				t.Errorf("%s: %s has no meaning", name, key)
			}
			if r.GradLn == nil {
				t.Errorf("%s: %s does not exist at %v: %s", name, key, theta, r.Why)
				continue
			}
			moved := slices.Clone(theta)
			for i := range theta {
				at := func(h float64) float64 {
					moved[i] = theta[i] + h
					q, _ := m.Quote(key, moved)
					moved[i] = theta[i]
					return math.Log(q.Value)
				}
				h := 1e-4 * math.Min(1, math.Abs(theta[i]))
				want := (8*(at(h)-at(-h)) - (at(2*h) - at(-2*h))) / (12 * h)
				near(t, name+": ∂ln "+key, r.GradLn[i], want, 1e-7*(1+math.Abs(want)))
			}
		}
	}
	if count < 6 {
		t.Errorf("only %d restated mechanisms", count)
	}
}

// Kd_i = [(n−i+1)/i] β_{i−1}/β_i: the four constants of the theory of the truth
// (60, 30, 6.6, 0.66) come back.
func TestAdairConstants(t *testing.T) {
	kd, choose := []float64{60, 30, 6.6, 0.66}, []float64{4, 6, 4, 1}
	theta, product := make([]float64, 4), 1.0
	for i, k := range kd {
		product *= k
		theta[i] = choose[i] / product
	}
	m := every["adair 4"].Build().(mechanisms.Restated)
	for i, r := range m.Restate(theta) {
		closeTo(t, r.Constant.Name, r.Value, kd[i], 1e-13)
	}
	q, ok := m.Quote("Kd2·Kd3·Kd4", theta)
	if !ok || q.Constant.Dimension != 3 {
		t.Errorf("the product of three: %+v", q)
	}
	closeTo(t, "the product of three", q.Value, 30*6.6*0.66, 1e-13)
	for _, bad := range []string{"Kd5", "Kd0", "Kd2·Kd4", "Kd3·Kd2", "Kd", "Kd1 ", "K_R", "Kd01", ""} {
		if _, ok := m.Quote(bad, theta); ok {
			t.Errorf("%q is quoted", bad)
		}
	}
}

// At β of exactly zero neighbours do not exist and their product does.
func TestAdairAtZero(t *testing.T) {
	m := every["adair 4"].Build().(mechanisms.Restated)
	for _, c := range []struct {
		theta   []float64
		missing []string
		product string
		value   float64
	}{
		{[]float64{0.02466, 9.20562e-4, 0, 2.567613e-6}, []string{"Kd3", "Kd4"}, "Kd3·Kd4", 9.20562e-4 / 2.567613e-6 / 6},
		{[]float64{0, 3, 2, 1}, []string{"Kd1", "Kd2"}, "Kd1·Kd2", 6.0 / 3},
		{[]float64{2, 0, 0, 5}, []string{"Kd2", "Kd3", "Kd4"}, "Kd2·Kd3·Kd4", 2.0 / 5 / 4},
		{[]float64{0, 0, 0, 5}, []string{"Kd1", "Kd2", "Kd3", "Kd4"}, "Kd1·Kd2·Kd3·Kd4", 1.0 / 5},
		{[]float64{1, 1, 1, 0}, []string{"Kd4"}, "", 0},
		{[]float64{1, 1, 0, 0}, []string{"Kd3", "Kd4"}, "", 0},
		{[]float64{0, 1, 0, 2}, []string{"Kd1", "Kd2", "Kd3", "Kd4"}, "Kd3·Kd4", 1.0 / 2 / 6},
	} {
		var missing []string
		var product *mechanisms.Restatement
		for _, r := range m.Restate(c.theta) {
			if r.GradLn == nil {
				missing = append(missing, r.Constant.Name)
				if r.Why == "" || r.Value > 0 && !math.IsInf(r.Value, 1) {
					t.Errorf("β = %v: %s does not exist, is %g: %q", c.theta, r.Constant.Name, r.Value, r.Why)
				}
			}
			if strings.Contains(r.Constant.Name, "·") {
				product = &r
			}
		}
		if !slices.Equal(missing, c.missing) {
			t.Errorf("β = %v: %v do not exist, not %v", c.theta, missing, c.missing)
		}
		if c.product == "" {
			if product != nil {
				t.Errorf("β = %v: %s exists", c.theta, product.Constant.Name)
			}
			continue
		}
		if product == nil || product.Constant.Name != c.product {
			t.Errorf("β = %v: %+v, not %s", c.theta, product, c.product)
			continue
		}
		closeTo(t, c.product, product.Value, c.value, 1e-13)
	}
}

// Classes and parts come back in order, the loosest last, as dissociation constants.
func TestOrderedClasses(t *testing.T) {
	m := every["two classes"].Build().(mechanisms.Restated)
	list := m.Restate([]float64{math.Log(2), math.Log(15)})
	closeTo(t, list[0].Constant.Key(), list[0].Value, 2, 1e-15)
	closeTo(t, list[1].Constant.Key(), list[1].Value, 30, 1e-14)
	parts := every["three parts"].Build().(mechanisms.Restated)
	rng := rand.New(rand.NewPCG(17, 18))
	sum := 0.0
	for _, r := range parts.Restate(mechtest.Draw(rng, parts)) {
		if r.Constant.Name == "share" {
			sum += r.Value
		}
	}
	closeTo(t, "sum of the shares", sum, 1, 1e-14)
}
