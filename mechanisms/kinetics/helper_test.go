package kinetics_test

import (
	"context"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"ligancy/mechanisms"
	"ligancy/mechanisms/kinetics"
	"ligancy/mechanisms/mechtest"
)

// site is one site: K is its constant.
var site = mechtest.Case{Family: "independent", Definition: mechanisms.Definition{Classes: []mechanisms.Count{{Name: "only", Sites: 1}}}}

// tetramer is the concerted tetramer: ten states and the ligand.
var tetramer = mechtest.Case{Family: "mwc", Definition: mechanisms.Definition{Sites: 4}}

// usualRates are the rates that join all states of a mechanism.
func usualRates(m mechanisms.Mechanism) []kinetics.Rate {
	net, err := mechanisms.NetworkOf(m)
	if err != nil {
		panic(err)
	}
	rates := []kinetics.Rate{{Key: "k_on"}}
	seen := map[string]bool{}
	for _, s := range net.Steps {
		key := ""
		switch s.Kind {
		case mechanisms.Exchange:
			key = "exchange"
		case mechanisms.Uptake:
			key = m.Effectors()[s.Effector] + ".k_on"
		}
		if key != "" && !seen[key] {
			seen[key] = true
			rates = append(rates, kinetics.Rate{Key: key})
		}
	}
	return rates
}

func build(t testing.TB, c mechtest.Case, rates ...string) *kinetics.Model {
	t.Helper()
	m := c.Build()
	list := usualRates(m)
	if len(rates) > 0 {
		list = nil
		for _, r := range rates {
			list = append(list, kinetics.Rate{Key: r})
		}
	}
	k, err := kinetics.New(m, list)
	if err != nil {
		t.Fatal(err)
	}
	return k
}

// bound binds a model to constants and rates as they are, not their logarithms.
func bound(t testing.TB, m *kinetics.Model, constants, rates []float64) *kinetics.Bound {
	t.Helper()
	b := m.Bound()
	if err := b.Bind(logs(constants), logs(rates), mechanisms.Environment{}); err != nil {
		t.Fatal(err)
	}
	return b
}

func logs(v []float64) []float64 {
	out := make([]float64, len(v))
	for i, x := range v {
		out[i] = math.Log(x)
	}
	return out
}

// drawRates draws ln of the rates within a few decades.
func drawRates(rng *rand.Rand, m *kinetics.Model) []float64 {
	phi := make([]float64, len(m.Rates()))
	for i := range phi {
		phi[i] = rng.Float64()*6 - 3
	}
	return phi
}

func run(t testing.TB, b *kinetics.Bound, p *kinetics.Program, times []float64) *kinetics.Course {
	t.Helper()
	c, err := b.Run(context.Background(), p, times, false)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func near(t interface{ Errorf(string, ...any) }, what string, got, want, within float64) {
	if !(math.Abs(got-want) <= within) {
		t.Errorf("%s is %.17g, not %.17g (%.2g off)", what, got, want, got-want)
	}
}

func complains(t *testing.T, err error, words ...string) {
	t.Helper()
	if err == nil {
		t.Errorf("no complaint; wanted %q", words)
		return
	}
	for _, w := range words {
		if !strings.Contains(err.Error(), w) {
			t.Errorf("the complaint %q lacks %q", err, w)
		}
	}
}
