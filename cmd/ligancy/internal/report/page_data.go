package report

import (
	"encoding/json"
	"math"
	"slices"

	"ligancy/fit/saturation"
)

// pageData is what the page's script reads: the numbers behind the figures.
type pageData struct {
	Unit   string      `json:"unit"`
	Ligand string      `json:"ligand"`
	Grid   [2]float64  `json:"grid"` // decadic logarithms of the first and last ligand value of every curve
	Levels []pageLevel `json:"levels"`
	Curves []string    `json:"curves"`
	Leader pageTrace   `json:"leader"`
	Rivals []pageTrace `json:"rivals"`
	Shown  []string    `json:"shown"` // names of the rivals that are shown at first
	Points []pagePoint `json:"points"`
	Preps  []string    `json:"preps"`
	Shapes int         `json:"shapes"` // marks that tell preparations apart
	Scaled bool        `json:"scaled"`
}

// pageLevel is one concentration that was tested.
type pageLevel struct {
	X    float64 `json:"x"`
	Text string  `json:"t"`
}

// pageTrace is one mechanism along the ligand axis: for each curve of the
// leader its response and its Hill coefficient on the grid, null where it has
// none there.
type pageTrace struct {
	ID        string          `json:"id"`
	Name      string          `json:"name"`
	Response  [][]short       `json:"y"`
	Slope     [][]short       `json:"n"`
	Residuals []short         `json:"r,omitempty"` // in the order of the points
	Behind    saturation.Real `json:"behind"`
}

// pagePoint is one kept measurement: curve, level, response, preparation (−1
// where none is named), row.
type pagePoint struct {
	Curve  int     `json:"c"`
	Level  int     `json:"l"`
	X      float64 `json:"x"`
	Y      short   `json:"y"`
	Prep   int     `json:"p"`
	Row    int     `json:"w"`
	Resid  short   `json:"r"`
	Marked bool    `json:"-"`
}

// short is a number with four significant digits; null where it is not finite.
type short float64

func (s short) MarshalJSON() ([]byte, error) {
	if !finite(float64(s)) {
		return []byte("null"), nil
	}
	return json.Marshal(roundTo(float64(s), 4))
}

// data gathers what the script reads.
func (v *view) data() *pageData {
	d := &pageData{Unit: printable(unitWord(v.d.analysis.Ligand.Unit)), Ligand: printable(v.d.analysis.Ligand.Name),
		Levels: []pageLevel{}, Curves: []string{}, Rivals: []pageTrace{}, Shown: []string{}, Points: []pagePoint{},
		Preps: []string{}, Shapes: 0}
	for _, x := range v.axis.Tested {
		d.Levels = append(d.Levels, pageLevel{roundTo(x, 6), axisNumber(roundTo(x, 3))})
	}
	groups := v.groups()
	lines := v.lines[v.leader]
	if len(lines) == 0 || len(groups) == 0 || len(lines) > mostPanels {
		return d
	}
	g := groups[0]
	d.Scaled = g.scaled
	d.Preps = append(d.Preps, printables(v.preps)...)
	n := len(lines[0].x)
	d.Grid = [2]float64{roundTo(math.Log10(lines[0].x[0]), 9), roundTo(math.Log10(lines[0].x[n-1]), 9)}
	for _, c := range lines {
		d.Curves = append(d.Curves, printable(curveLabel(c.name)))
	}
	d.Leader = v.trace(g, v.leader, n)
	for _, m := range v.rivals() {
		t := v.trace(g, m.Name, n)
		t.Behind = m.AICcBehind
		d.Rivals = append(d.Rivals, t)
		if m.Name == v.rival() {
			d.Shown = append(d.Shown, printable(m.Name))
		}
	}
	v.pagePoints(d, g)
	return d
}

// trace samples one mechanism on the leader's curves.
func (v *view) trace(g *responseGroup, mechanism string, n int) pageTrace {
	t := pageTrace{ID: v.mechanismID(mechanism), Name: printable(mechanism)}
	for i := range v.lines[v.leader] {
		var y, slope []short
		through := v.through(mechanism, []int{i})
		if len(v.lines[v.leader]) == 1 && len(through) > 1 {
			through = nil // several curves for one of the leader's: no single value
		}
		for k, ok := range through {
			if c := v.lines[mechanism][k]; ok && len(c.x) == n && y == nil {
				y, slope = shorts(v.overlaid(g, mechanism, k)), shorts(c.slope)
			}
		}
		t.Response, t.Slope = append(t.Response, y), append(t.Slope, slope)
	}
	return t
}

func shorts(all []float64) []short {
	out := make([]short, len(all))
	for i, x := range all {
		out[i] = short(x)
	}
	return out
}

// pagePoints lists the kept measurements and every mechanism's residuals.
func (v *view) pagePoints(d *pageData, g *responseGroup) {
	at := map[pointOf]int{}
	for i := range v.measured[v.leader] {
		r := &v.measured[v.leader][i]
		if r.LeftOut != nil || r.blocked || r.line < 0 || !g.has(r.Data) || !finite(r.free) || len(d.Points) == mostMarks {
			continue
		}
		level, ok := slices.BinarySearch(v.axis.Tested, r.level)
		if !ok {
			level = min(level, len(v.axis.Tested)-1)
		}
		p := pagePoint{Curve: r.line, Level: level, X: roundTo(r.free, 6), Y: short(r.drawn(g)), Prep: -1, Row: r.Row, Resid: short(r.Residual)}
		if r.Preparation != nil {
			p.Prep = slices.Index(v.preps, *r.Preparation)
		}
		at[pointOf{r.Data, r.Row}] = len(d.Points)
		d.Points = append(d.Points, p)
	}
	if len(v.preps) > 0 {
		d.Shapes = 8
	}
	for k := range d.Rivals {
		t := &d.Rivals[k]
		t.Residuals = make([]short, len(d.Points))
		for i := range t.Residuals {
			t.Residuals[i] = short(math.NaN())
		}
		for _, m := range v.rivals() {
			if v.mechanismID(m.Name) != t.ID {
				continue
			}
			for _, r := range v.measured[m.Name] {
				if i, ok := at[pointOf{r.Data, r.Row}]; ok {
					t.Residuals[i] = short(r.Residual)
				}
			}
		}
	}
}
