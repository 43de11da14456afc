package kinetics

import (
	"errors"
	"fmt"
	"slices"
	"strings"

	"ligancy/mechanisms"
)

// Rate names one rate constant, or one for each ligation.
//
// Its key is "k_on", "k_off" or "exchange", after the names of what it belongs to,
// joined by full stops: a part of a mixture, a conformation, a class of sites, an
// effector, a listed state ("alpha.k_on", "T.k_on", "alanine.k_on"). Of several keys
// that fit a step, the one with most names rules.
//
//	k_on      of one empty site               1/(ligand's unit · s)
//	k_off     of one filled site, in its place                  1/s
//	exchange  from the first conformation to another            1/s
type Rate struct {
	Key   string
	Count int // values: 1 (or 0), or one for each number of ligands bound before
}

// Problem is one thing wrong with the rates of a mechanism.
type Problem struct {
	Key     string // of the rate; "" where one is missing
	Problem string
	Write   string // what to write instead; may be empty
}

func (p *Problem) Error() string {
	s := p.Problem
	if p.Key != "" {
		s = "rates." + p.Key + ": " + s
	}
	if p.Write != "" {
		s += "; write " + p.Write
	}
	return s
}

// Model is a mechanism with rates. It is immutable and safe for concurrent use.
type Model struct {
	mechanism mechanisms.Mechanism
	net       *mechanisms.Network
	rates     []mechanisms.Constant
	of        []int  // of each step: its rate; −1 for a step without one
	back      []bool // of each step: its rate is that of the way back
	k         int
}

// New gives a mechanism rates, or says all that is wrong with them as a joined
// error of *Problem.
func New(m mechanisms.Mechanism, rates []Rate) (*Model, error) {
	net, err := mechanisms.NetworkOf(m)
	if err != nil {
		return nil, &Problem{Problem: err.Error(), Write: "a mechanism without rates"}
	}
	model := &Model{mechanism: m, net: net, k: len(m.Constants()), of: make([]int, len(net.Steps)), back: make([]bool, len(net.Steps))}
	a := assignment{Model: model, effectors: m.Effectors(), best: make([]int, len(net.Steps))}
	for e := range model.of {
		model.of[e], a.best[e] = -1, -1
	}
	a.owner = make([]string, len(net.Steps))
	for _, r := range rates {
		a.assign(r)
	}
	if len(a.problems) == 0 {
		a.connected()
	}
	if err := errors.Join(a.problems...); err != nil {
		return nil, err
	}
	return model, nil
}

// assignment is the rates on their way to the steps.
type assignment struct {
	*Model
	effectors []string
	best      []int    // names in the key of the rate that a step has
	owner     []string // that key
	problems  []error
}

func (a *assignment) complain(key, problem, write string) {
	a.problems = append(a.problems, &Problem{key, problem, write})
}

// assign gives one rate to the steps that it fits best.
func (a *assignment) assign(r Rate) {
	names := strings.Split(r.Key, ".")
	base := names[len(names)-1]
	names = names[:len(names)-1]
	kind := mechanisms.Binding
	effector := -1
	switch base {
	case "k_on", "k_off":
		at := slices.IndexFunc(names, func(n string) bool { return slices.Contains(a.effectors, n) })
		if at >= 0 {
			kind, effector = mechanisms.Uptake, slices.Index(a.effectors, names[at])
		}
	case "exchange":
		kind = mechanisms.Exchange
	default:
		a.complain(r.Key, fmt.Sprintf("%q is no rate constant", base), "k_on, k_off or exchange")
		return
	}
	var fits []int
	most := 0
	for e, s := range a.net.Steps {
		if s.Kind == kind && (effector < 0 || s.Effector == effector) && a.within(names, s) {
			fits = append(fits, e)
			most = max(most, s.Ligation+1)
		}
	}
	if len(fits) == 0 {
		a.alone(r.Key, kind, effector)
		return
	}
	count := max(1, r.Count)
	if count > 1 && count != most {
		a.complain(r.Key, fmt.Sprintf("%d values for %d ligations", count, most), fmt.Sprintf("one value, or a list of %d", most))
		return
	}
	first := a.lay(names, base, effector, count)
	for _, e := range fits {
		a.take(e, r.Key, len(names), first+min(a.net.Steps[e].Ligation, count-1), base == "k_off")
	}
}

// within says whether every name belongs to the step.
func (a *assignment) within(names []string, s mechanisms.NetworkStep) bool {
	for _, n := range names {
		if !slices.Contains(s.Labels, n) && !(s.Effector >= 0 && a.effectors[s.Effector] == n) {
			return false
		}
	}
	return true
}

// alone complains of a rate that no step takes.
func (a *assignment) alone(key string, kind mechanisms.StepKind, effector int) {
	switch {
	case kind == mechanisms.Exchange:
		a.complain(key, "has no partner: no two conformations of that name hold the same ligands", "no exchange, or the name of a conformation")
	case effector >= 0:
		a.complain(key, "has no partner: in this mechanism the effector is at rest always", "no rate for "+a.effectors[effector])
	default:
		a.complain(key, "has no partner: no site of that name binds the ligand", "k_on, or the name of a class of sites before it")
	}
}

// lay adds the constants of a rate and returns the place of the first.
func (a *assignment) lay(names []string, base string, effector, count int) int {
	first := len(a.rates)
	c := mechanisms.Constant{Name: base, Scale: mechanisms.Log, Low: 1e-30, High: 1e30, StartLow: 1e-3, StartHigh: 1e3}
	var site []string
	for _, n := range names {
		if effector < 0 || n != a.effectors[effector] {
			site = append(site, n)
		}
	}
	c.Site = strings.Join(site, ".")
	if effector >= 0 {
		c.Ligand = a.effectors[effector]
	}
	switch base {
	case "k_on":
		c.Dimension, c.Meaning = -1, "rate constant of binding to an empty site"
	case "k_off":
		c.Meaning = "rate constant of leaving a filled site"
	case "exchange":
		c.Meaning = "rate constant of the change of conformation, from the first one"
	}
	for i := range count {
		one := c
		if count > 1 {
			one.Name = fmt.Sprintf("%s%d", base, i+1)
		}
		a.rates = append(a.rates, one)
	}
	return first
}

// take gives a step a rate, unless it has one that is meant for it more narrowly.
func (a *assignment) take(e int, key string, names, rate int, back bool) {
	switch {
	case names < a.best[e]:
	case names == a.best[e] && a.owner[e] != key:
		s := a.net.Steps[e]
		a.complain(key, fmt.Sprintf("the step from %q to %q has this rate and %s as well: the constants of equilibrium give the other",
			a.net.States[s.From].Name, a.net.States[s.To].Name, a.owner[e]), "one of the two")
	default:
		a.of[e], a.best[e], a.owner[e], a.back[e] = rate, names, key, back
	}
}

// connected complains of states that no rates join to the others of their molecule.
func (a *assignment) connected() {
	cut := a.net.Unreached(nil, func(e int) bool { return a.of[e] >= 0 })
	if len(cut) == 0 {
		return
	}
	words := fmt.Sprintf("no rate leads to the state %q: it is cut off from the others", a.net.States[cut[0]].Name)
	if n := len(cut) - 1; n > 0 {
		words += fmt.Sprintf(", as are %d more", n)
	}
	a.complain("", words, a.missing(cut[0]))
}

// missing is the rate that would join a state.
func (a *assignment) missing(s int) string {
	for e, step := range a.net.Steps {
		if a.of[e] >= 0 || step.From != s && step.To != s {
			continue
		}
		switch step.Kind {
		case mechanisms.Exchange:
			return "exchange: 1e3 1/s"
		case mechanisms.Uptake:
			return a.effectors[step.Effector] + ".k_on, with its unit"
		default:
			return "k_on, with its unit"
		}
	}
	return "states that differ by one ligand, or have the same ligands"
}

// Mechanism is the mechanism that has the rates.
func (m *Model) Mechanism() mechanisms.Mechanism { return m.mechanism }

// Network is its states and steps.
func (m *Model) Network() *mechanisms.Network { return m.net }

// Rates lists the rate constants, fitted on ln scale; their order fixes that of φ.
// Bounds are in 1/s and the ligand's unit, not reduced.
func (m *Model) Rates() []mechanisms.Constant { return slices.Clone(m.rates) }

// Size is the number of constants: those of the mechanism, then the rates.
func (m *Model) Size() int { return m.k + len(m.rates) }
