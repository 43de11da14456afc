package mechanisms

import (
	"fmt"

	"gonum.org/v1/gonum/mat"
)

// Networked is a Mechanism whose molecules pass between explicit states one
// step at a time: what rates need (package kinetics).
type Networked interface {
	Mechanism
	// Network lists states and steps, or says why there are none.
	Network() (*Network, error)
}

// mostNetworkStates bounds a network: one step of its exact solution costs the
// cube of their number.
const mostNetworkStates = 512

// Network is the states of a mechanism and the steps that join them. It is
// immutable and safe for concurrent use.
//
// States of one block can pass into each other; those of different blocks are
// different molecules. At rest, state s of block b holds the share
//
//	p_s = f_b w_s x^(i_s) / Σ_{t∈b} w_t x^(i_t)
//
// of all sites, with f_b the block's share of them.
type Network struct {
	States []NetworkState
	Steps  []NetworkStep
	Blocks []string // names of the parts of a mixture; one "" else

	// Tags follow one ligand among many, for what of the bound is labelled.
	Tags  []Tag
	Moves []TagMove
	Gains []TagGain

	weigh func(w *Weights, theta []float64, env Environment)
	see   func(o []float64, do *mat.Dense, theta []float64) // nil: i_s/n
}

// NetworkState is one state, or a group that the symmetry of the molecule
// makes one.
type NetworkState struct {
	Name    string
	Ligands int // i_s
	Sites   int // n of its molecule
	Block   int
}

// StepKind says what happens in a step.
type StepKind uint8

const (
	Binding  StepKind = iota // the varied ligand binds
	Exchange                 // the conformation changes
	Uptake                   // an effector binds
)

// NetworkStep joins two states. From From to To a molecule goes with the
// site-level rate constant k times Ways (times the ligand, or the effector), and
// back with k times Ways times w_From/w_To, so that the balance is detailed.
type NetworkStep struct {
	Kind     StepKind
	From, To int
	Labels   []string // part, conformation, class of sites: whose rate it may be
	Effector int      // of an Uptake; −1
	Ligation int      // ligands bound before: place in a list of rates by ligation
	Back     float64  // number of ways back: k_off times it is the rate back
}

// Tag is one ligand, followed, in a molecule of State: on one class of sites.
// A state holds Number of them.
type Tag struct {
	State  int
	Number float64
}

// TagMove carries a tagged ligand along with its molecule, at the rate of the
// step, up or down, times Factor. To is −1 where the tagged ligand itself leaves.
type TagMove struct {
	Step     int
	Down     bool
	From, To int // tags
	Factor   float64
}

// TagGain is a tagged ligand that binds: Factor of the molecules that take the
// step up.
type TagGain struct {
	Step, To int
	Factor   float64
}

// Weights is a network at given constants: a workspace for Network.Weigh.
type Weights struct {
	LnW     []float64  // S: ln w_s, effectors contained; −Inf for a state that cannot be
	A       *mat.Dense // S×K: ∂ln w_s/∂θ
	LnWays  []float64  // E: ln of the ways forward
	AWays   *mat.Dense // E×K
	Share   []float64  // B: f_b
	AShare  *mat.Dense // B×K: ∂f_b/∂θ
	scratch []float64
}

// NewWeights makes room for a network with k constants.
func (n *Network) NewWeights(k int) *Weights {
	k = max(k, 1)
	return &Weights{
		LnW: make([]float64, len(n.States)), A: mat.NewDense(len(n.States), k, nil),
		LnWays: make([]float64, len(n.Steps)), AWays: mat.NewDense(max(1, len(n.Steps)), k, nil),
		Share: make([]float64, len(n.Blocks)), AShare: mat.NewDense(len(n.Blocks), k, nil),
		scratch: make([]float64, k),
	}
}

// Weigh settles the weights at θ.
func (n *Network) Weigh(w *Weights, theta []float64, env Environment) {
	w.A.Zero()
	w.AWays.Zero()
	w.AShare.Zero()
	clear(w.LnWays)
	for b := range w.Share {
		w.Share[b] = 1
	}
	n.weigh(w, theta, env)
}

// See writes what the response sees of each state, and its derivatives (S×K)
// where do is not nil: i_s/n, or what `turnover` and `sees` say.
func (n *Network) See(o []float64, do *mat.Dense, theta []float64) {
	if do != nil {
		do.Zero()
	}
	if n.see != nil {
		n.see(o, do, theta)
		return
	}
	for s, state := range n.States {
		o[s] = float64(state.Ligands) / float64(state.Sites)
	}
}

// NetworkOf is the network of a mechanism, or says why it has none.
func NetworkOf(m Mechanism) (*Network, error) {
	if n, ok := m.(Networked); ok {
		return n.Network()
	}
	return nil, fmt.Errorf("%s has no states that pass into each other one step at a time: it has no kinetics", m.Family())
}

func tooManyStates(n int) error {
	return fmt.Errorf("%d states are more than the %d that kinetics is solved for: fewer sites or classes", n, mostNetworkStates)
}

// sightOf is what a view sees of every state, of[s] being its conformation.
func (n *Network) sightOf(v *view, of []int) {
	if v == nil {
		return
	}
	states := n.States
	n.see = func(o []float64, do *mat.Dense, theta []float64) {
		for s, c := range of {
			unit := 1.0
			if v.turnover {
				unit = float64(states[s].Ligands) / float64(states[s].Sites)
			}
			weight := v.weight[c]
			if k := v.constant[c]; k >= 0 {
				weight = theta[k]
				if do != nil {
					do.Set(s, k, unit)
				}
			}
			o[s] = weight * unit
		}
	}
}

// Unreached lists the states that steps which carry do not join to the first live
// state of their block. live may be nil: all are.
func (n *Network) Unreached(live []bool, carries func(step int) bool) []int {
	reached := make([]bool, len(n.States))
	begun := make([]bool, len(n.Blocks))
	for s, state := range n.States {
		if (live == nil || live[s]) && !begun[state.Block] {
			begun[state.Block], reached[s] = true, true
		}
	}
	for more := true; more; {
		more = false
		for e, step := range n.Steps {
			if reached[step.From] != reached[step.To] && carries(e) {
				reached[step.From], reached[step.To], more = true, true, true
			}
		}
	}
	var rest []int
	for s := range n.States {
		if !reached[s] && (live == nil || live[s]) {
			rest = append(rest, s)
		}
	}
	return rest
}

// SeesBinding says whether the response sees what is bound, not the states.
func (n *Network) SeesBinding() bool { return n.see == nil }
