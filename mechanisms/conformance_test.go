package mechanisms_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"pgregory.net/rapid"

	"ligancy/mechanisms"
	"ligancy/mechanisms/mechtest"
)

// every is one definition of each kind that a family can take.
var every = map[string]mechtest.Case{
	"hill":                 {Family: "hill"},
	"adair 1":              {Family: "adair", Definition: mechanisms.Definition{Sites: 1}},
	"adair 4":              {Family: "adair", Definition: mechanisms.Definition{Sites: 4}},
	"adair 8":              {Family: "adair", Definition: mechanisms.Definition{Sites: 8}},
	"adair 4, ln Kd":       {Family: "adair", Definition: mechanisms.Definition{Sites: 4, SiteScale: true}},
	"mwc 2, c fixed":       {Family: "mwc", Definition: mechanisms.Definition{Sites: 2, Constants: fixed("c", 0.02)}},
	"mwc 4":                {Family: "mwc", Definition: mechanisms.Definition{Sites: 4}},
	"mwc 8":                {Family: "mwc", Definition: mechanisms.Definition{Sites: 8}},
	"mwc 4, exclusive":     {Family: "mwc", Definition: mechanisms.Definition{Sites: 4, Constants: fixed("c", 0)}},
	"mwc 4, effectors":     {Family: "mwc", Definition: mechanisms.Definition{Sites: 4, Effectors: twoEffectors}},
	"mwc 3, competitor":    {Family: "mwc", Definition: mechanisms.Definition{Sites: 3, Effectors: competitor}},
	"mwc 3, two rivals":    {Family: "mwc", Definition: mechanisms.Definition{Sites: 3, Effectors: twoRivals}},
	"mwc 2, c 0, rival":    {Family: "mwc", Definition: mechanisms.Definition{Sites: 2, Effectors: competitor, Constants: fixed("c", 0)}},
	"mwc 2 + 2":            {Family: "mwc", Definition: mechanisms.Definition{SiteClasses: chains, Differs: true}},
	"mwc 2 + 2, one c 0":   {Family: "mwc", Definition: mechanisms.Definition{SiteClasses: chains, Constants: fixed("beta.c", 0)}},
	"mwc 2 + 2, effectors": {Family: "mwc", Definition: mechanisms.Definition{SiteClasses: chains, Effectors: twoRivals}},
	"mwc 4, turnover":      {Family: "mwc", Definition: mechanisms.Definition{Sites: 4, Turnover: view("R", "T")}},
	"mwc 4, sees R":        {Family: "mwc", Definition: mechanisms.Definition{Sites: 4, Sees: []mechanisms.Weight{{Name: "R", Value: 1}}}},
	"mwc 4, sees T":        {Family: "mwc", Definition: mechanisms.Definition{Sites: 4, Sees: []mechanisms.Weight{{Name: "T", Value: 1}}}},
	"square":               {Family: "sequential", Definition: mechanisms.Definition{Contacts: "square"}},
	"tetrahedral":          {Family: "sequential", Definition: mechanisms.Definition{Contacts: "tetrahedral"}},
	"linear, K_AB":         {Family: "sequential", Definition: mechanisms.Definition{Contacts: "linear", Sites: 4, Constants: started("K_AB", 1)}},
	"ring of 8":            {Family: "sequential", Definition: mechanisms.Definition{Contacts: "ring", Sites: 8}},
	"prism of 8":           {Family: "sequential", Definition: mechanisms.Definition{Contacts: "prism", Sites: 8}},
	"octahedral":           {Family: "sequential", Definition: mechanisms.Definition{Contacts: "octahedral"}},
	"one class":            {Family: "independent", Definition: mechanisms.Definition{Classes: []mechanisms.Count{{Name: "only", Sites: 3}}}},
	"two classes":          {Family: "independent", Definition: mechanisms.Definition{Classes: twoClasses}},
	"two classes, ln Kd":   {Family: "independent", Definition: mechanisms.Definition{Classes: twoClasses, SiteScale: true}},
	"conformations":        {Family: "conformations", Definition: threeConformations},
	"states":               {Family: "states", Definition: listedStates},
	"simple parts":         {Family: "mixture", Definition: mechanisms.Definition{Parts: []mechanisms.Part{{Name: "tight", Sites: 1}, {Name: "loose", Sites: 1}}}},
	"three parts":          {Family: "mixture", Definition: threeParts},
	"dimer, tetramer": {Family: "assembly", Definition: mechanisms.Definition{Small: &mechanisms.Part{Sites: 2},
		Large: &mechanisms.Part{Family: "adair", Definition: &mechanisms.Definition{Sites: 4}}}},
	"monomer, trimer": {Family: "assembly", Definition: mechanisms.Definition{Small: &mechanisms.Part{Sites: 1},
		Large: &mechanisms.Part{Family: "mwc", Definition: &mechanisms.Definition{Sites: 3, Effectors: competitor}}}},
}

var (
	twoEffectors = []mechanisms.Effector{{Name: "alanine", Binds: "T"}, {Name: "FBP", Binds: "both"}}
	competitor   = []mechanisms.Effector{{Name: "analogue", Binds: "both", AtLigandSite: true}}
	twoRivals    = []mechanisms.Effector{{Name: "a", Binds: "both", AtLigandSite: true}, {Name: "b", Binds: "R", AtLigandSite: true}, {Name: "c", Binds: "T"}}
	chains       = []mechanisms.Count{{Name: "alpha", Sites: 2}, {Name: "beta", Sites: 2}}
	twoClasses   = []mechanisms.Count{{Name: "tight", Sites: 2}, {Name: "loose", Sites: 3}}

	threeConformations = mechanisms.Definition{
		Effectors: []mechanisms.Effector{{Name: "b", AtLigandSite: true}},
		Conformations: []mechanisms.Conformation{
			{Name: "A", Sites: 2, K: "K_A", Ligands: map[string]string{"a": "K", "b": "K"}},
			{Name: "I", Sites: 3, K: "K_I", Weight: "L_I", Ligands: map[string]string{"a": "K_I"}, EffectorSites: map[string]int{"a": 1}},
			{Name: "held", Like: "A", Weight: "r"}},
		Sees: []mechanisms.Weight{{Name: "A", Value: 1}, {Name: "I", Free: true}},
	}
	listedStates = mechanisms.Definition{
		States: []mechanisms.State{
			{Name: "E"},
			{Name: "ES", Ligands: 1, Ways: 2, Constants: map[string]float64{"K_S": -1}},
			{Name: "EI", Effectors: map[string]int{"I": 1}, Constants: map[string]float64{"K_I": -1}},
			{Name: "ESS", Ligands: 2, Constants: map[string]float64{"K_S": -2, "a": 1}},
			{Name: "ESI", Ligands: 1, Effectors: map[string]int{"I": 1}, Constants: map[string]float64{"K_S": -1, "K_I": -1, "b": 1}}},
		Turnover: []mechanisms.Weight{{Name: "ES", Value: 1}, {Name: "ESS", Free: true}},
	}
	threeParts = mechanisms.Definition{Parts: []mechanisms.Part{
		{Name: "tight", Sites: 1},
		{Name: "whole", Family: "mwc", Definition: &mechanisms.Definition{Sites: 4, Effectors: twoEffectors}},
		{Name: "loose", Sites: 2}}}
)

func view(one, free string) []mechanisms.Weight {
	return []mechanisms.Weight{{Name: one, Value: 1}, {Name: free, Free: true}}
}

func fixed(key string, v float64) map[string]mechanisms.Given {
	return map[string]mechanisms.Given{key: {Fixed: &v}}
}

func started(key string, v float64) map[string]mechanisms.Given {
	return map[string]mechanisms.Given{key: {Start: &v}}
}

func TestConformance(t *testing.T) {
	for name, c := range every {
		t.Run(name, func(t *testing.T) { mechtest.Conform(t, c.Build()) })
	}
}

// Saturation, Hill coefficient and every gradient against enumeration of
// microstates in extended precision.
func TestBruteForce(t *testing.T) {
	for name, c := range every {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			m := c.Build()
			rng := rand.New(rand.NewPCG(3, 4))
			theta, env := mechtest.Draw(rng, m), mechtest.DrawEnvironment(rng, m)
			compare(t, m, c, theta, env, []float64{-4, 0.3, 3.7})
		})
	}
}

// compare holds a curve, and what its response sees, against the reference.
func compare(t interface{ Errorf(string, ...any) }, m mechanisms.Mechanism, c mechtest.Case, theta []float64,
	env mechanisms.Environment, lnx []float64) {
	ref := mechtest.Reference{Family: c.Family, Definition: c.Definition, Mechanism: m}
	curve := m.Curve()
	curve.Bind(theta, env)
	check := func(curve mechanisms.Curve, what string) {
		var p mechanisms.Point
		for _, l := range lnx {
			curve.At(l, &p)
			if math.IsNaN(p.NH) {
				continue
			}
			want := ref.Point(theta, env, l)
			at := fmt.Sprintf("%s, ln x = %g, θ = %v", what, l, theta)
			near(t, at+": Y", p.Y, want.Y, 1e-12*want.Y)
			near(t, at+": 1 − Y", p.Empty, want.Empty, 1e-12*want.Empty)
			near(t, at+": n_H", p.NH, want.NH, 1e-12*math.Max(1, want.NH))
			near(t, at+": dn_H", p.DNH, want.DNH, 1e-11)
			near(t, at+": d²n_H", p.D2NH, want.D2NH, 1e-10)
			for i := range theta {
				near(t, fmt.Sprintf("%s: ∂Y/∂θ%d", at, i), p.GradY[i], want.GradY[i], 1e-11*math.Max(1, math.Abs(want.GradY[i])))
				near(t, fmt.Sprintf("%s: ∂n_H/∂θ%d", at, i), p.GradNH[i], want.GradNH[i], 1e-10*math.Max(1, math.Abs(want.GradNH[i])))
				near(t, fmt.Sprintf("%s: ∂dn_H/∂θ%d", at, i), p.GradDNH[i], want.GradDNH[i], 1e-10*math.Max(1, math.Abs(want.GradDNH[i])))
			}
		}
	}
	check(curve, "saturation")
	if w, ok := curve.(mechanisms.Watched); ok {
		ref.Watched = true
		check(w.Watch(), "response")
	}
}

// Populations against the enumerated microstates.
func TestBruteForcePopulations(t *testing.T) {
	rng := rand.New(rand.NewPCG(13, 14))
	for name, c := range every {
		if c.Family == "hill" || c.Family == "mixture" || c.Family == "assembly" {
			continue
		}
		m := c.Build()
		theta, env := mechtest.Draw(rng, m), mechtest.DrawEnvironment(rng, m)
		curve := m.Curve()
		curve.Bind(theta, env)
		p := curve.(mechanisms.Populated)
		ref := mechtest.Reference{Family: c.Family, Definition: c.Definition, Mechanism: m}
		for _, l := range []float64{-5, 0, 2, 6} {
			got, want := p.Populations(nil, l), ref.Populations(theta, env, l)
			for i, state := range p.StateNames() {
				near(t, fmt.Sprintf("%s, ln x = %g: %s", name, l, state), got[i], want[state], 1e-12*want[state])
			}
		}
	}
}

func near(t interface{ Errorf(string, ...any) }, what string, got, want, within float64) {
	if !(math.Abs(got-want) <= within) {
		t.Errorf("%s is %.17g, not %.17g (%.2g off)", what, got, want, got-want)
	}
}

func TestBruteForceRandom(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		c := mechtest.Cases(3).Draw(rt, "mechanism")
		m := c.Build()
		rng := rand.New(rand.NewPCG(rapid.Uint64().Draw(rt, "seed"), 0))
		compare(rt, m, c, mechtest.Draw(rng, m), mechtest.DrawEnvironment(rng, m), []float64{rapid.Float64Range(-8, 8).Draw(rt, "ln x")})
	})
}
