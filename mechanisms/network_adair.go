package mechanisms

// stepwise is a molecule whose sites are equal at each ligation: state i is all
// molecules with i ligands, n − i ways up and i + 1 down.
func stepwise(n int, b binder) *Network {
	net := &Network{Blocks: []string{""}}
	for i, name := range ligationNames(n) {
		net.States = append(net.States, NetworkState{Name: name, Ligands: i, Sites: n})
		if i == 0 {
			continue
		}
		e, tag, j := i-1, i-1, float64(i)
		net.Steps = append(net.Steps, NetworkStep{Kind: Binding, From: i - 1, To: i, Effector: -1, Ligation: i - 1, Back: j})
		net.Tags = append(net.Tags, Tag{State: i, Number: j})
		net.Gains = append(net.Gains, TagGain{Step: e, To: tag, Factor: 1})
		net.Moves = append(net.Moves, TagMove{Step: e, Down: true, From: tag, To: -1, Factor: 1 / j})
		if i > 1 {
			net.Moves = append(net.Moves, TagMove{Step: e, From: tag - 1, To: tag, Factor: 1},
				TagMove{Step: e, Down: true, From: tag, To: tag - 1, Factor: (j - 1) / j})
		}
	}
	net.weigh = func(w *Weights, theta []float64, env Environment) {
		c := newCoefficients(n, len(theta))
		b.bind(&c, theta, env)
		copy(w.LnW, c.lnB)
		for i := range net.States {
			copy(w.A.RawRowView(i), c.row(i))
		}
		for e := range net.Steps {
			w.LnWays[e] = lnWays(n - e)
		}
	}
	return net
}

// Network implements Networked.
func (m adair) Network() (*Network, error) { return stepwise(m.sites, m), nil }

// Network implements Networked.
func (m adairSites) Network() (*Network, error) { return stepwise(m.sites, m), nil }
