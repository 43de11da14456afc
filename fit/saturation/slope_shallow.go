package saturation

import (
	"context"
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// Measurements that part explanations of a shallow curve.
const (
	testDilution = "dissociation after dilution, with and without unlabelled ligand (interacting " +
		"sites change each other's off-rates)"
	testClass      = "a signal, an inhibitor or a mutation that sees one class of sites"
	testSeparation = "the molecules separated, or one population blocked"
	testSpread     = "purer material or single clones, with which a spread of affinities narrows"
	testBlocked    = "tubes in which an excess of unlabelled ligand blocks the sites"
	testEnds       = "points without ligand, and far enough above half saturation that nothing rises " +
		"any more"
	testPreparation = "more preparations, each read alone"
)

// shallow lists what may explain n_H below 1.
func (e *explainer) shallow(ctx context.Context) []*explanation {
	n := max(e.r.mostSites(), 2)
	list := []*explanation{
		{text: "unlike classes among " + sitesWords(n) + " of a molecule", test: testClass, tries: unlikeClasses(n),
			mine: severalClasses},
		{text: "two populations of molecules", test: testSeparation, tries: attempts("mixture", twoParts()),
			mine: ofFamily("mixture")},
		{text: "stepwise negative cooperativity of " + sitesWords(min(n, maxStepwise)), test: testDilution,
			tries: attempts("adair", mechanisms.Definition{Sites: min(n, maxStepwise)}),
			mine:  ofFamily("adair")},
		{text: "negative cooperativity of " + sitesWords(n) + " in contact", test: testDilution, tries: inContact(n),
			mine: ofFamily("sequential")},
		{text: "a spread of affinities (Sips)", test: testSpread,
			tries: attempts("hill", mechanisms.Definition{}), mine: ofFamily("hill"),
			number: e.spread(ctx)},
	}
	list = append(list, e.nonspecific()...)
	list = append(list, e.freeEnds())
	list = append(list, e.preparations(ctx))
	return append(list, &explanation{text: "concerted binding (MWC) of one ligand", standing: "out",
		why: "it cannot give n_H below 1", test: testDilution})
}

// attempts is one way of fitting: a family.
func attempts(family string, def mechanisms.Definition) []attempt {
	c, err := simpleCandidate(family, def)
	if err != nil {
		return nil
	}
	return []attempt{{candidate: c}}
}

func oneSite() mechanisms.Definition {
	return mechanisms.Definition{Classes: []mechanisms.Count{{Name: "only", Sites: 1}}}
}

func twoParts() mechanisms.Definition {
	return mechanisms.Definition{Parts: []mechanisms.Part{{Name: "tight", Sites: 1},
		{Name: "loose", Sites: 1}}}
}

// unlikeClasses are two classes on n sites, split as evenly as may be and with
// one site apart.
func unlikeClasses(n int) []attempt {
	var list []attempt
	done := map[int]bool{}
	for _, tight := range []int{n / 2, 1, n - 1} {
		if done[tight] {
			continue
		}
		done[tight] = true
		list = append(list, attempts("independent",
			mechanisms.Definition{Classes: []mechanisms.Count{{Name: "tight", Sites: tight},
				{Name: "loose", Sites: n - tight}}})...)
	}
	return list
}

// severalClasses recognises independent sites of more than one class.
func severalClasses(f *fitted) bool {
	return f.row.Family == "independent" && f.m.shift == nil && len(f.m.consts) > 1
}

// inContact are the usual layouts of contacts among n sites.
func inContact(n int) []attempt {
	switch n {
	case 2:
		return attempts("sequential", mechanisms.Definition{Sites: 2, Contacts: "pair"})
	case 3:
		return attempts("sequential", mechanisms.Definition{Sites: 3, Contacts: "triangle"})
	case 4:
		return append(attempts("sequential", mechanisms.Definition{Sites: 4, Contacts: "square"}),
			attempts("sequential", mechanisms.Definition{Sites: 4, Contacts: "tetrahedral"})...)
	}
	return attempts("sequential", mechanisms.Definition{Sites: n, Contacts: "ring"})
}

// spread gives the standard deviation of ln K that a Hill exponent below 1 stands
// for, on the shallowest curve, with the interval that the profile of h gives.
func (e *explainer) spread(ctx context.Context) func(*explanation) {
	return func(x *explanation) {
		c := e.curves[0]
		for _, o := range e.curves {
			if o.h < c.h {
				c = o
			}
		}
		f := e.r.hills[e.di].f
		low, high := math.NaN(), math.NaN()
		if pr, err := fit.NewProfiler(f.problem, f.result, e.r.a.Settings.Level); err == nil {
			low, high = openEnds(pr.Parameter(ctx, f.m.cells[c.cell].theta[1]))
		}
		x.name, x.value = spreadOfK, sipsSpread(c.h)
		x.low, x.high = sipsSpread(math.Exp(high)), sipsSpread(math.Exp(low))
		if x.why != "" {
			x.why += "; "
		}
		x.why += fmt.Sprintf("affinities whose ln K has an SD of %s (%s) give a Hill curve with n_H %s%s",
			toInterval(x.value, x.low, x.high), endWords(x.low, x.high), figures(c.h, 3), e.r.onCurve(c))
	}
}

// nonspecific is one site and a line; velocities have none.
func (e *explainer) nonspecific() []*explanation {
	r := &e.a.Data[0].Response
	if r.Kind == "velocity" {
		return nil
	}
	x := &explanation{text: "one site with nonspecific binding", test: testBlocked}
	if r.Kind == "bound" && r.Nonspecific.Free {
		x.text = "one site with the nonspecific binding that is fitted"
	}
	if c, err := simpleCandidate("independent", oneSite()); err == nil {
		x.tries = []attempt{{candidate: c, change: withLine}}
	}
	x.mine = func(f *fitted) bool { return oneSiteWith(f) && hasLine(f) }
	return []*explanation{x}
}

// oneSiteWith recognises the study's one-site mechanisms.
func oneSiteWith(f *fitted) bool {
	return f.m.shift == nil && f.row.Family == "independent" && f.row.Sites == 1
}

// hasLine says whether a fit has a line with the free ligand.
func hasLine(f *fitted) bool {
	for _, b := range f.m.blocks {
		for i := range b.pts {
			if b.pts[i].ns >= 0 {
				return true
			}
		}
	}
	return false
}

// withLine lets a response have a line with the free ligand. Its upper number
// then counts from the lower.
func withLine(a *Analysis) {
	r := &a.Data[0].Response
	if r.Kind != "bound" {
		switch {
		case r.High.Free != r.Low.Free:
			r.High.Free, r.Low.Free = true, true
		case !r.High.Free:
			r.High.Value -= r.Low.Value
		}
		r.Differs = renamed(r.Differs, "high", "Bmax")
		r.Kind = "bound"
	}
	r.Nonspecific = Setting{Free: true}
}

func renamed(m map[string]string, from, to string) map[string]string {
	out := map[string]string{}
	for k, v := range m {
		if k == from {
			k = to
		}
		out[k] = v
	}
	return out
}

// freeEnds is one site whose ends are both fitted.
func (e *explainer) freeEnds() *explanation {
	r := &e.a.Data[0].Response
	x := &explanation{text: "one site with an end not reached or set wrongly", test: testEnds}
	if r.Low.Free && r.High.Free {
		x.text = "one site with both ends fitted"
		x.mine = oneSiteWith
	}
	if c, err := simpleCandidate("independent", oneSite()); err == nil {
		x.tries = []attempt{{candidate: c, change: func(a *Analysis) {
			a.Data[0].Response.Low.Free, a.Data[0].Response.High.Free = true, true
		}}}
	}
	return x
}

// preparations explains shallowness by preparations that differ in K: pooled
// with a shift of ln K by preparation and, where that cannot be fitted, by each
// of them alone. It is open where n_H then has 1 in its 99 % interval.
func (e *explainer) preparations(ctx context.Context) *explanation {
	x := &explanation{text: "preparations with n_H 1 each that differ in K", test: testPreparation,
		mine: func(f *fitted) bool { return f.m.shift != nil }}
	names := map[string]bool{}
	for _, p := range e.a.Data[0].Points {
		names[p.Preparation] = p.Preparation != ""
	}
	if len(names) < 2 {
		x.standing, x.why = "not asked", "no two preparations are named"
		return x
	}
	pooled, curve := 0.0, e.curves[0]
	for _, c := range e.curves {
		if pooled == 0 || c.h < pooled {
			pooled, curve = c.h, c
		}
	}
	h, low, high, how, failed := e.shifted(ctx, curve)
	if failed != "" {
		h, low, high, how = e.eachAlone(curve)
	}
	if math.IsNaN(h) {
		x.standing, x.why = "not asked", failed
		return x
	}
	x.name = shareExplained
	x.value = math.Min((h-pooled)/(1-pooled), 1)
	x.low, x.high = math.Min((low-pooled)/(1-pooled), 1), math.Min((high-pooled)/(1-pooled), 1)
	x.why = fmt.Sprintf("%s n_H is %s (99 %%: %s) where pooled%s it is %s, so this explains %s of the "+
		"shallowness",
		how, figures(h, 3), endWords(low, high), e.r.onCurve(curve), figures(pooled, 3),
		percent(math.Max(x.value, 0)))
	x.standing = "out"
	if high >= 1 && x.value > 0.5 {
		x.standing = "open"
	}
	return x
}

// shifted is the exponent of a Hill equation whose ln K is shifted by preparation.
func (e *explainer) shifted(ctx context.Context, curve *reading) (h, low, high float64, how,
	failed string) {
	h, low, high = math.NaN(), math.NaN(), math.NaN()
	c, err := simpleCandidate("hill", mechanisms.Definition{})
	if err != nil {
		return h, low, high, "", err.Error()
	}
	c.ShiftByPreparation = true
	f := e.a.fitCandidate(ctx, &c, fit.Settings{Starts: readingStarts, Seed: e.a.Settings.Seed,
		Workers: e.a.Settings.Workers})
	if !f.answered() {
		if f.err != nil {
			return h, low, high, "", f.err.Error()
		}
		return h, low, high, "", "a shift by preparation could not be fitted"
	}
	at := f.m.cells[f.cellAtPoint(e, curve)].theta[1]
	h, low, high = math.Exp(f.result.Theta[at]), 0, math.Inf(1)
	if pr, err := fit.NewProfiler(f.problem, f.result, slopeLevel); err == nil {
		l, u := openEnds(pr.Parameter(ctx, at))
		low, high = math.Exp(l), math.Exp(u)
	}
	return h, low, high, fmt.Sprintf("with ln K shifted by preparation (SD %s)", figures(f.m.shift.tau, 2)),
		""
}

// cellAtPoint is the cell of the first point of a curve.
func (f *fitted) cellAtPoint(e *explainer, curve *reading) int {
	d := &e.a.Data[0]
	for _, q := range f.m.blocks[0].pts {
		if p := &d.Points[q.index]; p.Levels[len(p.Levels)-1] == curve.curve {
			return q.cell
		}
	}
	return 0
}

// eachAlone is the mean n_H of the preparations, with the interval of their mean.
func (e *explainer) eachAlone(curve *reading) (h, low, high float64, how string) {
	row := e.r.meanRow(curve)
	if row == nil || row.N < 2 {
		return math.NaN(), math.NaN(), math.NaN(), ""
	}
	t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: float64(row.N - 1)}.Quantile(0.5 + slopeLevel/2)
	half := t * float64(row.SDNH) / math.Sqrt(float64(row.N))
	h = float64(row.NH)
	return h, math.Max(h-half, 0), h + half, fmt.Sprintf("read alone, in %s preparations,",
		countWord(row.N))
}
