package saturation

import (
	"context"
	"fmt"
	"math"
	"strings"
)

const ratesSource = fromPractice + ": under 5 to 10 % of the substrate used up"

// asksInitialRates asks how much substrate was used up while a velocity was
// measured.
func (r *review) asksInitialRates(context.Context) {
	for di := range r.a.Data {
		d := &r.a.Data[di]
		if d.Response.Kind != "velocity" || d.Trace {
			continue
		}
		perSecond, ok := r.velocityUnit(d.Response.Unit)
		switch {
		case !ok || math.IsNaN(d.Incubation):
			r.ratesUnknown(di, ok)
		default:
			r.ratesJudged(di, perSecond)
		}
	}
}

// velocityUnit reads a velocity in the ligand's unit per time: 1/s as a factor.
func (r *review) velocityUnit(unit string) (perSecond float64, ok bool) {
	amount, time, found := strings.Cut(unit, "/")
	if !found || amount != r.a.Ligand.Unit {
		return 0, false
	}
	switch time {
	case "s":
		return 1, true
	case "min":
		return 1. / 60, true
	case "h":
		return 1. / 3600, true
	case "ms":
		return 1000, true
	}
	return 0, false
}

func (r *review) ratesUnknown(di int, inLigandUnit bool) {
	d := &r.a.Data[di]
	if r.stated(d, "initial rates", "initial rate", "linearity", "conversion", "substrate used") {
		r.add(answer{id: "initial-rates", group: foundGood, source: ratesSource, text: r.where(di) +
			"Initial rates are stated among the conditions."})
		return
	}
	why := "how long the reaction ran is not stated"
	if !inLigandUnit {
		why = fmt.Sprintf("a velocity in %s does not say how much of the substrate, in %s, was used",
			d.Response.Unit, r.a.Ligand.Unit)
	}
	_, n := consumed(1)
	r.add(answer{id: "initial-rates", group: sayInPaper, source: ratesSource,
		text:   r.where(di) + "Whether these are initial rates cannot be judged: " + why + ".",
		effect: fmt.Sprintf("Were V·t as large as K, one site would read n_H %.3f.", n),
		remedy: "conditions: {initial rates: under 5 % used, proportional to enzyme}"})
}

// ratesJudged compares what was used with what was there at every point.
func (r *review) ratesJudged(di int, perSecond float64) {
	d := &r.a.Data[di]
	used, at := 0.0, 0.0
	for i := range d.Points {
		if p := &d.Points[i]; p.LeftOut == "" && p.X > 0 {
			if u := p.Y * perSecond * d.Incubation / p.X; u > used {
				used, at = u, p.X
			}
		}
	}
	a := answer{id: "initial-rates", group: foundGood, source: ratesSource,
		text: fmt.Sprintf("%sAt most %s of the substrate was used up, at %s", r.where(di), percent(used),
			withUnit(at, r.a.Ligand.Unit, 3))}
	if list := r.readings(di); len(list) > 0 {
		c := steepest(list)
		v, _, _ := r.hills[di].end(c, highEnd, highSetting)
		shift, n := consumed(v * perSecond * d.Incubation / math.Exp(c.lnK))
		a.effect = fmt.Sprintf("One site then reads K %.3f times too high and n_H %.3f.", shift, n)
	}
	if used <= r.limits.Used {
		a.text += "."
		r.add(a)
		return
	}
	a.group = settleFirst
	a.text += ": these are not initial rates there."
	a.remedy = "measure sooner or with less enzyme, or leave those points out and say so"
	r.add(a)
}
