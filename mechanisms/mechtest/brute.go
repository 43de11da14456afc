package mechtest

import (
	"fmt"
	"math"
	"math/big"

	"ligancy/mechanisms"
)

// microstate is one way in which one molecule can be: its ligands and its
// weight without xⁱ.
type microstate struct {
	of      string // conformation or listed state; "" where there is one
	ligands int
	weight  *big.Float
	sees    *big.Float // what a response sees of it
}

// world is constants, by key, and concentrations, by name.
type world struct {
	value     map[string]*big.Float
	effector  map[string]*big.Float
	protomers *big.Float
}

// under is the world of a part: keys without the name of the part.
func (w world) under(name string) world {
	inner := world{value: map[string]*big.Float{}, effector: w.effector, protomers: w.protomers}
	for key, v := range w.value {
		if len(key) > len(name) && key[:len(name)+1] == name+"." {
			inner.value[key[len(name)+1:]] = v
		}
	}
	return inner
}

// over is x/K for the constant of that key.
func (w world) over(x *big.Float, key string) *big.Float {
	k, ok := w.value[key]
	if !ok {
		panic("no constant " + key)
	}
	return quo(x, k)
}

// enumerate lists every microstate of a molecule, site by site, from the
// physical description alone.
func enumerate(family string, d mechanisms.Definition, w world) []microstate {
	switch family {
	case "adair":
		return adair(d, w)
	case "mwc":
		return concerted(d, w)
	case "sequential":
		return sequential(d, w)
	case "independent":
		return independent(d, w)
	case "conformations":
		return conformations(d, w)
	case "states":
		return states(d, w)
	}
	panic("no microstates for " + family)
}

// subsets calls f with every way of filling n sites.
func subsets(n int, f func(filled []bool, count int)) {
	filled := make([]bool, n)
	for m := range 1 << n {
		count := 0
		for i := range filled {
			filled[i] = m>>i&1 == 1
			if filled[i] {
				count++
			}
		}
		f(filled, count)
	}
}

func adair(d mechanisms.Definition, w world) (list []microstate) {
	n := d.Sites
	beta := []*big.Float{number(1)}
	for i := 1; i <= n; i++ {
		if b, ok := w.value[fmt.Sprintf("beta%d", i)]; ok {
			beta = append(beta, quo(b, binomial(n, i)))
			continue
		}
		beta = append(beta, w.over(beta[i-1], fmt.Sprintf("Kd%d", i)))
	}
	subsets(n, func(_ []bool, count int) {
		list = append(list, microstate{ligands: count, weight: beta[count]})
	})
	return list
}

func binomial(n, k int) *big.Float {
	return zero().SetInt(new(big.Int).Binomial(int64(n), int64(k)))
}

func independent(d mechanisms.Definition, w world) (list []microstate) {
	var site []*big.Float // 1/K of each site
	before := number(1)
	for _, c := range d.Classes {
		key := "Kd"
		if len(d.Classes) > 1 {
			key = c.Name + ".Kd"
		}
		k, ok := w.value[key]
		if !ok {
			k = mul(before, w.value[c.Name+".ratio"])
		}
		before = k
		for range c.Sites {
			site = append(site, quo(number(1), k))
		}
	}
	subsets(len(site), func(filled []bool, count int) {
		weight := number(1)
		for i, f := range filled {
			if f {
				weight = mul(weight, site[i])
			}
		}
		list = append(list, microstate{ligands: count, weight: weight})
	})
	return list
}

// touching says whether sites a < b of n are in contact.
func touching(layout string, a, b, n int) bool {
	switch layout {
	case "pair", "triangle", "tetrahedral":
		return true
	case "square", "ring":
		return b-a == 1 || b-a == n-1
	case "linear":
		return b-a == 1
	case "octahedral": // corner i stands opposite i + 3
		return b-a != 3
	case "prism": // two rings, one above the other
		m := n / 2
		if a < m && b >= m {
			return b-a == m
		}
		return b-a == 1 || b-a == m-1
	}
	panic("no layout " + layout)
}

func sequential(d mechanisms.Definition, w world) (list []microstate) {
	n := d.Sites
	if n == 0 {
		n = map[string]int{"pair": 2, "triangle": 3, "square": 4, "tetrahedral": 4, "octahedral": 6}[d.Contacts]
	}
	contact := func(a, b int) bool { return touching(d.Contacts, a, b, n) }
	if d.Contacts == "" {
		for _, e := range d.Graph {
			n = max(n, e[0], e[1])
		}
		contact = func(a, b int) bool {
			for _, e := range d.Graph {
				if min(e[0], e[1]) == a+1 && max(e[0], e[1]) == b+1 {
					return true
				}
			}
			return false
		}
	}
	subsets(n, func(filled []bool, count int) {
		weight := number(1)
		for a := range n {
			if filled[a] {
				weight = w.over(weight, "K")
			}
			for b := a + 1; b < n; b++ {
				if !contact(a, b) {
					continue
				}
				if filled[a] && filled[b] {
					weight = mul(weight, w.value["K_BB"])
				} else if ab, ok := w.value["K_AB"]; ok && filled[a] != filled[b] {
					weight = mul(weight, ab)
				}
			}
		}
		list = append(list, microstate{ligands: count, weight: weight})
	})
	return list
}

// choice is one thing that can be at a place of a molecule.
type choice struct {
	ligands int
	weight  *big.Float
}

// fill lists every way to choose one thing at each place.
func fill(start microstate, places [][]choice) []microstate {
	list := []microstate{start}
	for _, options := range places {
		var next []microstate
		for _, s := range list {
			for _, o := range options {
				next = append(next, microstate{of: s.of, ligands: s.ligands + o.ligands, weight: mul(s.weight, o.weight), sees: s.sees})
			}
		}
		list = next
	}
	return list
}

func concerted(d mechanisms.Definition, w world) (list []microstate) {
	classes := d.SiteClasses
	if len(classes) == 0 {
		classes = []mechanisms.Count{{Sites: d.Sites}}
	}
	n := 0
	for _, c := range classes {
		n += c.Sites
	}
	for _, conf := range []string{"R", "T"} {
		start := microstate{of: conf, weight: number(1)}
		if conf == "T" {
			start.weight = w.value["L"]
		}
		var places [][]choice
		for _, class := range classes {
			prefix := ""
			if class.Name != "" {
				prefix = class.Name + "."
			}
			site := []choice{{0, number(1)}}
			c, binds := w.value[prefix+"c"]
			k := w.over(number(1), prefix+"K_R")
			if conf == "R" {
				site = append(site, choice{1, k})
			} else if binds {
				site = append(site, choice{1, mul(k, c)})
			}
			for _, e := range d.Effectors {
				if e.AtLigandSite && (e.Binds == conf || e.Binds == "both") {
					site = append(site, choice{0, w.over(w.effector[e.Name], e.Name+".K_"+conf)})
				}
			}
			for range class.Sites {
				places = append(places, site)
			}
		}
		for _, e := range d.Effectors {
			if !e.AtLigandSite && (e.Binds == conf || e.Binds == "both") {
				y := w.over(w.effector[e.Name], e.Name+".K_"+conf)
				for range n {
					places = append(places, []choice{{0, number(1)}, {0, y}})
				}
			}
		}
		list = append(list, view(d, w, conf, n, fill(start, places))...)
	}
	return list
}

// view writes what a response sees of the microstates of a conformation.
func view(d mechanisms.Definition, w world, conf string, n int, list []microstate) []microstate {
	weights, word := d.Turnover, "turnover_"
	if len(weights) == 0 {
		weights, word = d.Sees, "signal_"
	}
	v := number(0)
	for _, o := range weights {
		if o.Name == conf && o.Free {
			v = w.value[word+conf]
		} else if o.Name == conf {
			v = number(o.Value)
		}
	}
	for i := range list {
		list[i].sees = v
		if len(d.Turnover) > 0 && n > 0 {
			list[i].sees = quo(mul(v, number(float64(list[i].ligands))), number(float64(n)))
		}
	}
	return list
}

func conformations(d mechanisms.Definition, w world) (list []microstate) {
	n := 0
	byName := map[string]mechanisms.Conformation{}
	for _, c := range d.Conformations {
		if o, ok := byName[c.Like]; ok {
			o.Name, o.Weight = c.Name, c.Weight
			c = o
		}
		byName[c.Name] = c
		if c.K != "" {
			n = max(n, c.Sites)
		}
	}
	for _, named := range d.Conformations {
		c := byName[named.Name]
		start := microstate{of: c.Name, weight: number(1)}
		if c.Weight != "" {
			start.weight = w.value[c.Weight]
		}
		site := []choice{{0, number(1)}}
		if c.K != "" {
			site = append(site, choice{1, w.over(number(1), c.K)})
		}
		var places [][]choice
		for name, symbol := range c.Ligands {
			y := choice{0, w.over(w.effector[name], name+"."+symbol)}
			if atLigandSite(d, name) {
				site = append(site, y)
				continue
			}
			count, ok := c.EffectorSites[name]
			if !ok {
				count = c.Sites
			}
			for range count {
				places = append(places, []choice{{0, number(1)}, y})
			}
		}
		for range c.Sites {
			places = append(places, site)
		}
		list = append(list, view(d, w, c.Name, n, fill(start, places))...)
	}
	return list
}

func atLigandSite(d mechanisms.Definition, name string) bool {
	for _, e := range d.Effectors {
		if e.Name == name {
			return e.AtLigandSite
		}
	}
	return false
}

// states takes the list as it stands; exponents are whole numbers here.
func states(d mechanisms.Definition, w world) (list []microstate) {
	for _, s := range d.States {
		weight := number(1)
		for name, e := range s.Constants {
			v, ok := w.value[name]
			for key, other := range w.value {
				if !ok && len(key) > len(name) && key[len(key)-len(name)-1:] == "."+name {
					v = other
				}
			}
			weight = mul(weight, power(v, int(math.Round(e))))
		}
		for name, m := range s.Effectors {
			weight = mul(weight, power(w.effector[name], m))
		}
		for range max(1, s.Ways) {
			one := view(mechanisms.Definition{Sees: append(d.Turnover, d.Sees...)}, sighted(d, w), s.Name, 0,
				[]microstate{{of: s.Name, ligands: s.Ligands, weight: weight}})
			list = append(list, one...)
		}
	}
	return list
}

// sighted gives turnovers of states the name of signals: a state's is its own.
func sighted(d mechanisms.Definition, w world) world {
	out := world{value: map[string]*big.Float{}, effector: w.effector}
	for key, v := range w.value {
		if len(d.Turnover) > 0 && len(key) > 9 && key[:9] == "turnover_" {
			key = "signal_" + key[9:]
		}
		out.value[key] = v
	}
	return out
}
