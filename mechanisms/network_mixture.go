package mechanisms

import "fmt"

// Network implements Networked: the networks of the parts side by side.
func (m *mixture) Network() (*Network, error) {
	whole := &Network{}
	var nets []*Network
	for i, s := range m.parts {
		n, err := NetworkOf(s.mechanism)
		if err != nil {
			return nil, fmt.Errorf("part %s: %w", s.name, err)
		}
		nets = append(nets, n)
		whole.append(n, s.name, i, s.effects)
	}
	if len(whole.States) > mostNetworkStates {
		return nil, tooManyStates(len(whole.States))
	}
	whole.weigh = func(w *Weights, theta []float64, env Environment) { m.weighParts(nets, w, theta, env) }
	return whole, nil
}

// append adds the network of one part.
func (n *Network) append(p *Network, name string, block int, effectors []int) {
	state, step, tag := len(n.States), len(n.Steps), len(n.Tags)
	n.Blocks = append(n.Blocks, name)
	for _, s := range p.States {
		s.Name, s.Block = name+": "+s.Name, block
		n.States = append(n.States, s)
	}
	for _, e := range p.Steps {
		e.From, e.To = e.From+state, e.To+state
		e.Labels = append([]string{name}, e.Labels...)
		if e.Effector >= 0 {
			e.Effector = effectors[e.Effector]
		}
		n.Steps = append(n.Steps, e)
	}
	for _, t := range p.Tags {
		n.Tags = append(n.Tags, Tag{t.State + state, t.Number})
	}
	for _, v := range p.Moves {
		v.Step, v.From = v.Step+step, v.From+tag
		if v.To >= 0 {
			v.To += tag
		}
		n.Moves = append(n.Moves, v)
	}
	for _, g := range p.Gains {
		n.Gains = append(n.Gains, TagGain{g.Step + step, g.To + tag, g.Factor})
	}
}

// weighParts writes the weights of every part, and the shares.
func (m *mixture) weighParts(nets []*Network, w *Weights, theta []float64, env Environment) {
	state, step := 0, 0
	for i, s := range m.parts {
		n, own := nets[i], nets[i].NewWeights(len(s.local))
		local := make([]float64, len(s.local))
		for j, b := range s.local {
			local[j] = b.at(theta)
		}
		inner := Environment{Effectors: make([]float64, len(s.effects)), Protomers: env.Protomers}
		for j, e := range s.effects {
			inner.Effectors[j] = env.Effectors[e]
		}
		n.Weigh(own, local, inner)
		spread := func(row, g []float64) {
			for j, b := range s.local {
				b.addTo(row, g[j])
			}
		}
		for t := range n.States {
			w.LnW[state+t] = own.LnW[t]
			spread(w.A.RawRowView(state+t), own.A.RawRowView(t))
		}
		for e := range n.Steps {
			w.LnWays[step+e] = own.LnWays[e]
			spread(w.AWays.RawRowView(step+e), own.AWays.RawRowView(e))
		}
		state, step = state+len(n.States), step+len(n.Steps)
	}
	q := len(theta) - m.shares
	df := make([]float64, len(m.parts)*q)
	m.portions(w.Share, df, theta)
	for b := range m.parts {
		copy(w.AShare.RawRowView(b)[m.shares:], df[b*q:(b+1)*q])
	}
}
