package mechanisms

import (
	"errors"
	"fmt"
	"maps"
	"slices"
	"strings"
)

// part is one population of a mixture, or one species of an assembly, with its
// constants among those of the whole.
type part struct {
	name      string
	mechanism Mechanism
	// local is the part's own constants: each a combination of the whole's.
	local   []blend
	effects []int // index of each of the part's effectors among the whole's
}

// buildPart settles one part by itself, and says what is wrong with it under
// key.
func (p *problems) buildPart(key string, d Definition, s Part) Mechanism {
	if s.Family == "" {
		if s.Sites < 1 || s.Sites > maxSites {
			p.add(key, fmt.Sprintf("%d sites cannot be", s.Sites), fmt.Sprintf("a whole number from 1 to %d, or a mechanism", maxSites))
			return nil
		}
		m := independent{family: "independent", classes: []Count{{Sites: s.Sites}}}
		m.constants, m.lnK = siteConstants(m.classes)
		return m
	}
	family, ok := Lookup(s.Family)
	if !ok {
		p.add(key+".family", fmt.Sprintf("there is no family %q", s.Family), "one of "+strings.Join(familyNames(), ", "))
		return nil
	}
	var own Definition
	if s.Definition != nil {
		own = *s.Definition
	}
	own.Constants = maps.Clone(own.Constants)
	if own.Constants == nil {
		own.Constants = map[string]Given{}
	}
	for _, k := range sortedKeys(d.Constants) {
		if inner, ok := strings.CutPrefix(k, s.Name+"."); ok {
			own.Constants[inner] = d.Constants[k]
		}
	}
	own.SiteScale = own.SiteScale || d.SiteScale
	own.Differs = true // what the whole can hold is judged by the whole
	m, err := family.Build(own)
	p.under(key, err)
	if err != nil {
		return nil
	}
	if _, watched := m.Curve().(Watched); watched {
		p.add(key, "a part cannot have a turnover or a signal of its own", "the part without turnover and sees")
		return nil
	}
	return m
}

// under adds what is wrong with a part under its own key.
func (p *problems) under(key string, err error) {
	if err == nil {
		return
	}
	var one *DefinitionError
	if list, ok := err.(interface{ Unwrap() []error }); ok {
		for _, e := range list.Unwrap() {
			p.under(key, e)
		}
	} else if errors.As(err, &one) {
		p.add(key+"."+one.Key, one.Problem, one.Write)
	}
}

func familyNames() []string {
	list := Families()
	names := make([]string, len(list))
	for i, f := range list {
		names[i] = f.Name
	}
	return names
}

// place appends the part's constants to those of the whole, under its name.
func (s *part) place(constants *[]Constant, effectors *[]string) {
	for _, c := range s.mechanism.Constants() {
		c.Site = join(s.name, c.Site)
		s.local = append(s.local, blend{{len(*constants), 1}})
		*constants = append(*constants, c)
	}
	s.admit(effectors)
}

// admit finds the part's effectors among the whole's.
func (s *part) admit(effectors *[]string) {
	for _, e := range s.mechanism.Effectors() {
		at := slices.Index(*effectors, e)
		if at < 0 {
			at = len(*effectors)
			*effectors = append(*effectors, e)
		}
		s.effects = append(s.effects, at)
	}
}

// drop deletes what is said of the part's constants that are held at zero.
func (s *part) drop(given map[string]Given) {
	if z, ok := s.mechanism.(zeroed); ok {
		for _, key := range z.heldAtZero() {
			delete(given, join(s.name, key))
		}
	}
}

// zeroed is a mechanism some of whose usual constants are exactly zero, and
// no constants therefore.
type zeroed interface{ heldAtZero() []string }

func join(a, b string) string {
	if b == "" {
		return a
	}
	return a + "." + b
}

// AllGiven is what a definition says of constants, those of its parts included
// under the name of the part.
func (d Definition) AllGiven() map[string]Given {
	all := maps.Clone(d.Constants)
	if all == nil {
		all = map[string]Given{}
	}
	parts := slices.Clone(d.Parts)
	for name, s := range map[string]*Part{"small": d.Small, "large": d.Large} {
		if s != nil {
			parts = append(parts, Part{Name: name, Definition: s.Definition})
		}
	}
	for _, s := range parts {
		if s.Definition == nil {
			continue
		}
		for key, g := range s.Definition.AllGiven() {
			if _, said := all[join(s.Name, key)]; !said {
				all[join(s.Name, key)] = g
			}
		}
	}
	return all
}

// partCurve is the bound curve of a part.
type partCurve struct {
	smooth
	local []blend
	theta []float64
	pick  []int
	env   Environment
	jets  jet
}

func newPartCurve(s part) *partCurve {
	k := len(s.local)
	return &partCurve{smooth: s.mechanism.Curve().(smooth), local: s.local, theta: make([]float64, k), pick: s.effects,
		env: Environment{Effectors: make([]float64, len(s.effects))}, jets: newJet(k)}
}

// bind settles the part at the whole's constants.
func (s *partCurve) bind(theta []float64, env Environment) {
	for i, b := range s.local {
		s.theta[i] = b.at(theta)
	}
	for i, j := range s.pick {
		s.env.Effectors[i] = env.Effectors[j]
	}
	s.env.Protomers = env.Protomers
	s.Bind(s.theta, s.env)
}

// spread adds w times a gradient in the part's constants to one in the whole's.
func (s *partCurve) spread(row, g []float64, w float64) {
	for i, b := range s.local {
		b.addTo(row, w*g[i])
	}
}
