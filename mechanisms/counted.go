package mechanisms

import (
	"slices"
	"sort"
)

// Counting is a Mechanism that can say how many of an effector its molecules
// hold: for displacement, where the varied ligand is unlabelled and what is seen
// is a labelled effector.
type Counting interface {
	Mechanism
	// Counted is the same mechanism, constants and effectors in the same order,
	// whose curves are Watched and see ⟨m⟩/n, the number bound of that effector
	// per site of the varied ligand. ok is false where it binds none.
	Counted(effector string) (m Mechanism, ok bool)
}

// counted is a mechanism as explicit states, of which the response counts one
// effector. With ln w_s log-linear in the constants and in every ln y, Ȳ and
// ⟨m⟩ have
//
//	∂⟨o⟩/∂ln y = −Σ_{k of y} d_k ∂⟨o⟩/∂ln(constant k) ,
//
// d_k its power of the effector's unit: weights know y only beside its constants.
type counted struct {
	Mechanism
	states []countedState // in order of ligation
	seen   int            // the effector that is counted
}

// countedState is one arrangement of ligands and effectors.
type countedState struct {
	ligands int
	lnWays  float64
	a       []float64 // exponents of the constants
	count   []int     // of each effector
}

// count makes the mechanism where effector is bound at all.
func count(m Mechanism, states []countedState, effector string) (Mechanism, bool) {
	j := slices.Index(m.Effectors(), effector)
	if j < 0 || !slices.ContainsFunc(states, func(s countedState) bool { return s.count[j] > 0 }) {
		return nil, false
	}
	sort.SliceStable(states, func(i, j int) bool { return states[i].ligands < states[j].ligands })
	return &counted{m, states, j}, true
}

// Counted implements Counting.
func (m *mwc) Counted(effector string) (Mechanism, bool) {
	return count(m, arrangements(m.list, len(m.constants), len(m.effectors)), effector)
}

// Counted implements Counting.
func (m *conformational) Counted(effector string) (Mechanism, bool) {
	return count(m, arrangements(m.list, len(m.constants), len(m.effectors)), effector)
}

// Counted implements Counting.
func (m *stated) Counted(effector string) (Mechanism, bool) {
	states := make([]countedState, len(m.states))
	for i, s := range m.states {
		states[i] = countedState{ligands: s.Ligands, lnWays: lnWays(s.Ways), a: m.exponents(s, len(m.constants)), count: make([]int, len(m.effectors))}
		for j, e := range m.effectors {
			states[i].count[j] = s.Effectors[e]
		}
	}
	return count(m, states, effector)
}

// arrangements lists every conformation with every number of ligands and
// effectors on its sites.
func arrangements(list []conformer, k, effectors int) []countedState {
	var all []countedState
	for _, c := range list {
		bare := countedState{a: make([]float64, k), count: make([]int, effectors)}
		c.weight.addTo(bare.a, 1)
		states := []countedState{bare}
		for _, e := range c.effectors {
			states = fill(states, e.sites, []filling{{effector: e.effector, lnK: e.lnK}})
		}
		for _, s := range c.sets {
			var by []filling
			if s.binds {
				by = append(by, filling{effector: -1, lnK: s.lnK})
			}
			for _, r := range s.rivals {
				by = append(by, filling{effector: r.effector, lnK: r.lnK})
			}
			states = fill(states, s.sites, by)
		}
		all = append(all, states...)
	}
	return all
}

// filling is what may sit on a site: the varied ligand (effector −1) or an effector.
type filling struct {
	effector int
	lnK      blend
}

// fill puts every number of each filling on n equal sites of every state, with
// the binomial number of ways: one filling after the other on what is left free.
func fill(states []countedState, n int, by []filling) []countedState {
	type partial struct {
		countedState
		free int
	}
	open := make([]partial, len(states))
	for i, s := range states {
		open[i] = partial{s, n}
	}
	for _, f := range by {
		var next []partial
		for _, p := range open {
			for j := 0; j <= p.free; j++ {
				q := partial{p.clone(), p.free - j}
				q.lnWays += lnChoose[p.free][j]
				f.lnK.addTo(q.a, -float64(j))
				if f.effector < 0 {
					q.ligands += j
				} else {
					q.count[f.effector] += j
				}
				next = append(next, q)
			}
		}
		open = next
	}
	out := make([]countedState, len(open))
	for i, p := range open {
		out[i] = p.countedState
	}
	return out
}

func (s countedState) clone() countedState {
	s.a, s.count = slices.Clone(s.a), slices.Clone(s.count)
	return s
}

// Curve is a workspace that watches the counted effector.
func (m *counted) Curve() Curve {
	k, n := len(m.Constants()), m.Sites()
	ligation, of := make([]int, len(m.states)), make([]int, len(m.states))
	v := &view{weight: make([]float64, len(m.states)), constant: make([]int, len(m.states))}
	for s, state := range m.states {
		ligation[s], of[s] = state.ligands, s
		v.weight[s], v.constant[s] = float64(state.count[m.seen])/float64(n), -1
	}
	l := &logLinear{ensemble: newEnsemble(ligation, k, true), lnG: make([]float64, len(m.states))}
	l.count = make([][]float64, len(m.Effectors()))
	for j := range l.count {
		l.count[j] = make([]float64, len(m.states))
	}
	for s, state := range m.states {
		l.lnG[s] = state.lnWays
		copy(l.row(s), state.a)
		for j, c := range state.count {
			l.count[j][s] = float64(c)
		}
	}
	return v.watch(newPolynomialCurve(n, k, l), &l.ensemble, of)
}
