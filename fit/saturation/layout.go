package saturation

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// paramKind says what a fitted number belongs to.
type paramKind uint8

const (
	ofConstant paramKind = iota
	ofResponse
	ofNoise
	ofShift
	ofRate
)

// parameter is one fitted number of a model: a constant of the mechanism at one
// level, an end of a response, or a number of the scatter model.
type parameter struct {
	fit.Parameter
	kind     paramKind
	constant int    // index among the mechanism's constants
	quantity string // "low", "V", "Bmax", …, of a response
	data     int    // data set of a response quantity
	curve    string // "all", or the levels it holds for
	fixed    bool
}

// cell is one curve of a mechanism: the parameters that are its constants, and
// its environment. Points that share a cell share one binding of the constants.
type cell struct {
	theta []int // constant k → index in Θ
	env   mechanisms.Environment
	shift int    // place in Θ of the shift of ln K of its preparation; −1
	label string // the levels that set it apart from the other cells
	keys  []string
}

// model is a candidate laid over the data: what Θ means, and which points see which part of it.
type model struct {
	a      *Analysis
	c      *Candidate
	consts []mechanisms.Constant
	params []parameter
	cells  []cell
	blocks []*block
	shift  *shift  // nil without a shift by preparation
	timing *timing // nil without traces
}

// newModel lays out a candidate's parameters over the data.
func newModel(a *Analysis, c *Candidate) (*model, error) {
	m := &model{a: a, c: c, consts: c.Mechanism.Constants()}
	effectors, err := m.effectorColumns()
	if err != nil {
		return nil, err
	}
	m.layShift()
	if err := errors.Join(m.shiftable(), m.assemblable()); err != nil {
		return m, err
	}
	index := map[string]int{}  // constant and level → Θ
	cellAt := map[string]int{} // cell signature → cells
	for di := range a.Data {
		b := &block{m: m, data: di}
		if b.mech, b.tracer, err = countedMechanism(c.Mechanism, &a.Data[di]); err != nil {
			return nil, err
		}
		m.blocks = append(m.blocks, b)
		for pi := range a.Data[di].Points {
			p := &a.Data[di].Points[pi]
			if p.LeftOut != "" {
				continue
			}
			ci := m.cellOf(di, p, effectors, index, cellAt)
			b.add(pi, p, ci)
		}
	}
	if m.points() == 0 {
		return m, errors.New("no points are kept")
	}
	if err := m.layRates(); err != nil {
		return m, err
	}
	m.layResponses()
	m.layNoise()
	m.setRanges()
	if err := m.layTraces(); err != nil {
		return m, err
	}
	for _, b := range m.blocks {
		b.prepare()
	}
	return m, m.enoughPoints()
}

// effectorColumns finds the mechanism's effectors among the analysis's.
func (m *model) effectorColumns() ([]int, error) {
	var cols []int
	for _, name := range m.c.Mechanism.Effectors() {
		j := slices.IndexFunc(m.a.Effectors, func(s Substance) bool { return s.Name == name || s.Symbol == name })
		if j < 0 {
			return nil, fmt.Errorf("mechanism %q: no effector %q in the study", m.c.Name, name)
		}
		cols = append(cols, j)
	}
	return cols, nil
}

// differsBy says by which key a constant differs; "" if it is shared.
func (m *model) differsBy(k int) string {
	for _, name := range constantNames(m.consts, k) {
		if key, ok := m.c.Differs[name]; ok {
			return key
		}
	}
	if key, ok := m.c.Differs["all"]; ok {
		return key
	}
	return ""
}

// constantNames are the names by which a study may call constant k: its key,
// and its bare symbol where no other constant has it.
func constantNames(all []mechanisms.Constant, k int) []string {
	names := []string{all[k].Key()}
	if bare := all[k].Name; bare != names[0] && mechanisms.Find(all, bare) == k {
		names = append(names, bare)
	}
	return names
}

// given is what the study says of a constant.
func (m *model) given(k int) mechanisms.Given {
	for _, name := range constantNames(m.consts, k) {
		if g, ok := m.c.Given[name]; ok {
			return g
		}
	}
	return mechanisms.Given{}
}

// cellOf finds or makes the cell of a point.
func (m *model) cellOf(di int, p *Point, effectors []int, index, cellAt map[string]int) int {
	d := &m.a.Data[di]
	cl := cell{theta: make([]int, len(m.consts))}
	used := map[string]string{}
	for k := range m.consts {
		key := m.differsBy(k)
		level := ""
		if key != "" {
			if l, ok := m.a.level(d, p, key); ok {
				level = m.a.label(key, l)
				used[key] = level
			}
		}
		cl.theta[k] = m.parameterAt(k, level, index)
	}
	for _, j := range effectors {
		y := 0.0
		if j < len(p.Effectors) {
			y = p.Effectors[j]
		}
		cl.env.Effectors = append(cl.env.Effectors, y)
		used[m.a.Effectors[j].Name] = m.a.label(m.a.Effectors[j].Name, number(y))
	}
	if m.assembles() && d.SitesPresent.Value > 0 {
		cl.env.Protomers = d.SitesPresent.Value
		if len(m.a.Data) > 1 {
			used[byData] = d.Name
		}
	}
	cl.shift = m.shiftAt(p.Preparation)
	cl.keys, cl.label = m.curveLabel(d, used)
	sig := fmt.Sprint(cl.theta, cl.env, cl.shift)
	if i, ok := cellAt[sig]; ok {
		return i
	}
	cellAt[sig] = len(m.cells)
	m.cells = append(m.cells, cl)
	return len(m.cells) - 1
}

// assembles says whether the mechanism's curves depend on how much of the
// macromolecule there is.
func (m *model) assembles() bool {
	return slices.ContainsFunc(m.consts, func(c mechanisms.Constant) bool { return c.Protomers != 0 })
}

// assemblable refuses an assembly whose concentration is not said.
func (m *model) assemblable() error {
	if !m.assembles() {
		return nil
	}
	for i := range m.a.Data {
		if !(m.a.Data[i].SitesPresent.Value > 0) {
			return fmt.Errorf("data set %q does not say how much of the macromolecule there is, on which assembly depends: write sites_present: 80 uM under it", m.a.Data[i].Name)
		}
	}
	return nil
}

// curveLabel joins the levels in the order of the data set's factors, then
// effectors, then data set and preparation.
func (m *model) curveLabel(d *Dataset, used map[string]string) (keys []string, label string) {
	order := slices.Clone(d.Factors)
	for _, e := range m.a.Effectors {
		order = append(order, e.Name, e.Symbol)
	}
	order = append(order, byData, byPreparation)
	var parts []string
	for _, key := range order {
		if l, ok := used[key]; ok && l != "" && !slices.Contains(keys, key) {
			keys = append(keys, key)
			parts = append(parts, l)
		}
	}
	return keys, joinLabels(parts)
}

// parameterAt finds or makes the parameter of constant k at a level.
func (m *model) parameterAt(k int, level string, index map[string]int) int {
	sig := fmt.Sprint(k, "\x00", level)
	if i, ok := index[sig]; ok {
		return i
	}
	index[sig] = len(m.params)
	curve := "all"
	if level != "" {
		curve = level
	}
	m.params = append(m.params, parameter{kind: ofConstant, constant: k, curve: curve,
		Parameter: fit.Parameter{Name: displayName(m.consts[k]), StartLow: math.NaN(), StartHigh: math.NaN()}})
	return len(m.params) - 1
}

// displayName is how results call a constant: "K_R", "K_T of alanine", "K_R of alpha".
func displayName(c mechanisms.Constant) string {
	switch {
	case c.Ligand != "":
		return c.Name + " of " + c.Ligand
	case c.Site != "" && c.Site != c.Name:
		return c.Name + " of " + c.Site
	}
	return c.Name
}

// enoughPoints refuses fits with no more points than constants.
func (m *model) enoughPoints() error {
	n, free := m.points(), m.free()
	if n <= free {
		return fmt.Errorf("%d points cannot hold %d constants: leave out this mechanism, share or fix constants, or measure more", n, free)
	}
	return nil
}

// seen is the mechanism whose response derived numbers speak of: that of the
// data sets, where all of them see the same.
func (m *model) seen() mechanisms.Mechanism {
	first := m.c.Mechanism
	for i, b := range m.blocks {
		if i == 0 && b.tracer >= 0 {
			first = b.mech
		}
		if b.tracer != m.blocks[0].tracer {
			return m.c.Mechanism
		}
	}
	return first
}

// problem is the least-squares problem of the model.
func (m *model) problem() *fit.Problem {
	p := &fit.Problem{}
	for _, q := range m.params {
		p.Parameters = append(p.Parameters, q.Parameter)
	}
	for _, b := range m.blocks {
		p.Blocks = append(p.Blocks, b)
		p.Scatter = append(p.Scatter, b.scatter())
	}
	p.Starts = m.firstStarts()
	return p
}

// over is the model over other blocks, which from then on are its own.
func (m *model) over(blocks []fit.Block) *model {
	c := *m
	c.blocks = nil
	if m.shift != nil {
		s := *m.shift
		c.shift = &s
	}
	for _, b := range blocks {
		own := b.(*block)
		own.m = &c
		c.blocks = append(c.blocks, own)
	}
	return &c
}

// curveCells lists one cell of every curve: those that only a shift by
// preparation sets apart are one curve, that of no shift.
func (m *model) curveCells() []int {
	var list []int
	done := map[string]bool{}
	for i := range m.cells {
		sig := fmt.Sprint(m.cells[i].theta, m.cells[i].env)
		if !done[sig] {
			done[sig] = true
			list = append(list, i)
		}
	}
	return list
}
