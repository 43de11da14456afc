package mechanisms

import (
	"fmt"
	"math/bits"
	"slices"
)

// graph is the contacts between sites 0 … n−1.
type graph struct {
	n     int
	edges [][2]int
}

// namedGraph is a layout of contacts with a name.
type namedGraph struct {
	sites int // 0 where the study says the number
	least int
	even  bool
	edges func(n int) [][2]int
}

var namedGraphs = map[string]namedGraph{
	"pair":        {sites: 2, edges: chain},
	"triangle":    {sites: 3, edges: ring},
	"square":      {sites: 4, edges: ring},
	"tetrahedral": {sites: 4, edges: complete},
	"octahedral":  {sites: 6, edges: octahedron},
	"linear":      {least: 2, edges: chain},
	"ring":        {least: 3, edges: ring},
	"prism":       {least: 6, even: true, edges: prism},
}

func chain(n int) (e [][2]int) {
	for i := 1; i < n; i++ {
		e = append(e, [2]int{i - 1, i})
	}
	return e
}

func ring(n int) [][2]int { return append(chain(n), [2]int{0, n - 1}) }

func complete(n int) (e [][2]int) {
	for i := range n {
		for j := i + 1; j < n; j++ {
			e = append(e, [2]int{i, j})
		}
	}
	return e
}

// octahedron leaves out the three pairs of opposite corners.
func octahedron(n int) [][2]int {
	return slices.DeleteFunc(complete(n), func(e [2]int) bool { return e[1]-e[0] == n/2 })
}

// prism is two rings of n/2 sites, one above the other.
func prism(n int) (e [][2]int) {
	m := n / 2
	for i := range m {
		next := (i + 1) % m
		e = append(e, [2]int{i, next}, [2]int{m + i, m + next}, [2]int{i, m + i})
	}
	return e
}

// contacts settles the graph of a definition.
func (p *problems) contacts(d Definition) graph {
	if d.Contacts != "" && len(d.Graph) > 0 {
		p.add("contacts", "contacts are given both by name and by list", "one of the two")
		return graph{}
	}
	if d.Contacts != "" {
		return p.named(d)
	}
	if len(d.Graph) == 0 {
		p.add("contacts", "the contacts between sites are missing", "contacts: square, or a list [[1, 2], [2, 3]]")
		return graph{}
	}
	n := d.Sites
	if n == 0 {
		for _, e := range d.Graph {
			n = max(n, e[0], e[1])
		}
	}
	if n < 2 || n > maxSites {
		p.add("contacts", fmt.Sprintf("contacts between %s cannot be", sitesInWords(n)), fmt.Sprintf("2 to %d sites", maxSites))
		return graph{}
	}
	return p.listed(d.Graph, n)
}

func (p *problems) named(d Definition) graph {
	g, ok := namedGraphs[d.Contacts]
	if !ok {
		p.add("contacts", fmt.Sprintf("%q is not a layout of contacts", d.Contacts),
			fmt.Sprintf("one of %v, or a list [[1, 2], [2, 3]]", sortedKeys(namedGraphs)))
		return graph{}
	}
	n := d.Sites
	switch {
	case g.sites != 0 && n == 0:
		n = g.sites
	case g.sites != 0 && n != g.sites:
		p.add("sites", fmt.Sprintf("%s contacts have %d sites, not %d", d.Contacts, g.sites, n), fmt.Sprintf("sites: %d", g.sites))
		return graph{}
	case g.sites == 0 && n == 0:
		p.add("sites", "the number of sites is missing: "+d.Contacts+" contacts leave it open", "sites: "+fmt.Sprint(max(4, g.least)))
		return graph{}
	case n < g.least || n > maxSites || g.even && n%2 == 1:
		kind := "a whole number"
		if g.even {
			kind = "an even number"
		}
		p.add("sites", fmt.Sprintf("%s contacts cannot have %s", d.Contacts, sitesInWords(n)),
			fmt.Sprintf("%s from %d to %d", kind, g.least, maxSites))
		return graph{}
	}
	return graph{n, g.edges(n)}
}

// listed checks contacts given one by one, sites counted from 1.
func (p *problems) listed(list [][2]int, n int) graph {
	g := graph{n: n}
	touched := make([]bool, n)
	seen := map[[2]int]bool{}
	for i, e := range list {
		key := fmt.Sprintf("contacts[%d]", i)
		a, b := min(e[0], e[1]), max(e[0], e[1])
		switch {
		case a < 1 || b > n:
			p.add(key, fmt.Sprintf("[%d, %d] names a site that is not there", e[0], e[1]), fmt.Sprintf("sites from 1 to %d", n))
		case a == b:
			p.add(key, fmt.Sprintf("site %d is in contact with itself", a), "two different sites")
		case seen[[2]int{a, b}]:
			p.add(key, fmt.Sprintf("the contact of %d and %d stands twice", a, b), "each contact once")
		default:
			g.edges = append(g.edges, [2]int{a - 1, b - 1})
			touched[a-1], touched[b-1] = true, true
		}
		seen[[2]int{a, b}] = true
	}
	for i, t := range touched {
		if !t {
			p.add("contacts", fmt.Sprintf("site %d has no contact", i+1), fmt.Sprintf("a contact [%d, …] for it", i+1))
		}
	}
	if !slices.Contains(touched, false) {
		if rest := g.beyond(); len(rest) > 0 {
			p.add("contacts", fmt.Sprintf("the sites fall into groups without a contact between them: %v cannot be reached from 1", rest),
				"a contact that joins the groups, or a mixture of two mechanisms")
		}
	}
	return g
}

// beyond is the sites, counted from 1, that no path joins to the first.
func (g graph) beyond() (rest []int) {
	reached := uint32(1)
	for before := uint32(0); before != reached; {
		before = reached
		for _, e := range g.edges {
			pair := uint32(1)<<e[0] | uint32(1)<<e[1]
			if reached&pair != 0 {
				reached |= pair
			}
		}
	}
	for i := range g.n {
		if reached>>i&1 == 0 {
			rest = append(rest, i+1)
		}
	}
	return rest
}

// regular says whether all sites have the same number of contacts.
func (g graph) regular() bool {
	degree := make([]int, g.n)
	for _, e := range g.edges {
		degree[e[0]]++
		degree[e[1]]++
	}
	return slices.Max(degree) == slices.Min(degree)
}

// arrangement is a group of configurations alike in filled sites and contacts.
type arrangement struct{ filled, ab, bb int }

// arrangements counts the configurations of the graph, each site being empty
// (A) or filled (B), grouped by filled sites and AB and BB contacts.
func (g graph) arrangements() ([]arrangement, []float64) {
	count := map[arrangement]float64{}
	for m := uint32(0); m < 1<<g.n; m++ {
		a := arrangement{filled: bits.OnesCount32(m)}
		for _, e := range g.edges {
			switch m>>e[0]&1 + m>>e[1]&1 {
			case 1:
				a.ab++
			case 2:
				a.bb++
			}
		}
		count[a]++
	}
	list := make([]arrangement, 0, len(count))
	for a := range count {
		list = append(list, a)
	}
	slices.SortFunc(list, func(a, b arrangement) int {
		if c := a.filled - b.filled; c != 0 {
			return c
		}
		if c := a.ab - b.ab; c != 0 {
			return c
		}
		return a.bb - b.bb
	})
	ways := make([]float64, len(list))
	for i, a := range list {
		ways[i] = count[a]
	}
	return list, ways
}
