package saturation

import (
	"context"
	"math"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// PreparationRow is one preparation on one curve, each fitted alone by a Hill
// equation; the row "mean" after them gives the mean of the logarithms of
// x_half and of n_H, with standard deviations over the n preparations: the
// preparation is the unit of replication, not the point.
type PreparationRow struct {
	Curve       string  `json:"curve"`
	Preparation string  `json:"preparation"`
	Points      int     `json:"points"`
	XHalf       Real    `json:"x_half"`
	NH          Real    `json:"n_H"`
	SDLnXHalf   Real    `json:"sd_ln_x_half"`
	SDNH        Real    `json:"sd_n_H"`
	N           int     `json:"n"`
	Why         *string `json:"why"`
}

// preparationRows fits every preparation of every curve alone. There are none
// where a data set names fewer than two.
func (a *Analysis) preparationRows(ctx context.Context) []PreparationRow {
	var out []PreparationRow
	for di := range a.Data {
		d := &a.Data[di]
		if d.Response.Of != "" {
			continue // a Hill equation does not bind a tracer
		}
		curves, byCurve := a.pointsByCurve(d)
		for _, curve := range curves {
			rows := a.preparationsOf(ctx, d, curve, byCurve[curve])
			if len(rows) > 1 {
				out = append(append(out, rows...), meanOfPreparations(curve, rows))
			}
		}
	}
	return out
}

// pointsByCurve gathers kept points by curve, in order of appearance.
func (a *Analysis) pointsByCurve(d *Dataset) (order []string, by map[string][]Point) {
	by = map[string][]Point{}
	for i := range d.Points {
		p := &d.Points[i]
		if p.LeftOut != "" {
			continue
		}
		l := a.pointLabel(d, p)
		if len(by[l]) == 0 {
			order = append(order, l)
		}
		by[l] = append(by[l], *p)
	}
	return order, by
}

// preparationsOf fits the preparations of one curve.
func (a *Analysis) preparationsOf(ctx context.Context, d *Dataset, curve string, pts []Point) []PreparationRow {
	var names []string
	by := map[string][]Point{}
	for _, p := range pts {
		if p.Preparation == "" {
			return nil
		}
		if len(by[p.Preparation]) == 0 {
			names = append(names, p.Preparation)
		}
		by[p.Preparation] = append(by[p.Preparation], p)
	}
	if len(names) < 2 {
		return nil
	}
	var rows []PreparationRow
	for _, name := range names {
		row := PreparationRow{Curve: curve, Preparation: name, Points: len(by[name]), XHalf: nan, NH: nan, SDLnXHalf: nan, SDNH: nan, N: 1}
		x, h, why := a.hillAlone(ctx, d, by[name])
		if why != "" {
			row.Why = text(why)
		} else {
			row.XHalf, row.NH = Real(x), Real(h)
		}
		rows = append(rows, row)
	}
	return rows
}

// hillAlone fits a Hill equation to a few points of a data set.
func (a *Analysis) hillAlone(ctx context.Context, d *Dataset, pts []Point) (xHalf, nH float64, why string) {
	b := *a
	one := *d
	one.Points = pts
	b.Data = []Dataset{one}
	family, ok := mechanisms.Lookup("hill")
	if !ok {
		return 0, 0, "no Hill equation"
	}
	mech, err := family.Build(mechanisms.Definition{})
	if err != nil {
		return 0, 0, err.Error()
	}
	b.Candidates = []Candidate{{Name: "Hill equation", Family: "hill", Mechanism: mech}}
	f := b.fitCandidate(ctx, &b.Candidates[0], fit.Settings{Starts: 8, Seed: b.Settings.Seed, Workers: 1})
	switch {
	case f.result == nil && f.row.Why != nil:
		return 0, 0, *f.row.Why
	case f.result == nil || !f.answered() && f.row.Why == nil:
		return 0, 0, "the fit of this preparation alone did not converge"
	case f.row.Status == "at an edge":
		return 0, 0, "this preparation alone does not settle the curve: " + *f.row.Edge
	}
	for i, p := range f.m.params {
		if p.kind != ofConstant {
			continue
		}
		v := unscaled(f.m.consts[p.constant], f.result.Theta[i])
		if f.m.consts[p.constant].Name == "n_H" {
			nH = v
		} else {
			xHalf = v
		}
	}
	return xHalf, nH, ""
}

// meanOfPreparations is the row of means.
func meanOfPreparations(curve string, rows []PreparationRow) PreparationRow {
	var lnX, h []float64
	points := 0
	for _, r := range rows {
		points += r.Points
		if r.Why == nil {
			lnX, h = append(lnX, math.Log(float64(r.XHalf))), append(h, float64(r.NH))
		}
	}
	m := PreparationRow{Curve: curve, Preparation: "mean", Points: points, N: len(lnX)}
	mean, sd := meanAndSD(lnX)
	m.XHalf, m.SDLnXHalf = Real(math.Exp(mean)), Real(sd)
	mean, sd = meanAndSD(h)
	m.NH, m.SDNH = Real(mean), Real(sd)
	return m
}

// meanAndSD over n values; the SD of fewer than two does not exist.
func meanAndSD(v []float64) (mean, sd float64) {
	if len(v) == 0 {
		return math.NaN(), math.NaN()
	}
	for _, x := range v {
		mean += x / float64(len(v))
	}
	if len(v) < 2 {
		return mean, math.NaN()
	}
	for _, x := range v {
		sd += (x - mean) * (x - mean)
	}
	return mean, math.Sqrt(sd / float64(len(v)-1))
}
