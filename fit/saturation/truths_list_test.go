package saturation

import (
	"math"
	"math/rand/v2"
	"testing"
)

// Designs that several truths share.
var (
	wide  = series(24, 0.001, 1000)
	upper = series(24, 0.1, 1000)
)

// truths are the twelve constructed truths. All numbers are invented; they set
// apart what a saturation curve can and cannot say.
func truths(t testing.TB) []truth {
	dimers := blended(0.5, positiveDimer(0.1), positiveDimer(10))
	return []truth{
		{number: 1, name: "one site", nH: "1", candidates: ordinary,
			simulate: curveWith(0.01, series(24, 0.01, 100), 3, site(1)),
			holders:  []string{"one site", "Hill", "interacting pair", "unlike pair"}},
		{number: 2, name: "concerted, four sites", nH: "above 1", candidates: ordinary,
			simulate: curveWith(0.01, upper, 3, concerted(t, 1e4, 0.01, 1)),
			holders:  []string{"concerted"}, out: []string{"one site", "Hill", "unlike pair", "two classes"},
			said: []string{saysNotToldApart}},
		{number: 3, name: "sequential, square", nH: "above 1", candidates: ordinary,
			simulate: curveWith(0.01, upper, 3, curveOf(ordinaryOf(t, "square"), math.Log(120), math.Log(12))),
			holders:  []string{"square"}, out: []string{"one site", "Hill", "unlike pair", "two classes"},
			said: []string{saysNotToldApart}},
		{number: 4, name: "stepwise 60, 30, 6.6, 0.66", nH: "above 1", candidates: ordinary,
			simulate: curveWith(0.01, upper, 3, stepwise(t, 60, 30, 6.6, 0.66)),
			holders:  []string{"stepwise"}, out: []string{"one site", "Hill", "unlike pair", "two classes"}},
		{number: 5, name: "two unlike sites", nH: "below 1", candidates: ordinary,
			simulate: curveWith(0.01, wide, 3, blended(0.5, site(math.Sqrt(0.1)), site(math.Sqrt(10)))),
			holders:  []string{"unlike pair", "interacting pair"}, out: []string{"one site"},
			pairs: [][]string{{"unlike pair", "interacting pair"}}},
		{number: 6, name: "two positive dimers", nH: "below 1", candidates: ordinary,
			simulate: curveWith(0.01, wide, 3, dimers),
			holders:  []string{"stepwise"}, out: []string{"one site", "unlike pair", "two classes", "two populations", "concerted"},
			said: []string{saysNoIndependentSites}},
		{number: 7, name: "two populations", nH: "below 1", candidates: ordinary,
			simulate: curveWith(0.01, wide, 3, blended(0.35, site(1/math.Sqrt(30)), site(math.Sqrt(30)))),
			holders:  []string{"two populations"}, out: []string{"one site", "Hill", "two classes"},
			said: []string{saysSeveralReadings}},
		{number: 8, name: "spread of affinities", nH: "below 1", candidates: ordinary,
			simulate: curveWith(0.01, wide, 3, hillCurveOf(t, 1, 0.7)),
			holders:  []string{"Hill"}, out: []string{"one site", "unlike pair", "interacting pair", "two classes"},
			said: []string{saysSpread, saysHillTwin}},
		nonspecificTruth(),
		{number: 10, name: "upper end not reached", nH: "1", silent: true, candidates: ordinary, simulate: unfinished,
			holders: []string{"one site", "Hill", "interacting pair", "unlike pair"},
			said:    []string{saysEndNotReached, saysSlopeOpen}},
		shiftTruth(),
		{number: 12, name: "concerted, six points", nH: "above 1", silent: true, candidates: ordinary,
			simulate: curveWith(0.1, series(6, 0.3, 100), 1, concerted(t, 1e4, 0.01, 1)),
			holders:  []string{"concerted"}, said: []string{saysNothing}},
	}
}

// curveWith simulates replicates of a curve.
func curveWith(scatter float64, x []float64, replicates int, curve func(float64) float64) func(*rand.Rand) Dataset {
	return func(rng *rand.Rand) Dataset { return measuredCurve(rng, x, replicates, scatter, curve) }
}

func concerted(t testing.TB, l, c, kR float64) func(float64) float64 {
	m := ordinaryOf(t, "concerted")
	return curveOf(m, inOrder(t, m, map[string]float64{"L": l, "c": c, "K_R": kR})...)
}

func hillCurveOf(t testing.TB, k, h float64) func(float64) float64 {
	return curveOf(ordinaryOf(t, "Hill"), math.Log(k), math.Log(h))
}

// stepwise is an Adair curve of intrinsic dissociation constants.
func stepwise(t testing.TB, kd ...float64) func(float64) float64 {
	beta := make([]float64, len(kd))
	b := 1.0
	for i, k := range kd {
		b *= float64(len(kd)-i) / float64(i+1) / k
		beta[i] = b
	}
	return curveOf(ordinaryOf(t, "stepwise"), beta...)
}

// nonspecificTruth is one site with a line of nonspecific binding under it.
// What has two affinities with shares of its own, or four sites, holds such a
// line as a limit (a loose site that never fills), so it is not among those
// that have to be out without one.
func nonspecificTruth() truth {
	const plain = " without the line"
	names := []string{"one site", "Hill", "interacting pair", "unlike pair"}
	tr := truth{number: 9, name: "one site and nonspecific", nH: "1", holders: names}
	for _, n := range names {
		tr.out = append(tr.out, n+plain)
	}
	tr.candidates = func(t testing.TB) []Candidate {
		list := among(append(names, "two populations")...)(t)
		for _, c := range list[:len(names)] {
			c.Name += plain
			c.Ends = map[string]Setting{"nonspecific": {}}
			list = append(list, c)
		}
		return list
	}
	tr.simulate = func(rng *rand.Rand) Dataset {
		d := measuredCurve(rng, series(24, 0.01, 100), 3, 0.02, func(x float64) float64 { return x/(1+x) + 0.005*x })
		d.Response = Response{Kind: "bound", Unit: "pmol/mg", High: Setting{Free: true}, Nonspecific: Setting{Free: true}}
		return d
	}
	return tr
}

// unfinished is one site measured to twice its constant, with the upper end free.
func unfinished(rng *rand.Rand) Dataset {
	d := measuredCurve(rng, series(10, 0.02, 2), 3, 0.02, site(1))
	d.Response = Response{Kind: "bound", Unit: "pmol/mg", High: Setting{Free: true}}
	return d
}

// shiftTruth is six preparations of one site whose ln K scatter with deviation 1.
func shiftTruth() truth {
	names := []string{"one site", "Hill", "interacting pair", "unlike pair", "two populations"}
	tr := truth{number: 11, name: "six preparations", nH: "1", out: names, said: []string{saysShift},
		holders: []string{"one site shifted", "Hill shifted", "interacting pair shifted", "unlike pair shifted"}}
	tr.candidates = func(t testing.TB) []Candidate {
		list := among(names...)(t)
		for _, c := range list[:4] {
			c.Name += " shifted"
			c.ShiftByPreparation = true
			list = append(list, c)
		}
		return list
	}
	tr.simulate = func(rng *rand.Rand) Dataset {
		var d Dataset
		for p := range 6 {
			one := measuredCurve(rng, series(10, 0.01, 100), 2, 0.02, site(math.Exp(rng.NormFloat64())))
			if p == 0 {
				d = one
				d.Points = nil
			}
			for _, q := range one.Points {
				q.Preparation, q.Row = string(rune('A'+p)), len(d.Points)+2
				d.Points = append(d.Points, q)
			}
		}
		return d
	}
	return tr
}
