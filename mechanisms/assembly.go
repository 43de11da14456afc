package mechanisms

import (
	"fmt"
	"maps"
	"math"
	"slices"
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
