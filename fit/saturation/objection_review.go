package saturation

import (
	"context"
	"fmt"
	"sort"
	"strings"
)

// Groups of objections, by what is to be done about them.
const (
	settleFirst     = "settle first"
	sayInPaper      = "say in the paper"
	forCompleteness = "for completeness"
	foundGood       = "asked and found good"
)

var groupOrder = map[string]int{settleFirst: 0, sayInPaper: 1, forCompleteness: 2, foundGood: 3}

// fromPractice is the source of a rule that everybody follows and nobody published.
const fromPractice = "common practice, no single source"

// Objections are what a careful reviewer will ask of the study alone, before
// anything but a Hill equation is fitted to its curves: grouped by what to do,
// and what was asked and found good is among them. Run asks more, of the fits.
func (a *Analysis) Objections(ctx context.Context) []Objection {
	r := &review{a: a.withDefaults()}
	return r.answers(ctx)
}

// asked fills in what a reviewer will ask of the study and its fits, and what
// explains slopes other than 1.
func (a *Analysis) asked(ctx context.Context, out *Outcome, fits []*fitted, order []int) {
	r := &review{a: a, out: out, fits: fits, order: order}
	if len(order) > 0 {
		r.lead = fits[order[0]]
	}
	if len(a.Data) == 1 {
		r.alone = [][]PreparationRow{out.Preparations}
	}
	out.Objections = r.answers(ctx)
	out.Explanations = r.explanations(ctx)
}

// review asks what a careful reviewer will ask of a study: of its points and
// conditions and, where there are fits, of those.
type review struct {
	a      *Analysis
	limits Limits
	hills  []*hillStudy       // one per data set
	alone  [][]PreparationRow // every preparation by itself, per data set
	out    *Outcome           // of the fits; nil without
	fits   []*fitted
	order  []int
	lead   *fitted // nil without fits
	list   []Objection
}

// questions are asked in this order; each adds what it finds.
var questions = []func(*review, context.Context){
	(*review).asksReadable,
	(*review).asksDepletion,
	(*review).asksDissociation,
	(*review).asksIncubation,
	(*review).asksInitialRates,
	(*review).asksTransformation,
	(*review).asksPlateau,
	(*review).asksBaseline,
	(*review).asksNonspecific,
	(*review).asksEnds,
	(*review).asksConcentrations,
	(*review).asksPoints,
	(*review).asksReplicates,
	(*review).asksEvenness,
	(*review).asksLigandScatter,
	(*review).asksRecording,
	(*review).asksPreparations,
	(*review).asksPooling,
	(*review).asksSensitivity,
	(*review).asksSites,
	(*review).asksDefinition,
	(*review).asksShallowness,
	(*review).asksOneClass,
	(*review).asksCatalysis,
	(*review).asksResponse,
	(*review).asksConstants,
	(*review).asksSiteNumber,
	(*review).asksTies,
	(*review).asksIntervals,
	(*review).asksLeftOut,
	(*review).asksConditions,
}

// answers asks everything.
func (r *review) answers(ctx context.Context) []Objection {
	r.limits = r.a.Settings.Limits.orDefaults()
	if r.hills == nil {
		r.hills = r.a.hillStudies(ctx)
	}
	if r.alone == nil {
		for di := range r.a.Data {
			one := *r.a
			one.Data = r.a.Data[di : di+1]
			r.alone = append(r.alone, one.preparationRows(ctx))
		}
	}
	for _, q := range questions {
		if ctx.Err() != nil {
			break
		}
		q(r, ctx)
	}
	sort.SliceStable(r.list, func(i, j int) bool {
		return groupOrder[r.list[i].Group] < groupOrder[r.list[j].Group]
	})
	return r.list
}

// answer is an objection in the making.
type answer struct {
	id, group, text        string
	remedy, effect, source string // "" where there is none
}

func (r *review) add(a answer) {
	o := Objection{ID: a.id, Group: a.group, Text: a.text}
	for _, f := range []struct {
		from string
		to   **string
	}{{a.remedy, &o.Remedy}, {a.effect, &o.Effect}, {a.source, &o.Source}} {
		if f.from != "" {
			*f.to = text(f.from)
		}
	}
	r.list = append(r.list, o)
}

// where begins a sentence about one data set, where there are several.
func (r *review) where(di int) string {
	if len(r.a.Data) < 2 {
		return ""
	}
	return quoted(r.a.Data[di].Name) + ": "
}

// onCurve names a curve within its data set: " at pH 7.0"; "" where there is one.
func (r *review) onCurve(c *reading) string {
	if c.curve == "all" {
		return ""
	}
	return " at " + c.curve
}

// readings lists the curves that a Hill equation could be read from.
func (r *review) readings(di int) []*reading {
	var list []*reading
	for i := range r.hills[di].readings {
		if c := &r.hills[di].readings[i]; c.why == "" {
			list = append(list, c)
		}
	}
	return list
}

// unread says why the curves of a data set could not be read; "" where all could.
func (r *review) unread(di int) string {
	by := map[string][]string{} // reason → curves
	var reasons []string
	for _, c := range r.hills[di].readings {
		if c.why == "" {
			continue
		}
		if by[c.why] == nil {
			reasons = append(reasons, c.why)
		}
		by[c.why] = append(by[c.why], c.curve)
	}
	var s []string
	for _, why := range reasons {
		who := "each of " + countWord(len(by[why])) + " curves"
		switch {
		case by[why][0] == "all":
			who = "the curve"
		case len(by[why]) <= 2:
			who = "the curve at " + strings.Join(by[why], " and that at ")
		}
		s = append(s, who+" "+why)
	}
	return strings.Join(s, "; ")
}

// binds says whether a data set is one of binding at equilibrium that a Hill
// equation can be read from.
func (r *review) binds(di int) bool {
	d := &r.a.Data[di]
	return !d.Trace && d.Response.Of == ""
}

// withUnit writes a value and its unit.
func withUnit(v float64, unit string, digits int) string {
	return strings.TrimSpace(figures(v, digits) + " " + unit)
}

// percent writes a share.
func percent(v float64) string {
	switch {
	case v < 0.0005:
		return "under 0.05 %"
	case v < 0.1:
		return figures(100*v, 2) + " %"
	case v > 0.995 && v < 1:
		return "over 99 %"
	}
	return fmt.Sprintf("%.0f %%", 100*v)
}
