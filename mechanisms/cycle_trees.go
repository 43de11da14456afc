package mechanisms

import (
	"errors"
	"fmt"
	"math"
	"slices"
)

// plant lists the spanning trees that lead to each state: from every other state one
// route out, so that all end at the root. Trees of the same root and rates are one.
func (m *cyclic) plant() error {
	if cut := m.cutOff(); cut >= 0 {
		return fmt.Errorf("the state %q is not joined to the others", m.states[cut])
	}
	g := &grove{m: m, at: map[string]int{}, next: make([]int, len(m.states))}
	for root := range m.states {
		g.root = root
		if !g.grow(0) {
			return fmt.Errorf("these steps lead around in more than %d ways", mostTrees)
		}
	}
	if len(g.trees) == 0 {
		return errors.New("no state can be reached from all others: there is no steady state")
	}
	slices.SortStableFunc(g.trees, func(a, b tree) int { return a.ligands - b.ligands })
	m.trees = g.trees
	return nil
}

// cutOff is a state that no route joins to the first; −1 where all are joined.
func (m *cyclic) cutOff() int {
	reached := make([]bool, len(m.states))
	reached[0] = true
	for range m.states {
		for _, r := range m.routes {
			if reached[r.from] || reached[r.to] {
				reached[r.from], reached[r.to] = true, true
			}
		}
	}
	return slices.Index(reached, false)
}

// grove is the trees as they are found.
type grove struct {
	m     *cyclic
	root  int
	next  []int // of each state below s: its route
	at    map[string]int
	trees []tree
	found int
	tried int
}

// grow chooses the route out of state s and of those after it; false where there are
// too many.
func (g *grove) grow(s int) bool {
	if s == len(g.m.states) {
		g.found++
		return g.found <= mostTrees && g.keep()
	}
	if s == g.root {
		return g.grow(s + 1)
	}
	for i, r := range g.m.routes {
		if r.from != s || g.closes(s, r.to) {
			continue
		}
		g.next[s] = i
		if g.tried++; g.tried > 50*mostTrees || !g.grow(s+1) {
			return false
		}
	}
	return true
}

// closes says whether the routes chosen so far lead from t back to s.
func (g *grove) closes(s, t int) bool {
	for t != g.root {
		if t == s {
			return true
		}
		if t > s {
			return false
		}
		t = g.m.routes[g.next[t]].to
	}
	return false
}

// keep adds the tree that is chosen.
func (g *grove) keep() bool {
	t := tree{root: g.root, rates: make([]int, len(g.m.constants)), effects: make([]int, len(g.m.effectors))}
	for s := range g.m.states {
		if s == g.root {
			continue
		}
		r := g.m.routes[g.next[s]]
		t.ligands += r.ligands
		t.rates[r.constant]++
		if r.effector >= 0 {
			t.effects[r.effector]++
		}
	}
	key := fmt.Sprint(t.root, t.rates)
	if i, ok := g.at[key]; ok {
		g.trees[i].lnCount = math.Log(math.Exp(g.trees[i].lnCount) + 1)
		return true
	}
	g.at[key] = len(g.trees)
	g.trees = append(g.trees, t)
	return true
}
