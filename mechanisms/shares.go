package mechanisms

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// takeShares lays out the constants of the shares, or takes the shares that are
// given for every part; it returns the definition without those.
func (m *mixture) takeShares(p *problems, d Definition) Definition {
	given := map[string]Given{}
	own := map[string]float64{}
	for key, g := range d.Constants {
		given[key] = g
		if part, ok := strings.CutSuffix(key, ".share"); ok && m.has(part) {
			delete(given, key)
			m.ownShare(p, own, part, g)
		}
	}
	d.Constants = given
	switch {
	case len(own) == len(m.parts):
		m.fixShares(p, own)
		return d
	case len(own) > 0 && p.err() == nil:
		p.add("constants.share", "shares are given for some parts only", "a fixed share for every part, or none")
	}
	if len(m.parts) == 2 {
		m.constants = append(m.constants, Constant{Name: "share", Scale: Logit, Low: 1e-6, High: 1 - 1e-6,
			StartLow: 0.1, StartHigh: 0.9,
			EdgeLow: "no sites of " + m.parts[0].name, EdgeHigh: "no sites of " + m.parts[1].name,
			Meaning: "share of all sites that belong to " + m.parts[0].name})
		return d
	}
	for _, s := range m.parts[1:] {
		m.constants = append(m.constants, Constant{Name: "share_ratio", Site: s.name, Scale: Log, Low: 1e-6, High: 1e6,
			StartLow: 0.1, StartHigh: 10, EdgeLow: "no sites of " + s.name,
			Meaning: "sites of " + s.name + " over sites of " + m.parts[0].name})
	}
	return d
}

func (m *mixture) has(name string) bool {
	return slices.ContainsFunc(m.parts, func(s part) bool { return s.name == name })
}

func (m *mixture) ownShare(p *problems, own map[string]float64, part string, g Given) {
	key := "constants." + part + ".share"
	if !g.settled() {
		p.add(key, "only a fixed share can be given part by part", m.shareRemedy())
		return
	}
	if v := g.number(); v >= 0 && v <= 1 {
		own[part] = v
		return
	}
	p.add(key, fmt.Sprintf("a share of %g cannot be", g.number()), "a number from 0 to 1")
}

func (m *mixture) shareRemedy() string {
	if len(m.parts) == 2 {
		return "share: {start: 0.5}, the share of " + m.parts[0].name
	}
	return m.parts[1].name + ": {share_ratio: {start: 1}}, its sites over those of " + m.parts[0].name
}

func (m *mixture) fixShares(p *problems, own map[string]float64) {
	var sum float64
	for _, s := range m.parts {
		m.fixed = append(m.fixed, own[s.name])
		sum += own[s.name]
	}
	if math.Abs(sum-1) > 1e-9 {
		p.add("constants.share", fmt.Sprintf("the shares sum to %g, not 1", sum), "shares that sum to 1")
	}
}

// portions writes the shares and, where they are fitted, their derivatives
// ∂f_p/∂θ_q (parts × constants of the shares).
func (m *mixture) portions(f, df, theta []float64) {
	if m.fixed != nil {
		copy(f, m.fixed)
		return
	}
	q := theta[m.shares:]
	if len(f) == 2 {
		f[0], f[1] = logistic(q[0])
		df[0], df[1] = f[0]*f[1], -f[0]*f[1]
		return
	}
	top := math.Max(0, slices.Max(q))
	sum := 0.0
	for i := range f {
		f[i] = math.Exp(-top)
		if i > 0 {
			f[i] = math.Exp(q[i-1] - top)
		}
		sum += f[i]
	}
	for i := range f {
		f[i] /= sum
	}
	for i := range f {
		for j := range q {
			df[i*len(q)+j] = -f[i] * f[j+1]
		}
		if i > 0 {
			df[i*len(q)+i-1] += f[i]
		}
	}
}
