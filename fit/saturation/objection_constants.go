package saturation

import (
	"context"
	"fmt"
	"slices"
)

const countSource = "one equilibrium curve holds at most n constants: Middendorf & Aldrich 2017 J Gen " +
	"Physiol 149:105, 121"

// asksConstants counts constants before they are fitted.
func (r *review) asksConstants(context.Context) {
	single := []string{"adair", "mwc", "sequential", "independent", "conformations", "states"}
	asked := false
	for i := range r.a.Candidates {
		c := &r.a.Candidates[i]
		n := c.Mechanism.Sites()
		if n == 0 || !slices.Contains(single, c.Family) {
			continue
		}
		m, _ := newModel(r.a, c)
		if m == nil || len(m.cells) == 0 {
			continue
		}
		asked = true
		k, curves := 0, len(m.curveCells())
		for _, p := range m.params {
			if p.kind == ofConstant && !p.fixed {
				k++
			}
		}
		if k > n*curves {
			r.add(answer{id: "constants-counted", group: settleFirst, source: countSource,
				remedy: "constants: {c: {fixed: 0}}, or measure with an effector",
				text: fmt.Sprintf("%s has %d constants for %d curve(s) of %s, which hold %d at most.",
					quoted(c.Name), k, curves, sitesWords(n), n*curves)})
			return
		}
	}
	if asked {
		r.add(answer{id: "constants-counted", group: foundGood, source: countSource,
			text: "No mechanism has more constants than its curves can hold."})
	}
}
