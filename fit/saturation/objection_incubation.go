package saturation

import (
	"context"
	"fmt"
	"math"
	"strconv"
	"strings"
)

const incubationSource = "at least 5 half-lives of dissociation at the lowest ligand, and twice the " +
	"time changes nothing: Hulme & Trevethick 2010 Br J Pharmacol 161:1219; Jarmoskaite et al. 2020 " +
	"eLife 9:e57264; rules from memory"

// asksIncubation asks whether the slowest samples, those with least ligand, had
// come to rest.
func (r *review) asksIncubation(context.Context) {
	for di := range r.a.Data {
		d := &r.a.Data[di]
		if d.Trace || d.Response.Kind == "velocity" {
			continue
		}
		if math.IsNaN(d.Incubation) || d.Incubation <= 0 {
			r.incubationUnknown(di)
			continue
		}
		if m, curve := r.halfLives(di); !math.IsNaN(m) {
			r.incubationJudged(di, m, curve)
			continue
		}
		r.incubationBounded(di)
	}
	r.incubationsCompared()
}

func (r *review) incubationUnknown(di int) {
	a := answer{id: "incubation-unknown", group: settleFirst, source: incubationSource,
		remedy: "incubation: 90 min",
		text: r.where(di) +
			"The incubation is not stated: whether the samples with least ligand had come to rest " +
			"cannot be judged."}
	if pressure(r.a.Ligand.Unit) {
		a.group = forCompleteness
	} else if r.a.Data[di].Response.Kind == "signal" {
		a.group = sayInPaper
	}
	shift, n := early(1)
	a.effect = fmt.Sprintf("Stopped after one half-life one site reads EC50 %.3f K and n_H %.3f; very "+
		"early, n_H %.3f.",
		shift, n, 2*math.Ln2)
	r.add(a)
}

// slowest is the least value of a rate that any mechanism of the study gives.
func (r *review) slowest(name string) float64 {
	least := math.Inf(1)
	for i := range r.a.Candidates {
		for key, rate := range r.a.Candidates[i].Rates {
			if key != name && !strings.HasSuffix(key, "."+name) {
				continue
			}
			each := rate.Each
			for _, v := range []*float64{rate.Given.Value, rate.Given.Fixed, rate.Given.Start} {
				if v != nil {
					each = append(each[:len(each):len(each)], *v)
				}
			}
			for _, v := range each {
				if v > 0 {
					least = math.Min(least, v)
				}
			}
		}
	}
	if math.IsInf(least, 1) {
		return 0
	}
	return least
}

// halfLives counts the half-lives of dissociation that a data set stood, and on
// which curve that is least. Where only k_on is known, k_off = k_on·K with the K
// that the reading would have had at rest. NaN where nothing is known.
func (r *review) halfLives(di int) (m float64, curve string) {
	t := r.a.Data[di].Incubation
	kOn, kOff := r.slowest("k_on"), r.slowest("k_off")
	if !(t > 0) || kOn == 0 && kOff == 0 {
		return math.NaN(), ""
	}
	if kOff > 0 {
		return kOff * t / math.Ln2, ""
	}
	m = math.Inf(1)
	for _, c := range r.readings(di) {
		if v := halfLivesStood(kOn * math.Exp(c.lnK) * t); v < m {
			m, curve = v, r.onCurve(c)
		}
	}
	if math.IsInf(m, 1) {
		return math.NaN(), ""
	}
	return m, curve
}

func (r *review) incubationJudged(di int, m float64, curve string) {
	a := answer{id: "incubation", group: foundGood, source: incubationSource,
		text: fmt.Sprintf("%sThe incubation of %s is %s half-lives of dissociation%s", r.where(di),
			duration(r.a.Data[di].Incubation), figures(m, 2), curve)}
	if m > 0 {
		shift, n := early(m)
		a.effect = fmt.Sprintf("One site then reads EC50 %.3f K and n_H %.3f.", shift, n)
	} else {
		a.effect = fmt.Sprintf("One site then reads n_H up to %.3f.", 2*math.Ln2)
	}
	if m >= r.limits.HalfLives {
		a.text += "."
		r.add(a)
		return
	}
	a.group = settleFirst
	a.text += fmt.Sprintf(", fewer than %s: the samples with least ligand had not come to rest.",
		figures(r.limits.HalfLives, 2))
	a.remedy = "stand longer, and show that twice the time changes nothing"
	r.add(a)
}

// incubationBounded says for which rates the incubation was long enough.
func (r *review) incubationBounded(di int) {
	t := r.a.Data[di].Incubation
	r.add(answer{id: "incubation-unknown", group: sayInPaper, source: incubationSource,
		remedy: "rates: {k_on: 1e6 1/(M s)}, or measure at twice the time",
		text: fmt.Sprintf("%sNo rate is given. %s are %s half-lives only if k_off is above %s 1/s.",
			r.where(di), duration(t),
			figures(r.limits.HalfLives, 2), figures(r.limits.HalfLives*math.Ln2/t, 2))})
}

// duration writes seconds as the bench does.
func duration(t float64) string {
	switch {
	case t >= 2*3600:
		return threeFigures(t/3600) + " h"
	case t >= 120:
		return threeFigures(t/60) + " min"
	}
	return threeFigures(t) + " s"
}

func threeFigures(v float64) string { return strconv.FormatFloat(v, 'g', 3, 64) }

// incubationsCompared asks, where one curve was measured after two incubations,
// whether the longer one changed it.
func (r *review) incubationsCompared() {
	for di := range r.a.Data {
		for dj := range r.a.Data {
			s, l := r.a.Data[di].Incubation, r.a.Data[dj].Incubation
			if !(s > 0 && l >= 1.5*s) || r.a.Data[di].Trace || r.a.Data[dj].Trace {
				continue
			}
			for _, c := range r.readings(di) {
				for _, e := range r.readings(dj) {
					if c.curve == e.curve {
						r.compareIncubations(c, e)
					}
				}
			}
		}
	}
}

func (r *review) compareIncubations(c, e *reading) {
	s, l := r.a.Data[c.data].Incubation, r.a.Data[e.data].Incubation
	shift := e.lnK - c.lnK
	a := answer{id: "incubation-doubled", group: foundGood, source: incubationSource,
		text: fmt.Sprintf("After %s in place of %s, K_half%s changes by a factor of %s and n_H from "+
			"%s to %s",
			duration(l), duration(s), r.onCurve(c),
			figures(math.Exp(shift), 3), figures(c.h, 3), figures(e.h, 3))}
	if math.Abs(shift) > 2.58*math.Hypot(c.seLnK, e.seLnK) { // 99 %
		a.group = settleFirst
		a.text += ": the shorter one was not at rest"
		a.remedy = "leave the shorter incubation out, and double the longer one"
	}
	a.text += "."
	r.add(a)
}
