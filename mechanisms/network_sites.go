package mechanisms

import (
	"fmt"
	"slices"
	"strings"
)

// place is a state of conformers: a conformation and the ligands on each set of
// its sites.
type place struct {
	conformer int
	filled    []int // per set
}

func (p place) key() string { return fmt.Sprint(p.conformer, p.filled) }

func (p place) ligands() (n int) {
	for _, j := range p.filled {
		n += j
	}
	return n
}

// siteNetwork is the network of conformers: every conformation with every number
// of ligands on each of its sets of equal sites. Effectors are always at rest;
// where they compete for a site, only what they leave free is there to bind.
type siteNetwork struct {
	list    []conformer
	classes []string // name of each set
	sites   int
	places  []place
	at      map[string]int
	net     *Network
	sets    []int // of each step, −1 for an exchange
	tags    [][]int
}

// networkOfSites lays the network out.
func networkOfSites(list []conformer, classes []string, sites int, v *view) (*Network, error) {
	b := &siteNetwork{list: list, classes: classes, sites: sites, at: map[string]int{}, net: &Network{Blocks: []string{""}}}
	if err := b.listPlaces(); err != nil {
		return nil, err
	}
	for s := range b.places {
		b.bindings(s)
		b.exchanges(s)
	}
	b.net.weigh = b.weigh
	of := make([]int, len(b.places))
	for s, p := range b.places {
		of[s] = p.conformer
	}
	b.net.sightOf(v, of)
	b.tagSets()
	return b.net, nil
}

func (b *siteNetwork) listPlaces() error {
	n := 0
	for _, c := range b.list {
		ways := 1
		for _, s := range c.sets {
			if s.binds {
				ways *= s.sites + 1
			}
		}
		n += ways
	}
	if n > mostNetworkStates {
		return tooManyStates(n)
	}
	for c := range b.list {
		b.fillSets(place{c, make([]int, len(b.classes))}, 0)
	}
	return nil
}

func (b *siteNetwork) fillSets(p place, set int) {
	c := &b.list[p.conformer]
	if set == len(c.sets) {
		b.at[p.key()] = len(b.places)
		b.places = append(b.places, p)
		b.net.States = append(b.net.States, NetworkState{Name: b.name(p), Ligands: p.ligands(), Sites: b.sites})
		return
	}
	top := 0
	if c.sets[set].binds {
		top = c.sets[set].sites
	}
	for j := 0; j <= top; j++ {
		q := place{p.conformer, slices.Clone(p.filled)}
		q.filled[set] = j
		b.fillSets(q, set+1)
	}
}

func (b *siteNetwork) name(p place) string {
	conformer := b.list[p.conformer].name
	words := fmt.Sprintf("%d bound", p.ligands())
	if len(b.list[p.conformer].sets) > 1 {
		var parts []string
		for g := range b.list[p.conformer].sets {
			parts = append(parts, fmt.Sprintf("%d on %s", p.filled[g], b.classes[g]))
		}
		words = strings.Join(parts, ", ")
	}
	if conformer == "" {
		return words
	}
	return conformer + ", " + words
}

// bindings adds the steps that fill one more site of a state.
func (b *siteNetwork) bindings(s int) {
	p := b.places[s]
	for g, set := range b.list[p.conformer].sets {
		if !set.binds || p.filled[g] == set.sites {
			continue
		}
		q := place{p.conformer, slices.Clone(p.filled)}
		q.filled[g]++
		var labels []string
		for _, l := range []string{b.list[p.conformer].name, b.classes[g]} {
			if l != "" {
				labels = append(labels, l)
			}
		}
		b.net.Steps = append(b.net.Steps, NetworkStep{Kind: Binding, From: s, To: b.at[q.key()], Labels: labels, Effector: -1,
			Ligation: p.ligands(), Back: float64(q.filled[g])})
		b.sets = append(b.sets, g)
	}
}

// exchanges joins a state of the first conformation to those of the others.
func (b *siteNetwork) exchanges(s int) {
	p := b.places[s]
	if p.conformer != 0 {
		return
	}
	for c := 1; c < len(b.list); c++ {
		t, ok := b.at[place{c, p.filled}.key()]
		if !ok {
			continue
		}
		var labels []string
		if b.list[c].name != "" {
			labels = []string{b.list[c].name}
		}
		b.net.Steps = append(b.net.Steps, NetworkStep{Kind: Exchange, From: s, To: t, Labels: labels, Effector: -1,
			Ligation: p.ligands(), Back: 1})
		b.sets = append(b.sets, -1)
	}
}

// weigh writes the weights: those of conformers, ligation by ligation.
func (b *siteNetwork) weigh(w *Weights, theta []float64, env Environment) {
	crowding := func(c, g int, row []float64, factor float64) float64 {
		clear(w.scratch)
		lnA := crowd(b.list[c].sets[g].rivals, theta, env, w.scratch)
		for k, d := range w.scratch[:len(row)] {
			row[k] += factor * d
		}
		return factor * lnA
	}
	for s, p := range b.places {
		c, row := &b.list[p.conformer], w.A.RawRowView(s)
		lnW := c.weight.at(theta)
		c.weight.addTo(row, 1)
		for _, e := range c.effectors {
			lnW += float64(e.sites) * e.open(theta, env, row, float64(e.sites))
		}
		for g, set := range c.sets {
			j := p.filled[g]
			lnW += lnChoose[set.sites][j] + crowding(p.conformer, g, row, float64(set.sites-j))
			if j > 0 {
				lnW -= float64(j) * set.lnK.at(theta)
				set.lnK.addTo(row, -float64(j))
			}
		}
		w.LnW[s] = lnW
	}
	for e, g := range b.sets {
		if g < 0 {
			continue
		}
		p := b.places[b.net.Steps[e].From]
		w.LnWays[e] = lnWays(b.list[p.conformer].sets[g].sites-p.filled[g]) + crowding(p.conformer, g, w.AWays.RawRowView(e), -1)
	}
}

// tagSets follows one ligand on each set of sites of every state. Of the j
// ligands of a set, one leaves in j as the followed one.
func (b *siteNetwork) tagSets() {
	n := b.net
	for s, p := range b.places {
		own := make([]int, len(b.classes))
		for g, j := range p.filled {
			own[g] = -1
			if j > 0 {
				own[g] = len(n.Tags)
				n.Tags = append(n.Tags, Tag{State: s, Number: float64(j)})
			}
		}
		b.tags = append(b.tags, own)
	}
	for e, step := range n.Steps {
		from, to, set := b.tags[step.From], b.tags[step.To], b.sets[e]
		for g := range b.classes {
			if from[g] >= 0 {
				n.Moves = append(n.Moves, TagMove{Step: e, From: from[g], To: to[g], Factor: 1})
			}
			switch j := float64(b.places[step.To].filled[g]); {
			case to[g] < 0:
			case g != set:
				n.Moves = append(n.Moves, TagMove{Step: e, Down: true, From: to[g], To: from[g], Factor: 1})
			default:
				if j > 1 {
					n.Moves = append(n.Moves, TagMove{Step: e, Down: true, From: to[g], To: from[g], Factor: (j - 1) / j})
				}
				n.Moves = append(n.Moves, TagMove{Step: e, Down: true, From: to[g], To: -1, Factor: 1 / j})
				n.Gains = append(n.Gains, TagGain{Step: e, To: to[g], Factor: 1})
			}
		}
	}
}

// className is the class of sites that a site constant belongs to.
func className(constants []Constant, lnK blend) string {
	if len(lnK) == 0 {
		return ""
	}
	return constants[lnK[len(lnK)-1].index].Site
}

// setNames names the sets of conformers by the class of their constants.
func setNames(list []conformer, constants []Constant) []string {
	var names []string
	for _, c := range list {
		for g, s := range c.sets {
			if g == len(names) {
				names = append(names, "")
			}
			if names[g] == "" {
				names[g] = className(constants, s.lnK)
			}
		}
	}
	return names
}

// Network implements Networked.
func (m *mwc) Network() (*Network, error) {
	return networkOfSites(m.list, setNames(m.list, m.constants), m.sites, m.view)
}

// Network implements Networked.
func (m *conformational) Network() (*Network, error) {
	return networkOfSites(m.list, setNames(m.list, m.constants), m.sites, m.view)
}

// Network implements Networked.
func (m independent) Network() (*Network, error) {
	one := conformer{}
	names := make([]string, len(m.classes))
	for i, class := range m.classes {
		one.sets = append(one.sets, siteSet{sites: class.Sites, binds: true, lnK: m.lnK[i]})
		names[i] = class.Name
	}
	return networkOfSites([]conformer{one}, names, m.Sites(), nil)
}
