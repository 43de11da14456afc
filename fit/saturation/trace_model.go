package saturation

import (
	"errors"
	"fmt"
	"math"

	"ligancy/fit"
	"ligancy/mechanisms"
	"ligancy/mechanisms/kinetics"
)

// timing is a model's rates: what of Θ they are. Rates are shared by all curves. Of a
// cycle, whose constants are rates, there are none beside them.
type timing struct {
	kinetics *kinetics.Model   // of binding
	driven   mechanisms.Driven // of catalysis; nil else
	rates    []mechanisms.Constant
	at       []int // rate → Θ
}

// layRates adds the rates to the parameters where traces ask for them.
func (m *model) layRates() error {
	if !m.a.hasTraces() {
		return nil
	}
	if d, ok := m.c.Mechanism.(mechanisms.Driven); ok {
		m.timing = &timing{driven: d}
		return nil
	}
	k, err := m.c.Kinetics()
	if err != nil {
		return err
	}
	if k == nil {
		return fmt.Errorf("mechanism %q has no rates, and there are traces: write rates: {k_on: …}", m.c.Name)
	}
	m.timing = &timing{kinetics: k, rates: k.Rates()}
	for i, c := range m.timing.rates {
		m.timing.at = append(m.timing.at, len(m.params))
		m.params = append(m.params, parameter{kind: ofRate, constant: i, curve: "all",
			Parameter: fit.Parameter{Name: displayName(c), StartLow: math.NaN(), StartHigh: math.NaN()}})
	}
	return nil
}

// follower makes a workspace that follows traces.
func (t *timing) follower() kinetics.Follower {
	if t.driven != nil {
		return kinetics.NewProgress(t.driven)
	}
	return t.kinetics.Bound()
}

// Bounds and starts of a rate about the value that the study gives, as factors.
const (
	rateReach = 1e9
	rateStart = 30.
)

// setRateRange bounds a rate and says where it starts: about a bare value of the
// study; where the study says nothing, about what the traces last.
func (m *model) setRateRange(i int) {
	p := &m.params[i]
	g := m.c.saidRates()[p.constant]
	middle, spread := m.traceRate(m.timing.rates[p.constant]), 1e3
	if g.Value != nil {
		middle, spread = *g.Value, rateStart
	}
	if g.Start != nil {
		middle, spread = *g.Start, 1
	}
	p.Low, p.High = math.Log(middle/rateReach), math.Log(middle*rateReach)
	p.StartLow, p.StartHigh = math.Log(middle/spread), math.Log(middle*spread)
	if g.Low != nil && g.High != nil && g.Start == nil {
		p.StartLow, p.StartHigh = math.Log(*g.Low), math.Log(*g.High)
	}
	if g.Low != nil {
		p.Low = math.Log(*g.Low)
	}
	if g.High != nil {
		p.High = math.Log(*g.High)
	}
	if g.Fixed != nil {
		v := math.Log(*g.Fixed)
		p.Low, p.High, p.StartLow, p.StartHigh = v, v, v, v
		p.fixed = true
	}
	p.StartLow = math.Min(math.Max(p.StartLow, p.Low), p.High)
	p.StartHigh = math.Min(math.Max(p.StartHigh, p.Low), p.High)
}

// traceRate is a rate that the traces would show: one over the geometric mean of
// their times, and over that of their ligand for one of second order.
func (m *model) traceRate(c mechanisms.Constant) float64 {
	lnT, lnX, nT, nX := 0.0, 0.0, 0, 0
	for di := range m.a.Data {
		d := &m.a.Data[di]
		if !d.Trace {
			continue
		}
		for _, p := range d.Points {
			if p.Seconds > 0 {
				lnT += math.Log(p.Seconds)
				nT++
			}
			if x := d.traceLigand(p.X); x > 0 {
				lnX += math.Log(x)
				nX++
			}
		}
	}
	ln := -lnT / math.Max(1, float64(nT))
	if c.Dimension < 0 {
		ln -= lnX / math.Max(1, float64(nX))
	}
	return math.Exp(ln)
}

// trace is one sample followed in time: rows of one cell and one ligand value.
type trace struct {
	curve   int // in block.curves
	program kinetics.Program
	times   []float64
	at      []int // place of each time in the curve
}

// layTraces gathers the traces of every block and says what cannot be followed.
func (m *model) layTraces() error {
	var all []error
	for _, b := range m.blocks {
		d := &m.a.Data[b.data]
		if !d.Trace {
			continue
		}
		if d.Total && (!(d.SitesPresent.Value > 0) || d.SitesPresent.FromBmax > 0 || b.ends.nonspecific != "" && b.resp.Nonspecific.Free) {
			all = append(all, fmt.Errorf("data %q: a trace that uses up its ligand needs sites_present as a number and no free nonspecific", d.Name))
			continue
		}
		if b.tracer >= 0 {
			all = append(all, fmt.Errorf("data %q: a trace follows the varied ligand, not %s", d.Name, d.Response.Of))
			continue
		}
		for ci := range b.curves {
			b.gatherTraces(ci)
		}
		for i := range b.traces {
			if err := b.traces[i].program.Check(b.traces[i].times); err != nil {
				all = append(all, fmt.Errorf("data %q: %w", d.Name, err))
			}
		}
	}
	return errors.Join(all...)
}
