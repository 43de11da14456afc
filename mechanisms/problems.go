package mechanisms

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
)

// problems gathers what is wrong with a definition.
type problems struct{ list []error }

func (p *problems) add(key, problem, write string) {
	p.list = append(p.list, &DefinitionError{Key: key, Problem: problem, Write: write})
}

func (p *problems) err() error { return errors.Join(p.list...) }

// filled names the keys that a definition uses, as a study writes them.
func (d Definition) filled() []string {
	var keys []string
	say := func(key string, used bool) {
		if used {
			keys = append(keys, key)
		}
	}
	say("sites", d.Sites != 0 || len(d.SiteClasses) > 0)
	say("classes", len(d.Classes) > 0)
	say("contacts", d.Contacts != "" || len(d.Graph) > 0)
	say("effectors", len(d.Effectors) > 0)
	say("turnover", len(d.Turnover) > 0)
	say("sees", len(d.Sees) > 0)
	say("parts", len(d.Parts) > 0)
	say("small", d.Small != nil)
	say("large", d.Large != nil)
	say("conformations", len(d.Conformations) > 0)
	say("states", len(d.States) > 0)
	say("steps", len(d.Steps) > 0)
	say("constants", len(d.Constants) > 0)
	return keys
}

// unread complains of keys that the family does not read.
func (p *problems) unread(d Definition, reads ...string) {
	for _, key := range d.filled() {
		if !slices.Contains(reads, key) {
			p.add(key, "this family has no such key", "one of its own: "+strings.Join(reads, ", "))
		}
	}
}

// given complains of what is said of constants that do not exist, or cannot be.
func (p *problems) given(d Definition, constants []Constant) {
	for _, key := range sortedKeys(d.Constants) {
		at := Find(constants, key)
		if at < 0 {
			p.add("constants."+key, "this mechanism has no such constant", "one of "+keysOf(constants))
			continue
		}
		p.check("constants."+key, constants[at], d.Constants[key])
	}
}

// check complains of numbers that one constant cannot be.
func (p *problems) check(key string, c Constant, g Given) {
	say := func(word string, v *float64) {
		if ok, wants := c.admits(v); !ok {
			p.add(key+"."+word, fmt.Sprintf("%g cannot be: %s is %s", *v, c.Name, wants), wants)
		}
	}
	say("start", g.Start)
	say("fixed", g.Fixed)
	say("value", g.Value)
	say("range", g.Low)
	say("range", g.High)
	if g.Low != nil && g.High != nil && !(*g.Low < *g.High) {
		p.add(key+".range", fmt.Sprintf("the range ends at %g, not above its beginning %g", *g.High, *g.Low),
			"the smaller number first")
		return
	}
	if s := g.Start; s != nil && (g.Low != nil && *s < *g.Low || g.High != nil && *s > *g.High) {
		p.add(key+".start", fmt.Sprintf("the start %g lies outside the range", *s), "a start inside it")
	}
}

// admits says whether a constant can be v at all (nil: not said), and what it
// can be. Bounds of 1 are part of its meaning (c, ratio), others are only wide.
func (c Constant) admits(v *float64) (ok bool, wants string) {
	number := 0.5
	if v != nil {
		number = *v
	}
	finite := number < math.Inf(1)
	switch {
	case c.Scale == Linear:
		ok, wants = number >= 0 && finite, "a number not below 0"
	case c.Scale == Logit:
		ok, wants = number > 0 && number < 1, "a number between 0 and 1"
	case c.High == 1:
		ok, wants = number > 0 && number <= 1, "a number above 0 and not above 1"
	case c.Low == 1:
		ok, wants = number >= 1 && finite, "a number not below 1"
	default:
		ok, wants = number > 0 && finite, "a number above 0"
	}
	return ok || v == nil, wants
}

func sortedKeys[V any](m map[string]V) []string {
	keys := make([]string, 0, len(m))
	for k := range m {
		keys = append(keys, k)
	}
	slices.Sort(keys)
	return keys
}

func keysOf(constants []Constant) string {
	keys := make([]string, len(constants))
	for i, c := range constants {
		keys[i] = c.Key()
	}
	return strings.Join(keys, ", ")
}

// settled says whether a constant is held at a number.
func (g Given) settled() bool { return g.Fixed != nil || g.Value != nil }

// number is the fixed or given value.
func (g Given) number() float64 {
	if g.Fixed != nil {
		return *g.Fixed
	}
	return *g.Value
}

// said says whether anything is said of a constant.
func (g Given) said() bool {
	return g.settled() || g.Start != nil || g.Low != nil || g.High != nil
}

// countConstants asks for constants to be fixed where one curve cannot hold them
// all: n sites hold n (Middendorf & Aldrich 2017). Effectors, a response of its
// own, or constants that differ between curves bring more than one curve.
func (p *problems) countConstants(d Definition, constants []Constant, sites int, more bool) {
	if d.Differs || more {
		return
	}
	free, loose := 0, ""
	for i, c := range constants {
		if !d.fixes(constants, i) {
			free++
			if loose != "c" { // else the last one: as good as any
				loose = c.Key()
			}
		}
	}
	if free > sites {
		p.add("constants", fmt.Sprintf("one curve of %s holds at most %d constants, this mechanism has %d free ones "+
			"(Middendorf & Aldrich 2017)", sitesInWords(sites), sites, free),
			fmt.Sprintf("constants: {%s: {fixed: …}}, so that at most %d remain free", loose, sites))
	}
}

// fixes says whether constant i is held at a number.
func (d Definition) fixes(constants []Constant, i int) bool {
	for key, g := range d.Constants {
		if g.settled() && Find(constants, key) == i {
			return true
		}
	}
	return false
}

func sitesInWords(n int) string {
	if n == 1 {
		return "one site"
	}
	return fmt.Sprintf("%d sites", n)
}

// effectors complains of an effector that is named twice.
func (p *problems) effectors(list []Effector) {
	seen := map[string]bool{}
	for _, e := range list {
		if seen[e.Name] {
			p.add("effectors."+e.Name, "this effector is named twice", "each effector once")
		}
		seen[e.Name] = true
	}
}
