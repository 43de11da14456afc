package mechanisms

import (
	"math"
	"slices"
	"strings"

	"gonum.org/v1/gonum/mat"
)

const mixtureDoc = `Separate populations of molecules, side by side.

	Ȳ = Σ_p f_p Ȳ_p ,  Σ f_p = 1 ,  n_H = Σ f_p (dȲ_p/d ln x)/[Ȳ(1 − Ȳ)]

f_p is a share of all sites. Averages add, partition functions do not: there is no binding
polynomial and no interaction energy. ln x_median is the mean of the parts' by share.

Constants:

	those of the parts, under the name of the part
	share         of all sites, of the first of two parts            no unit, logit scale
	share_ratio   of every later of three or more parts, sites of it
	              over sites of the first; shares are quoted         no unit

Plain parts (a number of equal sites) are listed from the tightest to the loosest and stay
in that order, as the classes of independent do. Parts that are mechanisms of one kind can
be exchanged: give ranges where that matters. Shares fixed for every part must sum to 1.

Limits: equal parts are one. With plain parts n_H ≤ 1 everywhere.

What data hold what: share and constants are held where the parts lie well apart (a ratio
above 10); a mixture of simple sites, unlike sites and negative cooperativity are three
readings of one curve.

Keys: parts ({tight: 1, loose: 1}, or a mechanism for each), constants.

Feldman 1972, Anal. Biochem. 48:317.
`

// Separate populations of molecules, side by side.
//
//	Ȳ = Σ_p f_p Ȳ_p ,  Σ f_p = 1 ,  n_H = Σ f_p (dȲ_p/d ln x)/[Ȳ(1 − Ȳ)]
//
// f_p is a share of all sites. Averages add, partition functions do not: there is no binding
// polynomial and no interaction energy. ln x_median is the mean of the parts' by share.
//
// Constants:
//
//	those of the parts, under the name of the part
//	share         of all sites, of the first of two parts            no unit, logit scale
//	share_ratio   of every later of three or more parts, sites of it
//	              over sites of the first; shares are quoted         no unit
//
// Plain parts (a number of equal sites) are listed from the tightest to the loosest and stay
// in that order, as the classes of independent do. Parts that are mechanisms of one kind can
// be exchanged: give ranges where that matters. Shares fixed for every part must sum to 1.
//
// Limits: equal parts are one. With plain parts n_H ≤ 1 everywhere.
//
// What data hold what: share and constants are held where the parts lie well apart (a ratio
// above 10); a mixture of simple sites, unlike sites and negative cooperativity are three
// readings of one curve.
//
// Keys: parts ({tight: 1, loose: 1}, or a mechanism for each), constants.
//
// Feldman 1972, Anal. Biochem. 48:317.
type mixture struct {
	sites     int
	parts     []part
	constants []Constant
	effectors []string
	fixed     []float64 // shares that the study gives; nil where they are fitted
	shares    int       // index of the first constant of the shares
}

func buildMixture(d Definition) (Mechanism, error) {
	var p problems
	p.unread(d, "parts", "constants")
	if len(d.Parts) < 2 {
		p.add("parts", "a mixture has at least two parts", "parts: {tight: 1, loose: 1}")
	}
	m := &mixture{}
	seen := map[string]bool{}
	for _, s := range d.Parts {
		key := "parts." + s.Name
		if seen[s.Name] {
			p.add(key, "this name is used twice", "a name of its own for each part")
		}
		seen[s.Name] = true
		if mech := p.buildPart(key, d, s); mech != nil {
			m.parts = append(m.parts, part{name: s.Name, mechanism: mech})
		}
	}
	if err := p.err(); err != nil {
		return nil, err
	}
	m.settle(d)
	rest := m.takeShares(&p, d)
	p.given(m.without(rest), m.constants)
	if err := p.err(); err != nil {
		return nil, err
	}
	return m, nil
}

// without is the definition less what it says of constants that are held at zero.
func (m *mixture) without(d Definition) Definition {
	for i := range m.parts {
		m.parts[i].drop(d.Constants)
	}
	return d
}

// settle lays out the constants: of each part, then of the shares. Plain parts
// are ordered by affinity, as the classes of independent sites are, unless the
// study speaks of their constants.
func (m *mixture) settle(d Definition) {
	inOrder := !d.SiteScale && !m.speaksOfSites(d)
	before := -1 // the plain part before this one
	for i := range m.parts {
		s := &m.parts[i]
		_, plain := s.mechanism.(independent)
		plain = plain && len(s.mechanism.Constants()) == 1
		if plain && inOrder && before >= 0 {
			pair := []Count{{Name: m.parts[before].name}, {Name: s.name}}
			ratio, _ := ratioConstants(pair)
			s.local = []blend{append(slices.Clone(m.parts[before].local[0]), term{len(m.constants), 1})}
			m.constants = append(m.constants, ratio[1])
			s.admit(&m.effectors)
		} else {
			s.place(&m.constants, &m.effectors)
		}
		if plain {
			before = i
		}
		if n := s.mechanism.Sites(); i == 0 || n == m.sites {
			m.sites = n
		} else {
			m.sites = 0
		}
	}
	m.shares = len(m.constants)
}

// speaksOfSites says whether something is said of a Kd.
func (m *mixture) speaksOfSites(d Definition) bool {
	for key, g := range d.Constants {
		if strings.HasSuffix(key, ".Kd") && g.said() {
			return true
		}
	}
	return false
}

func (m *mixture) Family() string        { return "mixture" }
func (m *mixture) Sites() int            { return m.sites }
func (m *mixture) Constants() []Constant { return slices.Clone(m.constants) }
func (m *mixture) Effectors() []string   { return slices.Clone(m.effectors) }

func (m *mixture) Curve() Curve {
	k := len(m.constants)
	n := k - m.shares
	c := &mixtureCurve{m: m, f: make([]float64, len(m.parts)), df: make([]float64, len(m.parts)*n), jets: newJet(k)}
	for _, s := range m.parts {
		c.parts = append(c.parts, newPartCurve(s))
	}
	return c
}

// mixtureCurve is Ȳ = Σ f_p Ȳ_p: averages of separate molecules add.
type mixtureCurve struct {
	m     *mixture
	parts []*partCurve
	f, df []float64
	jets  jet
	y     []float64 // of one part, over one call's points
	g     []float64
	grad  mat.Dense
}

// Bind settles every part and the shares.
func (c *mixtureCurve) Bind(theta []float64, env Environment) {
	for _, s := range c.parts {
		s.bind(theta, env)
	}
	c.m.portions(c.f, c.df, theta)
}

// Saturation writes Ȳ and its gradient at each ln x.
func (c *mixtureCurve) Saturation(dst, lnx []float64, grad *mat.Dense) {
	if cap(c.y) < len(lnx) {
		c.y = make([]float64, len(lnx))
	}
	y := c.y[:len(lnx)]
	clear(dst[:len(lnx)])
	if grad != nil {
		for r := range lnx {
			clear(grad.RawRowView(r))
		}
	}
	for i, s := range c.parts {
		s.Saturation(y, lnx, c.room(grad, len(lnx), len(s.theta)))
		for r, v := range y {
			dst[r] += c.f[i] * v
			if grad == nil {
				continue
			}
			row := grad.RawRowView(r)
			s.spread(row, c.grad.RawRowView(r), c.f[i])
			c.share(row, i, v)
		}
	}
}

// room is a matrix for the gradient of one part; nil where none is wanted.
func (c *mixtureCurve) room(grad *mat.Dense, rows, cols int) *mat.Dense {
	if grad == nil {
		return nil
	}
	if cap(c.g) < rows*cols {
		c.g = make([]float64, rows*cols)
	}
	raw := c.grad.RawMatrix()
	raw.Rows, raw.Cols, raw.Stride, raw.Data = rows, cols, cols, c.g[:rows*cols]
	c.grad.SetRawMatrix(raw)
	return &c.grad
}

// share adds ∂f_i/∂θ times v.
func (c *mixtureCurve) share(row []float64, i int, v float64) {
	n := len(row) - c.m.shares
	for j, d := range c.df[i*n : (i+1)*n] {
		row[c.m.shares+j] += d * v
	}
}

// At writes saturation and Hill coefficient at one ln x.
func (c *mixtureCurve) At(lnx float64, p *Point) {
	c.jet(lnx, &c.jets, whole)
	low, high := c.endSlopes()
	c.jets.point(p, low, high)
}

func (c *mixtureCurve) jet(lnx float64, j *jet, to depth) {
	j.zero()
	for i, s := range c.parts {
		p, f := &s.jets, c.f[i]
		s.smooth.jet(lnx, p, to)
		j.y += f * p.y
		j.e += f * p.e
		j.y1 += f * p.y1
		j.y2 += f * p.y2
		j.y3 += f * p.y3
		if to >= saturated {
			s.spread(j.g, p.g, f)
			c.share(j.g, i, p.y)
		}
		if to == whole {
			s.spread(j.g1, p.g1, f)
			c.share(j.g1, i, p.y1)
			s.spread(j.g2, p.g2, f)
			c.share(j.g2, i, p.y2)
		}
	}
}

// endSlopes are those of the part that is steepest in vanishing least.
func (c *mixtureCurve) endSlopes() (low, high float64) {
	low, high = math.Inf(1), math.Inf(1)
	for i, s := range c.parts {
		if c.f[i] > 0 {
			l, h := s.endSlopes()
			low, high = min(low, l), min(high, h)
		}
	}
	return low, high
}

func (c *mixtureCurve) turns() (first, last float64) {
	first, last = math.Inf(1), math.Inf(-1)
	for i, s := range c.parts {
		if c.f[i] > 0 {
			a, b := s.turns()
			first, last = min(first, a), max(last, b)
		}
	}
	return first, last
}

func (c *mixtureCurve) ceiling() (y float64) {
	for i, s := range c.parts {
		y += c.f[i] * s.ceiling()
	}
	return y
}

// median is the mean of the parts' ln x_m, by their shares.
func (c *mixtureCurve) median() Measure {
	m := Measure{Grad: make([]float64, len(c.jets.g))}
	for i, s := range c.parts {
		own := Median(s.smooth)
		if own.Why != "" {
			return nothing("part " + c.m.parts[i].name + ": " + own.Why)
		}
		m.Value += c.f[i] * own.Value
		s.spread(m.Grad, own.Grad, c.f[i])
		c.share(m.Grad, i, own.Value)
	}
	return m
}

func (c *mixtureCurve) interaction() Measure {
	return nothing("the parts of a mixture are separate molecules: their first and last sites do not interact")
}

// StateNames names the states of the parts.
func (c *mixtureCurve) StateNames() (names []string) {
	for i, s := range c.parts {
		p, ok := s.smooth.(Populated)
		if !ok {
			names = append(names, c.m.parts[i].name)
			continue
		}
		for _, n := range p.StateNames() {
			names = append(names, c.m.parts[i].name+": "+n)
		}
	}
	return names
}

// Populations writes the share of all sites that stand in each state.
func (c *mixtureCurve) Populations(dst []float64, lnx float64) []float64 {
	dst = dst[:0]
	for i, s := range c.parts {
		p, ok := s.smooth.(Populated)
		if !ok {
			dst = append(dst, c.f[i])
			continue
		}
		for _, v := range p.Populations(nil, lnx) {
			dst = append(dst, c.f[i]*v)
		}
	}
	return dst
}
