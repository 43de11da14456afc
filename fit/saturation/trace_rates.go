package saturation

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"ligancy/mechanisms"
	"ligancy/mechanisms/kinetics"
)

// Kinetics is the candidate's mechanism with its rates, or says what is wrong with
// them, all at once; nil where the study gives it none.
func (c *Candidate) Kinetics() (*kinetics.Model, error) {
	if len(c.Rates) == 0 {
		return nil, nil
	}
	var list []kinetics.Rate
	var all []error
	for _, key := range c.rateKeys() {
		r := c.Rates[key]
		list = append(list, kinetics.Rate{Key: key, Count: max(1, len(r.Each))})
		all = append(all, c.checkOrder(key, r.Order))
	}
	m, err := kinetics.New(c.Mechanism, list)
	if err := errors.Join(append(all, err)...); err != nil {
		return nil, fmt.Errorf("mechanism %q: %w", c.Name, err)
	}
	return m, nil
}

// rateKeys are the keys of the rates, in a fixed order.
func (c *Candidate) rateKeys() []string {
	var keys []string
	for key := range c.Rates {
		keys = append(keys, key)
	}
	slices.Sort(keys)
	return keys
}

// checkOrder complains of a rate constant whose unit is that of another kind.
func (c *Candidate) checkOrder(key string, order int) error {
	want := 1
	if key == "k_on" || strings.HasSuffix(key, ".k_on") {
		want = 2
	}
	if order == 0 || order == want {
		return nil
	}
	words := map[int]string{1: "1/s", 2: "1/(the ligand's unit · s)"}
	return &kinetics.Problem{Key: key, Problem: fmt.Sprintf("is in %s, but such a rate is in %s", words[order], words[want]), Write: words[want]}
}

// said is what the study says of every rate constant of a model, in its order.
func (c *Candidate) saidRates() []mechanisms.Given {
	var out []mechanisms.Given
	for _, key := range c.rateKeys() {
		r := c.Rates[key]
		if len(r.Each) == 0 {
			out = append(out, r.Given)
		}
		for i := range r.Each {
			g := r.Given
			g.Value = &r.Each[i]
			out = append(out, g)
		}
	}
	return out
}

// givenRates is φ, ln of the rates, from the study's own values.
func (c *Candidate) givenRates(m *kinetics.Model) ([]float64, error) {
	var phi []float64
	rates := m.Rates()
	for i, g := range c.saidRates() {
		v := math.NaN()
		for _, p := range []*float64{g.Value, g.Fixed, g.Start} {
			if p != nil && math.IsNaN(v) {
				v = *p
			}
		}
		if !(v > 0) {
			return nil, fmt.Errorf("mechanism %q has no value for the rate %s", c.Name, rates[i].Key())
		}
		phi = append(phi, math.Log(v))
	}
	return phi, nil
}

// rateUnit writes the unit of a rate constant.
func (a *Analysis) rateUnit(c mechanisms.Constant) string {
	unit := a.Ligand.Unit
	for _, e := range a.Effectors {
		if c.Ligand != "" && (e.Name == c.Ligand || e.Symbol == c.Ligand) {
			unit = e.Unit
		}
	}
	return rateUnit(unit, -c.Dimension)
}

// rateUnit is the unit of a rate of so many ligands taken up.
func rateUnit(unit string, ligands int) string {
	if ligands == 0 {
		return "1/s"
	}
	return "1/(" + power(unit, ligands) + " s)"
}

// program is what is done with the sample of one trace. A ligand column tells what
// was added in place of the first phase that adds; where no phase adds, it is the
// ligand with which the sample had come to rest.
func (d *Dataset) program(x float64) kinetics.Program {
	p := kinetics.Program{Phases: programPhases(d.Phases)}
	if d.Total {
		p.Sites = d.SitesPresent.Value
	}
	if !(x > 0) {
		return p
	}
	at := slices.IndexFunc(p.Phases, func(ph kinetics.Phase) bool { return ph.Action == kinetics.Add })
	if at < 0 {
		p.Loaded = x
		return p
	}
	p.Phases[at].Amount = x
	return p
}

func programPhases(list []Phase) []kinetics.Phase {
	var out []kinetics.Phase
	for _, ph := range list {
		q := kinetics.Phase{Seconds: ph.Seconds}
		switch {
		case ph.Add > 0:
			q.Action, q.Amount = kinetics.Add, ph.Add
		case ph.Dilute > 0:
			q.Action, q.Amount = kinetics.Dilute, ph.Dilute
		case ph.Block > 0:
			q.Action, q.Amount = kinetics.Block, ph.Block
		case ph.Wash:
			q.Action = kinetics.Wash
		}
		out = append(out, q)
	}
	return out
}

// traceLigand is the ligand that a trace is about: that of its column, else what the
// phases add.
func (d *Dataset) traceLigand(x float64) float64 {
	if x > 0 {
		return x
	}
	for _, ph := range d.Phases {
		if ph.Add > 0 {
			return ph.Add
		}
	}
	return 0
}

// hasTraces says whether any data set is followed in time.
func (a *Analysis) hasTraces() bool {
	return slices.ContainsFunc(a.Data, func(d Dataset) bool { return d.Trace })
}

// atLigand is a point with the ligand that it is about: on a trace without a ligand
// column, what the phases add.
func (d *Dataset) atLigand(index int) *Point {
	p := &d.Points[index]
	if !d.Trace || p.X > 0 {
		return p
	}
	q := *p
	q.X = d.traceLigand(p.X)
	return &q
}
