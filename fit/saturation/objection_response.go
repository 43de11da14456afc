package saturation

import (
	"context"
	"fmt"
)

const (
	catalysisSource = "one-site glucokinase has h 1.2 to 1.5: Storer & Cornish-Bowden 1976 Biochem J 159:7"
	responseSource  = "a covalent cycle near zero order looks like a high Hill coefficient: Goldbeter & " +
		"Koshland 1981 Proc Natl Acad Sci 78:6840"
)

// asksCatalysis asks whether a slope of velocities is one of binding.
func (r *review) asksCatalysis(context.Context) {
	for di := range r.a.Data {
		list := r.readings(di)
		if r.a.Data[di].Response.Kind != "velocity" || len(list) == 0 {
			continue
		}
		a := answer{id: "catalysis", group: foundGood, source: catalysisSource,
			text: r.where(di) +
				"No velocity curve has h other than 1 (99 % interval): nothing is claimed for binding."}
		for _, c := range list {
			if c.low > 1 || c.high < 1 {
				a.group = sayInPaper
				a.text = fmt.Sprintf("%sVelocities%s have h %s (%s): that is kinetics until binding is "+
					"measured, and even a one-site enzyme can have it.",
					r.where(di), r.onCurve(c), figures(c.h, 3), c.interval())
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
		a := answer{id: "response-as-occupancy", group: foundGood, source: responseSource,
			text: r.where(di) + "Binding itself was measured."}
		switch d.Response.Kind {
		case "velocity":
			continue // asked as catalysis
		case "signal":
			a.group = sayInPaper
			a.text = r.where(di) +
				"A signal is not occupancy until it is shown to follow it: call its n_H an empirical slope."
			a.remedy = "show that the signal is proportional to binding"
			if len(list) > 0 {
				c := steepest(list)
				a.effect = fmt.Sprintf("A cycle near zero order gives any n_H, the %s of this one "+
					"among them.",
					figures(c.h, 3))
			}
		}
		r.add(a)
	}
}
