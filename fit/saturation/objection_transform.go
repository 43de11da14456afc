package saturation

import (
	"context"
	"fmt"
	"math"
	"strings"
)

const transformSource = "fit what was measured, transforms are for display: Cornish-Bowden, " +
	"Fundamentals of Enzyme Kinetics, from memory"

// straight is the correlation from which points are taken to lie on a line.
const straight = 0.995

// asksTransformation asks whether the response is what was measured.
func (r *review) asksTransformation(context.Context) {
	for di := range r.a.Data {
		d := &r.a.Data[di]
		if d.Trace || d.Response.Of != "" {
			continue
		}
		a := answer{id: "transformed-axes", group: foundGood, source: transformSource, text: r.where(di) +
			"The response is fitted as it was measured, on an untransformed axis."}
		if what := r.transformed(d); what != "" {
			a.group = settleFirst
			a.text = r.where(di) + "The response looks like " + what +
				": it cannot be a target of a fit, since its scatter is weighted wrongly."
			a.effect = "K and n_H of a fit to it mean nothing."
			a.remedy = "give the column that was measured"
		}
		r.add(a)
	}
}

// transformed says which transform a response is, by its unit and by the shape
// of its means; "" for none.
func (r *review) transformed(d *Dataset) string {
	switch u := strings.ToLower(d.Response.Unit); {
	case strings.HasPrefix(u, "log"), strings.HasPrefix(u, "ln"), strings.HasPrefix(u, "lg "):
		return "a logarithm, by its unit"
	case strings.HasPrefix(u, "1/"), strings.HasSuffix(u, "^-1") && !strings.ContainsAny(u, "/*. "):
		return "a reciprocal, by its unit"
	}
	_, by := r.a.pointsByCurve(d)
	var what string
	for _, pts := range by {
		w := shapeOfTransform(pts, d.Response)
		if w == "" {
			return ""
		}
		what = w
	}
	return what
}

// shapeOfTransform recognises a Hill plot (straight in ln x, beyond the ends of
// a saturation), a double-reciprocal plot (falling, straight in 1/x) and a plot
// of bound/free (falling, straight in what is bound).
func shapeOfTransform(pts []Point, resp Response) string {
	lnx, inv, y := means(pts)
	if len(y) < 5 {
		return ""
	}
	low, high := extremes(y)
	top := 1.0
	if resp.Percent {
		top = 100
	}
	switch {
	case resp.Kind == "saturation" && (low < -0.3*top || high > 1.3*top) && correlation(lnx, y) > straight:
		return fmt.Sprintf("the ordinate of a Hill plot: it runs straight with ln x from %s to %s",
			figures(low, 2), figures(high, 2))
	case resp.Kind != "signal" && correlation(inv, y) > straight && correlation(lnx, y) < 0:
		return "a reciprocal: it falls as the ligand rises, straight with 1/x"
	case resp.Kind != "signal" && correlation(lnx, y) < -0.8:
		return "something divided by the ligand: it falls as the ligand rises"
	}
	return ""
}

// means of the response by ligand value, with ln x and 1/x.
func means(pts []Point) (lnx, inv, y []float64) {
	at := map[float64]int{}
	var n []float64
	for i := range pts {
		p := &pts[i]
		if p.X <= 0 || p.Blocked {
			continue
		}
		k, ok := at[p.X]
		if !ok {
			k = len(y)
			at[p.X] = k
			lnx, inv, y, n = append(lnx, math.Log(p.X)), append(inv, 1/p.X), append(y, 0), append(n, 0)
		}
		n[k]++
		y[k] += (p.Y - y[k]) / n[k]
	}
	return lnx, inv, y
}

func extremes(v []float64) (low, high float64) {
	low, high = math.Inf(1), math.Inf(-1)
	for _, x := range v {
		low, high = math.Min(low, x), math.Max(high, x)
	}
	return low, high
}

// correlation is Pearson's r; 0 where one side does not vary.
func correlation(a, b []float64) float64 {
	ma, sa := meanAndSD(a)
	mb, sb := meanAndSD(b)
	if !(sa > 0 && sb > 0) {
		return 0
	}
	sum := 0.0
	for i := range a {
		sum += (a[i] - ma) * (b[i] - mb)
	}
	return sum / (float64(len(a)-1) * sa * sb)
}
