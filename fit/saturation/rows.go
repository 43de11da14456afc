package saturation

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"ligancy/mechanisms"
)

// pointRows lists every measurement beside the fit, left-out ones included.
func (f *fitted) pointRows() []PointRow {
	var out []PointRow
	for bi, b := range f.m.blocks {
		d := &f.m.a.Data[b.data]
		dev := f.deviations(b)
		sigma := f.blockSigma(bi)
		at := make(map[int]int, len(b.pts))
		for i, q := range b.pts {
			at[q.index] = i
		}
		for pi := range d.Points {
			p := &d.Points[pi]
			row := PointRow{Data: d.Name, Row: p.Row, X: Real(p.X), Y: Real(p.Y), Mechanism: f.row.Name, Fitted: nan, Residual: nan}
			if p.Preparation != "" {
				row.Preparation = text(p.Preparation)
			}
			if p.LeftOut != "" {
				row.LeftOut = text(p.LeftOut)
			}
			row.Curve = f.m.a.pointLabel(d, p)
			if i, ok := at[pi]; ok {
				row.Fitted = Real(b.predicted(i))
				row.Residual = Real((b.y[i] - b.predicted(i)) / (sigma * dev[i]))
			}
			out = append(out, row)
		}
	}
	return out
}

// pointLabel names the curve a measurement belongs to by all of its levels.
func (a *Analysis) pointLabel(d *Dataset, p *Point) string {
	var parts []string
	for j, key := range d.Factors {
		if j < len(p.Levels) {
			parts = append(parts, a.label(key, p.Levels[j]))
		}
	}
	for j := range a.Effectors {
		if j < len(p.Effectors) {
			parts = append(parts, a.label(a.Effectors[j].Name, number(p.Effectors[j])))
		}
	}
	return joinLabels(parts)
}

// Curves are drawn at gridPoints ligand values, from a gridMargin below the
// lowest tested one to as much above the highest.
const (
	gridPoints = 121
	gridMargin = 10
)

// curveRows samples every curve of a fit, with covariance bands.
func (f *fitted) curveRows() []CurveRow {
	var out []CurveRow
	low, high := f.m.a.testedRange()
	if !(low > 0) {
		return nil
	}
	lnLow, lnHigh := math.Log(low/gridMargin), math.Log(high*gridMargin)
	t := f.critical(f.m.a.Settings.Level)
	for _, ci := range f.m.curveCells() {
		c := f.m.boundCurve(ci, f.result.Theta)
		seen := watch(c)
		p, q := newPoint(len(f.m.consts)), newPoint(len(f.m.consts))
		for i := range gridPoints {
			lnx := lnLow + (lnHigh-lnLow)*float64(i)/(gridPoints-1)
			c.At(lnx, p)
			steep, s := p, p.Y
			if seen != c {
				seen.At(lnx, q)
				steep = q
				s = raw(seen, lnx)
			}
			row := CurveRow{Mechanism: f.row.Name, Curve: f.m.cells[ci].label, X: Real(math.Exp(lnx)),
				Saturation: Real(p.Y), NH: Real(steep.NH), Response: Real(f.responseAt(ci, s, math.Exp(lnx)))}
			se, seN := f.cellError(ci, p.GradY), f.cellError(ci, steep.GradNH)
			row.Low, row.High = logitBand(p.Y, t*se)
			row.NHLow, row.NHHigh = Real(steep.NH-t*seN), Real(steep.NH+t*seN)
			out = append(out, row)
		}
	}
	return out
}

// populationEvery thins the grid of the populations.
const populationEvery = 4

// populationRows samples the share of every state on every curve.
func (f *fitted) populationRows() []PopulationRow {
	low, high := f.m.a.testedRange()
	if !(low > 0) {
		return nil
	}
	var out []PopulationRow
	lnLow, lnHigh := math.Log(low/gridMargin), math.Log(high*gridMargin)
	for _, ci := range f.m.curveCells() {
		pop, ok := f.m.boundCurve(ci, f.result.Theta).(mechanisms.Populated)
		if !ok {
			continue
		}
		names := pop.StateNames()
		for i := 0; i < gridPoints; i += populationEvery {
			lnx := lnLow + (lnHigh-lnLow)*float64(i)/(gridPoints-1)
			for k, share := range pop.Populations(nil, lnx) {
				out = append(out, PopulationRow{f.row.Name, f.m.cells[ci].label, Real(math.Exp(lnx)), names[k], Real(share)})
			}
		}
	}
	return out
}

// raw is what a response sees at one ln x.
func raw(seen mechanisms.Curve, lnx float64) float64 {
	var y [1]float64
	seen.Saturation(y[:], []float64{lnx}, nil)
	return y[0]
}

// logitBand is a saturation with its interval, symmetric on the logit so that
// it stays between 0 and 1.
func logitBand(y, half float64) (low, high Real) {
	if !(y > 0 && y < 1) || math.IsNaN(half) {
		return nan, nan
	}
	l, h := math.Log(y/(1-y)), half/(y*(1-y))
	return Real(1 / (1 + math.Exp(h-l))), Real(1 / (1 + math.Exp(-h-l)))
}

// cellError is the standard error of a number with this gradient in a cell's constants.
func (f *fitted) cellError(cell int, grad []float64) float64 {
	if f.result.Cov == nil {
		return math.NaN()
	}
	g := mat.NewVecDense(len(f.m.params), nil)
	for k, j := range f.m.cells[cell].theta {
		g.SetVec(j, g.AtVec(j)+grad[k])
	}
	return math.Sqrt(mat.Inner(g, f.result.Cov, g))
}

// responseAt is the response on a cell's curve; NaN where its ends differ
// between the points of the curve.
func (f *fitted) responseAt(cell int, s, x float64) float64 {
	for _, b := range f.m.blocks {
		var first *datum
		for i := range b.pts {
			q := &b.pts[i]
			if q.cell != cell {
				continue
			}
			if first == nil {
				first = q
			} else if first.low != q.low || first.high != q.high || first.ns != q.ns {
				return math.NaN()
			}
		}
		if first == nil {
			continue
		}
		theta := f.result.Theta
		low, high := value(theta, first.low, b.resp.Low), value(theta, first.high, b.resp.High)
		if !b.ends.span {
			high -= low
		}
		return low + high*s + value(theta, first.ns, b.resp.Nonspecific)*x
	}
	return math.NaN()
}

// testedRange is the lowest and highest nonzero ligand value of the kept points.
func (a *Analysis) testedRange() (low, high float64) {
	low = math.Inf(1)
	for i := range a.Data {
		for _, p := range a.Data[i].Points {
			if p.LeftOut == "" && p.X > 0 {
				low, high = math.Min(low, p.X), math.Max(high, p.X)
			}
		}
	}
	if math.IsInf(low, 1) {
		return 0, 0
	}
	return low, high
}

// correlationRows lists the correlations of the estimates, each pair once.
func (f *fitted) correlationRows() []CorrelationRow {
	if f.result.Cov == nil {
		return nil
	}
	var out []CorrelationRow
	for i := range f.m.params {
		for j := range i {
			vi, vj := f.result.Cov.At(i, i), f.result.Cov.At(j, j)
			if vi <= 0 || vj <= 0 {
				continue
			}
			out = append(out, CorrelationRow{Mechanism: f.row.Name, A: f.m.params[j].title(), B: f.m.params[i].title(),
				R: Real(f.result.Cov.At(i, j) / math.Sqrt(vi*vj))})
		}
	}
	return out
}

// title names a parameter with the levels it holds for.
func (p *parameter) title() string {
	if p.curve == "all" {
		return p.Name
	}
	return p.Name + ", " + p.curve
}
