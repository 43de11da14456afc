package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"ligancy/mechanisms"
)

// objected finds the first answer of an objection; the zero Objection where it
// was not asked.
func objected(list []Objection, id string) Objection {
	for _, o := range list {
		if o.ID == id {
			return o
		}
	}
	return Objection{}
}

// asks is one study and what an objection says of it.
type asks struct {
	name  string
	id    string
	study func(t testing.TB) *Analysis
	group string
	says  []string // in text, effect or remedy
}

// with changes the plain study of one site.
func with(y func(float64) float64, change func(*Analysis)) func(testing.TB) *Analysis {
	return func(t testing.TB) *Analysis {
		a := plain(y).study(t)
		if change != nil {
			change(a)
		}
		return a
	}
}

// check runs cases through the objections to the study alone.
func check(t *testing.T, cases []asks) {
	t.Helper()
	for _, c := range cases {
		t.Run(c.id+", "+c.name, func(t *testing.T) {
			verify(t, c, c.study(t).Objections(context.Background()))
		})
	}
}

// checkFits runs cases through the objections to study and fits.
func checkFits(t *testing.T, cases []asks) {
	t.Helper()
	for _, c := range cases {
		t.Run(c.id+", "+c.name, func(t *testing.T) {
			verify(t, c, analysed(t, c.study(t)).Objections)
		})
	}
}

func verify(t *testing.T, c asks, list []Objection) {
	t.Helper()
	o := objected(list, c.id)
	all := strings.Join([]string{o.Text, deref(o.Effect), deref(o.Remedy)}, " | ")
	if o.Group != c.group {
		t.Errorf("%q, want %q: %s", o.Group, c.group, all)
	}
	for _, s := range c.says {
		if !strings.Contains(all, s) {
			t.Errorf("%q does not say %q", all, s)
		}
	}
	if o.Source == nil {
		t.Error("no source")
	}
	if o.Group == settleFirst && o.Remedy == nil {
		t.Error("to be settled, but no remedy")
	}
	t.Log(o.Group, "|", all)
}

// axis, time, rates

func TestObjectionsToTheAssay(t *testing.T) {
	sites := func(v float64) func(*Analysis) {
		return func(a *Analysis) { a.Data[0].SitesPresent = SitesPresent{Value: v, Unit: "nM"} }
	}
	kOn := func(v, seconds float64) func(*Analysis) {
		return func(a *Analysis) {
			a.Data[0].Incubation = seconds
			a.Candidates[0].Rates = map[string]Rate{"k_on": {Given: mechanisms.Given{Value: &v}, Order: 2}}
		}
	}
	velocity := func(seconds, v float64) func(*Analysis) {
		return func(a *Analysis) {
			a.Data[0].Response = Response{Kind: "velocity", Unit: "nM/s", High: Setting{Free: true}}
			a.Data[0].Incubation = seconds
			for i := range a.Data[0].Points {
				a.Data[0].Points[i].Y *= v
			}
		}
	}
	check(t, []asks{
		{"not stated", "ligand-depletion-unknown", with(hyperbola, nil), settleFirst,
			[]string{"cannot be judged", "Above 0.1"}},
		{"many sites", "ligand-depletion", with(hyperbola, sites(1)), settleFirst,
			[]string{"ligand_axis: total", "n_H 1.20"}},
		{"few sites", "ligand-depletion", with(hyperbola, sites(0.05)), foundGood,
			[]string{"can be taken as free"}},
		{"solved for", "ligand-depletion", with(depletedSite(1),
			func(a *Analysis) { sites(1)(a); a.Data[0].Total = true }), foundGood,
			[]string{"solved for", "against total ligand"}},
		{"a titration", "ligand-depletion", with(depletedSite(20),
			func(a *Analysis) { sites(20)(a); a.Data[0].Total = true }), sayInPaper, []string{"titration"}},
		{"one preparation's Bmax", "ligand-depletion", with(hyperbola, func(a *Analysis) {
			a.Data[0].SitesPresent = SitesPresent{FromBmax: 0.5}
			a.Data[0].Response = Response{Kind: "bound", High: Setting{Free: true}}
		}), settleFirst, []string{"Sites (0.5"}},
		{"of an enzyme", "ligand-depletion-unknown", with(hyperbola, velocity(math.NaN(), 1)),
			forCompleteness, []string{"enzyme"}},
		{"a gas", "dissociation", with(hyperbola, func(a *Analysis) {
			a.Ligand.Unit = "torr"
			a.Candidates = []Candidate{{Name: "four", Family: "mwc", Mechanism: build(t, "mwc", four())}}
		}), settleFirst, []string{"fall apart", "sites_present"}},
		{"stated", "dissociation", with(hyperbola, func(a *Analysis) {
			a.Ligand.Unit = "torr"
			a.Data[0].SitesPresent = SitesPresent{Value: 80, Unit: "uM"}
			a.Candidates = []Candidate{{Name: "four", Family: "mwc", Mechanism: build(t, "mwc", four())}}
		}), foundGood, nil},

		{"not stated", "incubation-unknown", with(hyperbola, nil), settleFirst,
			[]string{"EC50 1.530 K and n_H 1.235"}},
		{"without a rate", "incubation-unknown", with(hyperbola,
			func(a *Analysis) { a.Data[0].Incubation = 5400 }), sayInPaper,
			[]string{"90 min", "k_off is above 6.4e-04 1/s"}},
		{"too short", "incubation", with(func(x float64) float64 { return earlyShare(x, math.Ln2) },
			kOn(math.Ln2/60, 60)), settleFirst, []string{"stand longer"}},
		{"long enough", "incubation", with(hyperbola, kOn(0.01, 5400)), foundGood, []string{"n_H 1.000"}},
		{"of a gas", "incubation-unknown", with(hyperbola, func(a *Analysis) { a.Ligand.Unit = "torr" }),
			forCompleteness, nil},
		{"of a signal", "incubation-unknown", with(hyperbola,
			func(a *Analysis) { a.Data[0].Response.Kind = "signal" }), sayInPaper, nil},
		{"at rest", "incubation-doubled", twice(hyperbola, hyperbola), foundGood,
			[]string{"After 2 h in place of 60 min"}},
		{"not at rest", "incubation-doubled",
			twice(func(x float64) float64 { return earlyShare(x, math.Ln2) }, hyperbola), settleFirst,
			[]string{"not at rest"}},

		{"time not stated", "initial-rates", with(hyperbola, velocity(math.NaN(), 1)), sayInPaper,
			[]string{"n_H 1.129"}},
		{"another unit", "initial-rates", with(hyperbola,
			func(a *Analysis) { velocity(60, 1)(a); a.Data[0].Response.Unit = "nkat/mg" }), sayInPaper,
			[]string{"nkat/mg"}},
		{"stated", "initial-rates", with(hyperbola, func(a *Analysis) {
			velocity(math.NaN(), 1)(a)
			a.Conditions = map[string]string{"initial rates": "under 5 %"}
		}), foundGood, nil},
		{"used up", "initial-rates", with(hyperbola, velocity(60, 0.01)), settleFirst,
			[]string{"not initial rates"}},
		{"hardly used", "initial-rates", with(hyperbola, velocity(6, 0.005)), foundGood,
			[]string{"n_H 1.00"}},
	})
}

// twice is one curve after one hour and after two.
func twice(short, long func(float64) float64) func(testing.TB) *Analysis {
	return func(t testing.TB) *Analysis {
		a, b := plain(short).study(t), plain(long).study(t)
		a.Data[0].Incubation = 3600
		b.Data[0].Name, b.Data[0].Incubation = "longer", 7200
		a.Data = append(a.Data, b.Data[0])
		return a
	}
}

// the curve and its ends

func TestObjectionsToTheCurve(t *testing.T) {
	free := func(a *Analysis) {
		a.Data[0].Response = Response{Kind: "signal", Low: Setting{Free: true}, High: Setting{Free: true}}
	}
	over := func(low, high float64, levels int, change func(*Analysis)) func(testing.TB) *Analysis {
		return func(t testing.TB) *Analysis {
			s := plain(hyperbola)
			s.low, s.high, s.levels = low, high, levels
			a := s.study(t)
			if change != nil {
				change(a)
			}
			return a
		}
	}
	bound := func(ns Setting, blocked bool) func(testing.TB) *Analysis {
		return func(t testing.TB) *Analysis {
			s := plain(func(x float64) float64 { return hyperbola(x) + 0.01*x })
			a := s.study(t)
			a.Data[0].Response = Response{Kind: "bound", High: Setting{Free: true}, Nonspecific: ns}
			for i := range a.Data[0].Points {
				if p := &a.Data[0].Points[i]; blocked && i%3 == 0 {
					p.Blocked, p.Y = true, 0.01*p.X
				}
			}
			return a
		}
	}
	adair := func(a *Analysis) {
		a.Candidates = append(a.Candidates, Candidate{Name: "steps", Family: "adair",
			Mechanism: build(t, "adair", four())})
	}
	check(t, []asks{
		{"not reached", "plateau", over(-2, 0.3, 10, free), settleFirst,
			[]string{"not reached", "measure up to 1"}},
		{"set, and not reached", "plateau", over(-2, 0.3, 10, nil), sayInPaper,
			[]string{"was set, not measured"}},
		{"reached", "plateau", over(-2, 2, 10, free), foundGood, []string{"99 %"}},
		{"unreadable", "unread-curves", over(-2, -1.9, 10, free), sayInPaper, []string{"cannot be asked"}},
		{"readable", "unread-curves", over(-2, 2, 10, free), foundGood, nil},
		{"a trace", "unread-curves", over(-2, 2, 10, func(a *Analysis) { a.Data[0].Trace = true }), forCompleteness,
			[]string{"followed in time"}},
		{"nothing kept", "unread-curves", over(-2, 2, 10, func(a *Analysis) {
			for i := range a.Data[0].Points {
				a.Data[0].Points[i].LeftOut = "why"
			}
		}), settleFirst, []string{"No point is kept"}},

		{"extrapolated", "baseline", over(-0.5, 2, 12, free), settleFirst,
			[]string{"extrapolation", "measure without ligand"}},
		{"set untested", "baseline", over(-0.5, 2, 12, nil), sayInPaper, []string{"no point below"}},
		{"fitted", "baseline", over(-2, 2, 12, free), foundGood, []string{"is fitted, with"}},
		{"set", "baseline", over(-2, 2, 12, nil), foundGood, []string{"to be judged by the fits"}},
		{"refuted without ligand", "baseline", over(-2, 2, 12, func(a *Analysis) {
			for range 3 {
				a.Data[0].Points = append(a.Data[0].Points, Point{X: 0, Y: 0.08})
			}
		}), settleFirst, []string{"response: {low: free}"}},

		{"without blocked tubes", "nonspecific", bound(Setting{Free: true}, false), sayInPaper,
			[]string{"tied to Bmax"}},
		{"set", "nonspecific", bound(Setting{Value: 0.01}, false), sayInPaper, []string{"was set to 0.01"}},
		{"blocked tubes", "nonspecific", bound(Setting{Free: true}, true), foundGood,
			[]string{"24 blocked tubes"}},

		{"set", "ends-set", over(-2, 2, 12, nil), sayInPaper, []string{"high 1 and low 0"}},
		{"fitted", "ends-set", over(-2, 2, 12, free), foundGood, nil},

		{"few", "concentrations", over(-2, 2, 6, nil), sayInPaper,
			[]string{"Only six ligand values", "8 is the usual least"}},
		{"a gap", "concentrations", over(-2, 2, 24, func(a *Analysis) {
			for i := range a.Data[0].Points {
				if p := &a.Data[0].Points[i]; p.X > 0.3 && p.X < 3 {
					p.LeftOut = "gap"
				}
			}
		}), sayInPaper, []string{"nothing was measured over 1.", "measure at"}},
		{"enough", "concentrations", over(-2, 2, 12, nil), foundGood, []string{"Twelve ligand values"}},
		{"ends untested", "adair-ends", over(-0.5, 0.5, 12, adair), forCompleteness,
			[]string{"1–5 % and at 95–99 %"}},
		{"ends tested", "adair-ends", over(-2, 2, 24, adair), foundGood, nil},

		{"Hill plot", "transformed-axes", with(func(x float64) float64 { return math.Log(x) }, nil),
			settleFirst, []string{"ordinate of a Hill plot"}},
		{"double reciprocal", "transformed-axes", with(func(x float64) float64 { return 1 + 1/x },
			func(a *Analysis) {
				a.Data[0].Response = Response{Kind: "velocity", High: Setting{Free: true}}
			}), settleFirst, []string{"a reciprocal", "weighted wrongly"}},
		{"bound over free", "transformed-axes", with(func(x float64) float64 { return 1 / (1 + x) },
			func(a *Analysis) {
				a.Data[0].Response = Response{Kind: "bound", High: Setting{Free: true}}
			}), settleFirst, []string{"divided by the ligand"}},
		{"by its unit", "transformed-axes", with(hyperbola,
			func(a *Analysis) { a.Data[0].Response.Unit = "log10 nM" }), settleFirst,
			[]string{"by its unit"}},
		{"as measured", "transformed-axes", with(hyperbola, nil), foundGood, nil},
		{"a falling signal", "transformed-axes", with(func(x float64) float64 { return 1 / (1 + x) }, free),
			foundGood, nil},

		{"some", "left-out", with(hyperbola, func(a *Analysis) { a.Data[0].Points[70].LeftOut = "bubble" }),
			sayInPaper, []string{"One of 72 points", "bubble", "by a Hill fit, n_H moves by"}},
		{"none", "left-out", with(hyperbola, nil), foundGood, nil},
		{"to the top", "normalised", with(hyperbola, func(a *Analysis) {
			for i := range a.Data[0].Points {
				a.Data[0].Points[i].Y = math.Min(1, a.Data[0].Points[i].Y/0.98)
			}
		}), sayInPaper, []string{"kind: signal"}},
		{"as measured", "normalised", with(hyperbola, nil), foundGood, nil},
	})
}

// scatter

func TestObjectionsToTheScatter(t *testing.T) {
	noisy := func(y func(float64) float64, sd func(x, y float64) float64,
		sx float64) func(testing.TB) *Analysis {
		return func(t testing.TB) *Analysis {
			s := plain(y)
			s.scatter = 0
			a := s.study(t)
			rng := rand.New(rand.NewPCG(11, 12))
			for i := range a.Data[0].Points {
				p := &a.Data[0].Points[i]
				v := y(p.X * math.Exp(sx*rng.NormFloat64()))
				p.Y = v + sd(p.X, v)*rng.NormFloat64()
			}
			return a
		}
	}
	even := func(_, _ float64) float64 { return 0.01 }
	rising := func(_, y float64) float64 { return 0.08 * y }
	given := func(sd func(rng *rand.Rand, y float64) float64) func(testing.TB) *Analysis {
		return with(hyperbola, func(a *Analysis) {
			rng := rand.New(rand.NewPCG(3, 3))
			a.Data[0].Noise = GivenSigma
			for i := range a.Data[0].Points {
				p := &a.Data[0].Points[i]
				p.Sigma = sd(rng, hyperbola(p.X))
			}
		})
	}
	and := func(f func(testing.TB) *Analysis, change func(*Analysis)) func(testing.TB) *Analysis {
		return func(t testing.TB) *Analysis {
			a := f(t)
			change(a)
			return a
		}
	}
	check(t, []asks{
		{"none", "replicates",
			func(t testing.TB) *Analysis { s := plain(hyperbola); s.replicates = 1; return s.study(t) },
			sayInPaper, []string{"cannot be asked"}},
		{"hardly any", "replicates", func(t testing.TB) *Analysis {
			s := plain(hyperbola)
			s.replicates, s.levels = 2, 6
			return s.study(t)
		}, forCompleteness, []string{"6 degrees of freedom"}},
		{"enough", "replicates", with(hyperbola, nil), foundGood, []string{"48 degrees of freedom"}},

		{"rises", "uneven-scatter", noisy(hyperbola, rising, 0), settleFirst,
			[]string{"noise: replicates", "by a Hill fit, n_H moves by"}},
		{"even", "uneven-scatter", noisy(hyperbola, even, 0), foundGood, nil},
		{"not in proportion", "uneven-scatter", and(noisy(hyperbola, even, 0),
			func(a *Analysis) { a.Data[0].Noise = Proportional }), settleFirst,
			[]string{"do not scatter in proportion"}},
		{"in proportion", "uneven-scatter", and(noisy(hyperbola, rising, 0),
			func(a *Analysis) { a.Data[0].Noise = Proportional }), foundGood, nil},
		{"modelled", "uneven-scatter", and(noisy(hyperbola, rising, 0),
			func(a *Analysis) { a.Data[0].Noise = Mixed }), foundGood, []string{"modelled"}},
		{"SDs of three", "uneven-scatter", given(func(rng *rand.Rand, _ float64) float64 {
			return 0.02 * math.Sqrt(chiSquare(rng, 2)/2)
		}), sayInPaper, []string{"few replicates"}},
		{"a smooth law", "uneven-scatter",
			given(func(_ *rand.Rand, y float64) float64 { return 0.01 + 0.05*y }), foundGood,
			[]string{"smoothly"}},

		{"of the ligand", "ligand-scatter", noisy(hillOf(3), even, 0.08), sayInPaper,
			[]string{"the ligand values themselves scatter, by about"}},
		{"of the response", "ligand-scatter", noisy(hillOf(3), even, 0), foundGood, nil},

		{"a recording", "correlated-points", recording(0.8), settleFirst,
			[]string{"too narrow by a factor", "thin the recording"}},
		{"independent", "correlated-points", recording(0), foundGood, []string{"not correlated"}},
		{"single points", "correlated-points", with(hyperbola, nil), foundGood,
			[]string{"single measurements"}},
	})
}

// recording is one site followed continuously, with an autoregressive error.
func recording(rho float64) func(testing.TB) *Analysis {
	return func(t testing.TB) *Analysis {
		s := plain(hyperbola)
		s.levels, s.replicates, s.names, s.scatter = 400, 1, []string{"A"}, 0
		a := s.study(t)
		rng := rand.New(rand.NewPCG(21, 4))
		e := 0.0
		for i := range a.Data[0].Points {
			e = rho*e + math.Sqrt(1-rho*rho)*rng.NormFloat64()
			a.Data[0].Points[i].Y += 0.01 * e
		}
		return a
	}
}

// preparations, points, conditions

func TestObjectionsToTheReport(t *testing.T) {
	named := func(names ...string) func(testing.TB) *Analysis {
		return func(t testing.TB) *Analysis {
			s := plain(hyperbola)
			s.names, s.replicates = names, max(1, len(names))
			return s.study(t)
		}
	}
	full := map[string]string{"macromolecule": "receptor", "organism": "crab", "tissue": "nerve",
		"preparation": "membranes", "purity": "crude", "temperature": "25 degC",
		"pressure": "1 atm", "pH": "7.4", "buffer": "saline", "method": "filtration",
		"receptor concentration": "1 nM"}
	check(t, []asks{
		{"none named", "preparations", named(), sayInPaper, []string{"No preparation is named"}},
		{"one", "preparations", named("A"), sayInPaper, []string{"technical"}},
		{"three", "preparations", named("A", "B", "C"), sayInPaper,
			[]string{"Three preparations; 5 is the usual least", "times that between points"}},
		{"five", "preparations", named("A", "B", "C", "D", "E"), foundGood, []string{"Five preparations"}},
		{"some unnamed", "preparations", with(hyperbola,
			func(a *Analysis) { a.Data[0].Points[3].Preparation = "" }), sayInPaper,
			[]string{"1 points name no preparation"}},
		{"alike", "pooling", named("A", "B", "C", "D", "E"), foundGood, nil},
		{"one curve unreadable", "pooling", func(t testing.TB) *Analysis {
			s := plain(hyperbola)
			s.levels, s.names = 2, []string{"A", "B", "C"}
			return s.study(t)
		}, forCompleteness, []string{"cannot be asked"}},

		{"too few", "few-points", func(t testing.TB) *Analysis {
			s := plain(hyperbola)
			s.levels, s.replicates = 4, 1
			return s.study(t)
		}, settleFirst, []string{"AICc does not exist"}},
		{"enough", "few-points", with(hyperbola, nil), foundGood, nil},

		{"nothing", "conditions", with(hyperbola, nil), forCompleteness, []string{"organism", "purity"}},
		{"everything", "conditions-stated", with(hyperbola, func(a *Analysis) { a.Conditions = full }),
			foundGood, []string{"organism", "concentration of the macromolecule"}},
		{"not stated", "temperature", with(hyperbola, func(a *Analysis) { a.Kelvin = math.NaN() }),
			sayInPaper, []string{"units of RT"}},
		{"of an enzyme", "conditions", with(hyperbola,
			func(a *Analysis) { a.Data[0].Response.Kind = "velocity" }), forCompleteness,
			[]string{"EC number", "reaction"}},
	})
	a := plain(hyperbola).study(t)
	a.Conditions = full
	if o := objected(a.Objections(context.Background()), "conditions"); o.ID != "" {
		t.Errorf("all is stated, yet: %s", o.Text)
	}
	if s := deref(objected(a.Objections(context.Background()),
		"conditions-stated").Source); !strings.Contains(s, "STRENDA-style, adapted") {
		t.Errorf("source %q", s)
	}
}

// what n_H may and may not mean

func TestObjectionsToTheSlope(t *testing.T) {
	kind := func(y func(float64) float64, kind string) func(testing.TB) *Analysis {
		return with(y, func(a *Analysis) {
			a.Data[0].Response = Response{Kind: kind, High: Setting{Free: true},
				Low: Setting{Free: kind == "signal"}}
		})
	}
	two := func(sites int) func(*Analysis) {
		return func(a *Analysis) {
			a.Candidates = append(a.Candidates, Candidate{Name: "two", Family: "adair",
				Mechanism: build(t, "adair", mechanisms.Definition{Sites: sites})})
		}
	}
	check(t, []asks{
		{"too steep", "n_H-above-sites", with(hillOf(2.6), two(2)), settleFirst,
			[]string{"not an equilibrium mechanism with two sites, or an artefact"}},
		{"within", "n_H-above-sites", with(hillOf(1.6), two(2)), foundGood,
			[]string{"does not exceed the number of sites (2)"}},
		{"no sites tried", "n_H-above-sites", with(hillOf(1.6),
			func(a *Analysis) { a.Candidates = a.Candidates[1:] }), forCompleteness,
			[]string{"not a count of sites"}},
		{"shallow", "shallow", with(hillOf(0.7), nil), sayInPaper,
			[]string{"neither two sites nor negative cooperativity", "MWC with one ligand is ruled out"}},
		{"shallow", "shallow-causes", with(hillOf(0.7), nil), sayInPaper,
			[]string{"degraded protein", "solubility"}},
		{"one site", "shallow", with(hyperbola, nil), foundGood, nil},
		{"little hidden", "hidden-classes", with(hyperbola, nil), foundGood,
			[]string{"-fold would look the same"}},
		{"much hidden", "hidden-classes", func(t testing.TB) *Analysis {
			s := plain(hyperbola)
			s.scatter, s.levels, s.seed = 0.1, 8, 6
			return s.study(t)
		}, sayInPaper, nil},
		{"steep velocities", "catalysis", kind(hillOf(1.4), "velocity"), sayInPaper,
			[]string{"h of 2 at most"}},
		{"plain velocities", "catalysis", kind(hyperbola, "velocity"), foundGood, nil},
		{"a signal", "response-as-occupancy", kind(hillOf(2), "signal"), sayInPaper,
			[]string{"empirical slope"}},
		{"binding", "response-as-occupancy", kind(hyperbola, "bound"), foundGood, nil},
		{"counted", "constants-counted", with(hyperbola, two(2)), foundGood, nil},
		{"more than the curve holds", "constants-counted", with(hyperbola, func(a *Analysis) {
			m := build(t, "mwc", mechanisms.Definition{Sites: 2, Differs: true})
			a.Candidates = append(a.Candidates, Candidate{Name: "concerted pair", Family: "mwc",
				Mechanism: m})
		}), settleFirst, []string{"has 3 constants for 1 curve(s) of two sites, which hold 2 at most"}},
	})
}

// Objections that need the fits.
func TestObjectionsToTheFits(t *testing.T) {
	concerted := func(l, c, scatter float64, change func(*Analysis)) func(testing.TB) *Analysis {
		return func(t testing.TB) *Analysis {
			s := plain(bindingOf(t, "mwc", four(), math.Log(l), math.Log(c), 0))
			s.scatter = scatter
			s.candidates = []Candidate{{Name: "concerted", Family: "mwc",
				Mechanism: build(t, "mwc", four())}}
			a := s.study(t)
			if change != nil {
				change(a)
			}
			return a
		}
	}
	shift := func(name string, by float64) func(*Analysis) {
		return func(a *Analysis) {
			for i := range a.Data[0].Points {
				if p := &a.Data[0].Points[i]; p.Preparation == name {
					p.X *= by
				}
			}
		}
	}
	precipitated := func(t testing.TB) *Analysis {
		s := plain(hyperbola)
		s.high, s.levels, s.response = 0.9, 8, Response{Kind: "signal", Low: Setting{Free: true},
			High: Setting{Free: true}}
		a := s.study(t)
		for i := range a.Data[0].Points {
			if p := &a.Data[0].Points[i]; p.X > 7 {
				p.Y -= 0.05
			}
		}
		return a
	}
	raised := with(func(x float64) float64 { return 0.06 + 0.94*hyperbola(x) }, nil)
	checkFits(t, []asks{
		{"wrong", "ends-set", raised, settleFirst, []string{"n_H moves by", "more than the intervals"}},
		{"right", "ends-set", with(hyperbola, nil), sayInPaper, []string{"less than the intervals"}},
		{"raised", "baseline", raised, settleFirst, []string{"lie off by"}},
		{"level", "baseline", with(hyperbola, nil), foundGood, []string{"agree with it"}},
		{"differ", "n_H-definition", concerted(1e5, 0.001, 0.01, nil), sayInPaper,
			[]string{"by a Hill fit of these points", "differ by up to"}},
		{"agree", "n_H-definition", with(hillOf(1.5), nil), foundGood, nil},
		{"none hangs", "without-a-preparation", concerted(1e3, 0.01, 0.01, nil), foundGood,
			[]string{"Most without preparation"}},
		{"one pulls", "without-a-preparation", concerted(1e3, 0.01, 0.01, shift("B", 3)), settleFirst,
			[]string{"Without preparation B"}},
		{"none named", "without-a-preparation", concerted(1e3, 0.01, 0.01, func(a *Analysis) {
			for i := range a.Data[0].Points {
				a.Data[0].Points[i].Preparation = ""
			}
		}), forCompleteness, []string{"cannot be asked"}},
		{"none hangs", "without-the-outermost", concerted(1e3, 0.01, 0.01, nil), foundGood, nil},
		{"the top falls", "without-the-outermost", precipitated, settleFirst,
			[]string{"Without the highest ligand value"}},
		{"tied", "tied-constants", concerted(1e3, 0.01, 0.01, nil), sayInPaper,
			[]string{"r = -0.99", "K_R·L^(1/4)"}},
		{"untied", "tied-constants", concerted(1e3, 0.01, 0.01, func(a *Analysis) {
			one := 1e3
			a.Candidates[0].Given = map[string]mechanisms.Given{"K_R": {Fixed: ptr(1)}, "L": {Start: &one}}
		}), foundGood, nil},
		{"not counted by the curve", "site-number", concerted(1e3, 0.01, 0.05, nil), sayInPaper,
			[]string{"take n from the structure", "does not count sites"}},
		{"counted", "site-number", concerted(1e3, 0.01, 0.0005, nil), foundGood, nil},
		{"profiles", "symmetric-intervals", concerted(1e3, 0.01, 0.01, nil), foundGood,
			[]string{"the most lopsided, of"}},
		{"symmetric", "symmetric-intervals", concerted(1e3, 0.01, 0.01,
			func(a *Analysis) { a.Settings.Method = "covariance" }), sayInPaper,
			[]string{"method: profile"}},
		{"open", "symmetric-intervals", concerted(1e6, 1e-6, 0.02, nil), sayInPaper,
			[]string{"not ended on both sides"}},
		{"interval of the end", "plateau", func(t testing.TB) *Analysis {
			s := plain(hyperbola)
			s.low, s.high, s.levels, s.scatter = -2, 0.3, 10, 0.02
			s.response = Response{Kind: "signal", Low: Setting{Free: true}, High: Setting{Free: true}}
			return s.study(t)
		}, settleFirst, []string{"extrapolation", "n_H of a Hill fit runs from"}},
	})
}
