package mechanisms

import "slices"

var families = []Family{
	{Name: "hill", Doc: hillDoc, Keys: []string{"constants"}, Build: buildHill},
	{Name: "adair", Doc: adairDoc, Keys: []string{"sites", "constants"}, Build: buildAdair},
	{Name: "mwc", Doc: mwcDoc, Keys: []string{"sites", "effectors", "turnover", "sees", "constants"}, Build: buildMWC},
	{Name: "sequential", Doc: sequentialDoc, Keys: []string{"contacts", "sites", "constants"}, Build: buildSequential},
	{Name: "independent", Doc: independentDoc, Keys: []string{"classes", "constants"}, Build: buildIndependent},
}

// Families is the table of families, in the order in which they are listed.
func Families() []Family { return slices.Clone(families) }

// Lookup finds a family by name.
func Lookup(name string) (Family, bool) {
	for _, f := range families {
		if f.Name == name {
			return f, true
		}
	}
	return Family{}, false
}
