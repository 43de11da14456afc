package saturation

import (
	"context"
	"fmt"
)

const (
	shallowSource = "equilibrium data cannot tell heterogeneity from negative cooperativity: Sevlever, " +
		"Di Bella & Ventura 2020 PLoS Comput Biol 16:e1007929"
	causesSource = fromPractice
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
				r.add(answer{id: "shallow", group: foundGood, source: shallowSource,
					text: "No curve is shallower than one site (99 % interval of n_H of a Hill fit)."})
				return
			}
		}
		return
	}
	r.add(answer{id: "shallow", group: sayInPaper, source: shallowSource,
		text: fmt.Sprintf("%sn_H of a Hill fit%s is %s (%s): this proves neither two sites nor negative "+
			"cooperativity, and MWC with one ligand is ruled out.",
			r.where(worst.data), r.onCurve(worst), figures(worst.h, 3), worst.interval()),
		effect: fmt.Sprintf("Affinities spread by an SD of ln K of %s give the same curve.",
			figures(sipsSpread(worst.h), 3)),
		remedy: "dissociation after dilution, with and without unlabelled ligand"})
	r.add(answer{id: "shallow-causes", group: sayInPaper, source: causesSource,
		text: "Also to be excluded: impure or mixed ligand, degraded protein, wrong nonspecific " +
			"binding, drift, coupled receptor states, solubility at the top.",
		effect: "Each of them can bring n_H below 1."})
}
