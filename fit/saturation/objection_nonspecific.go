package saturation

import (
	"context"
	"fmt"
	"math"
)

const nonspecificSource = fromPractice + ": measure nonspecific binding in blocked tubes"

// asksNonspecific asks what nonspecific binding rests on.
func (r *review) asksNonspecific(context.Context) {
	for di := range r.a.Data {
		d := &r.a.Data[di]
		if d.Response.Kind != "bound" || d.Trace || d.Response.SitesPerMolecule &&
			!d.Response.Nonspecific.Free {
			continue
		}
		blocked := 0
		for i := range d.Points {
			if d.Points[i].Blocked && d.Points[i].LeftOut == "" {
				blocked++
			}
		}
		a := answer{id: "nonspecific", group: sayInPaper, source: nonspecificSource,
			remedy: "columns: {blocked: tube}",
			effect: "Nonspecific binding taken too low makes the curve shallower."}
		switch {
		case d.Response.Nonspecific.Free && blocked > 0:
			a = answer{id: "nonspecific", group: foundGood, source: nonspecificSource,
				text: fmt.Sprintf("%sNonspecific binding is fitted with %d blocked tubes.", r.where(di),
					blocked)}
		case d.Response.Nonspecific.Free:
			a.text = r.where(di) + "Nonspecific binding is fitted without blocked tubes" +
				r.nonspecificTie(di) + "."
		default:
			a.text = fmt.Sprintf("%sNonspecific binding was set to %s, not measured here.", r.where(di),
				figures(d.Response.Nonspecific.Value, 3))
		}
		r.add(a)
	}
}

// nonspecificTie is how it is correlated with Bmax in the Hill fit.
func (r *review) nonspecificTie(di int) string {
	f := r.hills[di].f
	if f == nil || f.result.Cov == nil {
		return ""
	}
	q := f.m.blocks[0].pts[0]
	if q.high < 0 || q.ns < 0 {
		return ""
	}
	cov := f.result.Cov
	c := cov.At(q.high, q.ns) / math.Sqrt(cov.At(q.high, q.high)*cov.At(q.ns, q.ns))
	if math.IsNaN(c) {
		return ""
	}
	return fmt.Sprintf(", and is tied to Bmax (r = %s)", figures(c, 2))
}
