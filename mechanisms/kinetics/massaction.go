package kinetics

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/mechanisms"
)

// massAction is the equations of mass action of a bound model. Its state is
//
//	p_1 … p_S   shares of the states, of all sites
//	m_1 … m_T   labelled ligands on each tag, where there is unlabelled ligand
//	x           free labelled ligand
//	u           free unlabelled ligand, where there is any
//
// with x + u driving every binding step, and
//
//	dx/dt = −[sites] Σ (binding of label − leaving of label)/n .
//
// Where ligand is not used up, dx/dt = du/dt = 0.
type massAction struct {
	b      *Bound
	sites  float64 // concentration; 0: ligand is not used up
	tagged bool
	s, t   int
	terms  []term
}

func newMassAction(b *Bound, sites float64, tagged bool) *massAction {
	m := &massAction{b: b, sites: sites, tagged: tagged, s: len(b.m.net.States), t: len(b.m.net.Tags)}
	m.flows()
	if tagged {
		m.labelledFlows()
	}
	return m
}

func (m *massAction) Dim() int {
	if m.tagged {
		return m.s + m.t + 2
	}
	return m.s + 1
}

// NumParams is the number of constants.
func (m *massAction) NumParams() int { return m.b.m.Size() }

// free is the place of x; u follows.
func (m *massAction) free() int {
	if m.tagged {
		return m.s + m.t
	}
	return m.s
}

// term is one flow: rate·y[from]·(ligand where driven) out of from into to, and w of
// it out of the free ligand at free.
type term struct {
	from, to int // −1: nowhere
	keeps    bool
	rate     float64
	step     int
	down     bool
	driven   int // 0: by nothing; 1: by all ligand; 2: by the labelled; 3: by the unlabelled
	free     int // place of the ligand that it takes from (set free where negative weight); −1
	weight   float64
}

// Derivs writes the rates of change.
func (m *massAction) Derivs(dst []float64, _ float64, y []float64) error {
	clear(dst)
	x, u := m.ligand(y)
	for i := range m.terms {
		f := &m.terms[i]
		v := f.rate * y[f.from] * drive(f.driven, x, u)
		f.spread(func(place int, w float64) { dst[place] += w * v })
	}
	return nil
}

// Jacobian writes the derivatives by the state.
func (m *massAction) Jacobian(dst *mat.Dense, _ float64, y []float64) error {
	raw := dst.RawMatrix()
	x, u := m.ligand(y)
	at := m.free()
	for i := range m.terms {
		f := &m.terms[i]
		d := f.rate * drive(f.driven, x, u)
		e := f.rate * y[f.from]
		f.spread(func(place int, w float64) {
			row := raw.Data[place*raw.Stride:]
			row[f.from] += w * d
			if f.driven == 1 || f.driven == 2 {
				row[at] += w * e
			}
			if m.tagged && (f.driven == 1 || f.driven == 3) {
				row[at+1] += w * e
			}
		})
	}
	return nil
}

// ParamJacobian writes the derivatives by Θ.
func (m *massAction) ParamJacobian(dst *mat.Dense, _ float64, y []float64) error {
	x, u := m.ligand(y)
	for i := range m.terms {
		f := &m.terms[i]
		v := f.rate * y[f.from] * drive(f.driven, x, u)
		if v == 0 {
			continue
		}
		d := m.b.dUp
		if f.down {
			d = m.b.dDown
		}
		g := d.RawRowView(f.step)
		f.spread(func(place int, w float64) {
			row := dst.RawRowView(place)
			for k, q := range g {
				row[k] += w * v * q
			}
		})
	}
	return nil
}

func (m *massAction) ligand(y []float64) (x, u float64) {
	at := m.free()
	if m.tagged {
		return y[at], y[at+1]
	}
	return y[at], 0
}

func drive(driven int, x, u float64) float64 {
	switch driven {
	case 1:
		return x + u
	case 2:
		return x
	case 3:
		return u
	}
	return 1
}

// spread calls f with every place that a flow changes.
func (f *term) spread(change func(place int, w float64)) {
	if !f.keeps {
		change(f.from, -1)
	}
	if f.to >= 0 {
		change(f.to, 1)
	}
	if f.free >= 0 && f.weight != 0 {
		change(f.free, -f.weight)
	}
}

// flows are those between states. Without labels they carry the ligand; with them the
// ligand that leaves or binds is taken as unlabelled here, and labelledFlows puts
// right which it was.
func (m *massAction) flows() {
	net := m.b.m.net
	for e, s := range net.Steps {
		if m.b.up[e] == 0 {
			continue
		}
		free, w, driven := -1, 0.0, 0
		if s.Kind == mechanisms.Binding {
			driven = 1
			free, w = m.free(), m.sites/float64(net.States[s.From].Sites)
			if m.tagged {
				free++
			}
		}
		m.terms = append(m.terms, term{from: s.From, to: s.To, rate: m.b.up[e], step: e, driven: driven, free: free, weight: w})
		m.terms = append(m.terms, term{from: s.To, to: s.From, rate: m.b.down[e], step: e, down: true, free: free, weight: -w})
	}
}

// labelledFlows carry the labelled ligands. Each that binds or leaves is exchanged
// for the unlabelled one that flows counted.
func (m *massAction) labelledFlows() {
	net, at := m.b.m.net, m.free()
	for _, v := range net.Moves {
		rate, down := m.b.up[v.Step], v.Down
		driven := 0
		if down {
			rate = m.b.down[v.Step]
		} else if net.Steps[v.Step].Kind == mechanisms.Binding {
			driven = 1
		}
		if rate == 0 {
			continue
		}
		from, to := m.s+v.From, -1
		if v.To >= 0 {
			to = m.s + v.To
		}
		m.terms = append(m.terms, term{from: from, to: to, rate: rate * v.Factor, step: v.Step, down: down, driven: driven, free: -1})
		if to < 0 && m.sites > 0 {
			w := m.sites / float64(net.States[net.Tags[v.From].State].Sites)
			m.terms = append(m.terms, term{from: from, to: -1, keeps: true, rate: rate * v.Factor, step: v.Step, down: true, free: at, weight: -w})
			m.terms = append(m.terms, term{from: from, to: -1, keeps: true, rate: rate * v.Factor, step: v.Step, down: true, free: at + 1, weight: w})
		}
	}
	for _, g := range net.Gains {
		s := net.Steps[g.Step]
		rate := m.b.up[g.Step] * g.Factor
		if rate == 0 {
			continue
		}
		m.terms = append(m.terms, term{from: s.From, to: m.s + g.To, keeps: true, rate: rate, step: g.Step, driven: 2, free: -1})
		if m.sites > 0 {
			w := m.sites / float64(net.States[s.From].Sites)
			m.terms = append(m.terms, term{from: s.From, to: -1, keeps: true, rate: rate, step: g.Step, driven: 2, free: at, weight: w})
			m.terms = append(m.terms, term{from: s.From, to: -1, keeps: true, rate: rate, step: g.Step, driven: 2, free: at + 1, weight: -w})
		}
	}
}

// finite is the first place that is no number; −1 where all are.
func finite(y []float64) int {
	for i, v := range y {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return i
		}
	}
	return -1
}
