package saturation

import (
	"context"
	"fmt"
	"math"
	"slices"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// refit fits the mechanism of f again to a study that is changed in one thing,
// from the constants that f found. A shift by preparation keeps its deviation.
func (f *fitted) refit(ctx context.Context, change func(*Analysis, *Candidate)) *fitted {
	a := *f.m.a
	a.Data = slices.Clone(a.Data)
	for i := range a.Data {
		a.Data[i].Points = slices.Clone(a.Data[i].Points)
	}
	c := *f.m.c
	change(&a, &c)
	g := &fitted{twinOf: -1, row: MechanismRow{Name: c.Name, Family: c.Family, Sites: f.row.Sites,
		Status: "no answer"}}
	if g.m, g.err = newModel(&a, &c); g.err != nil {
		return g
	}
	g.row.Constants, g.row.Points = g.m.free(), g.m.points()
	g.problem = g.m.problem()
	g.problem.Starts = [][]float64{g.m.startsFrom(f)}
	one := fit.Settings{Starts: 1, Workers: 1}
	if g.m.shift != nil {
		g.m.shift.lambda, g.m.shift.tau = f.m.shift.lambda, f.m.shift.tau
		g.result, g.err = fit.Solve(ctx, g.problem, one)
	} else {
		g.result, g.err = g.solve(ctx, one)
	}
	if g.err != nil || g.result == nil || g.result.Status == fit.NoAnswer {
		g.result = nil
		return g
	}
	g.describe()
	return g
}

// startsFrom is Θ of this model where f, of the same mechanism, has the same
// numbers; an end that f held fixed starts there.
func (m *model) startsFrom(f *fitted) []float64 {
	theta := m.firstStarts()[0]
	for i := range m.params {
		p := &m.params[i]
		j := slices.IndexFunc(f.m.params, func(q parameter) bool {
			return q.kind == p.kind && q.constant == p.constant && q.quantity == p.quantity &&
				q.data == p.data && q.curve == p.curve
		})
		switch {
		case j >= 0:
			theta[i] = f.result.Theta[j]
		case p.kind == ofResponse:
			theta[i] = f.m.endSet(p, theta[i])
		}
		theta[i] = math.Min(math.Max(theta[i], p.Low), p.High)
	}
	return theta
}

// endSet is the number at which an end of a response was held.
func (m *model) endSet(p *parameter, otherwise float64) float64 {
	for _, b := range m.blocks {
		if b.data != p.data {
			continue
		}
		switch p.quantity {
		case b.ends.low:
			return b.resp.Low.Value
		case b.ends.high:
			return b.resp.High.Value
		case b.ends.nonspecific:
			return b.resp.Nonspecific.Value
		}
	}
	return otherwise
}

// halves is ln of half saturation and n_H there, of every curve, by label.
func (f *fitted) halves() map[string][2]float64 {
	out := map[string][2]float64{}
	grad := make([]float64, len(f.m.params))
	for _, c := range f.m.curveCells() {
		out[f.m.cells[c].label] = [2]float64{
			f.m.measured(c, at(0.5))()(f.result.Theta, grad),
			f.m.measured(c, mechanisms.HillAtHalf)()(f.result.Theta, grad)}
	}
	return out
}

// quotedConstants are the constants as results print them, with their labels.
func (f *fitted) quotedConstants() (labels []string, values []float64) {
	list := f.m.restated(f.result.Theta)
	if list == nil {
		for i := range f.m.params {
			if f.m.params[i].kind == ofConstant && !f.m.params[i].fixed {
				list = append(list, f.m.parameterWanted(i))
			}
		}
	}
	grad := make([]float64, len(f.m.params))
	for _, w := range list {
		label := w.row.Name
		if w.row.Site != nil {
			label += " of " + *w.row.Site
		}
		if w.row.Ligand != nil && *w.row.Ligand != f.m.a.Ligand.Name {
			label += " of " + *w.row.Ligand
		}
		if w.row.Curve != "all" {
			label += ", " + w.row.Curve
		}
		labels = append(labels, label)
		values = append(values, w.back(w.make()(f.result.Theta, grad)))
	}
	return labels, values
}

// move is by how much half saturation and n_H of a curve move between two fits
// of one mechanism, and how that compares with their intervals.
type move struct {
	curve    string
	lnX, nH  float64
	ratio    float64 // of the larger one to half of its interval
	compared bool    // there is an interval
}

// moveBetween is the largest move: relative to the intervals that half gives for
// "x_half" (of the logarithm) and "n_H_half", or as it is where half is nil.
func moveBetween(f, g *fitted, half func(name, curve string) float64) move {
	from, to := f.halves(), g.halves()
	best := move{ratio: -1}
	for _, c := range f.m.curveCells() {
		label := f.m.cells[c].label
		v, ok := to[label]
		if !ok {
			continue
		}
		m := move{curve: label, lnX: v[0] - from[label][0], nH: v[1] - from[label][1]}
		for k, d := range []float64{m.lnX, m.nH} {
			d = math.Abs(d)
			if half != nil {
				if h := half([]string{"x_half", "n_H_half"}[k], label); h > 0 {
					d /= h
					m.compared = true
				} else {
					d = 0
				}
			}
			if !math.IsNaN(d) {
				m.ratio = math.Max(m.ratio, d)
			}
		}
		if m.ratio > best.ratio {
			best = m
		}
	}
	return best
}

// inWords is "n_H moves by +0.03 at pH 7.0, half saturation by 2.1 %".
func (m move) inWords() string {
	where := onCurve(trimEach(m.curve))
	switch n, x := math.IsNaN(m.nH), math.IsNaN(m.lnX); {
	case n && x:
		return "half saturation is lost" + where
	case n:
		return fmt.Sprintf("half saturation moves by %s%s, and n_H there is lost",
			factorWords(math.Exp(m.lnX)), where)
	case x:
		return fmt.Sprintf("n_H moves by %s%s", signed(m.nH), where)
	}
	return fmt.Sprintf("n_H moves by %s%s, half saturation by %s", signed(m.nH), where,
		factorWords(math.Exp(m.lnX)))
}
