package saturation

import (
	"context"
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// hillReading is what a Hill fit of these data would say of one curve of a
// fitted mechanism: the exponent of the Hill curve closest to the mechanism's
// predictions ŷ at the points of that curve, with the data's own weights,
// scatter model and free ends.
//
// Its standard error follows from the implicit function theorem on the normal
// equations, Jᵩᵀ(ŷ_Hill(φ) − ŷ(Θ)) = 0, second derivatives of the Hill curve
// left out (they are multiplied by the misfit): dφ/dΘ = (JᵩᵀJᵩ)⁻¹ Jᵩᵀ J_Θ.
type hillReading struct {
	h, se float64
	why   string
}

// hillReadingOf finds the reading of one cell.
func (f *fitted) hillReadingOf(ctx context.Context, cell int) hillReading {
	a, rows := f.hillStudy(cell)
	if len(rows) == 0 {
		return hillReading{why: "no points on this curve"}
	}
	hm, err := newModel(a, &a.Candidates[0])
	if err != nil {
		return hillReading{why: err.Error()}
	}
	r, err := fit.Solve(ctx, hm.problem(), fit.Settings{Starts: 4, Seed: 1, Workers: 1})
	if err != nil || r == nil || r.Status == fit.NoAnswer || r.Status == fit.Stopped {
		return hillReading{why: "no Hill curve comes closest to this one"}
	}
	at := -1
	for i, p := range hm.params {
		if p.kind == ofConstant && hm.consts[p.constant].Name == "n_H" {
			at = i
		}
	}
	h := unscaled(hm.consts[hm.params[at].constant], r.Theta[at])
	if r.Edges[at] != fit.Inside {
		return hillReading{h: h, why: "the closest Hill curve lies on a bound of its exponent"}
	}
	return hillReading{h: h, se: f.readingError(hm, r, rows, at) * h}
}

// hillStudy is an analysis of the predictions on one cell by the Hill equation.
func (f *fitted) hillStudy(cell int) (*Analysis, [][2]int) {
	src := f.m.a
	a := &Analysis{Ligand: src.Ligand, Effectors: src.Effectors, Kelvin: src.Kelvin, Settings: src.Settings}
	var rows [][2]int // block and point, in the order of the new points
	for bi, b := range f.m.blocks {
		d := src.Data[b.data]
		if d.Trace {
			continue
		}
		b.predict(f.result.Theta, false)
		pts := d.Points
		d.Points = nil
		for i, q := range b.pts {
			if q.cell != cell {
				continue
			}
			p := pts[q.index]
			p.Y = b.predicted(i)
			d.Points = append(d.Points, p)
			rows = append(rows, [2]int{bi, i})
		}
		if len(d.Points) > 0 {
			a.Data = append(a.Data, d)
		}
	}
	hill, ok := mechanisms.Lookup("hill")
	if !ok {
		return a, nil
	}
	def := mechanisms.Definition{}
	mech, err := hill.Build(def)
	if err != nil {
		return a, nil
	}
	a.Candidates = []Candidate{{Name: "Hill reading", Family: "hill", Mechanism: mech}}
	return a, rows
}

// readingError is the standard error of ln h.
func (f *fitted) readingError(hm *model, r *fit.Result, rows [][2]int, at int) float64 {
	if f.result.Cov == nil {
		return math.NaN()
	}
	n, p, q := len(rows), len(hm.params), len(f.m.params)
	jPhi, jTheta := mat.NewDense(n, p, nil), mat.NewDense(n, q, nil)
	i, predicted := 0, -1
	for _, b := range hm.blocks {
		b.predict(r.Theta, true)
		s := make([]float64, len(b.pts))
		b.noise.deviations(b, s, r.Theta)
		for j := range b.pts {
			for k, v := range b.work.jHat.RawRowView(b.pts[j].row) {
				jPhi.Set(i, k, v/s[j])
			}
			src := f.m.blocks[rows[i][0]]
			if predicted != rows[i][0] {
				src.predict(f.result.Theta, true)
				predicted = rows[i][0]
			}
			for k, v := range src.work.jHat.RawRowView(src.pts[rows[i][1]].row) {
				jTheta.Set(i, k, v/s[j])
			}
			i++
		}
	}
	var dPhi mat.Dense
	if err := dPhi.Solve(jPhi, jTheta); err != nil {
		return math.NaN()
	}
	g := mat.NewVecDense(q, mat.Row(nil, at, &dPhi))
	return math.Sqrt(mat.Inner(g, f.result.Cov, g))
}
