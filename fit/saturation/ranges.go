package saturation

import (
	"math"
	"sort"

	"ligancy/mechanisms"
)

// setRanges gives every parameter its bounds and the box of its starts, from
// what the study says and, where it is silent, from the data.
func (m *model) setRanges() {
	for i := range m.params {
		switch m.params[i].kind {
		case ofConstant:
			m.setConstantRange(i)
		case ofResponse:
			m.setResponseRange(i)
		case ofRate:
			m.setRateRange(i)
		case ofShift:
			m.params[i].StartLow, m.params[i].StartHigh = 0, 0
		}
	}
}

// setConstantRange translates a constant's reduced bounds to the data at hand.
func (m *model) setConstantRange(i int) {
	p := &m.params[i]
	c := m.consts[p.constant]
	unit := math.Pow(m.typical(i, c), float64(c.Dimension)) * math.Pow(m.protomers(i), float64(c.Protomers))
	p.Low, p.High = scaled(c, c.Low*unit), scaled(c, c.High*unit)
	p.StartLow, p.StartHigh = scaled(c, c.StartLow*unit), scaled(c, c.StartHigh*unit)
	g := m.given(p.constant)
	if g.Low != nil {
		p.Low = scaled(c, *g.Low)
	}
	if g.High != nil {
		p.High = scaled(c, *g.High)
	}
	if g.Start != nil {
		p.StartLow = scaled(c, *g.Start)
		p.StartHigh = p.StartLow
	}
	if g.Fixed != nil {
		v := scaled(c, *g.Fixed)
		p.Low, p.High, p.StartLow, p.StartHigh = v, v, v, v
		p.fixed = true
	}
	p.StartLow = math.Min(math.Max(p.StartLow, p.Low), p.High)
	p.StartHigh = math.Min(math.Max(p.StartHigh, p.Low), p.High)
}

// protomers is the geometric mean of the concentrations of protomers of the
// cells that parameter i governs, or 1.
func (m *model) protomers(i int) float64 {
	sum, n := 0.0, 0.0
	for ci := range m.cells {
		if p := m.cells[ci].env.Protomers; p > 0 && m.governs(i, ci) {
			sum += math.Log(p)
			n++
		}
	}
	if n == 0 {
		return 1
	}
	return math.Exp(sum / n)
}

// scaled puts a constant on the scale on which it is fitted.
func scaled(c mechanisms.Constant, v float64) float64 {
	switch c.Scale {
	case mechanisms.Linear:
		return v
	case mechanisms.Logit:
		return math.Log(v / (1 - v))
	}
	return math.Log(v)
}

// unscaled is the constant at a fitted value.
func unscaled(c mechanisms.Constant, theta float64) float64 {
	switch c.Scale {
	case mechanisms.Linear:
		return theta
	case mechanisms.Logit:
		return 1 / (1 + math.Exp(-theta))
	}
	return math.Exp(theta)
}

// typical is the concentration by which a constant's reduced bounds are
// multiplied: the ligand at half of the response of the points that the
// constant governs, or the geometric mean of an effector's levels.
func (m *model) typical(i int, c mechanisms.Constant) float64 {
	var pts []*Point
	var resp Response
	for _, b := range m.blocks {
		for _, q := range b.pts {
			if m.governs(i, q.cell) {
				pts = append(pts, m.a.Data[b.data].atLigand(q.index))
				resp = m.a.Data[b.data].Response
			}
		}
	}
	if c.Ligand != "" {
		return m.effectorScale(c.Ligand, pts)
	}
	return halfResponse(pts, resp)
}

// governs says whether parameter i is a constant of a cell.
func (m *model) governs(i, cell int) bool {
	for _, j := range m.cells[cell].theta {
		if j == i {
			return true
		}
	}
	return false
}

// effectorScale is the geometric mean of an effector's nonzero levels, or 1.
func (m *model) effectorScale(name string, pts []*Point) float64 {
	sum, n := 0.0, 0
	for j, e := range m.a.Effectors {
		if e.Name != name && e.Symbol != name {
			continue
		}
		for _, p := range pts {
			if j < len(p.Effectors) && p.Effectors[j] > 0 {
				sum += math.Log(p.Effectors[j])
				n++
			}
		}
	}
	if n == 0 {
		return 1
	}
	return math.Exp(sum / float64(n))
}

// halfResponse reads off the ligand at which the mean response crosses the
// middle of its range, by interpolation in ln x; the geometric mean of the
// ligand values where it does not cross. It is only where starts begin.
func halfResponse(pts []*Point, r Response) float64 {
	type level struct{ x, y, n float64 }
	var ls []level
	byX := map[float64]int{}
	for _, p := range pts {
		if p.X <= 0 || p.Blocked {
			continue
		}
		i, ok := byX[p.X]
		if !ok {
			i = len(ls)
			byX[p.X] = i
			ls = append(ls, level{x: p.X})
		}
		ls[i].y += p.Y
		ls[i].n++
	}
	if len(ls) == 0 {
		return 1
	}
	sort.Slice(ls, func(i, j int) bool { return ls[i].x < ls[j].x })
	low, high := math.Inf(1), math.Inf(-1)
	for i := range ls {
		ls[i].y /= ls[i].n
		low, high = math.Min(low, ls[i].y), math.Max(high, ls[i].y)
	}
	if !r.Low.Free {
		low = r.Low.Value
	}
	if !r.High.Free && r.Kind == "saturation" {
		high = r.High.Value
	}
	half := (low + high) / 2
	for i := 1; i < len(ls); i++ {
		a, b := ls[i-1], ls[i]
		if (a.y-half)*(b.y-half) <= 0 && a.y != b.y {
			t := (half - a.y) / (b.y - a.y)
			return math.Exp(math.Log(a.x) + t*(math.Log(b.x)-math.Log(a.x)))
		}
	}
	mean := 0.0
	for _, l := range ls {
		mean += math.Log(l.x)
	}
	return math.Exp(mean / float64(len(ls)))
}

// firstStarts are the starts before the drawn ones: the middle of every range.
func (m *model) firstStarts() [][]float64 {
	theta := make([]float64, len(m.params))
	for i, p := range m.params {
		if p.kind != ofShift {
			theta[i] = (p.StartLow + p.StartHigh) / 2
		}
	}
	return [][]float64{theta}
}
