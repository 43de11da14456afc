package kinetics_test

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/mechanisms"
	"ligancy/mechanisms/kinetics"
	"ligancy/mechanisms/mechtest"
)

// molecule is a mechanism site by site: every site empty, labelled or unlabelled, in
// one of the conformations. It is solved with gonum's matrix exponential.
type molecule struct {
	sites, conformations int
	weight               func(conformation int, filled []bool) float64 // without ligand
	kOn, exchange        float64
}

const (
	empty = iota
	labelled
	unlabelled
)

func (m *molecule) size() int { return m.conformations * int(math.Pow(3, float64(m.sites))) }

func (m *molecule) digits(s int) (conformation int, sites []int) {
	conformation = s % m.conformations
	s /= m.conformations
	for range m.sites {
		sites = append(sites, s%3)
		s /= 3
	}
	return conformation, sites
}

func (m *molecule) index(conformation int, sites []int) int {
	s := 0
	for i := len(sites) - 1; i >= 0; i-- {
		s = 3*s + sites[i]
	}
	return s*m.conformations + conformation
}

func (m *molecule) weightOf(c int, sites []int) float64 {
	filled := make([]bool, len(sites))
	for i, d := range sites {
		filled[i] = d != empty
	}
	return m.weight(c, filled)
}

// generator is dp/dt = Q p with x of labelled and u of unlabelled ligand.
func (m *molecule) generator(x, u float64) *mat.Dense {
	n := m.size()
	q := mat.NewDense(n, n, nil)
	flow := func(from, to int, rate float64) {
		q.Set(to, from, q.At(to, from)+rate)
		q.Set(from, from, q.At(from, from)-rate)
	}
	for s := range n {
		c, sites := m.digits(s)
		for i, d := range sites {
			if d != empty {
				continue
			}
			for kind, amount := range map[int]float64{labelled: x, unlabelled: u} {
				sites[i] = kind
				t := m.index(c, sites)
				flow(s, t, m.kOn*amount)
				back := m.kOn / m.weightOf(c, sites)
				sites[i] = empty
				flow(t, s, back*m.weightOf(c, sites))
			}
		}
		if c == 0 {
			for other := 1; other < m.conformations; other++ {
				t := m.index(other, sites)
				flow(s, t, m.exchange)
				flow(t, s, m.exchange*m.weightOf(0, sites)/m.weightOf(other, sites))
			}
		}
	}
	return q
}

// follow is the share of all sites with label, and with any ligand, after time t with
// x alone and after as much again with u beside it.
func (m *molecule) follow(x, u, t float64) (all, label [2]float64) {
	n := m.size()
	p := mat.NewVecDense(n, nil)
	sum := 0.0
	for s := range n {
		c, sites := m.digits(s)
		if n := count(sites, labelled) + count(sites, unlabelled); n == 0 {
			p.SetVec(s, m.weightOf(c, sites))
			sum += p.AtVec(s)
		}
	}
	p.ScaleVec(1/sum, p)
	for phase, unlab := range []float64{0, u} {
		q := m.generator(x, unlab)
		q.Scale(t, q)
		var e mat.Dense
		e.Exp(q)
		var next mat.VecDense
		next.MulVec(&e, p)
		p.CopyVec(&next)
		for s := range n {
			_, sites := m.digits(s)
			label[phase] += p.AtVec(s) * float64(count(sites, labelled)) / float64(m.sites)
			all[phase] += p.AtVec(s) * float64(count(sites, labelled)+count(sites, unlabelled)) / float64(m.sites)
		}
	}
	return all, label
}

func count(sites []int, kind int) (n int) {
	for _, d := range sites {
		if d == kind {
			n++
		}
	}
	return n
}

// Grouped states and followed ligands against every arrangement of labelled and
// unlabelled ligand on every site.
func TestBruteForce(t *testing.T) {
	const k, l, c, bb, ab, loose = 0.7, 30, 0.05, 3.5, 0.4, 6.
	graph := [][2]int{{1, 2}, {2, 3}, {3, 4}}
	cases := map[string]struct {
		of       mechtest.Case
		theta    map[string]float64
		molecule molecule
	}{
		"mwc": {mechtest.Case{Family: "mwc", Definition: mechanisms.Definition{Sites: 3}}, map[string]float64{"L": l, "c": c, "K_R": k},
			molecule{sites: 3, conformations: 2, weight: func(conf int, filled []bool) float64 {
				w := 1.0
				if conf == 1 {
					w = l
				}
				for _, f := range filled {
					if f {
						w *= []float64{1 / k, c / k}[conf]
					}
				}
				return w
			}}},
		"linear": {mechtest.Case{Family: "sequential", Definition: mechanisms.Definition{Graph: graph, Constants: map[string]mechanisms.Given{"K_AB": {Start: new(float64)}}}},
			map[string]float64{"K": k, "K_BB": bb, "K_AB": ab},
			molecule{sites: 4, conformations: 1, weight: func(_ int, filled []bool) float64 {
				w := 1.0
				for _, f := range filled {
					if f {
						w /= k
					}
				}
				for _, e := range graph {
					switch a, b := filled[e[0]-1], filled[e[1]-1]; {
					case a && b:
						w *= bb
					case a || b:
						w *= ab
					}
				}
				return w
			}}},
		"two classes": {mechtest.Case{Family: "independent", Definition: mechanisms.Definition{SiteScale: true,
			Classes: []mechanisms.Count{{Name: "tight", Sites: 2}, {Name: "loose", Sites: 1}}}}, map[string]float64{"tight.Kd": k, "loose.Kd": loose},
			molecule{sites: 3, conformations: 1, weight: func(_ int, filled []bool) float64 {
				w := 1.0
				for i, f := range filled {
					if f {
						w /= []float64{k, k, loose}[i]
					}
				}
				return w
			}}},
	}
	one := 1.0
	cases["linear"].of.Definition.Constants["K_AB"] = mechanisms.Given{Start: &one}
	for name, q := range cases {
		m := build(t, q.of)
		var theta, phi []float64
		for _, c := range m.Mechanism().Constants() {
			theta = append(theta, q.theta[c.Key()])
		}
		for range m.Rates() {
			phi = append(phi, 0.8)
		}
		q.molecule.kOn, q.molecule.exchange = 0.8, 0.8
		const x, u, sec = 1.3, 4.0, 0.6
		all, label := q.molecule.follow(x, u, sec)
		b := bound(t, m, theta, phi)
		p := &kinetics.Program{Tolerance: 1e-12, Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: x, Seconds: sec},
			{Action: kinetics.Block, Amount: u, Seconds: sec}}}
		got := run(t, b, p, []float64{sec, 2 * sec})
		for i := range 2 {
			near(t, fmt.Sprintf("%s: saturation, phase %d", name, i+1), got.Saturation[i], all[i], 1e-10)
			near(t, fmt.Sprintf("%s: label, phase %d", name, i+1), got.Labelled[i], label[i], 1e-10)
		}
	}
}
