package saturation

import (
	"math"
	"math/rand/v2"
	"testing"

	"ligancy/mechanisms"
)

// truth is one constructed truth of the verdict: what is simulated, what is
// tried, and what the verdict has to come to.
type truth struct {
	number     int
	name       string
	simulate   func(rng *rand.Rand) Dataset
	candidates func(t testing.TB) []Candidate
	holders    []string   // candidates whose curves hold the truth: itself and its twins
	out        []string   // must be out
	nH         string     // what is true of n_H: "1", "above 1", "below 1"
	silent     bool       // n_H may be left open
	said       []string   // each must be said
	pairs      [][]string // twins that must be named together
}

// series is n ligand values from low to high in equal steps of ln x.
func series(n int, low, high float64) []float64 {
	x := make([]float64, n)
	for i := range x {
		x[i] = low * math.Pow(high/low, float64(i)/float64(n-1))
	}
	return x
}

// measuredCurve simulates replicates of a curve with normal scatter.
func measuredCurve(rng *rand.Rand, x []float64, replicates int, scatter float64, curve func(x float64) float64) Dataset {
	d := Dataset{Name: "simulated", Noise: Constant, Incubation: math.NaN(),
		Response: Response{Kind: "saturation", Unit: "fraction", High: Setting{Value: 1}}}
	for _, v := range x {
		for range replicates {
			d.Points = append(d.Points, Point{X: v, Y: curve(v) + scatter*rng.NormFloat64(), Row: len(d.Points) + 2})
		}
	}
	return d
}

// curveOf is the saturation of a mechanism at given constants on their fitted scales.
func curveOf(m mechanisms.Mechanism, theta ...float64) func(float64) float64 {
	c := m.Curve()
	c.Bind(theta, mechanisms.Environment{})
	y, lnx := make([]float64, 1), make([]float64, 1)
	return func(x float64) float64 {
		lnx[0] = math.Log(x)
		c.Saturation(y, lnx, nil)
		return y[0]
	}
}

// newRand is a generator of its own for study k of a test.
func newRand(seed uint64, k int) *rand.Rand { return rand.New(rand.NewPCG(seed, uint64(k))) }

// site is one site of dissociation constant k.
func site(k float64) func(float64) float64 { return func(x float64) float64 { return x / (k + x) } }

// positiveDimer has half saturation at k and a second site that binds a
// hundredfold more tightly than the first: Z = 1 + 2x/(10k) + x²/k².
func positiveDimer(k float64) func(float64) float64 {
	return func(x float64) float64 {
		a := x / k
		return (a/10 + a*a) / (1 + a/5 + a*a)
	}
}

// blended is a share f of one curve and the rest of another.
func blended(f float64, a, b func(float64) float64) func(float64) float64 {
	return func(x float64) float64 { return f*a(x) + (1-f)*b(x) }
}

// ordinary are the candidates of most truths.
func ordinary(t testing.TB) []Candidate {
	c := func(name, family string, d mechanisms.Definition) Candidate {
		return Candidate{Name: name, Family: family, Mechanism: build(t, family, d)}
	}
	classes := func(a, b int) mechanisms.Definition {
		return mechanisms.Definition{Classes: []mechanisms.Count{{Name: "tight", Sites: a}, {Name: "loose", Sites: b}}}
	}
	return []Candidate{
		c("one site", "independent", mechanisms.Definition{Classes: []mechanisms.Count{{Name: "only", Sites: 1}}}),
		c("Hill", "hill", mechanisms.Definition{}),
		c("interacting pair", "adair", mechanisms.Definition{Sites: 2}),
		c("unlike pair", "independent", classes(1, 1)),
		c("stepwise", "adair", mechanisms.Definition{Sites: 4}),
		c("two classes", "independent", classes(2, 2)),
		c("concerted", "mwc", mechanisms.Definition{Sites: 4}),
		c("square", "sequential", mechanisms.Definition{Contacts: "square"}),
		c("tetrahedron", "sequential", mechanisms.Definition{Contacts: "tetrahedral"}),
		c("two populations", "mixture", mechanisms.Definition{Parts: []mechanisms.Part{{Name: "tight", Sites: 1}, {Name: "loose", Sites: 1}}}),
	}
}

// ordinaryOf is the mechanism of one ordinary candidate.
func ordinaryOf(t testing.TB, name string) mechanisms.Mechanism {
	return among(name)(t)[0].Mechanism
}

// inOrder puts constants, by key, on their fitted scales in a mechanism's order.
func inOrder(t testing.TB, m mechanisms.Mechanism, v map[string]float64) []float64 {
	t.Helper()
	theta := make([]float64, len(m.Constants()))
	for i, c := range m.Constants() {
		w, ok := v[c.Key()]
		if !ok {
			t.Fatalf("no value for %s", c.Key())
		}
		theta[i] = scaled(c, w)
	}
	return theta
}

// among are the ordinary candidates of these names.
func among(names ...string) func(testing.TB) []Candidate {
	return func(t testing.TB) []Candidate {
		var list []Candidate
		for _, c := range ordinary(t) {
			for _, n := range names {
				if c.Name == n {
					list = append(list, c)
				}
			}
		}
		return list
	}
}
