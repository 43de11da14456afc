package saturation

import (
	"context"
	"fmt"
	"math"
)

const sitesSource = "n_H ≤ n at equilibrium, one macromolecule against free ligand: exact"

// asksSites asks whether n_H can be that of an equilibrium with the sites of
// the mechanisms.
func (r *review) asksSites(context.Context) {
	n := r.mostSites()
	for di := range r.a.Data {
		list := r.readings(di)
		if len(list) == 0 || !r.binds(di) {
			continue
		}
		c := list[0]
		for _, o := range list {
			if o.low > c.low {
				c = o
			}
		}
		a := answer{id: "n_H-above-sites", group: foundGood, source: sitesSource}
		switch {
		case n == 0:
			a.group = forCompleteness
			a.text = fmt.Sprintf("%sNo mechanism with sites is tried: n_H (%s%s) is a steepness, not a count of sites.", r.where(di), figures(c.h, 3), r.onCurve(c))
		case c.low > float64(n):
			a.group = settleFirst
			a.text = fmt.Sprintf("%sn_H of a Hill fit%s is %s (%s): not an equilibrium mechanism with %s, or an artefact.", r.where(di), r.onCurve(c), figures(c.h, 3), c.interval(), sitesWords(n))
			a.effect = fmt.Sprintf("At equilibrium n_H cannot exceed %d.", n)
			a.remedy = "look for depletion, too short an incubation, or a response that is not binding"
		default:
			a.text = fmt.Sprintf("%sn_H of a Hill fit%s (%s) does not exceed the number of sites (%d), which it does not count.", r.where(di), r.onCurve(c), figures(c.h, 3), n)
		}
		r.add(a)
	}
}

// interval writes the interval of h: "99 % interval 0.91 to 1.08".
func (c *reading) interval() string {
	return "99 % interval " + endWords(c.low, c.high)
}

// endWords writes two ends, of which one may be missing.
func endWords(low, high float64) string {
	lowOpen, highOpen := !(low > 0), math.IsInf(high, 1)
	switch {
	case lowOpen && highOpen:
		return "without an end"
	case lowOpen:
		return "up to " + figures(high, 3)
	case highOpen:
		return figures(low, 3) + " and beyond"
	}
	return figures(low, 3) + " to " + figures(high, 3)
}

func sitesWords(n int) string {
	if n == 1 {
		return "one site"
	}
	return countWord(n) + " sites"
}

const definitionSource = "midpoint, fitted and 10–90 % slopes differ: Goldbeter & Koshland 1981 Proc Natl Acad Sci 78:6840 for the last"

// definitionsDiffer is the difference of two Hill coefficients of one curve from
// which it matters which is printed.
const definitionsDiffer = 0.1

// asksDefinition asks by how much the numbers called n_H differ here.
func (r *review) asksDefinition(context.Context) {
	if r.lead == nil {
		return
	}
	names := []string{"n_H_half", "n_H_max", "n_H_10_90", "n_H_hill_reading"}
	widest, words := -1.0, ""
	for _, c := range r.lead.m.curveCells() {
		label := r.lead.m.cells[c].label
		low, high, s := math.Inf(1), math.Inf(-1), []string{}
		for k, name := range names {
			q := r.leadRow(name, label)
			if q == nil || math.IsNaN(float64(q.Value)) {
				continue
			}
			v := float64(q.Value)
			low, high = math.Min(low, v), math.Max(high, v)
			s = append(s, figures(v, 3)+[]string{" at half saturation", " where steepest", " from 10 to 90 %", " by a Hill fit of these points"}[k])
		}
		if high-low > widest && len(s) > 1 {
			widest, words = high-low, fmt.Sprintf("n_H of %s%s is %s", quoted(r.lead.row.Name), atLabel(label), list(s))
		}
	}
	if widest < 0 {
		return
	}
	a := answer{id: "n_H-definition", group: foundGood, source: definitionSource, text: words + "."}
	if widest >= definitionsDiffer {
		a.group = sayInPaper
		a.effect = fmt.Sprintf("They differ by up to %s.", figures(widest, 2))
		a.remedy = "print n_H with its definition"
	}
	r.add(a)
}

const (
	shallowSource = "equilibrium data cannot tell heterogeneity from negative cooperativity: Sevlever, Di Bella & Ventura 2020 PLoS Comput Biol 16:e1007929"
	causesSource  = fromPractice
)

// asksShallowness lists, beside a shallow curve, what it does not prove and what
// else makes a curve shallow.
func (r *review) asksShallowness(context.Context) {
	var worst *reading
	for di := range r.a.Data {
		if !r.binds(di) {
			continue
		}
		for _, c := range r.readings(di) {
			if c.high < 1 && (worst == nil || c.h < worst.h) {
				worst = c
			}
		}
	}
	if worst == nil {
		for di := range r.a.Data {
			if r.binds(di) && len(r.readings(di)) > 0 {
				r.add(answer{id: "shallow", group: foundGood, source: shallowSource, text: "No curve is shallower than one site (99 % interval of n_H of a Hill fit)."})
				return
			}
		}
		return
	}
	r.add(answer{id: "shallow", group: sayInPaper, source: shallowSource,
		text:   fmt.Sprintf("%sn_H of a Hill fit%s is %s (%s): this proves neither two sites nor negative cooperativity, and MWC with one ligand is ruled out.", r.where(worst.data), r.onCurve(worst), figures(worst.h, 3), worst.interval()),
		effect: fmt.Sprintf("Affinities spread by an SD of ln K of %s give the same curve.", figures(sipsSpread(worst.h), 3)),
		remedy: "dissociation after dilution, with and without unlabelled ligand"})
	r.add(answer{id: "shallow-causes", group: sayInPaper, source: causesSource,
		text:   "Also to be excluded: impure or mixed ligand, degraded protein, wrong nonspecific binding, drift, coupled receptor states, solubility at the top.",
		effect: "Each of them can bring n_H below 1."})
}

const oneClassSource = "two classes of sites behind one Hill curve: computed; one class against two is no regular test: Böhning et al. 1994 Ann Inst Stat Math 46:373, from memory"

// asksOneClass asks what unlike sites a curve like that of one site may hide.
func (r *review) asksOneClass(context.Context) {
	for di := range r.a.Data {
		if !r.binds(di) {
			continue
		}
		for _, c := range r.readings(di) {
			if c.high < 1 || c.low > 1 {
				continue // not the curve of one site
			}
			a := answer{id: "hidden-classes", group: foundGood, source: oneClassSource}
			if !(c.low > 0.3) {
				a.group = sayInPaper
				a.text = fmt.Sprintf("%sn_H%s is held from below to %s only: unlike sites of any ratio could hide here.", r.where(di), r.onCurve(c), figures(math.Max(c.low, 0), 2))
				r.add(a)
				break
			}
			rho := hiddenRatio(c.low)
			_, rms := twoClassFit(rho)
			a.text = fmt.Sprintf("%sNot told from one site%s; two equal classes whose K differ up to %s-fold would look the same (n_H down to %s; rms misfit %s).", r.where(di), r.onCurve(c), figures(rho, 2), figures(c.low, 3), figures(rms, 2))
			a.effect = fmt.Sprintf("Such classes have n_H %s at half saturation.", figures(twoClassHalf(rho), 3))
			if rho > hiddenTenfold {
				a.group = sayInPaper
				a.remedy = "more points, or less scatter, before one class is claimed"
			}
			r.add(a)
			break
		}
	}
}

// hiddenTenfold is the ratio of hidden classes from which it is to be said.
const hiddenTenfold = 10

const (
	catalysisSource = "one-site glucokinase has h 1.2 to 1.5: Storer & Cornish-Bowden 1976 Biochem J 159:7"
	responseSource  = "a covalent cycle near zero order looks like a high Hill coefficient: Goldbeter & Koshland 1981 Proc Natl Acad Sci 78:6840"
)

// asksCatalysis asks whether a slope of velocities is one of binding.
func (r *review) asksCatalysis(context.Context) {
	for di := range r.a.Data {
		list := r.readings(di)
		if r.a.Data[di].Response.Kind != "velocity" || len(list) == 0 {
			continue
		}
		a := answer{id: "catalysis", group: foundGood, source: catalysisSource,
			text: r.where(di) + "No velocity curve has h other than 1 (99 % interval): nothing is claimed for binding."}
		for _, c := range list {
			if c.low > 1 || c.high < 1 {
				a.group = sayInPaper
				a.text = fmt.Sprintf("%sVelocities%s have h %s (%s): that is kinetics until binding is measured, and even a one-site enzyme can have it.", r.where(di), r.onCurve(c), figures(c.h, 3), c.interval())
				a.remedy = "measure binding at equilibrium"
				a.effect = "A one-site enzyme that changes slowly between two forms reaches h of 2 at most."
				break
			}
		}
		r.add(a)
	}
}

// asksResponse asks whether a signal may be read as occupancy.
func (r *review) asksResponse(context.Context) {
	for di := range r.a.Data {
		list := r.readings(di)
		d := &r.a.Data[di]
		if d.Trace || d.Response.Of != "" {
			continue
		}
		a := answer{id: "response-as-occupancy", group: foundGood, source: responseSource, text: r.where(di) + "Binding itself was measured."}
		switch d.Response.Kind {
		case "velocity":
			continue // asked as catalysis
		case "signal":
			a.group = sayInPaper
			a.text = r.where(di) + "A signal is not occupancy until it is shown to follow it: call its n_H an empirical slope."
			a.remedy = "show that the signal is proportional to binding"
			if len(list) > 0 {
				c := steepest(list)
				a.effect = fmt.Sprintf("A cycle near zero order gives any n_H, the %s of this one among them.", figures(c.h, 3))
			}
		}
		r.add(a)
	}
}
