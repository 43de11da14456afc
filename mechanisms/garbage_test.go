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

var (
	anyName  = rapid.SampledFrom([]string{"", "A", "B", "R", "T", "K", "c", "L", "share", "tight", "a.b", "K_R", "Kd1", "·"})
	anyCount = rapid.SampledFrom([]int{-1, 0, 1, 2, 3, 4, 5, 17, 1 << 40})
	anyReal  = rapid.SampledFrom([]float64{0, 1, -1, 0.5, 2, 1e300, math.NaN(), math.Inf(1)})
)

func maybe(t *rapid.T, what string) bool { return rapid.IntRange(0, 3).Draw(t, what) == 0 }

func anyWeights(t *rapid.T) []mechanisms.Weight {
	return rapid.SliceOfN(rapid.Custom(func(t *rapid.T) mechanisms.Weight {
		return mechanisms.Weight{Name: anyName.Draw(t, "name"), Value: anyReal.Draw(t, "value"), Free: rapid.Bool().Draw(t, "free")}
	}), 1, 3).Draw(t, "weights")
}

func anyCounts(t *rapid.T) []mechanisms.Count {
	return rapid.SliceOfN(rapid.Custom(func(t *rapid.T) mechanisms.Count {
		return mechanisms.Count{Name: anyName.Draw(t, "name"), Sites: anyCount.Draw(t, "sites")}
	}), 1, 3).Draw(t, "counts")
}

func anyGiven(t *rapid.T) mechanisms.Given {
	var g mechanisms.Given
	for _, p := range []**float64{&g.Start, &g.Fixed, &g.Value, &g.Low, &g.High} {
		if maybe(t, "said") {
			v := anyReal.Draw(t, "number")
			*p = &v
		}
	}
	return g
}

func anyPart(depth int) *rapid.Generator[mechanisms.Part] {
	return rapid.Custom(func(t *rapid.T) mechanisms.Part {
		p := mechanisms.Part{Name: anyName.Draw(t, "part"), Sites: anyCount.Draw(t, "sites")}
		if maybe(t, "whole") {
			p.Family = rapid.SampledFrom([]string{"hill", "adair", "mwc", "independent", "mixture", "assembly", "none"}).Draw(t, "family")
		}
		if depth > 0 && maybe(t, "definition") {
			d := anyDefinition(depth-1).Draw(t, "definition")
			p.Definition = &d
		}
		return p
	})
}

func anyConformation(t *rapid.T) mechanisms.Conformation {
	c := mechanisms.Conformation{Name: anyName.Draw(t, "name"), Sites: anyCount.Draw(t, "sites"), K: anyName.Draw(t, "K"),
		Weight: anyName.Draw(t, "weight")}
	if maybe(t, "like") {
		c.Like = anyName.Draw(t, "like")
	}
	if maybe(t, "ligands") {
		c.Ligands = rapid.MapOfN(anyName, anyName, 0, 2).Draw(t, "ligands")
	}
	if maybe(t, "effector sites") {
		c.EffectorSites = rapid.MapOfN(anyName, anyCount, 0, 2).Draw(t, "effector sites")
	}
	return c
}

func anyState(t *rapid.T) mechanisms.State {
	s := mechanisms.State{Name: anyName.Draw(t, "name"), Ligands: anyCount.Draw(t, "ligands"), Ways: anyCount.Draw(t, "ways")}
	if maybe(t, "effectors") {
		s.Effectors = rapid.MapOfN(anyName, anyCount, 0, 2).Draw(t, "effectors")
	}
	s.Constants = rapid.MapOfN(anyName, anyReal, 0, 2).Draw(t, "constants")
	return s
}

// anyDefinition generates definitions that mean nothing, mostly.
func anyDefinition(depth int) *rapid.Generator[mechanisms.Definition] {
	return rapid.Custom(func(t *rapid.T) (d mechanisms.Definition) {
		d.Sites = anyCount.Draw(t, "sites")
		d.Differs, d.SiteScale = rapid.Bool().Draw(t, "differs"), rapid.Bool().Draw(t, "site scale")
		if maybe(t, "site classes") {
			d.SiteClasses = anyCounts(t)
		}
		if maybe(t, "classes") {
			d.Classes = anyCounts(t)
		}
		if maybe(t, "contacts") {
			d.Contacts = rapid.SampledFrom([]string{"square", "ring", "prism", "linear", "heap"}).Draw(t, "layout")
		}
		if maybe(t, "graph") {
			for range rapid.IntRange(0, 4).Draw(t, "edges") {
				d.Graph = append(d.Graph, [2]int{anyCount.Draw(t, "a"), anyCount.Draw(t, "b")})
			}
		}
		if maybe(t, "effectors") {
			d.Effectors = rapid.SliceOfN(rapid.Custom(func(t *rapid.T) mechanisms.Effector {
				return mechanisms.Effector{Name: anyName.Draw(t, "effector"), Binds: anyName.Draw(t, "binds"), AtLigandSite: rapid.Bool().Draw(t, "at")}
			}), 0, 2).Draw(t, "effectors")
		}
		if maybe(t, "turnover") {
			d.Turnover = anyWeights(t)
		}
		if maybe(t, "sees") {
			d.Sees = anyWeights(t)
		}
		if maybe(t, "constants") {
			d.Constants = rapid.MapOfN(anyName, rapid.Custom(anyGiven), 0, 3).Draw(t, "constants")
		}
		if maybe(t, "parts") {
			d.Parts = rapid.SliceOfN(anyPart(depth), 0, 3).Draw(t, "parts")
		}
		if maybe(t, "species") {
			small, large := anyPart(depth).Draw(t, "small"), anyPart(depth).Draw(t, "large")
			d.Small, d.Large = &small, &large
		}
		if maybe(t, "conformations") {
			d.Conformations = rapid.SliceOfN(rapid.Custom(anyConformation), 0, 3).Draw(t, "conformations")
		}
		if maybe(t, "states") {
			d.States = rapid.SliceOfN(rapid.Custom(anyState), 0, 4).Draw(t, "states")
		}
		return d
	})
}

// only keeps the keys that a family reads, so that more gets past its first look.
func only(d mechanisms.Definition, family string) mechanisms.Definition {
	keep := mechanisms.Definition{Differs: d.Differs, SiteScale: d.SiteScale, Constants: d.Constants}
	switch family {
	case "adair":
		keep.Sites = d.Sites
	case "mwc":
		keep.Sites, keep.SiteClasses, keep.Effectors, keep.Turnover, keep.Sees = d.Sites, d.SiteClasses, d.Effectors, d.Turnover, d.Sees
	case "sequential":
		keep.Sites, keep.Contacts, keep.Graph = d.Sites, d.Contacts, d.Graph
	case "independent":
		keep.Classes = d.Classes
	case "conformations":
		keep.Conformations, keep.Effectors, keep.Turnover, keep.Sees = d.Conformations, d.Effectors, d.Turnover, d.Sees
	case "states":
		keep.States, keep.Effectors, keep.Turnover, keep.Sees = d.States, d.Effectors, d.Turnover, d.Sees
	case "mixture":
		keep.Parts = d.Parts
	case "assembly":
		keep.Small, keep.Large = d.Small, d.Large
	}
	return keep
}

// No definition makes a family panic: it is refused with its faults, or what it
// gives can be evaluated.
func TestGarbage(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		d := anyDefinition(2).Draw(rt, "definition")
		for _, f := range mechanisms.Families() {
			for _, d := range []mechanisms.Definition{d, only(d, f.Name)} {
				m, err := f.Build(d)
				if (m == nil) == (err == nil) {
					rt.Fatalf("%s: mechanism %v, error %v", f.Name, m, err)
				}
				if err != nil {
					complaints(err)
					continue
				}
				evaluate(rt, m)
			}
		}
	})
}

func evaluate(t *rapid.T, m mechanisms.Mechanism) {
	rng := rand.New(rand.NewPCG(1, 1))
	theta, env := mechtest.Draw(rng, m), mechtest.DrawEnvironment(rng, m)
	c := m.Curve()
	c.Bind(theta, env)
	dst, grad := make([]float64, 3), mat.NewDense(3, max(1, len(theta)), nil)
	if len(theta) == 0 {
		grad = nil
	}
	c.Saturation(dst, []float64{-1, 0, 1}, grad)
	for _, f := range measures {
		f(c)
		if w, ok := c.(mechanisms.Watched); ok {
			f(w.Watch())
		}
	}
	for _, y := range dst {
		if !(y >= 0 && y <= 1+1e-15) {
			t.Errorf("%s: saturation %g", m.Family(), y)
		}
	}
}
