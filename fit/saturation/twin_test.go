package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"ligancy/mechanisms"
)

// pairs are the mechanisms of two sites and what they may be mistaken for.
func pairs(t testing.TB) []Candidate {
	list := among("one site", "Hill", "interacting pair", "unlike pair", "two classes", "two populations")(t)
	return append(list, Candidate{Name: "pair in contact", Family: "sequential",
		Mechanism: build(t, "sequential", mechanisms.Definition{Contacts: "pair"})})
}

// studyOf simulates a saturation curve and tries candidates on it.
func studyOf(rng *rand.Rand, scatter float64, x []float64, curve func(float64) float64, candidates []Candidate) *Analysis {
	return &Analysis{Ligand: Substance{Name: "ligand", Unit: "uM"}, Kelvin: math.NaN(),
		Data: []Dataset{measuredCurve(rng, x, 3, scatter, curve)}, Candidates: candidates,
		Settings: Settings{Starts: 12, Seed: 1, Level: 0.95, Method: "covariance", Draws: 199}}
}

// ranked fits and ranks the candidates of a study.
func ranked(a *Analysis) (fits []*fitted, order []int, c *curves) {
	a = a.withDefaults()
	fits = a.fitAll(context.Background(), nil)
	c = newCurves(a, fits)
	return fits, rank(fits, c), c
}

// groupOf lists the names that share the curves of one mechanism, itself included.
func groupOf(fits []*fitted, order []int, name string) []string {
	for _, g := range twinGroups(fits, order) {
		if slices.Contains(g, name) {
			slices.Sort(g)
			return g
		}
	}
	return []string{name}
}

// A two-site curve below n_H = 1 is that of an interacting pair and of an unlike
// one alike (real roots; theory: section 5), of four sites in two classes, and of
// two sites in contact; above 1, the unlike sites drop out.
func TestTwoSiteTwins(t *testing.T) {
	for i, ratio := range []float64{1.6, 3, 10, 100, 1000, 1 / 3.0, 0.1, 0.01} {
		rng := rand.New(rand.NewPCG(31, uint64(i)))
		// Intrinsic constants K'_1 ≥ K'_2 of two sites, Z = 1 + 2x/a + x²/(ab).
		a, b := math.Sqrt(1/ratio), math.Sqrt(ratio)
		curve := func(x float64) float64 {
			p, q := 2*x/a, x*x/(a*b)
			return (p/2 + q) / (1 + p + q)
		}
		fits, order, _ := ranked(studyOf(rng, 0.005, wide, curve, pairs(t)))
		want := []string{"interacting pair", "pair in contact"}
		if ratio > 1 {
			want = append(want, "two classes", "unlike pair")
		}
		if got := groupOf(fits, order, "interacting pair"); !slices.Equal(got, want) {
			t.Errorf("ratio %v: twins %v, want %v", ratio, got, want)
		}
	}
}

// Twins count once in the weights, each with the weight of all.
func TestTwinsCountOnce(t *testing.T) {
	curve := blended(0.5, site(0.2), site(5))
	fits, order, _ := ranked(studyOf(rand.New(rand.NewPCG(5, 5)), 0.01, wide, curve, pairs(t)))
	sum, pair := 0.0, 0.0
	for _, i := range order {
		if fits[i].twinOf < 0 {
			sum += float64(fits[i].row.AICcWeight)
		}
		if fits[i].row.Name == "interacting pair" {
			pair = float64(fits[i].row.AICcWeight)
		}
	}
	if math.Abs(sum-1) > 1e-12 {
		t.Errorf("weights of all curves add up to %v", sum)
	}
	for _, i := range order {
		if name := fits[i].row.Name; name == "unlike pair" || name == "two classes" || name == "pair in contact" {
			if w := float64(fits[i].row.AICcWeight); math.Abs(w-pair) > 1e-6 {
				t.Errorf("%s: weight %v, its twin %v", name, w, pair)
			}
		}
	}
}

// Four-site polynomials with complex roots have no twin among independent
// sites, and concerted and pairwise curves are none of each other, near as they
// are: no table of names says so.
func TestFourSitesAreNoTwins(t *testing.T) {
	for _, tr := range truths(t) {
		if n := tr.number; n != 2 && n != 3 && n != 4 && n != 6 {
			continue
		}
		fits, order, _ := ranked(tr.study(t, 0))
		for _, name := range []string{"stepwise", "concerted", "square", "tetrahedron"} {
			if g := groupOf(fits, order, name); len(g) > 1 {
				t.Errorf("truth %d: %v are called twins", tr.number, g)
			}
		}
	}
}

// Twins do not depend on the order of the candidates, nor on their names.
func TestTwinsWhateverTheOrder(t *testing.T) {
	curve := blended(0.5, site(0.3), site(3))
	var want []string
	for k := range 3 {
		list := pairs(t)
		rng := rand.New(rand.NewPCG(9, uint64(k)))
		rng.Shuffle(len(list), func(i, j int) { list[i], list[j] = list[j], list[i] })
		fits, order, _ := ranked(studyOf(rand.New(rand.NewPCG(8, 8)), 0.01, wide, curve, list))
		got := groupOf(fits, order, "unlike pair")
		if k == 0 {
			want = got
		}
		if !slices.Equal(got, want) {
			t.Errorf("order %d: %v, %v", k, got, want)
		}
	}
}

// Which candidates hold the curves of which is a matter of mathematics: a
// polynomial of four sites holds every mechanism of four and the square of any
// of two; a pair of unlike sites is a mixture with equal shares; a Hill curve
// holds one site and no other.
func TestCandidatesHoldOthers(t *testing.T) {
	holds := map[string][]string{
		"one site":         {},
		"Hill":             {"one site"},
		"interacting pair": {"one site", "unlike pair", "two classes"},
		"unlike pair":      {"one site", "two classes"},
		"stepwise":         {"one site", "interacting pair", "unlike pair", "two classes", "concerted", "square", "tetrahedron"},
		"two classes":      {"one site", "unlike pair"},
		"concerted":        {"one site"},
		"square":           {"one site"},
		"tetrahedron":      {"one site"},
		"two populations":  {"one site", "unlike pair", "two classes"},
	}
	freedom := map[string]int{"one site": 1, "Hill": 2, "interacting pair": 2, "unlike pair": 2, "stepwise": 4,
		"two classes": 2, "concerted": 3, "square": 2, "tetrahedron": 2, "two populations": 3}
	for _, number := range []int{1, 3, 5} {
		tr := truths(t)[number-1]
		fits, _, c := ranked(tr.study(t, 0))
		for j, f := range fits {
			if got := c.imitation(j).freedom(); got != freedom[f.row.Name] {
				t.Errorf("%s: freedom %d, want %d", f.row.Name, got, freedom[f.row.Name])
			}
			for i, g := range fits {
				want := i == j || slices.Contains(holds[f.row.Name], g.row.Name)
				if got := c.hold(j, i); got != want {
					t.Errorf("truth %d: %s holds %s: %v, want %v", number, f.row.Name, g.row.Name, got, want)
				}
			}
		}
	}
}
