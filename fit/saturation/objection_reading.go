package saturation

import (
	"context"
	"math"
	"slices"
	"strings"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// hillStudy is one data set read by a Hill equation for every curve, with the
// response, scatter model and axis that the study says.
type hillStudy struct {
	f        *fitted // nil where it could not be fitted
	readings []reading
}

// reading is half saturation and steepness of one curve, before any mechanism.
type reading struct {
	data   int
	curve  string // as points are labelled
	points []int  // in Dataset.Points: kept, not blocked
	lnK, h float64
	seLnK  float64
	// low and high are the ends of the profile interval of h at slopeLevel;
	// ∓Inf where there is none.
	low, high float64
	why       string // why there is nothing to be read
	cell      int
	free      map[int]float64 // ln of the free ligand, by point, on a total axis
}

// eachCurve is a factor that tells all curves of a data set apart; no study can
// have a factor of this name.
const eachCurve = "\x00curve"

// curveByCurve is one data set in which the curves are told apart by eachCurve.
func (a *Analysis) curveByCurve(di int) *Analysis {
	b := *a
	d := a.Data[di]
	d.Factors = append(slices.Clone(d.Factors), eachCurve)
	d.Points = slices.Clone(d.Points)
	for i := range d.Points {
		p := &d.Points[i]
		levels := slices.Clone(p.Levels)
		for len(levels) < len(d.Factors)-1 {
			levels = append(levels, "")
		}
		p.Levels = append(levels, a.pointLabel(&a.Data[di], p))
	}
	b.Data, b.Candidates, b.Contrasts = []Dataset{d}, nil, nil
	return &b
}

// asksReadable says of which curves nothing can be asked that needs half
// saturation and steepness, and why.
func (r *review) asksReadable(context.Context) {
	for di := range r.a.Data {
		a := answer{id: "unread-curves", group: foundGood, source: fromPractice,
			text: r.where(di) + "Every curve can be read by a Hill equation."}
		switch why := r.unread(di); {
		case len(r.hills[di].readings) == 0:
			a.group, a.remedy = settleFirst, "keep some of the points"
			a.text = r.where(di) + "No point is kept: nothing can be asked of its curves."
		case why != "":
			a.group = sayInPaper
			a.text = r.where(di) + "What is asked of half saturation and steepness cannot be asked: " + why + "."
			if r.binds(di) {
				a.remedy = "measure on both sides of half saturation"
			} else {
				a.group = forCompleteness
			}
		}
		r.add(a)
	}
}

// trimEach is a label of a curve as results print it.
func trimEach(label string) string { return strings.TrimPrefix(label, eachCurve+" ") }

// hillStudies reads every data set.
func (a *Analysis) hillStudies(ctx context.Context) []*hillStudy {
	list := make([]*hillStudy, len(a.Data))
	for di := range a.Data {
		list[di] = a.hillStudyOf(ctx, di)
	}
	return list
}

// readingStarts is the number of starts of a reading.
const readingStarts = 4

func (a *Analysis) hillStudyOf(ctx context.Context, di int) *hillStudy {
	s := &hillStudy{readings: a.curvesToRead(di)}
	if len(s.readings) == 0 {
		return s
	}
	why := ""
	switch d := &a.Data[di]; {
	case d.Trace:
		why = "is followed in time and holds no saturation curve"
	case d.Response.Of != "":
		why = "counts another ligand, so that no saturation curve of this one is drawn"
	}
	if why == "" {
		c, err := simpleCandidate("hill", mechanisms.Definition{})
		if err != nil {
			why = err.Error()
		} else {
			s.f = a.curveByCurve(di).fitCandidate(ctx, &c, fit.Settings{Starts: readingStarts,
				Seed: a.Settings.Seed, Workers: a.Settings.Workers})
			why = s.failed()
		}
	}
	if why != "" {
		s.f = nil
		for i := range s.readings {
			s.readings[i].why = why
		}
		return s
	}
	s.read(ctx)
	return s
}

// curvesToRead lists the curves of a data set with their points.
func (a *Analysis) curvesToRead(di int) []reading {
	var list []reading
	d := &a.Data[di]
	for i := range d.Points {
		p := &d.Points[i]
		if p.LeftOut != "" {
			continue
		}
		l := a.pointLabel(d, p)
		at := slices.IndexFunc(list, func(c reading) bool { return c.curve == l })
		if at < 0 {
			at = len(list)
			list = append(list, reading{data: di, curve: l, cell: -1})
		}
		if !p.Blocked {
			list[at].points = append(list[at].points, i)
		}
	}
	return list
}

// simpleCandidate is a mechanism whose constants all differ from curve to curve.
func simpleCandidate(family string, def mechanisms.Definition) (Candidate, error) {
	f, ok := mechanisms.Lookup(family)
	if !ok {
		return Candidate{}, &mechanisms.DefinitionError{Key: family, Problem: "no such family"}
	}
	def.Differs = true
	m, err := f.Build(def)
	if err != nil {
		return Candidate{}, err
	}
	return Candidate{Name: family, Family: family, Mechanism: m,
		Differs: map[string]string{"all": eachCurve}}, nil
}

// failed says why a Hill fit says nothing.
func (s *hillStudy) failed() string {
	switch {
	case s.f.result == nil && s.f.err != nil:
		return "could not be read by a Hill equation: " + s.f.err.Error()
	case s.f.result == nil || s.f.result.Status == fit.NoAnswer || s.f.result.Status == fit.Stopped:
		return "could not be read by a Hill equation: the fit found no minimum"
	}
	return ""
}

// read fills the readings from the fit.
func (s *hillStudy) read(ctx context.Context) {
	m, r := s.f.m, s.f.result
	pr, _ := fit.NewProfiler(s.f.problem, r, slopeLevel)
	cellOf := map[int]int{} // point → cell
	for _, q := range m.blocks[0].pts {
		cellOf[q.index] = q.cell
	}
	for k := range s.readings {
		c := &s.readings[k]
		if len(c.points) == 0 {
			c.why = "has no points with open sites"
			continue
		}
		c.cell = cellOf[c.points[0]]
		atK, atH := m.cells[c.cell].theta[0], m.cells[c.cell].theta[1]
		if r.Edges[atK] != fit.Inside || r.Edges[atH] != fit.Inside {
			c.why = "does not settle a Hill equation: K_half or n_H runs to a bound"
			continue
		}
		c.lnK, c.h = r.Theta[atK], math.Exp(r.Theta[atH])
		c.seLnK, c.low, c.high = s.error(atK), math.Inf(-1), math.Inf(1)
		if pr != nil {
			c.low, c.high = openEnds(pr.Parameter(ctx, atH))
			c.low, c.high = math.Exp(c.low), math.Exp(c.high)
		}
		s.solveAxis(c)
	}
}

// openEnds is an interval whose missing ends are infinite.
func openEnds(iv fit.Interval) (low, high float64) {
	low, high = iv.Low, iv.High
	if iv.LowOpen || iv.LowEdge {
		low = math.Inf(-1)
	}
	if iv.HighOpen || iv.HighEdge {
		high = math.Inf(1)
	}
	return low, high
}

// error is the standard error of a fitted number.
func (s *hillStudy) error(i int) float64 {
	if s.f.result.Cov == nil {
		return math.NaN()
	}
	return math.Sqrt(s.f.result.Cov.At(i, i))
}

// solveAxis finds the free ligand of every point on a total axis.
func (s *hillStudy) solveAxis(c *reading) {
	b := s.f.m.blocks[0]
	if !s.f.m.a.Data[b.data].Total {
		return
	}
	c.free = map[int]float64{}
	curve := s.f.m.boundCurve(c.cell, s.f.result.Theta)
	p := newPoint(len(s.f.m.consts))
	for i := range b.pts {
		if q := &b.pts[i]; q.cell == c.cell && !q.blocked {
			bal, _ := b.balanceOf(&b.rows[q.row], s.f.result.Theta)
			c.free[q.index] = freeLigand(curve, bal, p)
		}
	}
}

// lnFree is ln of the free ligand of a point.
func (c *reading) lnFree(d *Dataset, i int) float64 {
	if l, ok := c.free[i]; ok {
		return l
	}
	return math.Log(d.Points[i].X)
}

// at is the saturation that the reading gives at ln x.
func (c *reading) at(lnx float64) float64 { return expit(c.h * (lnx - c.lnK)) }

// levels lists ln of the free ligand of a curve, rising, one for every nonzero
// value on the axis: on a total axis the mean over the points of that value.
func (c *reading) levels(d *Dataset) []float64 {
	sum, n := map[float64]float64{}, map[float64]float64{}
	for _, i := range c.points {
		if x := d.Points[i].X; x > 0 {
			sum[x] += c.lnFree(d, i)
			n[x]++
		}
	}
	list := make([]float64, 0, len(n))
	for x := range n {
		list = append(list, sum[x]/n[x])
	}
	slices.Sort(list)
	return list
}

// end is a number of the response for a curve: as fitted, or as set. Where it
// differs among the points of the curve it is that of the first.
func (s *hillStudy) end(c *reading, pick func(*datum) int, set func(*Response) Setting) (v, se float64,
	at int) {
	b := s.f.m.blocks[0]
	for i := range b.pts {
		if q := &b.pts[i]; q.cell == c.cell && !q.blocked {
			j := pick(q)
			v = value(s.f.result.Theta, j, set(&b.resp))
			if j >= 0 {
				se = s.error(j)
			}
			return v, se, j
		}
	}
	return math.NaN(), math.NaN(), -1
}

func highEnd(q *datum) int            { return q.high }
func lowEnd(q *datum) int             { return q.low }
func highSetting(r *Response) Setting { return r.High }
func lowSetting(r *Response) Setting  { return r.Low }
