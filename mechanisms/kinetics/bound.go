package kinetics

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/mechanisms"
)

// Bound is a model at given constants: a workspace for one goroutine.
//
// Gradients are by Θ = (θ, φ): the constants of the mechanism on their scales, then
// ln of the rates.
type Bound struct {
	m   *Model
	w   *mechanisms.Weights
	env mechanisms.Environment

	// Of each step, without the ligand: rates and ∂ln/∂Θ (E×P).
	up, down   []float64
	dUp, dDown *mat.Dense
	live       []bool // of each state
	o          []float64
	do         *mat.Dense // S×K
}

// Bound makes a workspace.
func (m *Model) Bound() *Bound {
	s, e := len(m.net.States), max(1, len(m.net.Steps))
	return &Bound{m: m, w: m.net.NewWeights(m.k), up: make([]float64, len(m.net.Steps)), down: make([]float64, len(m.net.Steps)),
		dUp: mat.NewDense(e, m.Size(), nil), dDown: mat.NewDense(e, m.Size(), nil), live: make([]bool, s),
		o: make([]float64, s), do: mat.NewDense(s, max(1, m.k), nil)}
}

// Model is the mechanism with its rates.
func (b *Bound) Model() *Model { return b.m }

// Bind settles the rates at θ, the constants of the mechanism, and φ, ln of the
// rates. It fails where a rate is not finite, or where a weight of zero cuts states
// off; the error names a state.
func (b *Bound) Bind(theta, phi []float64, env mechanisms.Environment) error {
	net := b.m.net
	b.env = env
	net.Weigh(b.w, theta, env)
	for s, l := range b.w.LnW {
		b.live[s] = !math.IsInf(l, -1)
		if math.IsNaN(l) || math.IsInf(l, 1) {
			return fmt.Errorf("the weight of state %q is not finite", net.States[s].Name)
		}
	}
	net.See(b.o, b.do, theta)
	for e := range net.Steps {
		if err := b.bindStep(e, phi); err != nil {
			return err
		}
	}
	if rest := net.Unreached(b.live, func(e int) bool { return b.up[e] > 0 && b.down[e] > 0 }); len(rest) > 0 {
		return fmt.Errorf("state %q is cut off at these constants: a state on the way to it has no weight, or a rate is zero",
			net.States[rest[0]].Name)
	}
	return nil
}

// bindStep writes the rates of one step and their derivatives.
func (b *Bound) bindStep(e int, phi []float64) error {
	net, k := b.m.net, b.m.k
	s := net.Steps[e]
	r := b.m.of[e]
	b.up[e], b.down[e] = 0, 0
	up, down := b.dUp.RawRowView(e), b.dDown.RawRowView(e)
	clear(up)
	clear(down)
	if r < 0 || !b.live[s.From] || !b.live[s.To] {
		return nil
	}
	lnY := 0.0
	if s.Effector >= 0 {
		lnY = math.Log(b.env.Effectors[s.Effector])
	}
	from, to := b.w.A.RawRowView(s.From), b.w.A.RawRowView(s.To)
	fall := b.w.LnW[s.From] - b.w.LnW[s.To]
	lnUp, lnDown := phi[r]+b.w.LnWays[e]+lnY, 0.0
	if b.m.back[e] {
		lnDown = phi[r] + math.Log(s.Back)
		lnUp = lnDown - fall
		for i := range k {
			up[i] = to[i] - from[i]
		}
	} else {
		lnDown = lnUp + fall
		ways := b.w.AWays.RawRowView(e)
		for i := range k {
			up[i] = ways[i]
			down[i] = ways[i] + from[i] - to[i]
		}
	}
	up[k+r], down[k+r] = 1, 1
	b.up[e], b.down[e] = math.Exp(lnUp), math.Exp(lnDown)
	for _, v := range []float64{b.up[e], b.down[e]} {
		if !(v > 0) || math.IsInf(v, 0) {
			return fmt.Errorf("the rate between the states %q and %q is %g", net.States[s.From].Name, net.States[s.To].Name, v)
		}
	}
	return nil
}

// AtRest writes the shares of the states at rest with the free ligand x and, where
// grad is not nil (S×(P+1)), their derivatives by Θ and, last, by ln x.
func (b *Bound) AtRest(dst []float64, grad *mat.Dense, x float64) []float64 {
	net := b.m.net
	if dst == nil {
		dst = make([]float64, len(net.States))
	}
	lnx := math.Log(x)
	top, sum := make([]float64, len(net.Blocks)), make([]float64, len(net.Blocks))
	for k := range top {
		top[k] = math.Inf(-1)
	}
	term := func(s int) float64 {
		if i := net.States[s].Ligands; i > 0 {
			return b.w.LnW[s] + float64(i)*lnx
		}
		return b.w.LnW[s]
	}
	for s := range dst {
		top[net.States[s].Block] = math.Max(top[net.States[s].Block], term(s))
	}
	for s := range dst {
		k := net.States[s].Block
		dst[s] = math.Exp(term(s) - top[k])
		sum[k] += dst[s]
	}
	for s := range dst {
		k := net.States[s].Block
		dst[s] *= b.w.Share[k] / sum[k]
	}
	if grad != nil {
		b.restGradient(grad, dst)
	}
	return dst
}

// restGradient writes ∂p_s/∂Θ = p_s (A_s − ⟨A⟩_b) + (∂f_b/∂Θ) p_s/f_b.
func (b *Bound) restGradient(grad *mat.Dense, p []float64) {
	net, k, all := b.m.net, b.m.k, b.m.Size()
	mean := mat.NewDense(len(net.Blocks), k+1, nil)
	for s, state := range net.States {
		if f := b.w.Share[state.Block]; p[s] > 0 && f > 0 {
			row := mean.RawRowView(state.Block)
			for i, a := range b.w.A.RawRowView(s)[:k] {
				row[i] += p[s] / f * a
			}
			row[k] += p[s] / f * float64(state.Ligands)
		}
	}
	for s, state := range net.States {
		row := grad.RawRowView(s)
		clear(row)
		f := b.w.Share[state.Block]
		if p[s] == 0 || f == 0 {
			continue
		}
		m := mean.RawRowView(state.Block)
		df := b.w.AShare.RawRowView(state.Block)
		for i, a := range b.w.A.RawRowView(s)[:k] {
			row[i] = p[s]*(a-m[i]) + p[s]/f*df[i]
		}
		row[all] = p[s] * (float64(state.Ligands) - m[k])
	}
}

// Saturation is Σ p_s i_s/n of given shares.
func (b *Bound) Saturation(p []float64) (y float64) {
	for s, state := range b.m.net.States {
		y += p[s] * float64(state.Ligands) / float64(state.Sites)
	}
	return y
}

// Seen is what the response sees of given shares, Σ o_s p_s.
func (b *Bound) Seen(p []float64) (o float64) {
	for s, v := range p {
		o += b.o[s] * v
	}
	return o
}

// carried is a step with what drives it: x for binding.
func (b *Bound) carried(e int, x float64) float64 {
	if b.m.net.Steps[e].Kind == mechanisms.Binding {
		return b.up[e] * x
	}
	return b.up[e]
}
