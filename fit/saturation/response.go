package saturation

import (
	"math"
	"slices"

	"ligancy/fit"
)

// ends are the names of a response's numbers, as the trade calls them.
//
//	ŷ = low + (high − low)·s + nonspecific·x
//
// where s is what the mechanism says (saturation, or what a signal sees). The
// upper number of a velocity is V and that of specific binding Bmax; both count
// from low: ŷ = low + V·s.
type ends struct {
	low, high, nonspecific string
	span                   bool // the upper number is a span above low, not an end
}

// endsOf names the numbers of a response of this kind.
func endsOf(kind string) ends {
	switch kind {
	case "bound":
		return ends{"low", "Bmax", "nonspecific", true}
	case "velocity":
		return ends{"low", "V", "", true}
	}
	return ends{"low", "high", "", false}
}

// layResponses adds the free numbers of every response and tells the points.
func (m *model) layResponses() {
	for _, b := range m.blocks {
		d := &m.a.Data[b.data]
		e := endsOf(d.Response.Kind)
		b.ends, b.resp = e, m.c.response(d.Response)
		if r := &b.resp; r.SitesPerMolecule && !r.High.Free && r.High.Value == 0 {
			r.High.Value = float64(m.c.Mechanism.Sites())
		}
		index := map[string]int{}
		for i := range b.pts {
			q := &b.pts[i]
			p := &d.Points[q.index]
			q.low = m.responseAt(b, d, p, e.low, b.resp.Low, index)
			q.high = m.responseAt(b, d, p, e.high, b.resp.High, index)
			q.ns = -1
			if e.nonspecific != "" {
				q.ns = m.responseAt(b, d, p, e.nonspecific, b.resp.Nonspecific, index)
			}
		}
	}
}

// response is a data set's response with the ends that the candidate says.
func (c *Candidate) response(r Response) Response {
	e := endsOf(r.Kind)
	for _, end := range []struct {
		name string
		at   *Setting
	}{{e.low, &r.Low}, {e.high, &r.High}, {e.nonspecific, &r.Nonspecific}} {
		if s, ok := c.Ends[end.name]; ok && end.name != "" {
			*end.at = s
		}
	}
	return r
}

// responseAt finds or makes the parameter of a response's number for a point;
// −1 where the number is fixed.
func (m *model) responseAt(b *block, d *Dataset, p *Point, name string, s Setting, index map[string]int) int {
	if !s.Free {
		return -1
	}
	level := ""
	if key, ok := d.Response.Differs[name]; ok {
		if l, ok := m.a.level(d, p, key); ok {
			level = m.a.label(key, l)
		}
	}
	sig := name + "\x00" + level
	if i, ok := index[sig]; ok {
		return i
	}
	index[sig] = len(m.params)
	curve := "all"
	if level != "" {
		curve = level
	} else if len(m.a.Data) > 1 {
		curve = d.Name
	}
	m.params = append(m.params, parameter{kind: ofResponse, quantity: name, data: b.data, curve: curve,
		Parameter: fit.Parameter{Name: name, Linear: b.linear() && (!d.Total || name == "low")}})
	return len(m.params) - 1
}

// setResponseRange bounds a response's number and says where it starts.
func (m *model) setResponseRange(i int) {
	p := &m.params[i]
	b := m.blocks[p.data]
	d := &m.a.Data[p.data]
	yLow, yHigh, xHigh := math.Inf(1), math.Inf(-1), 0.0
	for _, q := range b.pts {
		if !slices.Contains([]int{q.low, q.high, q.ns}, i) {
			continue
		}
		y := d.Points[q.index].Y
		yLow, yHigh = min(yLow, y), max(yHigh, y)
		xHigh = max(xHigh, b.counted(&row{x: d.Points[q.index].X, part: q.part}))
	}
	span := max(yHigh-yLow, 1e-12*math.Abs(yHigh), math.SmallestNonzeroFloat64)
	p.Low, p.High = math.Inf(-1), math.Inf(1)
	switch p.quantity {
	case "V", "Bmax":
		p.Low = 0
		p.StartLow, p.StartHigh = 0.8*span, 2*span
	case "nonspecific":
		p.Low = 0
		p.StartLow, p.StartHigh = 0, 0.5*span/max(xHigh, math.SmallestNonzeroFloat64)
	case "high":
		p.StartLow, p.StartHigh = yHigh-0.1*span, yHigh+0.5*span
	default:
		p.StartLow, p.StartHigh = yLow-0.2*span, yLow+0.1*span
	}
}
