package mechanisms

import (
	"fmt"
	"maps"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
)

const assemblyDoc = `Small molecules that assemble, m of them, into a large one.

	m S ⇌ L ,  [L]/[S]^m = K_assembly · Ẑ_L(x)/Ẑ_S(x)^m ,  n_S[S] + n_L[L] = protomers
	Ȳ = (1 − t)Ȳ_S + tȲ_L ,  t = n_L[L]/protomers
	dȲ/d ln x = (1 − t)Var_S/n_S + t·Var_L/n_L + n_L(Ȳ_L − Ȳ_S)² t(1 − t)/(1 + (m − 1)t)

Ẑ is the binding polynomial over that without ligands and effectors; the mass balance is
solved exactly. m is the ratio of the numbers of sites: dimer and tetramer, m = 2.

Constants:

	K_assembly   association constant without ligands    1/(unit of the protein)^(m − 1), molecules
	small.…, large.…   those of the two species          as in their families

Limits: concentrated protein is the large species alone, dilute protein the small one.
Between them Ȳ depends on the protein's concentration: cooperativity falls with dilution
where only the large species has it.

What data hold what: curves at several protein concentrations, some where each species
prevails. One curve at one concentration cannot hold K_assembly beside the constants of
both species.

Keys: small, large (a number of sites, or a mechanism with a binding polynomial),
constants. The data give sites_present.

Ackers & Halvorson 1974, Proc. Natl. Acad. Sci. 71:4312.
`

// Small molecules that assemble, m of them, into a large one.
//
//	m S ⇌ L ,  [L]/[S]^m = K_assembly · Ẑ_L(x)/Ẑ_S(x)^m ,  n_S[S] + n_L[L] = protomers
//	Ȳ = (1 − t)Ȳ_S + tȲ_L ,  t = n_L[L]/protomers
//	dȲ/d ln x = (1 − t)Var_S/n_S + t·Var_L/n_L + n_L(Ȳ_L − Ȳ_S)² t(1 − t)/(1 + (m − 1)t)
//
// Ẑ is the binding polynomial over that without ligands and effectors; the mass balance is
// solved exactly. m is the ratio of the numbers of sites: dimer and tetramer, m = 2.
//
// Constants:
//
//	K_assembly   association constant without ligands    1/(unit of the protein)^(m − 1), molecules
//	small.…, large.…   those of the two species          as in their families
//
// Limits: concentrated protein is the large species alone, dilute protein the small one.
// Between them Ȳ depends on the protein's concentration: cooperativity falls with dilution
// where only the large species has it.
//
// What data hold what: curves at several protein concentrations, some where each species
// prevails. One curve at one concentration cannot hold K_assembly beside the constants of
// both species.
//
// Keys: small, large (a number of sites, or a mechanism with a binding polynomial),
// constants. The data give sites_present.
//
// Ackers & Halvorson 1974, Proc. Natl. Acad. Sci. 71:4312.
type assembly struct {
	parts     [2]part // small, large
	m         int     // small molecules in a large one
	constants []Constant
	effectors []string
}

func buildAssembly(d Definition) (Mechanism, error) {
	var p problems
	p.unread(d, "small", "large", "constants")
	a := &assembly{}
	for i, name := range []string{"small", "large"} {
		s := []*Part{d.Small, d.Large}[i]
		if s == nil {
			p.add(name, "this species is missing", name+": {family: adair, sites: 4}")
			continue
		}
		named := *s
		named.Name = name
		mech := p.buildPart(name, d, named)
		if mech == nil {
			continue
		}
		if _, ok := mech.Curve().(factored); !ok {
			p.add(name+".family", fmt.Sprintf("a species of %s has no binding polynomial", mech.Family()),
				"adair, mwc, sequential, independent, conformations or states")
		}
		a.parts[i] = part{name: name, mechanism: mech}
	}
	if err := p.err(); err != nil {
		return nil, err
	}
	small, large := a.parts[0].mechanism.Sites(), a.parts[1].mechanism.Sites()
	if a.m = large / small; a.m < 2 || large%small != 0 {
		p.add("large", fmt.Sprintf("%s cannot be put together from small ones of %s", sitesInWords(large), sitesInWords(small)),
			fmt.Sprintf("a multiple of %d", small))
		return nil, p.err()
	}
	a.settle()
	given := maps.Clone(d.Constants)
	for i := range a.parts {
		a.parts[i].drop(given)
	}
	d.Constants = given
	p.given(d, a.constants)
	if err := p.err(); err != nil {
		return nil, err
	}
	return a, nil
}

func (a *assembly) settle() {
	power := math.Max(1, float64(a.m-1))
	a.constants = []Constant{{Name: "K_assembly", Scale: Log, Protomers: 1 - a.m,
		Low: math.Pow(1e-9, power), High: math.Pow(1e12, power), StartLow: math.Pow(1e-2, power), StartHigh: math.Pow(1e3, power),
		EdgeLow: "small species alone", EdgeHigh: "large species alone",
		Meaning: fmt.Sprintf("association constant of %d small molecules without ligands", a.m)}}
	for i := range a.parts {
		a.parts[i].place(&a.constants, &a.effectors)
	}
}

func (a *assembly) Family() string        { return "assembly" }
func (a *assembly) Sites() int            { return a.parts[1].mechanism.Sites() }
func (a *assembly) Constants() []Constant { return slices.Clone(a.constants) }
func (a *assembly) Effectors() []string   { return slices.Clone(a.effectors) }

func (a *assembly) Curve() Curve {
	c := &assemblyCurve{a: a, jets: newJet(len(a.constants)), g: make([]float64, len(a.constants))}
	for i := range c.species {
		c.species[i] = newSpecies(a.parts[i])
	}
	c.n = float64(c.species[1].poly.n)
	return c
}

// species is a bound polynomial with ln Ẑ = ln Z − ln Z_0, Z_0 being that without
// ligand and effectors.
type species struct {
	*partCurve
	poly *coefficients
	sum  *average

	bare   *partCurve // the species without effectors; nil where there are none
	lnZero float64
	dZero  []float64
	dLnZ   []float64 // ∂ln Ẑ/∂θ, of the species' own constants
}

func newSpecies(s part) *species {
	c := &species{partCurve: newPartCurve(s)}
	c.poly = c.smooth.(factored).polynomial()
	c.sum = newAverage(c.poly, filled(c.poly.n), empty(c.poly.n), nil)
	c.dZero, c.dLnZ = make([]float64, c.poly.k), make([]float64, c.poly.k)
	if len(s.effects) > 0 {
		c.bare = newPartCurve(s)
	}
	return c
}

func (s *species) settle(theta []float64, env Environment) {
	s.bind(theta, env)
	s.smooth.(factored).polynomial()
	zero := s.poly
	if s.bare != nil {
		for i, b := range s.local {
			s.bare.theta[i] = b.at(theta)
		}
		s.bare.Bind(s.bare.theta, s.bare.env)
		zero = s.bare.smooth.(factored).polynomial()
	}
	s.lnZero = zero.lnB[0]
	copy(s.dZero, zero.row(0))
}

// jet writes the species' jet and returns ln Ẑ, without xⁿ where x → ∞.
func (s *species) jet(lnx float64, to depth) float64 {
	s.sum.jet(lnx, &s.jets, to)
	for k := range s.dLnZ {
		s.dLnZ[k] = s.sum.dMean[k] - s.dZero[k]
	}
	return s.sum.lnP - s.lnZero
}

// assemblyCurve is Ȳ = (1−t)Ȳ_S + tȲ_L with t the share of protomers in the large
// species. With protomers P, n_S[S] + n_L[L] = P and [L] = K [S]^m Ẑ_L/Ẑ_S^m,
//
//	t/(1−t)^m = G = m K (P/n_S)^{m−1} Ẑ_L/Ẑ_S^m ,
//
// solved for logit t, in which the left side is convex and has a slope between
// 1 and m. dt/d ln G = t(1−t)/(1+(m−1)t); d ln G/d ln x = n_L(Ȳ_L − Ȳ_S).
type assemblyCurve struct {
	a       *assembly
	species [2]*species
	n       float64 // sites of the large species
	lnK     float64
	lnP     float64 // ln of the protomers
	jets    jet
	g       []float64 // ∂ln G/∂θ
}

// Bind settles both species.
func (c *assemblyCurve) Bind(theta []float64, env Environment) {
	c.lnK, c.lnP = theta[0], math.Log(env.Protomers)
	for _, s := range c.species {
		s.settle(theta, env)
	}
}

// Saturation writes Ȳ and its gradient at each ln x.
func (c *assemblyCurve) Saturation(dst, lnx []float64, grad *mat.Dense) {
	for r, lx := range lnx {
		c.jet(lx, &c.jets, depthFor(grad))
		dst[r] = c.jets.y
		if grad != nil {
			copy(grad.RawRowView(r), c.jets.g)
		}
	}
}

// At writes saturation and Hill coefficient at one ln x.
func (c *assemblyCurve) At(lnx float64, p *Point) {
	c.jet(lnx, &c.jets, whole)
	low, high := c.endSlopes()
	c.jets.point(p, low, high)
}

// lnG is ln G where the species have ln Ẑ_S and ln Ẑ_L.
func (c *assemblyCurve) lnG(lnZS, lnZL float64) float64 {
	m := float64(c.a.m)
	lnS := c.lnP - math.Log(c.n/m) // ln(P/n_S)
	return math.Log(m) + c.lnK + (m-1)*lnS + lnZL - m*lnZS
}

// split solves t/(1−t)^m = G: t and 1−t.
func split(lnG, m float64) (t, rest float64) {
	if math.IsInf(lnG, -1) {
		return 0, 1
	}
	v := lnG
	if v > 0 {
		v /= m
	}
	for range 60 {
		step := (v + (m-1)*softplus(v) - lnG)
		t, rest = logistic(v)
		step /= rest + m*t
		v -= step
		if math.Abs(step) <= 1e-16*math.Max(1, math.Abs(v)) {
			break
		}
	}
	return logistic(v)
}

func (c *assemblyCurve) jet(lnx float64, j *jet, to depth) {
	j.zero()
	m := float64(c.a.m)
	lnZS := c.species[0].jet(lnx, to)
	lnZL := c.species[1].jet(lnx, to)
	s, l := &c.species[0].jets, &c.species[1].jets
	t, rest := split(c.lnG(lnZS, lnZL), m)
	x := blendOf(s, l, t, rest, m, c.n)
	j.y, j.e = rest*s.y+t*l.y, rest*s.e+t*l.e
	j.y1 = rest*s.y1 + t*l.y1 + x.d*x.tx
	j.y2 = rest*s.y2 + t*l.y2 + 2*x.d1*x.tx + x.d*x.txx
	j.y3 = rest*s.y3 + t*l.y3 + 3*x.d2*x.tx + 3*x.d1*x.txx + x.d*x.txxx
	if to == values {
		return
	}
	c.logGradient(m)
	for k, g := range c.g {
		j.g[k] += x.d * x.t1 * g
	}
	c.species[0].spread(j.g, s.g, rest)
	c.species[1].spread(j.g, l.g, t)
	if to == whole {
		c.deepen(j, s, l, &x, t, rest)
	}
}

// logGradient writes ∂ln G/∂θ.
func (c *assemblyCurve) logGradient(m float64) {
	clear(c.g)
	c.g[0] = 1
	c.species[0].spread(c.g, c.species[0].dLnZ, -m)
	c.species[1].spread(c.g, c.species[1].dLnZ, 1)
}

// mixing is how t moves: with ln G (t1 … t3) and with ln x (tx …), and the
// differences Ȳ_L − Ȳ_S (d …).
type mixing struct {
	d, d1, d2     float64
	g1, g2        float64 // d ln G/d ln x and d²
	t1, t2, t3    float64
	tx, txx, txxx float64
	n             float64
}

// blendOf writes the derivatives of t. With τ = t(1−t)/(1+rt), r = m−1:
//
//	τ′ = (1 − 2t − rt²)/(1+rt)² ,  τ″ = −2m/(1+rt)³ .
func blendOf(s, l *jet, t, rest, m, n float64) (x mixing) {
	x.n = n
	x.d, x.d1, x.d2 = l.y-s.y, l.y1-s.y1, l.y2-s.y2
	if s.y > 0.5 {
		x.d = s.e - l.e
	}
	r := m - 1
	q := 1 + r*t
	slope := (rest - t - r*t*t) / (q * q)
	x.t1 = t * rest / q
	x.t2 = slope * x.t1
	x.t3 = -2*m/(q*q*q)*x.t1*x.t1 + slope*x.t2
	x.g1, x.g2 = n*x.d, n*x.d1
	g3 := n * x.d2
	x.tx = x.t1 * x.g1
	x.txx = x.t2*x.g1*x.g1 + x.t1*x.g2
	x.txxx = x.t3*x.g1*x.g1*x.g1 + 3*x.t2*x.g1*x.g2 + x.t1*g3
	return x
}

// deepen adds the gradients of y′ and y″.
func (c *assemblyCurve) deepen(j, s, l *jet, x *mixing, t, rest float64) {
	for k, g := range c.g {
		tx := x.t2 * g * x.g1
		txx := x.t3*g*x.g1*x.g1 + x.t2*g*x.g2
		j.g1[k] += x.d1*x.t1*g + x.d*tx
		j.g2[k] += x.d2*x.t1*g + 2*x.d1*tx + x.d*txx
	}
	for i, w := range [2]float64{rest, t} {
		sign := float64(2*i - 1)
		sp := c.species[i]
		p := []*jet{s, l}[i]
		// ∂tx = t1 n ∂d ; ∂txx = 2 t2 g1 n ∂d + t1 n ∂d′.
		sp.spread(j.g1, p.g1, w)
		sp.spread(j.g1, p.g, sign*(x.tx+x.d*x.t1*x.n))
		sp.spread(j.g2, p.g2, w)
		sp.spread(j.g2, p.g1, sign*(2*x.tx+x.d*x.t1*x.n))
		sp.spread(j.g2, p.g, sign*(2*x.d1*x.t1*x.n+x.txx+2*x.d*x.t2*x.g1*x.n))
	}
}

func (c *assemblyCurve) endSlopes() (low, high float64) {
	a, b := c.species[0].endSlopes()
	d, e := c.species[1].endSlopes()
	return min(a, d), min(b, e)
}

func (c *assemblyCurve) turns() (first, last float64) {
	a, b := c.species[0].turns()
	d, e := c.species[1].turns()
	return min(a, d), max(b, e)
}

func (c *assemblyCurve) ceiling() float64 {
	t, rest := split(c.lnG(c.full(0), c.full(1)), float64(c.a.m))
	return rest*c.species[0].ceiling() + t*c.species[1].ceiling()
}

// full is ln of the coefficient of the full species, of Ẑ.
func (c *assemblyCurve) full(i int) float64 {
	s := c.species[i]
	return s.poly.lnB[s.poly.n] - s.lnZero
}

// median follows from the free energy F = Pμ − [S] − [L], whose slope against
// ln x is −PȲ: ln x_m = (F_∞ − F_0)/P, where μ_∞ leaves out ln x; and by the
// envelope theorem ∂F = −[S]∂ln Ẑ_S − [L]∂ln(K Ẑ_L).
func (c *assemblyCurve) median() Measure {
	out := Measure{Grad: make([]float64, len(c.g))}
	for i, s := range c.species {
		if math.IsInf(s.poly.lnB[s.poly.n], -1) {
			return nothing("the last site of the " + c.a.parts[i].name + " species never fills")
		}
	}
	m, lnP := float64(c.a.m), c.lnP
	if math.IsInf(lnP, -1) {
		lnP = 0 // small molecules alone: it falls out
	}
	nS := c.n / m
	for _, end := range []struct {
		sign float64
		lnZ  func(i int) float64
		row  func(p *coefficients) []float64
	}{
		{1, c.full, func(p *coefficients) []float64 { return p.row(p.n) }},
		{-1, c.empty, func(p *coefficients) []float64 { return p.row(0) }},
	} {
		t, rest := split(c.lnG(end.lnZ(0), end.lnZ(1)), m)
		small, large := rest/nS, t/c.n // molecules per protomer
		mu := (math.Log(rest) + lnP - math.Log(nS) - end.lnZ(0)) / nS
		if rest == 0 {
			mu = (lnP - math.Log(c.n) - c.lnK - end.lnZ(1)) / c.n
		}
		out.Value += end.sign * (mu - small - large)
		out.Grad[0] -= end.sign * large
		for i, w := range []float64{small, large} {
			s := c.species[i]
			for k, d := range end.row(s.poly) {
				s.local[k].addTo(out.Grad, -end.sign*w*(d-s.dZero[k]))
			}
		}
	}
	return out
}

func (c *assemblyCurve) empty(i int) float64 {
	s := c.species[i]
	return s.poly.lnB[0] - s.lnZero
}

func (c *assemblyCurve) interaction() Measure {
	return nothing("assembly couples the molecules: the distance of the asymptotes depends on the protein concentration")
}

// StateNames names the states of both species.
func (c *assemblyCurve) StateNames() (names []string) {
	for i, s := range c.species {
		for _, n := range s.smooth.(factored).StateNames() {
			names = append(names, c.a.parts[i].name+": "+n)
		}
	}
	return names
}

// Populations writes the share of protomers that stand in each state.
func (c *assemblyCurve) Populations(dst []float64, lnx float64) []float64 {
	dst = dst[:0]
	t, rest := split(c.lnG(c.species[0].jet(lnx, values), c.species[1].jet(lnx, values)), float64(c.a.m))
	for i, w := range []float64{rest, t} {
		for _, v := range c.species[i].smooth.(factored).Populations(nil, lnx) {
			dst = append(dst, w*v)
		}
	}
	return dst
}

// Restate gives the constants of both species as they are quoted.
func (a *assembly) Restate(theta []float64) []Restatement {
	out := []Restatement{plainly(a.constants[0], theta, 0)}
	for i := range a.parts {
		out = append(out, a.parts[i].restate(theta, len(a.constants))...)
	}
	return out
}

// Quote gives one quoted constant by key.
func (a *assembly) Quote(key string, theta []float64) (Restatement, bool) {
	for i := range a.parts {
		if r, ok := a.parts[i].quote(key, theta, len(a.constants)); ok {
			return r, true
		}
	}
	return quoted(a.Restate(theta), key)
}
