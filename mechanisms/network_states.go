package mechanisms

import (
	"fmt"
	"math"
)

// Network implements Networked. Listed states are joined by a step where one
// holds one ligand more and all else is the same; by an uptake where it holds one
// effector more; and by an exchange where both hold the same and only one of them
// is the first of its kind. Rates are those of the whole step, whatever `ways`.
func (m *stated) Network() (*Network, error) {
	net := &Network{Blocks: []string{""}}
	if len(m.states) > mostNetworkStates {
		return nil, tooManyStates(len(m.states))
	}
	tag := make([]int, len(m.states))
	for s, state := range m.states {
		net.States = append(net.States, NetworkState{Name: state.Name, Ligands: state.Ligands, Sites: m.sites})
		tag[s] = -1
		if state.Ligands > 0 {
			tag[s] = len(net.Tags)
			net.Tags = append(net.Tags, Tag{State: s, Number: float64(state.Ligands)})
		}
	}
	for s := range m.states {
		for t := range m.states {
			if step, ok := m.joined(s, t); ok {
				net.follow(step, tag)
				net.Steps = append(net.Steps, step)
			}
		}
	}
	of := make([]int, len(m.states))
	for s := range of {
		of[s] = s
	}
	net.sightOf(m.view, of)
	net.weigh = m.weigh
	return net, nil
}

// joined is the step from state s to state t, if there is one.
func (m *stated) joined(s, t int) (NetworkStep, bool) {
	a, b := m.states[s], m.states[t]
	step := NetworkStep{From: s, To: t, Labels: []string{b.Name}, Effector: -1, Ligation: a.Ligands, Back: 1}
	more, changed := -1, 0
	for j, e := range m.effectors {
		switch d := b.Effectors[e] - a.Effectors[e]; {
		case d == 1:
			more = j
			changed++
		case d != 0:
			return step, false
		}
	}
	switch gained := b.Ligands - a.Ligands; {
	case gained == 1 && changed == 0:
		step.Kind = Binding
		return step, true
	case gained == 0 && changed == 1:
		step.Kind, step.Effector = Uptake, more
		return step, true
	case gained == 0 && changed == 0 && s < t && m.firstLike(s):
		step.Kind = Exchange
		return step, true
	}
	return step, false
}

// firstLike says whether no state before s holds the same.
func (m *stated) firstLike(s int) bool {
	key := func(x State) string {
		k := fmt.Sprint(x.Ligands)
		for _, e := range m.effectors {
			k += fmt.Sprint(" ", x.Effectors[e])
		}
		return k
	}
	for t := range s {
		if key(m.states[t]) == key(m.states[s]) {
			return false
		}
	}
	return true
}

// follow adds what a step does to a ligand that is followed.
func (n *Network) follow(s NetworkStep, tag []int) {
	e, from, to := len(n.Steps), tag[s.From], tag[s.To]
	if from >= 0 {
		n.Moves = append(n.Moves, TagMove{Step: e, From: from, To: to, Factor: 1})
	}
	if to < 0 {
		return
	}
	if s.Kind != Binding {
		n.Moves = append(n.Moves, TagMove{Step: e, Down: true, From: to, To: from, Factor: 1})
		return
	}
	j := float64(n.States[s.To].Ligands)
	if j > 1 {
		n.Moves = append(n.Moves, TagMove{Step: e, Down: true, From: to, To: from, Factor: (j - 1) / j})
	}
	n.Moves = append(n.Moves, TagMove{Step: e, Down: true, From: to, To: -1, Factor: 1 / j})
	n.Gains = append(n.Gains, TagGain{Step: e, To: to, Factor: 1})
}

// weigh writes the weights of the listed states.
func (m *stated) weigh(w *Weights, theta []float64, env Environment) {
	for s, state := range m.states {
		row := w.A.RawRowView(s)
		copy(row, m.exponents(state, len(theta)))
		v := lnWays(state.Ways)
		for k, a := range row {
			if a != 0 {
				v += a * theta[k]
			}
		}
		for j, e := range m.effectors {
			if c := state.Effectors[e]; c != 0 {
				v += float64(c) * math.Log(env.Effectors[j])
			}
		}
		w.LnW[s] = v
	}
}
