package mechanisms_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"ligancy/mechanisms"
	"ligancy/mechanisms/mechtest"
)

func named(names ...string) (list []mechanisms.State) {
	for _, n := range names {
		list = append(list, mechanisms.State{Name: n})
	}
	return list
}

// Cycles that the tests turn: Michaelis and Menten's; a mnemonic enzyme, whose product
// leaves it in a form F that binds faster or slower; a slow transition between two
// forms that both turn over; two sites; one with an inhibitor.
var cycles = map[string]mechanisms.Definition{
	"Michaelis and Menten": {States: named("E", "ES"), Steps: []mechanisms.Step{
		{From: "E", To: "ES", Ligands: 1, Rate: "k1", Back: "k2"}, {From: "ES", To: "E", Rate: "k3", Product: true}}},
	"mnemonic": {States: named("E", "F", "ES", "FS"), Steps: []mechanisms.Step{
		{From: "E", To: "ES", Ligands: 1, Rate: "k1", Back: "k2"}, {From: "ES", To: "FS", Rate: "k3"},
		{From: "F", To: "FS", Ligands: 1, Rate: "k4", Back: "k5"}, {From: "FS", To: "F", Rate: "k6", Product: true},
		{From: "F", To: "E", Rate: "k7", Back: "k8"}}},
	"slow transition": {States: named("E", "F", "ES", "FS"), Steps: []mechanisms.Step{
		{From: "E", To: "ES", Ligands: 1, Rate: "k1", Back: "k2"}, {From: "ES", To: "E", Rate: "k3", Product: true},
		{From: "F", To: "FS", Ligands: 1, Rate: "k4", Back: "k5"}, {From: "FS", To: "F", Rate: "k6", Product: true},
		{From: "E", To: "F", Rate: "k7", Back: "k8"}, {From: "ES", To: "FS", Rate: "k9", Back: "k10"}}},
	"two sites": {States: named("E", "ES", "ESS"), Steps: []mechanisms.Step{
		{From: "E", To: "ES", Ligands: 1, Rate: "k1", Back: "k2"}, {From: "ES", To: "ESS", Ligands: 1, Rate: "k3", Back: "k4"},
		{From: "ES", To: "E", Rate: "k5", Product: true}, {From: "ESS", To: "ES", Rate: "k6", Product: true}}},
	"inhibited": {States: named("E", "ES", "EI"), Steps: []mechanisms.Step{
		{From: "E", To: "ES", Ligands: 1, Rate: "k1", Back: "k2"}, {From: "ES", To: "E", Rate: "k3", Product: true},
		{From: "E", To: "EI", Effector: "I", Rate: "k4", Back: "k5"}}},
	"no product": {States: named("E", "F", "ES", "FS"), Steps: []mechanisms.Step{
		{From: "E", To: "ES", Ligands: 1, Rate: "k1", Back: "k2"}, {From: "F", To: "FS", Ligands: 1, Rate: "k3", Back: "k4"},
		{From: "E", To: "F", Rate: "k5", Back: "k6"}, {From: "ES", To: "FS", Rate: "k7", Back: "k8"}}},
}

func cycle(t testing.TB, d mechanisms.Definition) mechanisms.Mechanism {
	t.Helper()
	f, _ := mechanisms.Lookup("cycle")
	m, err := f.Build(d)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

func TestCycleConformance(t *testing.T) {
	for name, d := range cycles {
		t.Run(name, func(t *testing.T) { mechtest.Conform(t, cycle(t, d)) })
	}
}

// steady is the steady state by elimination without subtraction (Grassmann, Taksar &
// Heyman 1985, Oper. Res. 33:1107), rate[i][j] from i to j.
func steady(rate [][]float64) []float64 {
	n := len(rate)
	for k := n - 1; k > 0; k-- {
		out := 0.0
		for j := range k {
			out += rate[k][j]
		}
		for i := range k {
			rate[i][k] /= out
			for j := range k {
				if i != j {
					rate[i][j] += rate[i][k] * rate[k][j]
				}
			}
		}
	}
	p := make([]float64, n)
	p[0] = 1
	sum := 1.0
	for k := 1; k < n; k++ {
		for i := range k {
			p[k] += p[i] * rate[i][k]
		}
		sum += p[k]
	}
	for k := range p {
		p[k] /= sum
	}
	return p
}

// Shares and velocity of every cycle against elimination on its rates.
func TestCycleAgainstElimination(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	for name, d := range cycles {
		m := cycle(t, d)
		at := map[string]int{}
		for s, state := range d.States {
			at[state.Name] = s
		}
		for range 50 {
			theta := make([]float64, len(m.Constants()))
			k := map[string]float64{}
			for i, c := range m.Constants() {
				theta[i] = 10 * (rng.Float64() - 0.5)
				k[c.Name] = math.Exp(theta[i])
			}
			env := mechtest.DrawEnvironment(rng, m)
			lnx := 6 * (rng.Float64() - 0.5)
			rate := make([][]float64, len(d.States))
			for s := range rate {
				rate[s] = make([]float64, len(d.States))
			}
			for _, s := range d.Steps {
				there := k[s.Rate] * math.Exp(float64(s.Ligands)*lnx)
				if s.Effector != "" {
					there *= env.Effectors[0]
				}
				rate[at[s.From]][at[s.To]] += there
				if s.Back != "" {
					rate[at[s.To]][at[s.From]] += k[s.Back]
				}
			}
			p := steady(rate)
			v := 0.0
			for _, s := range d.Steps {
				if s.Product {
					v += k[s.Rate] * p[at[s.From]]
				}
			}
			curve := m.Curve()
			curve.Bind(theta, env)
			got := curve.(mechanisms.Populated).Populations(nil, lnx)
			for s := range p {
				near(t, fmt.Sprintf("%s: share of %s", name, d.States[s].Name), got[s], p[s], 1e-13)
			}
			if w, ok := curve.(mechanisms.Watched); ok {
				var y [1]float64
				w.Watch().Saturation(y[:], []float64{lnx}, nil)
				near(t, name+": velocity", y[0], v, 1e-12*v)
			}
		}
	}
}

// E + S ⇌ ES → E + P is k_3 x/(x + (k_2 + k_3)/k_1), n_H = 1.
func TestMichaelisMenten(t *testing.T) {
	m := cycle(t, cycles["Michaelis and Menten"])
	curve := m.Curve()
	curve.Bind([]float64{math.Log(2), math.Log(3), math.Log(5)}, mechanisms.Environment{})
	v := curve.(mechanisms.Watched).Watch()
	var y [1]float64
	for _, x := range []float64{0.01, 1, 4, 300} {
		v.Saturation(y[:], []float64{math.Log(x)}, nil)
		near(t, "velocity", y[0], 5*x/(x+4), 1e-14*y[0])
	}
	half, slope := mechanisms.XAt(v, 0.5), mechanisms.HillAtHalf(v)
	near(t, "K", math.Exp(half.Value), 4, 1e-13)
	near(t, "n_H", slope.Value, 1, 1e-13)
}

// One site and n_H on both sides of 1, by kinetics alone (Ainslie, Shill & Neet 1972;
// Ricard, Meunier & Buc 1974): not so where the transition is fast.
func TestOneSiteCooperates(t *testing.T) {
	slope := func(name string, rates ...float64) float64 {
		m := cycle(t, cycles[name])
		if m.Sites() != 1 {
			t.Errorf("%s has %d sites", name, m.Sites())
		}
		theta := make([]float64, len(rates))
		for i, k := range rates {
			theta[i] = math.Log(k)
		}
		curve := m.Curve()
		curve.Bind(theta, mechanisms.Environment{})
		v := curve.(mechanisms.Watched).Watch()
		h := mechanisms.HillAtHalf(v)
		if h.Why != "" {
			t.Errorf("%s: %s", name, h.Why)
		}
		return h.Value
	}
	// The rates k_1, k_2, … in the order of the constants.
	if n := slope("mnemonic", 1, 10, 100, 100, 10, 0.1, 10, 0.01); !(n > 1.5) {
		t.Errorf("mnemonic, F binds better: n_H %g is not above 1", n)
	}
	if n := slope("mnemonic", 100, 0.1, 10, 0.01, 10, 1, 100, 1); !(n < 0.5) {
		t.Errorf("mnemonic, E binds better: n_H %g is not below 1", n)
	}
	if n := slope("mnemonic", 1, 10, 1e6, 100, 10, 0.1, 1e9, 1e6); math.Abs(n-1) > 1e-3 {
		t.Errorf("mnemonic, fast: n_H %g is not 1", n)
	}
	up, down := slope("slow transition", 0.1, 10, 10, 10, 1, 10, 0.01, 10, 10, 0.01), slope("slow transition", 10, 1, 0.01, 0.01, 1, 1, 0.01, 0.1, 0.1, 10)
	if !(up > 1.5) || !(down < 0.8) {
		t.Errorf("slow transition: n_H %g and %g are not on both sides of 1", up, down)
	}
}

// A cycle in balance is equilibrium: states with the same constants bind alike. Out of
// balance it says around which loop.
func TestCycleInBalance(t *testing.T) {
	m := cycle(t, cycles["no product"])
	// k1/k2 = 1/K, k3/k4 = c/K, k5/k6 = L, k7/k8 = L c.
	const k, c, l = 2., 0.05, 40.
	theta := logs(3/k, 3, 5*c/k, 5, 7*l, 7, 0.1*l*c, 0.1)
	balanced := m.(mechanisms.Balanced)
	if ok, why := balanced.Balance(theta, mechanisms.Environment{}); !ok {
		t.Error(why)
	}
	f, _ := mechanisms.Lookup("states")
	rest, err := f.Build(mechanisms.Definition{Differs: true, States: []mechanisms.State{{Name: "E"}, {Name: "F", Constants: map[string]float64{"L": 1}},
		{Name: "ES", Ligands: 1, Constants: map[string]float64{"K": -1}}, {Name: "FS", Ligands: 1, Constants: map[string]float64{"K": -1, "L": 1, "c": 1}}}})
	if err != nil {
		t.Fatal(err)
	}
	at := map[string]float64{"K": k, "L": l, "c": c}
	var given []float64
	for _, q := range rest.Constants() {
		given = append(given, math.Log(at[q.Name]))
	}
	a, b := m.Curve(), rest.Curve()
	a.Bind(theta, mechanisms.Environment{})
	b.Bind(given, mechanisms.Environment{})
	var p, q mechanisms.Point
	for _, lnx := range []float64{-8, -1, 0, 1, 4, 9} {
		a.At(lnx, &p)
		b.At(lnx, &q)
		near(t, "Y", p.Y, q.Y, 1e-14)
		near(t, "n_H", p.NH, q.NH, 1e-12)
	}
	theta[0] += math.Log(2)
	if ok, why := balanced.Balance(theta, mechanisms.Environment{}); ok || !strings.Contains(why, "0.5 times") {
		t.Errorf("out of balance: %v, %q", ok, why)
	}
	mm := cycle(t, cycles["Michaelis and Menten"]).(mechanisms.Balanced)
	if ok, why := mm.Balance(logs(1, 1, 1), mechanisms.Environment{}); ok || !strings.Contains(why, "from ES to E yields product and does not go back") {
		t.Errorf("a driven cycle: %v, %q", ok, why)
	}
}

func logs(v ...float64) []float64 {
	for i, x := range v {
		v[i] = math.Log(x)
	}
	return v
}

func TestCycleComplaints(t *testing.T) {
	step := mechanisms.Step{From: "E", To: "ES", Ligands: 1, Rate: "k1", Back: "k2"}
	turn := mechanisms.Step{From: "ES", To: "E", Rate: "k3", Product: true}
	for words, d := range map[string]mechanisms.Definition{
		"at least two states":              {States: named("E"), Steps: []mechanisms.Step{step}},
		`there is no state "ES"`:           {States: named("E", "F"), Steps: []mechanisms.Step{step}},
		`the state "F" is not joined`:      {States: named("E", "ES", "F"), Steps: []mechanisms.Step{step, turn}},
		"has no rate constant":             {States: named("E", "ES"), Steps: []mechanisms.Step{{From: "E", To: "ES", Ligands: 1}}},
		"does not go back: product":        {States: named("E", "ES"), Steps: []mechanisms.Step{step, {From: "ES", To: "E", Rate: "k3", Back: "k4", Product: true}}},
		"leads from \"E\" to itself":       {States: named("E", "ES"), Steps: []mechanisms.Step{step, {From: "E", To: "E", Rate: "k"}}},
		"no step takes up the ligand":      {States: named("E", "F"), Steps: []mechanisms.Step{{From: "E", To: "F", Rate: "k1", Back: "k2"}}},
		"the ligands do not add up":        {States: named("E", "ES"), Steps: []mechanisms.Step{step, {From: "ES", To: "E", Rate: "k3"}}},
		"k1 stands for steps that take up": {States: named("E", "ES"), Steps: []mechanisms.Step{step, {From: "ES", To: "E", Rate: "k1", Product: true}}},
		"takes something up and yields":    {States: named("E", "ES"), Steps: []mechanisms.Step{step, {From: "ES", To: "E", Ligands: 1, Rate: "k3", Product: true}}},
		"there is no steady state":         {States: named("E", "ES", "F"), Steps: []mechanisms.Step{{From: "E", To: "ES", Ligands: 1, Rate: "k1"}, {From: "E", To: "F", Rate: "k2"}}},
		"no such constant":                 {States: named("E", "ES"), Steps: []mechanisms.Step{step, turn}, Constants: fixed("k9", 1)},
		"this family has no such key":      {States: named("E", "ES"), Steps: []mechanisms.Step{step, turn}, Sites: 4},
		"takes up two kinds of ligand":     {States: named("E", "ES"), Steps: []mechanisms.Step{{From: "E", To: "ES", Ligands: 1, Effector: "I", Rate: "k"}}},
	} {
		f, _ := mechanisms.Lookup("cycle")
		if _, err := f.Build(d); err == nil || !strings.Contains(err.Error(), words) {
			t.Errorf("the complaint is %v, without %q", err, words)
		}
	}
}
