package report

import (
	"strconv"
	"strings"

	"ligancy/fit/saturation"
)

// measuredCurves names the curves that were measured, in order of appearance:
// kept points of one data set that share the levels of all factors and effectors.
func measuredCurves(a *saturation.Analysis) []string {
	var names []string
	seen := map[string]bool{}
	for i := range a.Data {
		set := &a.Data[i]
		for j := range set.Points {
			pt := &set.Points[j]
			if pt.LeftOut != "" {
				continue
			}
			name := levels(a, set, pt)
			if !seen[set.Name+"\x00"+name] {
				seen[set.Name+"\x00"+name] = true
				if name == "" {
					name = set.Name
				}
				names = append(names, name)
			}
		}
	}
	return names
}

// levels writes "pH 7.6, alanine 5 mM" for one point.
func levels(a *saturation.Analysis, set *saturation.Dataset, pt *saturation.Point) string {
	var parts []string
	for k, f := range set.Factors {
		if k < len(pt.Levels) {
			parts = append(parts, f+" "+pt.Levels[k])
		}
	}
	for k, e := range a.Effectors {
		if k < len(pt.Effectors) {
			parts = append(parts, strings.TrimSpace(e.Name+" "+strconv.FormatFloat(pt.Effectors[k], 'g', -1, 64)+" "+e.Unit))
		}
	}
	return strings.Join(parts, ", ")
}
