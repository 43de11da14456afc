package saturation

import (
	"context"
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
	g := &fitted{twinOf: -1, row: MechanismRow{Name: c.Name, Family: c.Family, Sites: f.row.Sites, Status: "no answer"}}
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
			return q.kind == p.kind && q.constant == p.constant && q.quantity == p.quantity && q.data == p.data && q.curve == p.curve
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

// halfSlopes is n_H at half saturation of every curve, by label.
func (f *fitted) halfSlopes() map[string]float64 {
	out := map[string]float64{}
	grad := make([]float64, len(f.m.params))
	for _, c := range f.m.curveCells() {
		out[f.m.cells[c].label] = f.m.measured(c, mechanisms.HillAtHalf)()(f.result.Theta, grad)
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

// slopeMoves is by how much n_H at half saturation moves between two fits of
// one mechanism: the largest move, and of which curve.
func slopeMoves(f, g *fitted) (move float64, curve string) {
	from, to := f.halfSlopes(), g.halfSlopes()
	for _, c := range f.m.curveCells() {
		label := f.m.cells[c].label
		v, ok := to[label]
		if d := v - from[label]; ok && !(math.Abs(d) <= math.Abs(move)) && !math.IsNaN(d) {
			move, curve = d, label
		}
	}
	return move, curve
}
