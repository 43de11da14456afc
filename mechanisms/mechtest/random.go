package mechtest

import (
	"fmt"

	"pgregory.net/rapid"

	"ligancy/mechanisms"
)

// Case is a family with a definition that it accepts.
type Case struct {
	Family     string
	Definition mechanisms.Definition
}

// Build settles the mechanism of a case that is known to be sound.
func (c Case) Build() mechanisms.Mechanism {
	f, ok := mechanisms.Lookup(c.Family)
	if !ok {
		panic("no family " + c.Family)
	}
	m, err := f.Build(c.Definition)
	if err != nil {
		panic(fmt.Sprintf("%s: %v", c.Family, err))
	}
	return m
}

// Cases generates random mechanisms of up to most sites, of every family with a
// binding polynomial.
func Cases(most int) *rapid.Generator[Case] {
	return rapid.OneOf(Molecules(most), rapid.Map(rapid.SliceOfN(Molecules(most), 2, 3), mixed), assembled(most))
}

// Molecules generates random mechanisms of one molecule.
func Molecules(most int) *rapid.Generator[Case] {
	return rapid.Custom(func(t *rapid.T) Case {
		n := rapid.IntRange(2, most).Draw(t, "sites")
		d := mechanisms.Definition{Differs: true}
		switch rapid.IntRange(0, 5).Draw(t, "family") {
		case 0:
			d.Sites, d.SiteScale = n, rapid.Bool().Draw(t, "site scale")
			return Case{"adair", d}
		case 1:
			d.Sites = n
			d.Effectors = effectors(t)
			d.Turnover, d.Sees = views(t, "R", "T")
			return Case{"mwc", d}
		case 2:
			a := rapid.IntRange(1, n-1).Draw(t, "alpha")
			d.SiteClasses = []mechanisms.Count{{Name: "alpha", Sites: a}, {Name: "beta", Sites: n - a}}
			d.Effectors = effectors(t)
			return Case{"mwc", d}
		case 3:
			d.Graph = contacts(t, n)
			return Case{"sequential", d}
		case 4:
			a := rapid.IntRange(1, n-1).Draw(t, "tight")
			d.Classes = []mechanisms.Count{{Name: "tight", Sites: a}, {Name: "loose", Sites: n - a}}
			return Case{"independent", d}
		}
		d.Conformations = []mechanisms.Conformation{{Name: "A", Sites: n, K: "K_A"}, {Name: "I", Sites: n - 1, K: "K_I", Weight: "L_I"},
			{Name: "held", Like: "A", Weight: "r"}, {Name: "idle", Weight: "q"}}
		d.Turnover, d.Sees = views(t, "A", "held")
		return Case{"conformations", d}
	})
}

func effectors(t *rapid.T) (list []mechanisms.Effector) {
	for i := range rapid.IntRange(0, 2).Draw(t, "effectors") {
		list = append(list, mechanisms.Effector{Name: fmt.Sprintf("e%d", i),
			Binds:        rapid.SampledFrom([]string{"R", "T", "both"}).Draw(t, "binds"),
			AtLigandSite: rapid.Bool().Draw(t, "at ligand site")})
	}
	return list
}

func views(t *rapid.T, a, b string) (turnover, sees []mechanisms.Weight) {
	w := []mechanisms.Weight{{Name: a, Value: 1}, {Name: b, Free: true}}
	switch rapid.IntRange(0, 2).Draw(t, "view") {
	case 1:
		return w, nil
	case 2:
		return nil, w
	}
	return nil, nil
}

// contacts draws a connected graph: a random tree and some edges more.
func contacts(t *rapid.T, n int) (list [][2]int) {
	seen := map[[2]int]bool{}
	join := func(a, b int) {
		e := [2]int{min(a, b), max(a, b)}
		if a != b && !seen[e] {
			seen[e] = true
			list = append(list, e)
		}
	}
	for i := 2; i <= n; i++ {
		join(i, rapid.IntRange(1, i-1).Draw(t, "parent"))
	}
	for range rapid.IntRange(0, n).Draw(t, "more") {
		join(rapid.IntRange(1, n).Draw(t, "a"), rapid.IntRange(1, n).Draw(t, "b"))
	}
	return list
}

// mixed makes a mixture of molecules.
func mixed(list []Case) Case {
	d := mechanisms.Definition{}
	for i, c := range list {
		c.Definition.Turnover, c.Definition.Sees = nil, nil
		own := c.Definition
		d.Parts = append(d.Parts, mechanisms.Part{Name: fmt.Sprintf("p%d", i), Family: c.Family, Definition: &own})
	}
	return Case{"mixture", d}
}

// assembled makes an assembly of small molecules into a large one.
func assembled(most int) *rapid.Generator[Case] {
	return rapid.Custom(func(t *rapid.T) Case {
		m := rapid.IntRange(2, max(2, most/2)).Draw(t, "small ones in a large one")
		n := rapid.IntRange(1, most/m).Draw(t, "sites of a small one")
		large := mechanisms.Definition{Sites: m * n, Differs: true}
		family := rapid.SampledFrom([]string{"adair", "mwc"}).Draw(t, "large")
		return Case{"assembly", mechanisms.Definition{
			Small: &mechanisms.Part{Sites: n},
			Large: &mechanisms.Part{Family: family, Definition: &large},
		}}
	})
}
