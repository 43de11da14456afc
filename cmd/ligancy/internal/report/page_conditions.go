package report

import (
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"

	"ligancy/fit/saturation"
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

// conditionsOf lists the conditions that are asked for, each as the study or
// its data state it, then what else the study states.
func conditionsOf(a *saturation.Analysis) []saturation.ConditionRow {
	stated := map[string]string{}
	for k, s := range a.Conditions {
		stated[strings.ToLower(strings.ReplaceAll(k, "_", " "))] = s
	}
	statedByData(a, stated)
	var rows []saturation.ConditionRow
	used := map[string]bool{}
	rates := len(a.Data) > 0 && a.Data[0].Response.Kind == "velocity"
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
		row := saturation.ConditionRow{Condition: c.name, Asked: true}
		if len(found) > 0 {
			text := strings.Join(found, "; ")
			row.Stated = &text
		}
		rows = append(rows, row)
	}
	for _, k := range slices.Sorted(maps.Keys(stated)) {
		if text := stated[k]; !used[k] {
			rows = append(rows, saturation.ConditionRow{Condition: k, Stated: &text})
		}
	}
	return rows
}

// conditionsTable shows them; what is not stated is said to be so.
func (v *view) conditionsTable() *table {
	t := &table{Caption: "Conditions, as the study states them", Head: []string{"condition", "stated"}}
	for _, c := range v.d.Conditions {
		text := entry{Text: "not stated", Colour: -1}
		if c.Stated != nil {
			text = entry{Text: printable(*c.Stated)}
		}
		t.Rows = append(t.Rows, []entry{{Text: printable(c.Condition), Head: true}, text})
	}
	return t
}

// statedByData adds what the data themselves state.
func statedByData(a *saturation.Analysis, stated map[string]string) {
	if text := ligandRange(a); text != "" {
		stated[a.Ligand.Name+", range"] = text
	}
	preparations := map[string]bool{}
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
		for _, p := range set.Points {
			if p.Preparation != "" && p.LeftOut == "" {
				preparations[p.Preparation] = true
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
	if n := len(preparations); n > 0 {
		stated["independent preparations"] = fmt.Sprint(n)
	}
}

// ligandRange is the lowest and highest ligand value used; "" without any.
func ligandRange(a *saturation.Analysis) string {
	low, high, none := math.Inf(1), math.Inf(-1), false
	for i := range a.Data {
		for _, p := range a.Data[i].Points {
			switch {
			case p.LeftOut != "":
			case p.X == 0:
				none = true
			default:
				low, high = math.Min(low, p.X), math.Max(high, p.X)
			}
		}
	}
	if !(low <= high) {
		return ""
	}
	text := strings.TrimSpace(axisNumber(roundTo(low, 3)) + " to " + axisNumber(roundTo(high, 3)) + " " + unitWord(a.Ligand.Unit))
	if none {
		text += ", and none"
	}
	return text
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
