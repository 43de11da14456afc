package report

import (
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"
)

// asked is one condition that a reader of an equilibrium or rate study looks
// for, and the words under which studies state it. The list follows level 1A of
// the STRENDA guidelines (list versions 1.2 and 1.5), adapted to binding.
type asked struct {
	name  string
	words []string
	rates bool // asked of velocities only
}

var conditionsAsked = []asked{
	{name: "macromolecule", words: []string{"macromolecule", "protein", "enzyme", "receptor"}},
	{name: "EC number and reaction", words: []string{"ec", "ec number", "reaction"}, rates: true},
	{name: "organism and strain", words: []string{"organism", "species", "strain"}},
	{name: "tissue or localisation", words: []string{"tissue", "localisation", "localization", "cell"}},
	{name: "preparation and purity", words: []string{"preparation", "purity", "purification"}},
	{name: "modification", words: []string{"modification", "modifications", "tag", "sequence"}},
	{name: "concentration of sites", words: []string{"sites present", "concentration", "enzyme concentration", "protein concentration"}},
	{name: "temperature", words: []string{"temperature"}},
	{name: "pressure or atmosphere", words: []string{"pressure", "atmosphere"}},
	{name: "pH", words: []string{"ph"}},
	{name: "buffer, salts and other components", words: []string{"buffer", "salts", "medium", "ionic strength"}},
	{name: "time of incubation", words: []string{"incubation", "equilibration"}},
	{name: "initial rates", words: []string{"initial rates", "proportionality"}, rates: true},
}

// conditionsTable says under which conditions the study was made; what it does
// not say is "not stated".
func (v *view) conditionsTable() *table {
	a := v.d.analysis
	t := &table{Caption: "Conditions, as the study states them", Head: []string{"condition", "stated"}}
	stated := map[string]string{}
	for k, s := range a.Conditions {
		stated[strings.ToLower(strings.ReplaceAll(k, "_", " "))] = s
	}
	v.fromData(stated)
	used := map[string]bool{}
	rates := v.kind() == "velocity"
	for _, c := range conditionsAsked {
		if c.rates && !rates {
			continue
		}
		var found []string
		for _, w := range c.words {
			if s, ok := stated[w]; ok && !used[w] {
				found = append(found, s)
				used[w] = true
			}
		}
		text := entry{Text: printable(strings.Join(found, "; "))}
		if len(found) == 0 {
			text = entry{Text: "not stated", Colour: -1}
		}
		t.Rows = append(t.Rows, []entry{{Text: c.name, Head: true}, text})
	}
	for _, k := range slices.Sorted(maps.Keys(stated)) {
		if !used[k] {
			t.Rows = append(t.Rows, []entry{{Text: printable(k), Head: true}, {Text: printable(stated[k])}})
		}
	}
	return t
}

func (v *view) kind() string {
	if len(v.d.analysis.Data) == 0 {
		return ""
	}
	return v.d.analysis.Data[0].Response.Kind
}

// fromData adds what the data themselves state.
func (v *view) fromData(stated map[string]string) {
	a := v.d.analysis
	if from, to := span(v.axis.Tested); from <= to {
		text := fmt.Sprintf("%s to %s %s", axisNumber(roundTo(math.Pow(10, from), 3)), axisNumber(roundTo(math.Pow(10, to), 3)), unitWord(a.Ligand.Unit))
		if v.axis.Tested[0] == 0 {
			text += ", and none"
		}
		stated[a.Ligand.Name+", range"] = strings.TrimSpace(text)
	}
	for i := range a.Data {
		set := &a.Data[i]
		for k, f := range set.Factors {
			var levels []string
			for _, p := range set.Points {
				if k < len(p.Levels) && !slices.Contains(levels, p.Levels[k]) && len(levels) < mostPanels {
					levels = append(levels, p.Levels[k])
				}
			}
			name := strings.ToLower(f)
			if _, ok := stated[name]; !ok {
				stated[name] = "varied: " + strings.Join(levels, ", ")
			}
		}
		if s := set.SitesPresent; s.Value > 0 {
			stated["sites present"] = significant(s.Value, 4) + " " + unitWord(a.Ligand.Unit) + " of sites"
		} else if s.FromBmax > 0 {
			stated["sites present"] = "from the fitted maximal binding"
		}
		if finite(set.Incubation) && set.Incubation > 0 {
			stated["incubation"] = duration(set.Incubation)
		}
	}
	if n := len(v.preps); n > 0 {
		stated["independent preparations"] = fmt.Sprint(n)
	}
}

// duration writes seconds in the unit that fits.
func duration(seconds float64) string {
	switch {
	case seconds >= 7200:
		return significant(seconds/3600, 3) + " h"
	case seconds >= 120:
		return significant(seconds/60, 3) + " min"
	}
	return significant(seconds, 3) + " s"
}
