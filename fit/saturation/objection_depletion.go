package saturation

import (
	"context"
	"fmt"
	"math"
	"slices"
)

const (
	depletionSource = "sites at most K/10, under 10 % of the ligand bound: Hulme & Trevethick 2010 Br J " +
		"Pharmacol 161:1219; Jarmoskaite et al. 2020 eLife 9:e57264; rules from memory"
	titrationRatio = 10 // sites per K above which a curve measures sites rather than K
)

// asksDepletion asks whether bound ligand was taken from the free ligand that
// the axis shows.
func (r *review) asksDepletion(context.Context) {
	for di := range r.a.Data {
		d := &r.a.Data[di]
		switch {
		case d.Trace || pressure(r.a.Ligand.Unit): // a gas is kept at its pressure
		case d.Total:
			r.depletionSolved(di)
		case !r.sitesComparable(d):
			r.depletionUnknown(di)
		default:
			r.depletionJudged(di)
		}
	}
}

// pressure says whether a ligand is measured as a gas.
func pressure(unit string) bool {
	return slices.Contains([]string{"torr", "mmHg", "mm[Hg]", "kPa", "Pa", "hPa", "atm", "bar", "mbar",
		"ppm"}, unit)
}

// sitesComparable says whether the sites are given in the ligand's unit.
func (r *review) sitesComparable(d *Dataset) bool {
	s := d.SitesPresent
	return s.FromBmax > 0 || s.Value > 0 && (s.Unit == "" || s.Unit == r.a.Ligand.Unit)
}

// sitesOn is the concentration of sites for one curve.
func (r *review) sitesOn(c *reading) float64 {
	s := r.a.Data[c.data].SitesPresent
	if s.FromBmax > 0 {
		v, _, _ := r.hills[c.data].end(c, highEnd, highSetting)
		return s.FromBmax * v
	}
	return s.Value
}

func (r *review) depletionUnknown(di int) {
	a := answer{id: "ligand-depletion-unknown", group: settleFirst, source: depletionSource,
		text: r.where(di) +
			"The concentration of sites (not of molecules) is not stated: whether bound ligand was taken from the free " +
			"ligand on the axis cannot be judged.",
		remedy: "sites_present: 5 " + r.a.Ligand.Unit}
	if r.a.Data[di].Response.Kind == "velocity" {
		a.group = forCompleteness
		a.text = r.where(di) +
			"The concentration of enzyme sites is not stated: whether they hold a share of the " +
			"substrate cannot be judged."
	}
	if list := r.readings(di); len(list) > 0 {
		c := steepest(list)
		k := math.Exp(c.lnK)
		a.text += fmt.Sprintf(" Above %s of sites it matters.",
			withUnit(r.limits.SitesPerK*k, r.a.Ligand.Unit, 2))
		_, one := depleted(1, 1)
		a.effect = fmt.Sprintf("With as many sites as K_half (%s), one site reads n_H %.3f against "+
			"added ligand.",
			withUnit(k, r.a.Ligand.Unit, 2), one)
	}
	r.add(a)
}

// steepest is the reading of largest n_H.
func steepest(list []*reading) *reading {
	return slices.MaxFunc(list, func(a, b *reading) int {
		if a.h < b.h {
			return -1
		}
		return 1
	})
}

// depletionJudged compares sites with K and with the ligand of every point.
func (r *review) depletionJudged(di int) {
	d := &r.a.Data[di]
	list := r.readings(di)
	if len(list) == 0 {
		r.add(answer{id: "ligand-depletion-unknown", group: sayInPaper, source: depletionSource,
			text: r.where(di) + "Depletion cannot be judged, since K cannot be read: " + r.unread(di) +
				".",
			remedy: "measure on both sides of half saturation"})
		return
	}
	worst, ratio, share := list[0], 0.0, 0.0
	for _, c := range list {
		sites := r.sitesOn(c)
		if q := sites / math.Exp(c.lnK); q > ratio {
			worst, ratio = c, q
		}
		for _, i := range c.points {
			if x := d.Points[i].X; x > 0 {
				bound := sites * c.at(math.Log(x))
				share = math.Max(share, bound/(x+bound))
			}
		}
	}
	sites, k := r.sitesOn(worst), math.Exp(worst.lnK)
	a := answer{id: "ligand-depletion", group: foundGood, source: depletionSource,
		text: fmt.Sprintf("%sSites (%s) are %s of K_half%s (%s), and at most %s of the ligand would "+
			"be bound",
			r.where(di), withUnit(sites, r.a.Ligand.Unit, 2),
			figures(ratio, 2), r.onCurve(worst), withUnit(k, r.a.Ligand.Unit, 2), percent(share))}
	shift, one := depleted(ratio, 1)
	a.effect = fmt.Sprintf("Read against added ligand one site gives K %.3f times too high and n_H %.3f.",
		shift, one)
	if ratio <= r.limits.SitesPerK && share < r.limits.BoundShare {
		a.text += ": added ligand can be taken as free."
		r.add(a)
		return
	}
	_, own := depleted(ratio, worst.h)
	a.group = settleFirst
	a.text += ": the axis is right only if free ligand was measured, not if it is what was added."
	a.effect += fmt.Sprintf(" This curve's %s would be read as %s.", figures(worst.h, 3), figures(own, 3))
	a.remedy = "ligand_axis: total, or say how free ligand was measured"
	r.add(a)
}

// depletionSolved says what a total axis does to n_H.
func (r *review) depletionSolved(di int) {
	list := r.readings(di)
	if len(list) == 0 {
		r.add(answer{id: "ligand-depletion", group: foundGood, source: depletionSource,
			text: r.where(di) + "Depletion is solved for on the axis of total ligand."})
		return
	}
	worst, ratio := list[0], 0.0
	for _, c := range list {
		if q := r.sitesOn(c) / math.Exp(c.lnK); q > ratio {
			worst, ratio = c, q
		}
	}
	_, own := depleted(ratio, worst.h)
	a := answer{id: "ligand-depletion", group: foundGood, source: depletionSource,
		text: fmt.Sprintf("%sDepletion is solved for: sites are %s of K_half%s.", r.where(di),
			figures(ratio, 2), r.onCurve(worst)),
		effect: fmt.Sprintf("n_H at half saturation is %.3f against free and %.3f against total ligand: "+
			"say which is printed.",
			worst.h, own)}
	if ratio >= titrationRatio {
		a.group = sayInPaper
		a.text += " With so many the curve is a titration, which holds the number of sites better than K."
		a.remedy = fmt.Sprintf("repeat with sites below %s",
			withUnit(math.Exp(worst.lnK), r.a.Ligand.Unit, 2))
	}
	r.add(a)
}
