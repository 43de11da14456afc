package saturation

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strings"

	"ligancy/fit"
)

// ExplanationRow is one explanation of curves that are shallower or steeper than
// one site. Explanations are fitted curve by curve, every constant free on each,
// beside the study's mechanisms and not among them.
type ExplanationRow struct {
	Slope       string  `json:"slope"` // "shallow", "steep"
	Curve       string  `json:"curve"` // those that are
	Explanation string  `json:"explanation"`
	Mechanism   *string `json:"mechanism"`   // of the study, that is this explanation
	Standing    string  `json:"standing"`    // "open", "out", "twin", "not asked"
	TwinOf      *string `json:"twin_of"`     // what gives the same curves
	AICcBehind  Real    `json:"aicc_behind"` // of the best explanation or mechanism of these curves
	AICcAhead   Real    `json:"aicc_ahead"`  // of the study's best mechanism; null where that is better
	// Name, Value, Low and High are the number that the explanation comes with.
	Name  *string `json:"name"`
	Value Real    `json:"value"`
	Unit  string  `json:"unit"`
	Low   Real    `json:"low"`
	High  Real    `json:"high"`
	Why   *string `json:"why"`
	Test  *string `json:"test"` // the measurement that would decide
}

// Numbers that explanations come with: ExplanationRow.Name.
const (
	spreadOfK          = "SD of ln K"
	shareExplained     = "share of the shallowness"
	halfLivesStoodName = "half-lives stood"
	sitesNeededName    = "sites needed"
)

const (
	mostExplained     = 4  // curves that are explained together
	explanationStarts = 8  // of a fit
	explanationDraws  = 99 // of the deciding bootstrap, at most
	maxStepwise       = 6  // sites of a stepwise explanation
)

// explanation is one in the making.
type explanation struct {
	text, test string
	tries      []attempt
	// mine says which of the study's mechanisms are this explanation.
	mine func(*fitted) bool
	// standing and why are set where no fit is to decide.
	standing, why string
	number        func(*explanation) // fills name, value, low, high from the fit

	best             *fitted
	name             string
	value, low, high float64
}

// attempt is one way of fitting an explanation.
type attempt struct {
	candidate Candidate
	change    func(*Analysis) // of response or axis; may be nil
}

// explainer weighs the explanations of some curves of one data set.
type explainer struct {
	r      *review
	di     int
	slope  string
	curves []*reading
	a      *Analysis // those curves alone, told apart by eachCurve
	rivals []*fitted // mechanisms of the study over the same points
	list   []*explanation
}

// explanations explains every data set whose n_H of a Hill fit is not 1 beyond
// its 99 % interval.
func (r *review) explanations(ctx context.Context) []ExplanationRow {
	rows := []ExplanationRow{}
	for di := range r.a.Data {
		if !r.binds(di) {
			continue
		}
		var shallow, steep []*reading
		for _, c := range r.readings(di) {
			switch {
			case c.high < 1:
				shallow = append(shallow, c)
			case c.low > 1:
				steep = append(steep, c)
			}
		}
		rows = append(rows, r.explain(ctx, di, "shallow", shallow)...)
		rows = append(rows, r.explain(ctx, di, "steep", steep)...)
	}
	return rows
}

func (r *review) explain(ctx context.Context, di int, slope string, curves []*reading) []ExplanationRow {
	if len(curves) == 0 || ctx.Err() != nil {
		return nil
	}
	e := &explainer{r: r, di: di, slope: slope}
	e.choose(curves)
	if slope == "shallow" {
		e.list = e.shallow(ctx)
	} else {
		e.list = e.steep(ctx)
	}
	for _, x := range e.list {
		e.fit(ctx, x)
	}
	return e.weigh(ctx)
}

// choose keeps the curves that are furthest from n_H 1, in the study's order,
// and lays out their points.
func (e *explainer) choose(curves []*reading) {
	far := slices.Clone(curves)
	slices.SortStableFunc(far, func(a, b *reading) int {
		switch d := math.Abs(math.Log(a.h)) - math.Abs(math.Log(b.h)); {
		case d > 0:
			return -1
		case d < 0:
			return 1
		}
		return 0
	})
	far = far[:min(len(far), mostExplained)]
	for _, c := range curves {
		if slices.Contains(far, c) {
			e.curves = append(e.curves, c)
		}
	}
	e.a = e.r.a.curveByCurve(e.di)
	d := &e.a.Data[0]
	keep := map[string]bool{}
	for _, c := range e.curves {
		keep[c.curve] = true
	}
	d.Points = slices.DeleteFunc(d.Points, func(p Point) bool { return !keep[p.Levels[len(p.Levels)-1]] })
	if len(e.r.a.Data) == 1 && len(d.Points) == len(e.r.a.Data[0].Points) {
		for _, i := range e.r.order {
			e.rivals = append(e.rivals, e.r.fits[i])
		}
	}
}

// fit fits an explanation in every way and keeps the best.
func (e *explainer) fit(ctx context.Context, x *explanation) {
	for _, t := range x.tries {
		b := *e.a
		b.Data = slices.Clone(b.Data)
		if t.change != nil {
			t.change(&b)
		}
		f := b.fitCandidate(ctx, &t.candidate, fit.Settings{Starts: explanationStarts,
			Seed: b.Settings.Seed, Workers: b.Settings.Workers})
		if f.answered() && !math.IsInf(float64(f.row.AICc), 0) && (x.best == nil || f.row.AICc < x.best.row.AICc) {
			x.best = f
		}
	}
}

// weigh gives every explanation its standing.
func (e *explainer) weigh(ctx context.Context) []ExplanationRow {
	lead, tried := e.leader(), e.bestTried()
	var rows []ExplanationRow
	for i, x := range e.list {
		row := ExplanationRow{Slope: e.slope, Curve: e.labels(), Explanation: x.text, Standing: x.standing,
			AICcBehind: nan, AICcAhead: nan, Value: nan, Low: nan, High: nan, Test: text(x.test)}
		if x.best != nil && lead != nil {
			row.AICcBehind = x.best.row.AICc - lead.row.AICc
		}
		if x.best != nil && tried != nil && x.best.row.AICc < tried.row.AICc {
			row.AICcAhead = tried.row.AICc - x.best.row.AICc
		}
		if f := e.own(x); f != nil {
			row.Mechanism = text(f.row.Name)
		}
		if x.standing == "" {
			e.judge(ctx, x, lead)
			row.Standing = x.standing
			row.TwinOf = e.twin(x, i)
			if row.TwinOf != nil && row.Standing == "open" {
				row.Standing = "twin"
			}
		}
		if x.number != nil && (x.best != nil || len(x.tries) == 0) {
			x.number(x)
		}
		if x.name != "" {
			row.Name, row.Value, row.Low, row.High = text(x.name), Real(x.value), Real(x.low), Real(x.high)
			row.Unit = "1"
			if x.name == sitesNeededName {
				row.Unit = e.a.Ligand.Unit
			}
		}
		if x.why != "" {
			row.Why = text(x.why)
		}
		rows = append(rows, row)
	}
	return rows
}

// bestTried is the best by AICc of the study's mechanisms over the same points;
// nil where they are not over the same points.
func (e *explainer) bestTried() *fitted {
	var best *fitted
	for _, f := range e.rivals {
		if math.IsInf(float64(f.row.AICc), 0) {
			continue // a perfect fit
		}
		if best == nil || f.row.AICc < best.row.AICc {
			best = f
		}
	}
	return best
}

// leader is the best by AICc of the study's mechanisms and all explanations.
func (e *explainer) leader() *fitted {
	lead := e.bestTried()
	for _, x := range e.list {
		if x.best != nil && (lead == nil || x.best.row.AICc < lead.row.AICc) {
			lead = x.best
		}
	}
	return lead
}

// judge says whether an explanation is out: as for mechanisms, by studies
// simulated from it and fitted with it and the leader. What the study itself has
// tried and not refused stands, unless an explanation leads.
func (e *explainer) judge(ctx context.Context, x *explanation, lead *fitted) {
	f, own := x.best, e.own(x)
	if own != nil && own.row.Standing != "out" {
		x.standing, x.why = "open", quoted(own.row.Name)+" is this, and is not out"
		if lead == e.bestTried() || len(e.rivals) == 0 {
			return
		}
		if f == nil || own.row.AICc < f.row.AICc {
			f = own
		}
		x.why = quoted(own.row.Name) + " is this"
	}
	switch {
	case f == nil:
		x.standing = "not asked"
		if x.why == "" {
			x.why = "it could not be fitted to these points"
		}
		return
	case f == lead || f.row.AICc-lead.row.AICc <= tieWidth:
		x.standing = "open"
		return
	}
	x.standing = "open"
	d := &decider{a: e.a, fits: []*fitted{lead, f}, order: []int{0, 1}, rivals: []int{0},
		draws: min(e.r.a.Settings.Draws, explanationDraws)}
	if !d.out(ctx, 1) {
		return
	}
	x.standing = "out"
	why := fmt.Sprintf("it does not describe these curves (AICc %s behind)",
		figures(float64(f.row.AICc-lead.row.AICc), 2))
	switch {
	case x.why == "":
		x.why = why
	case own != nil:
		x.why += ", but " + why
	}
}

// own is the first of the study's mechanisms that is this explanation: the best
// of them, in the order of AICc.
func (e *explainer) own(x *explanation) *fitted {
	for _, i := range e.r.order {
		if f := e.r.fits[i]; x.mine != nil && x.mine(f) {
			return f
		}
	}
	return nil
}

// twin names what gives the same curves with as many numbers: a mechanism of
// the study, else an explanation before this one. Its own mechanism is no twin.
func (e *explainer) twin(x *explanation, i int) *string {
	if x.standing == "out" || x.standing == "not asked" {
		return nil
	}
	f, own := x.best, e.own(x)
	if f == nil && len(e.rivals) > 0 {
		f = own // over the same points
	}
	if f == nil {
		return nil
	}
	for _, g := range e.rivals {
		if g != own && g != f && !(x.mine != nil && x.mine(g)) && g.row.Standing != "out" && g.k == f.k &&
			sameFit(f, g) {
			return text(quoted(g.row.Name))
		}
	}
	for _, o := range e.list[:i] {
		if o.best != nil && o.standing != "out" && o.best.k == f.k && sameFit(f, o.best) {
			return text(o.text)
		}
	}
	return nil
}

// sameFitTolerance is the largest difference of predictions, in units of the
// scatter, at which two fits with as many numbers draw one curve.
const sameFitTolerance = 1e-3

// sameFit says whether two fits predict the same at every point.
func sameFit(f, g *fitted) bool {
	for bi, b := range f.m.blocks {
		o := g.m.blocks[bi]
		dev := f.deviations(b)
		sigma := math.Max(f.blockSigma(bi), 1e-12)
		o.predict(g.result.Theta, false)
		for i := range b.pts {
			if !(math.Abs(b.predicted(i)-o.predicted(i)) <= sameFitTolerance*sigma*dev[i]) {
				return false
			}
		}
	}
	return true
}

// labels names the curves.
func (e *explainer) labels() string {
	var names []string
	for _, c := range e.curves {
		names = append(names, c.curve)
	}
	return strings.Join(names, "; ")
}

// ofFamily recognises the study's mechanisms of some families.
func ofFamily(families ...string) func(*fitted) bool {
	return func(f *fitted) bool { return f.m.shift == nil && slices.Contains(families, f.row.Family) }
}
