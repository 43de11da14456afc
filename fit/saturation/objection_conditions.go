package saturation

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strings"
)

const leftOutSource = "exclusions, normalisation and weighting are declared: " + fromPractice

// asksLeftOut asks what was left out and whether the response was normalised.
func (r *review) asksLeftOut(ctx context.Context) {
	for di := range r.a.Data {
		d := &r.a.Data[di]
		n, reasons := 0, []string(nil)
		for i := range d.Points {
			if why := d.Points[i].LeftOut; why != "" {
				n++
				if !slices.Contains(reasons, why) {
					reasons = append(reasons, why)
				}
			}
		}
		a := answer{id: "left-out", group: foundGood, source: leftOutSource, text: r.where(di) + "No point was left out."}
		if n > 0 {
			a.group = sayInPaper
			a.text = fmt.Sprintf("%s%s of %d points left out (%s).", r.where(di), capital(countWord(n)), len(d.Points), strings.Join(reasons, "; "))
			a.remedy = "declare them, with the reasons, and the fit with them"
			a.effect = r.withLeftOut(ctx, di)
		}
		r.add(a)
		r.normalised(di)
	}
}

// withLeftOut is what n_H of a Hill fit becomes with the points put back.
func (r *review) withLeftOut(ctx context.Context, di int) string {
	f := r.hills[di].f
	if f == nil {
		return ""
	}
	g := f.refit(ctx, func(b *Analysis, _ *Candidate) {
		for i := range b.Data[0].Points {
			b.Data[0].Points[i].LeftOut = ""
		}
	})
	if g.result == nil {
		return "With them there is no Hill fit."
	}
	return fmt.Sprintf("With them, by a Hill fit, %s.", moveBetween(f, g, nil).inWords())
}

// normalised asks whether a saturation was scaled to its own extremes: then the
// highest or lowest point of every series is exactly an end.
func (r *review) normalised(di int) {
	d := &r.a.Data[di]
	if d.Response.Kind != "saturation" || d.Trace {
		return
	}
	top := 1.0
	if d.Response.Percent {
		top = 100
	}
	type span struct{ low, high float64 }
	by := map[string]span{}
	for i := range d.Points {
		p := &d.Points[i]
		if p.LeftOut != "" {
			continue
		}
		k := r.a.pointLabel(d, p) + "\x00" + p.Preparation
		s, ok := by[k]
		if !ok {
			s = span{math.Inf(1), math.Inf(-1)}
		}
		by[k] = span{math.Min(s.low, p.Y), math.Max(s.high, p.Y)}
	}
	low, high := len(by) > 0, len(by) > 0
	for _, s := range by {
		low, high = low && s.low == 0, high && s.high == top
	}
	a := answer{id: "normalised", group: foundGood, source: leftOutSource, text: r.where(di) + "The response was not scaled to its own highest or lowest point."}
	if low || high {
		a.group = sayInPaper
		a.text = r.where(di) + "Every series touches an end exactly, as when it is scaled to its own extreme points: their scatter became the ends'."
		a.effect = "Scaled to its own highest point, a curve that has not ended reads too steep, and its K too low."
		a.remedy = "response: {kind: signal}, with the values as measured"
	}
	r.add(a)
}

// item is one thing that a methods section states, with the keys under which a
// study may state it.
type item struct {
	name string
	keys []string
}

var (
	strendaCommon = []item{
		{"macromolecule", []string{"macromolecule", "protein", "enzyme", "receptor", "carrier"}},
		{"organism", []string{"organism", "species", "strain", "source"}},
		{"tissue", []string{"tissue", "localisation", "localization", "organ", "cell", "cells"}},
		{"preparation", []string{"preparation", "modification", "expression", "isolation"}},
		{"purity", []string{"purity"}},
		{"temperature", []string{"temperature"}},
		{"pressure", []string{"pressure", "atmosphere"}},
		{"pH", []string{"ph"}},
		{"buffer", []string{"buffer", "medium", "components", "salts"}},
	}
	strendaEnzyme = []item{
		{"EC number", []string{"ec", "ec number"}},
		{"reaction", []string{"reaction", "balanced reaction"}},
		{"enzyme concentration", []string{"enzyme concentration", "protein concentration"}},
		{"initial rates", []string{"initial rates", "initial rate", "linearity"}},
		{"assay", []string{"assay", "method", "detection"}},
	}
	strendaBinding = []item{
		{"concentration of the macromolecule", []string{"macromolecule concentration", "protein concentration", "receptor concentration", "haem concentration"}},
		{"method", []string{"assay", "method", "detection"}},
	}
)

// asksConditions asks what a methods section states, after STRENDA level 1A.
func (r *review) asksConditions(context.Context) {
	for di := range r.a.Data {
		d := &r.a.Data[di]
		items, name := append(slices.Clone(strendaCommon), strendaBinding...), "STRENDA-style, adapted"
		if d.Response.Kind == "velocity" {
			items, name = append(slices.Clone(strendaCommon), strendaEnzyme...), "STRENDA"
		}
		var stated, lacking []string
		for _, it := range items {
			sites := strings.Contains(it.name, "concentration") && (d.SitesPresent.Value > 0 || d.SitesPresent.FromBmax > 0)
			kelvin := it.name == "temperature" && !math.IsNaN(r.a.Kelvin)
			if sites || kelvin || r.stated(d, it.keys...) {
				stated = append(stated, it.name)
			} else {
				lacking = append(lacking, it.name)
			}
		}
		source := "STRENDA list 1A, versions 1.2 and 1.5; " + name
		if len(lacking) > 0 {
			r.add(answer{id: "conditions", group: forCompleteness, source: source, remedy: "conditions: {" + lacking[0] + ": …}",
				text: r.where(di) + "Level 1A still lacks: " + strings.Join(lacking, ", ") + "."})
		}
		if len(stated) > 0 {
			r.add(answer{id: "conditions-stated", group: foundGood, source: source, text: r.where(di) + "Stated: " + strings.Join(stated, ", ") + "."})
		}
		if math.IsNaN(r.a.Kelvin) && !r.stated(d, "temperature") {
			r.add(answer{id: "temperature", group: sayInPaper, source: source, remedy: "conditions: {temperature: 25 degC}",
				text: r.where(di) + "The temperature is not stated: interaction energies are given in units of RT."})
		}
	}
}

// stated says whether a condition is stated, for the study or the data set, as
// a factor or as an effector.
func (r *review) stated(d *Dataset, keys ...string) bool {
	is := func(name string) bool {
		return slices.Contains(keys, strings.ReplaceAll(strings.ToLower(strings.TrimSpace(name)), "_", " "))
	}
	for _, all := range []map[string]string{r.a.Conditions, d.Conditions} {
		for k, v := range all {
			if is(k) && strings.TrimSpace(v) != "" {
				return true
			}
		}
	}
	return slices.ContainsFunc(d.Factors, is)
}
