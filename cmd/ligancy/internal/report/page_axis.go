package report

import (
	"math"
	"slices"
	"strings"

	"ligancy/cmd/ligancy/internal/figure"
	"ligancy/fit/saturation"
)

// words for figures and the page: printable text in the sans.
func words(s string) figure.Label { return figure.Prose(figure.Sans, printable(s)) }

// ligandTitle is the title of the ligand axis: quantity / unit.
func (d *Document) ligandTitle() string {
	s := d.analysis.Ligand
	quantity := s.Name
	if slices.ContainsFunc(d.analysis.Data, func(set saturation.Dataset) bool { return set.Total }) {
		quantity = "free " + quantity
	}
	switch {
	case s.Unit == "" || s.Unit == "1":
		return quantity
	case slices.Contains(pressures, s.Unit):
		quantity += " pressure"
	default:
		quantity += " concentration"
	}
	return quantity + " / " + unitAfterSolidus(s.Unit)
}

// unitAfterSolidus puts a compound unit in brackets, so that one solidus
// parts quantity and unit.
func unitAfterSolidus(unit string) string {
	if strings.ContainsAny(unit, "/ ") {
		return "(" + unit + ")"
	}
	return unit
}

// responseTitle names what a data set measured: quantity / unit.
func responseTitle(set *saturation.Dataset) string {
	r := &set.Response
	quantity, unit := "", r.Unit
	switch {
	case r.Kind == "saturation" && r.Percent:
		quantity, unit = "sites filled", "%"
	case r.Kind == "saturation":
		return "fraction of sites filled"
	case r.Kind == "bound":
		quantity = "bound"
		if r.Of != "" {
			quantity = "bound " + r.Of
		}
	case r.Kind == "velocity":
		quantity = "velocity"
	default:
		quantity = "signal"
	}
	if unit == "" || unit == "1" {
		return quantity
	}
	return quantity + " / " + unitAfterSolidus(unit)
}

// ends is how a response reads a saturation s at ligand x: low + span·s + slope·x.
type ends struct{ low, span, slope float64 }

// sameResponse is the ends of a response that is the saturation itself.
var sameResponse = ends{span: 1}

// endsAt finds the ends that hold for a measurement under a mechanism: fitted
// ones among the quantities, the others in the study.
func (v *view) endsAt(mechanism string, r *saturation.PointRow) ends {
	set := v.sets[r.Data]
	if set == nil {
		return sameResponse
	}
	get := func(s saturation.Setting, names ...string) float64 {
		if !s.Free {
			return s.Value
		}
		for _, q := range v.responses[mechanism] {
			if slices.Contains(names, q.Name) && belongs(r, q.Curve) {
				return float64(q.Value)
			}
		}
		return math.NaN()
	}
	resp := &set.Response
	e := ends{low: get(resp.Low, "low"), slope: get(resp.Nonspecific, "nonspecific")}
	top := get(resp.High, "high", "V", "Bmax")
	e.span = top
	if resp.Kind == "saturation" || resp.Kind == "signal" {
		e.span = top - e.low
	}
	return e
}

// freeAt is the free ligand at a measurement on a total axis: where the fitted
// curve gives the fitted response. NaN where it lies beyond the drawn curve.
func freeAt(c *curveLine, e ends, fitted float64, blocked bool) float64 {
	if blocked {
		if e.slope > 0 {
			return (fitted - e.low) / e.slope
		}
		return math.NaN()
	}
	at := func(i int) float64 { return e.low + e.span*c.saturation[i] + e.slope*c.x[i] - fitted }
	for i := 1; i < len(c.x); i++ {
		if a, b := at(i-1), at(i); a <= 0 && b >= 0 || a >= 0 && b <= 0 {
			if a == b {
				return c.x[i]
			}
			return c.x[i-1] * math.Pow(c.x[i]/c.x[i-1], a/(a-b))
		}
	}
	return math.NaN()
}

// curveLine is one curve of one mechanism, in order of ligand.
type curveLine struct {
	name                            string
	x, saturation, response, low    []float64
	high, slope, slopeLow, slopeTop []float64
}

// curveLines gathers the sampled curves by mechanism, in order.
func curveLines(rows []saturation.CurveRow) map[string][]*curveLine {
	by := map[string][]*curveLine{}
	var last *curveLine
	lastOf := ""
	for i := range rows {
		r := &rows[i]
		if last == nil || last.name != r.Curve || lastOf != r.Mechanism {
			last, lastOf = nil, r.Mechanism
			for _, c := range by[r.Mechanism] {
				if c.name == r.Curve {
					last = c
				}
			}
			if last == nil {
				last = &curveLine{name: r.Curve}
				by[r.Mechanism] = append(by[r.Mechanism], last)
			}
		}
		last.x = append(last.x, float64(r.X))
		last.saturation = append(last.saturation, float64(r.Saturation))
		last.response = append(last.response, float64(r.Response))
		last.low, last.high = append(last.low, float64(r.Low)), append(last.high, float64(r.High))
		last.slope = append(last.slope, float64(r.NH))
		last.slopeLow, last.slopeTop = append(last.slopeLow, float64(r.NHLow)), append(last.slopeTop, float64(r.NHHigh))
	}
	return by
}

// at interpolates values of the curve at a ligand value, linearly in its logarithm.
func (c *curveLine) at(values []float64, x float64) float64 {
	i, _ := slices.BinarySearch(c.x, x)
	if len(c.x) == 0 || i == 0 && x < c.x[0] || i == len(c.x) {
		return math.NaN()
	}
	if i == 0 || c.x[i] == x {
		return values[i]
	}
	t := math.Log(x/c.x[i-1]) / math.Log(c.x[i]/c.x[i-1])
	return values[i-1] + t*(values[i]-values[i-1])
}

// xy pairs the curve's ligand values with others of its values.
func (c *curveLine) xy(values []float64) []figure.XY {
	out := make([]figure.XY, len(c.x))
	for i := range out {
		out[i] = figure.XY{X: c.x[i], Y: values[i]}
	}
	return out
}
