package mechanisms

import (
	"fmt"
	"slices"
)

const conformationsDoc = `Any number of conformations in equilibrium, each with its own sites and ligands.

	Z = Σ_c W_c Π_e (1 + y_e/K_ce)^(m_ce) (1 + x/K_c)^(n_c) ,  W of the first = 1

Each conformation has a weight W against the first, n_c sites of constant K_c (none: it
does not bind), and m_ce sites for effector e. mwc is the case of two conformations, T
with weight L and K_T = K_R/c.

Constants, under the names that the study gives:

	weights    [conformation]/[first one] without ligands    no unit
	K          dissociation constants of the ligand          ligand's unit
	effectors' dissociation constants                        effector's unit
	turnover_…, signal_…   where they are free               in units of the others

A name used twice is one constant. Conformations that are alike in everything but their
constants can be exchanged: give ranges where that matters. An effector that competes for
the ligand's sites is said so under effectors (at: ligand site).

Limits: weights → 0 leave the first conformation alone.

What data hold what: one binding curve holds at most n constants. A conformation that is
like another in its sites (held: {like: A, weight: r}) changes binding not at all; it shows
in a signal that sees only one of the two, such as the share of a repressor that is not on
its operator.

Keys: conformations ({A: {sites: 2, K: K_A}, I: {sites: 2, K: K_I, weight: L_I}}; like,
ligands, effector sites), effectors, turnover, sees (weights, or a list of names), constants.

Monod, Wyman & Changeux 1965, J. Mol. Biol. 12:88. Wyman & Gill 1990, Binding and Linkage.
`

// Any number of conformations in equilibrium, each with its own sites and ligands.
//
//	Z = Σ_c W_c Π_e (1 + y_e/K_ce)^(m_ce) (1 + x/K_c)^(n_c) ,  W of the first = 1
//
// Each conformation has a weight W against the first, n_c sites of constant K_c (none: it
// does not bind), and m_ce sites for effector e. mwc is the case of two conformations, T
// with weight L and K_T = K_R/c.
//
// Constants, under the names that the study gives:
//
//	weights    [conformation]/[first one] without ligands    no unit
//	K          dissociation constants of the ligand          ligand's unit
//	effectors' dissociation constants                        effector's unit
//	turnover_…, signal_…   where they are free               in units of the others
//
// A name used twice is one constant. Conformations that are alike in everything but their
// constants can be exchanged: give ranges where that matters. An effector that competes for
// the ligand's sites is said so under effectors (at: ligand site).
//
// Limits: weights → 0 leave the first conformation alone.
//
// What data hold what: one binding curve holds at most n constants. A conformation that is
// like another in its sites (held: {like: A, weight: r}) changes binding not at all; it shows
// in a signal that sees only one of the two, such as the share of a repressor that is not on
// its operator.
//
// Keys: conformations ({A: {sites: 2, K: K_A}, I: {sites: 2, K: K_I, weight: L_I}}; like,
// ligands, effector sites), effectors, turnover, sees (weights, or a list of names), constants.
//
// Monod, Wyman & Changeux 1965, J. Mol. Biol. 12:88. Wyman & Gill 1990, Binding and Linkage.
type conformational struct {
	sites     int
	constants []Constant
	effectors []string
	list      []conformer
	view      *view
}

func buildConformations(d Definition) (Mechanism, error) {
	var p problems
	p.unread(d, "conformations", "effectors", "turnover", "sees", "constants")
	p.effectors(d.Effectors)
	list := p.resolve(d.Conformations)
	p.views(d, conformationNames(list))
	if err := p.err(); err != nil {
		return nil, err
	}
	m := &conformational{}
	m.settle(&p, d, list)
	p.given(d, m.constants)
	p.countConstants(d, m.constants, m.sites, len(m.effectors) > 0 || m.view != nil)
	if err := p.err(); err != nil {
		return nil, err
	}
	return m, nil
}

func conformationNames(list []Conformation) []string {
	names := make([]string, len(list))
	for i, c := range list {
		names[i] = c.Name
	}
	return names
}

// resolve fills in what conformations take from others, and complains.
func (p *problems) resolve(given []Conformation) []Conformation {
	if len(given) == 0 {
		p.add("conformations", "no conformation is named", "conformations: {A: {sites: 2, K: K_A}, I: {sites: 2, K: K_I, weight: L_I}}")
		return nil
	}
	list := slices.Clone(given)
	seen := map[string]bool{}
	for i, c := range list {
		key := "conformations." + c.Name
		if seen[c.Name] {
			p.add(key, "this name is used twice", "a name of its own for each")
		}
		seen[c.Name] = true
		switch {
		case i == 0 && c.Weight != "":
			p.add(key+".weight", "the first conformation is the reference, of weight 1", "no weight here")
		case i > 0 && c.Weight == "":
			p.add(key+".weight", "the weight against the first conformation is missing", "weight: L_"+c.Name)
		}
		p.take(list, i, key)
		if list[i].Sites < 0 || list[i].Sites > maxSites {
			p.add(key+".sites", fmt.Sprintf("%d sites cannot be", list[i].Sites), fmt.Sprintf("at most %d", maxSites))
		}
		if list[i].K != "" && list[i].Sites == 0 {
			p.add(key+".sites", "the number of sites is missing", "sites: 2")
		}
	}
	if !slices.ContainsFunc(list, func(c Conformation) bool { return c.K != "" }) && p.err() == nil {
		p.add("conformations", "no conformation binds the ligand", "K: K_A and sites: 2 in one of them")
	}
	return list
}

// take copies sites and constants of the conformation that list[i] is like,
// where it does not give its own.
func (p *problems) take(list []Conformation, i int, key string) {
	c := &list[i]
	if c.Like == "" {
		return
	}
	at := slices.IndexFunc(list[:i], func(o Conformation) bool { return o.Name == c.Like })
	if at < 0 {
		p.add(key+".like", fmt.Sprintf("no conformation before this one is named %q", c.Like),
			"the name of one that stands above it")
		return
	}
	o := list[at]
	if c.Sites == 0 {
		c.Sites = o.Sites
	}
	if c.K == "" {
		c.K = o.K
	}
	if c.Ligands == nil {
		c.Ligands = o.Ligands
	}
	if c.EffectorSites == nil {
		c.EffectorSites = o.EffectorSites
	}
}

// settle lays out constants and conformers.
func (m *conformational) settle(p *problems, d Definition, list []Conformation) {
	m.effectors = effectorNames(p, d, list)
	roles := roles{index: map[string]int{}}
	for _, c := range list {
		m.sites = max(m.sites, boundBy(c))
	}
	for _, c := range list {
		f := conformer{name: c.Name}
		key := "conformations." + c.Name
		if c.Weight != "" {
			f.weight = blend{{roles.of(p, key+".weight", weightConstant(c)), 1}}
		}
		set := siteSet{sites: c.Sites, binds: c.K != ""}
		if set.binds {
			set.lnK = blend{{roles.of(p, key+".K", namedSiteConstant(c)), 1}}
		}
		for j, name := range m.effectors {
			symbol, ok := c.Ligands[name]
			if !ok {
				continue
			}
			k := roles.of(p, key+".ligands."+name, namedEffectorConstant(name, symbol))
			f.take(p, key, d, c, effectorSites{effector: j, sites: c.Sites, lnK: blend{{k, 1}}}, name, &set)
		}
		if set.sites > 0 {
			f.sets = []siteSet{set}
		}
		m.list = append(m.list, f)
	}
	m.constants = roles.list
	m.view = newView(d, m.list, &m.constants)
}

// take puts an effector on its own sites or on those of the ligand.
func (f *conformer) take(p *problems, key string, d Definition, c Conformation, e effectorSites, name string, set *siteSet) {
	at := slices.IndexFunc(d.Effectors, func(e Effector) bool { return e.Name == name })
	if at >= 0 && d.Effectors[at].AtLigandSite {
		set.rivals = append(set.rivals, e)
		if c.Sites == 0 {
			p.add(key+".sites", fmt.Sprintf("%s binds at the ligand's sites, and there are none here", name), "sites: 2")
		}
		if n, ok := c.EffectorSites[name]; ok && n != c.Sites {
			p.add(key, fmt.Sprintf("%s binds at the ligand's sites, so that their number is theirs", name), "no number of sites for it")
		}
		return
	}
	if n, ok := c.EffectorSites[name]; ok {
		e.sites = n
	}
	if e.sites < 1 || e.sites > 10*maxSites {
		p.add(key, fmt.Sprintf("%s needs a number of sites here", name), "how many sites it has")
		return
	}
	f.effectors = append(f.effectors, e)
}

func boundBy(c Conformation) int {
	if c.K == "" {
		return 0
	}
	return c.Sites
}

// effectorNames is those of the definition's own list, then others by name.
func effectorNames(p *problems, d Definition, list []Conformation) []string {
	var names []string
	for _, e := range d.Effectors {
		names = append(names, e.Name)
		if e.Binds != "" {
			p.add("effectors."+e.Name+".binds", "what it binds is said by the conformations themselves",
				"its constant under the conformation that binds it")
		}
		if !slices.ContainsFunc(list, func(c Conformation) bool { _, ok := c.Ligands[e.Name]; return ok }) {
			p.add("effectors."+e.Name, "no conformation binds it", "its constant under the conformation that binds it")
		}
	}
	more := map[string]bool{}
	for _, c := range list {
		for name := range c.Ligands {
			if !slices.Contains(names, name) {
				more[name] = true
			}
		}
		for name := range c.EffectorSites {
			if _, ok := c.Ligands[name]; !ok {
				p.add("conformations."+c.Name, fmt.Sprintf("%s has sites but no constant here", name), "its dissociation constant by name")
			}
		}
	}
	return append(names, sortedKeys(more)...)
}

// roles is the constants met so far, each with one role.
type roles struct {
	list  []Constant
	index map[string]int
}

// of is the index of a constant that several may share, if in the same role.
func (r *roles) of(p *problems, key string, c Constant) int {
	name := c.Key()
	if i, ok := r.index[name]; ok {
		if had := r.list[i]; had.Dimension != c.Dimension {
			p.add(key, fmt.Sprintf("%s is a weight in one place and a dissociation constant in another", name), "two names")
		}
		return i
	}
	r.index[name] = len(r.list)
	r.list = append(r.list, c)
	return len(r.list) - 1
}

func weightConstant(c Conformation) Constant {
	return Constant{Name: c.Weight, Scale: Log, Low: 1e-12, High: 1e40, StartLow: 1e-2, StartHigh: 1e8,
		EdgeLow: "conformation " + c.Name + " is not there without ligands",
		Meaning: "weight of conformation " + c.Name + " without ligands, the first having 1"}
}

func namedSiteConstant(c Conformation) Constant {
	k := siteConstant(c.K, "dissociation constant of conformation "+c.Name)
	k.StartLow, k.StartHigh = 1e-3, 1e3
	k.EdgeHigh = "conformation " + c.Name + " does not bind"
	return k
}

func namedEffectorConstant(effector, symbol string) Constant {
	return Constant{Name: symbol, Ligand: effector, Scale: Log, Dimension: 1, Low: 1e-8, High: 1e8,
		StartLow: 1e-2, StartHigh: 1e2, Meaning: "dissociation constant of " + effector}
}

func (m *conformational) Family() string        { return "conformations" }
func (m *conformational) Sites() int            { return m.sites }
func (m *conformational) Constants() []Constant { return slices.Clone(m.constants) }
func (m *conformational) Effectors() []string   { return slices.Clone(m.effectors) }

func (m *conformational) Curve() Curve {
	model := newConformers(m.list, m.sites, len(m.constants), m.view != nil)
	poly := newPolynomialCurve(m.sites, len(m.constants), model)
	poly.detail = model.detail()
	return m.view.watch(poly, &model.ensemble, model.of)
}
