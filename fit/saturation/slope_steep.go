package saturation

import (
	"context"
	"fmt"
	"math"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// Measurements that part explanations of a steep curve.
const (
	testSites     = "fewer sites (depletion shifts half saturation with them), or free ligand measured"
	testTime      = "twice the incubation, since half saturation falls until binding is at rest"
	testState     = "a signal that sees one conformation, or an effector that binds one"
	testHalfway   = "populations of the half-filled molecule, or points nearer the ends of the curve"
	testAssembly  = "another protein concentration, with which assembly-linked curves change"
	testBinding   = "binding at equilibrium, without turnover"
	testOccupancy = "occupancy measured beside the response, and other concentrations of the cycle's " +
		"enzymes"
)

// usualSites are taken where no mechanism of the study has more sites than one.
const usualSites = 4

// steep lists what may explain n_H above 1.
func (e *explainer) steep(ctx context.Context) []*explanation {
	n, least := e.r.mostSites(), 0.0
	for _, c := range e.curves {
		least = math.Max(least, c.low)
	}
	if n < 2 {
		n = usualSites // none is said
	}
	n = max(n, int(math.Ceil(least)))
	list := []*explanation{}
	if x := e.depletion(ctx); x != nil {
		list = append(list, x)
	}
	if x := e.incubation(); x != nil {
		list = append(list, x)
	}
	if x := e.freeEnds(); x.mine == nil {
		list = append(list, x)
	}
	list = append(list,
		&explanation{text: "concerted binding (MWC) of " + sitesWords(n), test: testState,
			tries: concertedSites(n), mine: ofFamily("mwc")},
		&explanation{text: "interaction of " + sitesWords(n) + " in contact (sequential)",
			test: testHalfway, tries: inContact(n), mine: ofFamily("sequential")})
	if n <= maxStepwise {
		list = append(list, &explanation{text: "stepwise binding to " + sitesWords(n), test: testHalfway,
			tries: attempts("adair", mechanisms.Definition{Sites: n}), mine: ofFamily("adair")})
	}
	list = append(list, e.assembly())
	if x := e.unbound(least); x != nil {
		list = append(list, x)
	}
	if sites := e.r.mostSites(); sites > 0 && least > float64(sites) {
		list = append(list, &explanation{text: "any equilibrium mechanism with " + sitesWords(sites),
			standing: "out", test: testBinding,
			why: fmt.Sprintf("n_H is above %s (99 %%): not an equilibrium mechanism with that many "+
				"sites, or an artefact",
				figures(least, 3))})
	}
	return list
}

// concertedSites is MWC; with two sites one of its three constants must be fixed,
// and binding to R alone is taken.
func concertedSites(n int) []attempt {
	def := mechanisms.Definition{Sites: n}
	if n == 2 {
		zero := 0.0
		def.Constants = map[string]mechanisms.Given{"c": {Fixed: &zero}}
	}
	return attempts("mwc", def)
}

// depletion is one site against total ligand: with the sites that the study
// states, or with the number of them that fits best.
func (e *explainer) depletion(ctx context.Context) *explanation {
	d := &e.r.a.Data[e.di]
	x := &explanation{text: "one site that depletes the ligand", test: testSites}
	switch {
	case pressure(e.a.Ligand.Unit):
		x.standing, x.why = "out", "a gas is kept at its pressure"
		return x
	case d.Total:
		x.standing, x.why = "out", "it is solved for on the axis of total ligand"
		return x
	}
	c, err := simpleCandidate("independent", oneSite())
	if err != nil {
		return nil
	}
	if e.r.sitesComparable(d) {
		x.tries = []attempt{{candidate: c, change: func(a *Analysis) { a.Data[0].Total = true }}}
		return x
	}
	sites, f := e.sitesNeeded(ctx, c)
	if f == nil {
		return x
	}
	x.best = f
	x.name, x.value, x.low, x.high = sitesNeededName, sites, math.NaN(), math.NaN()
	x.why = fmt.Sprintf("no concentration of sites makes one site give these curves (best %s)",
		withUnit(sites, e.a.Ligand.Unit, 2))
	x.number = func(x *explanation) {
		if x.standing != "out" {
			x.why = fmt.Sprintf("the sites are not stated; %s of them would do",
				withUnit(sites, e.a.Ligand.Unit, 2))
		}
	}
	return x
}

// sitesNeeded searches the concentration of sites with which one site describes
// the curves best: half saturation against total ligand is K + S/2, so that S
// lies between 0 and twice the least of them. The fit counts S as a number.
func (e *explainer) sitesNeeded(ctx context.Context, c Candidate) (float64, *fitted) {
	most := math.Inf(1)
	for _, r := range e.curves {
		most = math.Min(most, 2*math.Exp(r.lnK))
	}
	var best *fitted
	at, sites := 0.0, 0.0
	try := func(u float64) float64 {
		b := *e.a
		b.Data = append([]Dataset(nil), b.Data...)
		b.Data[0].Total, b.Data[0].SitesPresent = true, SitesPresent{Value: most * expit(u),
			Unit: e.a.Ligand.Unit}
		starts := explanationStarts
		if best != nil {
			starts = 2
		}
		f := b.fitCandidate(ctx, &c, fit.Settings{Starts: starts, Seed: b.Settings.Seed,
			Workers: b.Settings.Workers})
		if !f.answered() {
			return math.Inf(1)
		}
		if best == nil || f.lnL > best.lnL {
			best, at, sites = f, u, b.Data[0].SitesPresent.Value
		}
		return -f.lnL
	}
	for u := -4.0; u <= 6; u += 2 {
		try(u)
	}
	goldenSection(try, at-2, at+2, 10)
	if best == nil {
		return 0, nil
	}
	best.k++
	if aicc, ok := akaike(best.lnL, best.k, best.row.Points); ok {
		best.row.AICc = Real(aicc)
	}
	return sites, best
}

// incubation is one site read before it came to rest; velocities and gases are
// not asked.
func (e *explainer) incubation() *explanation {
	if e.a.Data[0].Response.Kind == "velocity" {
		return nil
	}
	x := &explanation{text: "one site read before it was at rest", test: testTime}
	if m, _ := e.r.halfLives(e.di); m >= e.r.limits.HalfLives {
		x.standing, x.why = "out", fmt.Sprintf("it stood %s half-lives", figures(m, 2))
		return x
	}
	c := Candidate{Name: "incubation", Family: "incubation", Mechanism: unrested{},
		Differs: map[string]string{"all": eachCurve}}
	x.tries = []attempt{{candidate: c}}
	x.number = func(x *explanation) {
		if x.standing == "out" {
			x.why = fmt.Sprintf("n_H of one site never exceeds %.3f that way, and its curve does not fit",
				2*math.Ln2)
			return
		}
		x.name, x.low, x.high = halfLivesStoodName, math.NaN(), math.NaN()
		x.value = math.Exp(x.best.result.Theta[x.best.m.cells[0].theta[1]])
		x.why = fmt.Sprintf("it needs an incubation of %s half-lives of dissociation", figures(x.value, 2))
	}
	return x
}

// assembly is never fitted here: one curve at one protein concentration cannot
// hold it.
func (e *explainer) assembly() *explanation {
	x := &explanation{text: "assembly of molecules linked to binding", test: testAssembly,
		mine: ofFamily("assembly")}
	if e.own(x) == nil {
		x.standing, x.why = "open", "one protein concentration cannot hold it; not fitted here"
	} else {
		x.why = "it is among the mechanisms, and is out"
	}
	return x
}

// unbound is what may steepen a response that is not binding.
func (e *explainer) unbound(least float64) *explanation {
	switch e.a.Data[0].Response.Kind {
	case "velocity":
		x := &explanation{text: "kinetic cooperativity of a one-site enzyme", standing: "open",
			test: testBinding,
			why:  "velocities alone cannot exclude it: a ratio of quadratics has h up to 2"}
		if least > 2 {
			x.standing,
				x.why = "out", fmt.Sprintf("two slow forms reach h of 2, and it is above %s (99 %%)",
				figures(least, 3))
		}
		return x
	case "signal":
		return &explanation{text: "a covalent cycle near zero order", standing: "open", test: testOccupancy,
			why: "it gives any slope; n_H of a signal is empirical"}
	}
	return nil
}
