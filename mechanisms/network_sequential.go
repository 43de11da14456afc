package mechanisms

import (
	"fmt"
	"iter"
	"math"
	"math/bits"
	"slices"
)

// mostPattern is the number of sites up to which the 2ⁿ patterns of filled sites
// are grouped.
const mostPattern = 10

// patterns groups the 2ⁿ ways of filling the sites of a graph so that every way
// of a group has the same number of steps into each other group: the groups then
// are states, exactly (lumpability: Kemeny & Snell 1960, Finite Markov Chains).
type patterns struct {
	n       int
	first   []arrangement // of each pattern
	group   []int         // of each pattern
	members [][]uint32    // of each group
}

// Network implements Networked.
func (m *sequential) Network() (*Network, error) {
	if m.sites > mostPattern {
		return nil, fmt.Errorf("the kinetics of %d sites in contact has too many patterns of filled sites: at most %d sites", m.sites, mostPattern)
	}
	p := m.contacts.patterns(len(m.constants) > 2)
	if len(p.members) > mostNetworkStates {
		return nil, tooManyStates(len(p.members))
	}
	net := &Network{Blocks: []string{""}}
	count := map[int]int{}
	for _, ways := range p.members {
		i := bits.OnesCount32(ways[0])
		count[i]++
		net.States = append(net.States, NetworkState{Name: fmt.Sprintf("%d bound", i), Ligands: i, Sites: m.sites})
	}
	named := map[int]int{}
	for g := range net.States {
		if i := net.States[g].Ligands; count[i] > 1 {
			named[i]++
			net.States[g].Name += fmt.Sprintf(", pattern %d %s", named[i], siteList(p.members[g][0], m.sites))
		}
	}
	lnWaysUp := p.steps(net)
	p.tags(net)
	net.weigh = func(w *Weights, theta []float64, _ Environment) {
		for g, ways := range p.members {
			a := p.first[ways[0]]
			row := w.A.RawRowView(g)
			row[0], row[1] = -float64(a.filled), float64(a.bb)
			if len(theta) > 2 {
				row[2] = float64(a.ab)
			}
			w.LnW[g] = math.Log(float64(len(ways)))
			for k, t := range theta {
				w.LnW[g] += row[k] * t
			}
		}
		copy(w.LnWays, lnWaysUp)
	}
	return net, nil
}

// siteList writes which sites are filled, counted from 1.
func siteList(m uint32, n int) string {
	var list []int
	for i := range n {
		if m>>i&1 == 1 {
			list = append(list, i+1)
		}
	}
	return fmt.Sprint(list)
}

// patterns groups the ways of filling the graph; with contacts of an empty and a
// filled site told apart or not.
func (g graph) patterns(withAB bool) *patterns {
	p := &patterns{n: g.n, first: make([]arrangement, 1<<g.n), group: make([]int, 1<<g.n)}
	key := make([]string, 1<<g.n)
	for m := range key {
		a := g.arranged(uint32(m))
		if !withAB {
			a.ab = 0
		}
		p.first[m] = a
		key[m] = fmt.Sprint(a)
	}
	groups := p.regroup(key)
	for {
		for m := range key {
			key[m] = p.signature(uint32(m))
		}
		next := p.regroup(key)
		if next == groups {
			return p
		}
		groups = next
	}
}

// arranged counts what one pattern holds.
func (g graph) arranged(m uint32) arrangement {
	a := arrangement{filled: bits.OnesCount32(m)}
	for _, e := range g.edges {
		switch m>>e[0]&1 + m>>e[1]&1 {
		case 1:
			a.ab++
		case 2:
			a.bb++
		}
	}
	return a
}

// signature is the group of a pattern and of all its neighbours.
func (p *patterns) signature(m uint32) string {
	near := make([]int, p.n)
	for i := range near {
		near[i] = p.group[m^1<<i]
	}
	slices.Sort(near)
	return fmt.Sprint(p.group[m], near)
}

// regroup makes one group of each key, in order of ligation, and counts them.
func (p *patterns) regroup(key []string) int {
	order := make([]uint32, len(key))
	for m := range order {
		order[m] = uint32(m)
	}
	slices.SortStableFunc(order, func(a, b uint32) int { return bits.OnesCount32(a) - bits.OnesCount32(b) })
	at := map[string]int{}
	p.members = p.members[:0]
	for _, m := range order {
		g, ok := at[key[m]]
		if !ok {
			g = len(p.members)
			at[key[m]] = g
			p.members = append(p.members, nil)
		}
		p.members[g] = append(p.members[g], m)
	}
	for g, ways := range p.members {
		for _, m := range ways {
			p.group[m] = g
		}
	}
	return len(p.members)
}

// steps adds the steps of one more filled site, and returns ln of their ways up.
func (p *patterns) steps(net *Network) (lnUp []float64) {
	for g, ways := range p.members {
		up := map[int]int{}
		for i := range p.n {
			if ways[0]>>i&1 == 0 {
				up[p.group[ways[0]|1<<i]]++
			}
		}
		for _, t := range sortedInts(up) {
			back := 0
			m := p.members[t][0]
			for i := range p.n {
				if m>>i&1 == 1 && p.group[m&^(1<<i)] == g {
					back++
				}
			}
			net.Steps = append(net.Steps, NetworkStep{Kind: Binding, From: g, To: t, Effector: -1,
				Ligation: net.States[g].Ligands, Back: float64(back)})
			lnUp = append(lnUp, math.Log(float64(up[t])))
		}
	}
	return lnUp
}

func sortedInts(m map[int]int) []int {
	var list []int
	for k := range m {
		list = append(list, k)
	}
	slices.Sort(list)
	return list
}

// marked is a pattern with one of its filled sites followed.
type marked struct {
	pattern uint32
	site    int
}

// tags follows one filled site of every pattern, grouped as the patterns are.
func (p *patterns) tags(net *Network) {
	var all []marked
	for _, ways := range p.members {
		for _, m := range ways {
			for i := range p.n {
				if m>>i&1 == 1 {
					all = append(all, marked{m, i})
				}
			}
		}
	}
	group, groups := map[marked]int{}, 0
	regroup := func(key func(marked) string) int {
		at, next := map[string]int{}, map[marked]int{}
		for _, q := range all {
			k := key(q)
			if _, ok := at[k]; !ok {
				at[k] = len(at)
			}
			next[q] = at[k]
		}
		group = next
		return len(at)
	}
	groups = regroup(func(q marked) string { return fmt.Sprint(p.group[q.pattern], p.group[q.pattern&^(1<<q.site)]) })
	for {
		next := regroup(func(q marked) string {
			var near []int
			for i := range p.n {
				if i != q.site {
					near = append(near, group[marked{q.pattern ^ 1<<i, q.site}])
				}
			}
			slices.Sort(near)
			return fmt.Sprint(group[q], p.group[q.pattern&^(1<<q.site)], near)
		})
		if next == groups {
			break
		}
		groups = next
	}
	p.followed(net, all, group, groups)
}

// followed writes tags, moves and gains from one member of each group.
func (p *patterns) followed(net *Network, all []marked, group map[marked]int, groups int) {
	one, size := make([]marked, groups), make([]int, groups)
	for _, q := range slices.Backward(all) {
		one[group[q]] = q
		size[group[q]]++
	}
	for t, q := range one {
		own := p.group[q.pattern]
		net.Tags = append(net.Tags, Tag{State: own, Number: float64(size[t]) / float64(len(p.members[own]))})
	}
	at, up := p.stepsByEnds(net)
	for t, q := range one {
		p.moves(net, t, q, group, at, up)
	}
	for e, s := range net.Steps {
		into := map[int]int{}
		for m, i := range p.fillings(s) {
			into[group[marked{m, i}]]++
		}
		for _, t := range sortedInts(into) {
			net.Gains = append(net.Gains, TagGain{Step: e, To: t, Factor: float64(into[t]) / up[e]})
		}
	}
}

// fillings are the ways of a step from one pattern: the pattern after, and the site
// that fills.
func (p *patterns) fillings(s NetworkStep) iter.Seq2[uint32, int] {
	m := p.members[s.From][0]
	return func(yield func(uint32, int) bool) {
		for i := range p.n {
			if m>>i&1 == 0 && p.group[m|1<<i] == s.To && !yield(m|1<<i, i) {
				return
			}
		}
	}
}

// stepsByEnds finds a step by its states, and counts its ways up.
func (p *patterns) stepsByEnds(net *Network) (at map[[2]int]int, up []float64) {
	at, up = map[[2]int]int{}, make([]float64, len(net.Steps))
	for e, s := range net.Steps {
		at[[2]int{s.From, s.To}] = e
		for range p.fillings(s) {
			up[e]++
		}
	}
	return at, up
}

// moves adds what happens to a followed ligand: its own leaving, and the filling and
// emptying of the other sites.
func (p *patterns) moves(net *Network, t int, q marked, group map[marked]int, at map[[2]int]int, up []float64) {
	own := p.group[q.pattern]
	for i := range p.n {
		r := marked{q.pattern ^ 1<<i, q.site}
		other := p.group[r.pattern]
		if q.pattern>>i&1 == 0 {
			e := at[[2]int{own, other}]
			net.Moves = append(net.Moves, TagMove{Step: e, From: t, To: group[r], Factor: 1 / up[e]})
			continue
		}
		e, to := at[[2]int{other, own}], -1
		if i != q.site {
			to = group[r]
		}
		net.Moves = append(net.Moves, TagMove{Step: e, Down: true, From: t, To: to, Factor: 1 / net.Steps[e].Back})
	}
}
