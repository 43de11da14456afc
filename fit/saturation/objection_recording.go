package saturation

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
)

const (
	recordingSource = "effective number N(1 − ρ)/(1 + ρ) with ρ the lag-1 autocorrelation: standard for " +
		"an autoregressive series, from memory"
	// recordingPoints is the least number of ligand values in one series of one
	// preparation that makes it a recording.
	recordingPoints = 30
	z99             = 2.58
)

// asksRecording asks whether neighbouring points repeat one another, as those of
// a continuous recording do.
func (r *review) asksRecording(context.Context) {
	for di := range r.a.Data {
		if !r.binds(di) || r.hills[di].f == nil {
			continue
		}
		rho, n, longest := r.neighbours(di)
		a := answer{id: "correlated-points", group: foundGood, source: recordingSource}
		if n == 0 {
			a.text = fmt.Sprintf("%sPoints are single measurements, not a continuous recording (at most "+
				"%d ligand values in a series).",
				r.where(di), longest)
			r.add(a)
			continue
		}
		points := float64(r.kept(di))
		a.text = fmt.Sprintf("%sNeighbouring residuals of the recording are not correlated (ρ = %s).",
			r.where(di), figures(rho, 2))
		if rho > z99/math.Sqrt(n) {
			effective := points * (1 - rho) / (1 + rho)
			a.group = sayInPaper
			if effective < points/2 {
				a.group = settleFirst
			}
			a.text = fmt.Sprintf("%sNeighbouring residuals are correlated (ρ = %s): %.0f points are "+
				"worth about %.0f.",
				r.where(di), figures(rho, 2), points, effective)
			a.effect = fmt.Sprintf("Intervals, that of n_H among them, are too narrow by a factor of %s.",
				figures(math.Sqrt(points/effective), 3))
			a.remedy = "thin the recording, or count recordings, not points"
		}
		r.add(a)
	}
}

func (r *review) kept(di int) (n int) {
	for i := range r.a.Data[di].Points {
		if r.a.Data[di].Points[i].LeftOut == "" {
			n++
		}
	}
	return n
}

// neighbours is the lag-1 autocorrelation of the residuals of recordings, in the
// order of the ligand within one curve and preparation, over n pairs. A smooth
// trend is taken off first: it is misfit of the curve, or what the points share
// with all others of their preparation. longest is the largest number of ligand
// values in any series.
func (r *review) neighbours(di int) (rho, n float64, longest int) {
	num, den := 0.0, 0.0
	res := r.residuals(di)
	for _, list := range r.series(di, res) {
		longest = max(longest, r.distinct(di, list))
		m := float64(len(list))
		if r.distinct(di, list) < recordingPoints {
			continue
		}
		e := detrended(list, res)
		own, square := 0.0, 0.0
		for i, v := range e {
			square += v * v
			if i > 0 {
				own += v * e[i-1]
				n++
			}
		}
		// The trend's p numbers take about p/(m−p) of the variance off the
		// lag-1 covariance: Σ H(i, i−1) ≈ tr H = p.
		num += own + square*trendTerms/(m-trendTerms)
		den += square
	}
	if den == 0 {
		return 0, 0, longest
	}
	return num / den, n, longest
}

// series lists the points with residuals by curve and preparation, in the order
// of the ligand and then of the file.
func (r *review) series(di int, res []float64) [][]int {
	d := &r.a.Data[di]
	at := map[string]int{}
	var list [][]int
	for i := range d.Points {
		p := &d.Points[i]
		if math.IsNaN(res[i]) || p.Blocked {
			continue
		}
		k := r.a.pointLabel(d, p) + "\x00" + p.Preparation
		if _, ok := at[k]; !ok {
			at[k] = len(list)
			list = append(list, nil)
		}
		list[at[k]] = append(list[at[k]], i)
	}
	for _, s := range list {
		slices.SortStableFunc(s, func(a, b int) int {
			return cmp.Or(cmp.Compare(d.Points[a].X, d.Points[b].X),
				cmp.Compare(d.Points[a].Row, d.Points[b].Row))
		})
	}
	return list
}

// distinct counts the ligand values of a series in order.
func (r *review) distinct(di int, list []int) (n int) {
	pts := r.a.Data[di].Points
	for k, i := range list {
		if k == 0 || pts[i].X != pts[list[k-1]].X {
			n++
		}
	}
	return n
}

// trendTerms is the number of Legendre polynomials, in the place within the
// series, that detrended takes off.
const trendTerms = 7

// detrended residuals of a series.
func detrended(list []int, res []float64) []float64 {
	m := len(list)
	a := mat.NewDense(m, trendTerms, nil)
	e := mat.NewVecDense(m, nil)
	for k, i := range list {
		e.SetVec(k, res[i])
		u := 2*float64(k)/float64(m-1) - 1
		p, q := 1.0, u
		for j := range trendTerms {
			a.Set(k, j, p)
			p, q = q, (float64(2*j+3)*u*q-float64(j+1)*p)/float64(j+2)
		}
	}
	var c, trend mat.VecDense
	if err := c.SolveVec(a, e); err == nil {
		trend.MulVec(a, &c)
		e.SubVec(e, &trend)
	}
	return e.RawVector().Data
}
