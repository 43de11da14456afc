package saturation

import (
	"context"
	"math"
	"slices"
	"strings"
)

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
		{"concentration of the macromolecule", []string{"macromolecule concentration",
			"protein concentration", "receptor concentration", "haem concentration"}},
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
			sites := strings.Contains(it.name, "concentration") &&
				(d.SitesPresent.Value > 0 || d.SitesPresent.FromBmax > 0)
			kelvin := it.name == "temperature" && !math.IsNaN(r.a.Kelvin)
			if sites || kelvin || r.stated(d, it.keys...) {
				stated = append(stated, it.name)
			} else {
				lacking = append(lacking, it.name)
			}
		}
		source := "STRENDA list 1A, versions 1.2 and 1.5; " + name
		if len(lacking) > 0 {
			r.add(answer{id: "conditions", group: forCompleteness, source: source, remedy: "conditions: {" +
				lacking[0] + ": …}",
				text: r.where(di) + "Level 1A still lacks: " + strings.Join(lacking, ", ") + "."})
		}
		if len(stated) > 0 {
			r.add(answer{id: "conditions-stated", group: foundGood, source: source, text: r.where(di) +
				"Stated: " + strings.Join(stated, ", ") + "."})
		}
		if math.IsNaN(r.a.Kelvin) && !r.stated(d, "temperature") {
			r.add(answer{id: "temperature", group: sayInPaper, source: source,
				remedy: "conditions: {temperature: 25 degC}",
				text: r.where(di) +
					"The temperature is not stated: interaction energies are given in units of RT."})
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
