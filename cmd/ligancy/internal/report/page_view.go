package report

import (
	"math"
	"slices"
	"strconv"
	"strings"

	"ligancy/cmd/ligancy/internal/figure"
	"ligancy/fit/saturation"
)

// Bounds of a page, so that it stays small whatever the study: what goes beyond
// them is said, with the table that has it.
const (
	mostRivals   = 12   // mechanisms that can be shown over the leader
	mostPanels   = 24   // curves listed
	mostFields   = 15   // curves drawn as small multiples
	mostMarks    = 1500 // measurements drawn with marks of their own
	mostRows     = 400  // measurements listed
	mostBars     = 30   // mechanisms drawn
	mostListed   = 100  // mechanisms listed
	mostSampling = 60   // curves of rivals that can be read, over all mechanisms
)

// view is a document looked at from the page: rows found by what they belong to.
type view struct {
	d         *Document
	leader    string
	rows      map[key]*saturation.QuantityRow
	place     map[*saturation.QuantityRow]int // line of quantities.csv
	cautions  []caution
	sets      map[string]*saturation.Dataset
	lines     map[string][]*curveLine
	responses map[string][]*saturation.QuantityRow // of a response, by mechanism
	measured  map[string][]reading                 // by mechanism
	blocked   map[string]map[int]bool              // rows that see no specific binding, by data set
	ranked    []*saturation.MechanismRow
	preps     []string
	boots     map[key][]*saturation.QuantityRow // numbers again, by bootstrap
	axis      figure.Ligand

	// Found when asked for, and kept.
	levels   map[levelKey][]reading     // kept measurements of the leader
	crossed  map[string]map[[2]int]bool // by mechanism
	overlays map[overlay][]float64
	parted   []*responseGroup
}

func newView(d *Document) *view {
	v := &view{
		d: d, leader: d.shown(), rows: d.index(), place: map[*saturation.QuantityRow]int{},
		sets: map[string]*saturation.Dataset{}, lines: curveLines(d.Curves),
		responses: map[string][]*saturation.QuantityRow{}, blocked: map[string]map[int]bool{},
		boots: map[key][]*saturation.QuantityRow{}, crossed: map[string]map[[2]int]bool{}, overlays: map[overlay][]float64{},
	}
	v.cautions = d.cautionsOn(v.leader)
	for i := range d.Quantities {
		q := &d.Quantities[i]
		v.place[q] = i + 2
		if q.Interval == "bootstrap" {
			k := key{q.Mechanism, q.Curve, q.Of, q.Name}
			v.boots[k] = append(v.boots[k], q)
		}
		if q.Of == "response" {
			v.responses[q.Mechanism] = append(v.responses[q.Mechanism], q)
		}
	}
	for i := range d.analysis.Data {
		v.readSet(&d.analysis.Data[i])
	}
	v.read()
	v.rank()
	v.layAxis()
	return v
}

// readSet notes what a data set says of its points beyond their rows.
func (v *view) readSet(set *saturation.Dataset) {
	v.sets[set.Name] = set
	rows := map[int]bool{}
	for i := range set.Points {
		p := &set.Points[i]
		if p.Blocked {
			rows[p.Row] = true
		}
		if p.Preparation != "" && !slices.Contains(v.preps, p.Preparation) {
			v.preps = append(v.preps, p.Preparation)
		}
	}
	v.blocked[set.Name] = rows
}

// rank puts the mechanisms in order: the leader, then by AICc.
func (v *view) rank() {
	for i := range v.d.Mechanisms {
		v.ranked = append(v.ranked, &v.d.Mechanisms[i])
	}
	slices.SortStableFunc(v.ranked, func(a, b *saturation.MechanismRow) int {
		x, y := last(float64(a.AICcBehind)), last(float64(b.AICcBehind))
		switch {
		case a.Name == v.leader && b.Name != v.leader:
			return -1
		case b.Name == v.leader && a.Name != v.leader:
			return 1
		case x < y:
			return -1
		case x > y:
			return 1
		}
		return 0
	})
}

// Beyond the tested range figures show half a decade, more where a curve's
// 1 to 99 % reach goes further, a decade at most.
const (
	axisMargin     = 2
	axisMarginMost = 10
)

// layAxis settles the ligand axis that figures share.
func (v *view) layAxis() {
	v.axis.Title = figure.Words(figure.SerifItalic, printable(v.d.ligandTitle()))
	var tested []float64
	for _, r := range v.measured[v.leader] {
		if r.LeftOut == nil && !r.blocked && finite(r.level) && r.level >= 0 {
			tested = append(tested, r.level)
		}
	}
	v.axis.Tested = distinct(tested)
	low, high := span(v.axis.Tested)
	if low > high { // no points: the curves alone
		for _, c := range v.lines[v.leader] {
			l, h := span(c.x)
			low, high = min(low, l), max(high, h)
		}
		if low > high {
			low, high = 0, 1
		}
		v.axis.Low, v.axis.High = math.Pow(10, low), math.Pow(10, high)
		return
	}
	from, to := math.Pow(10, low), math.Pow(10, high)
	v.axis.Low, v.axis.High = from/axisMargin, to*axisMargin
	for _, c := range v.d.curvesOf(v.leader) {
		r := v.reach(c)
		if r.X01 > 0 {
			v.axis.Low = min(v.axis.Low, max(r.X01/1.15, from/axisMarginMost))
		}
		if finite(r.X99) {
			v.axis.High = max(v.axis.High, min(r.X99*1.15, to*axisMarginMost))
		}
	}
	if len(v.axis.Tested) > mostTicks {
		v.axis.Tested = thinned(v.axis.Tested, mostTicks)
	}
}

// mostTicks bounds the ticks of the ligand axis and the levels that keys step through.
const mostTicks = 200

// thinned keeps so many values, the first and the last among them.
func thinned(all []float64, n int) []float64 {
	out := make([]float64, n)
	for i := range out {
		out[i] = all[i*(len(all)-1)/(n-1)]
	}
	return out
}

// reach is where a curve of the leader lies.
func (v *view) reach(curve string) figure.Ruler {
	at := func(name string) float64 {
		if q := v.rows[key{v.leader, curve, "position", name}]; q != nil {
			return float64(q.Value)
		}
		return math.NaN()
	}
	return figure.Ruler{X01: at("x_01"), X10: at("x_10"), Half: at("x_half"), X90: at("x_90"), X99: at("x_99")}
}

// shortNames are the curves' names without what all of them share in front.
func shortNames(names []string) []string {
	out := slices.Clone(names)
	if len(names) < 2 {
		return out
	}
	prefix := names[0]
	for _, n := range names[1:] {
		for !strings.HasPrefix(n, prefix) {
			prefix = prefix[:len(prefix)-1]
		}
	}
	prefix = prefix[:strings.LastIndex(prefix, " ")+1]
	for i, n := range names {
		out[i] = n[len(prefix):]
	}
	return out
}

// mechanismID is by what the page calls a mechanism: its place in the result.
func (v *view) mechanismID(name string) string {
	for i := range v.d.Mechanisms {
		if v.d.Mechanisms[i].Name == name {
			return strconv.Itoa(i)
		}
	}
	return ""
}

// rivals are the mechanisms that can be shown over the leader, in order.
func (v *view) rivals() []*saturation.MechanismRow {
	var out []*saturation.MechanismRow
	curves := 0
	for _, m := range v.ranked {
		lines := len(v.lines[m.Name])
		if m.Name == v.leader || lines == 0 {
			continue
		}
		curves += lines
		if len(out) == mostRivals || len(out) > 0 && curves > mostSampling {
			break
		}
		out = append(out, m)
	}
	return out
}

// rival is the mechanism that is shown beside the leader at first: the closest
// that is not out and says something else, else a Hill equation, else the next.
func (v *view) rival() string {
	rivals := v.rivals()
	for _, m := range rivals {
		if m.Standing == "ties" || m.Standing == "open" {
			return m.Name
		}
	}
	for _, m := range rivals {
		if m.Family == "hill" {
			return m.Name
		}
	}
	if len(rivals) > 0 {
		return rivals[0].Name
	}
	return ""
}
