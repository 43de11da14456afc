package mechanisms

import "slices"

// table is filled by init: parts of a mixture look families up.
var table []Family

func init() {
	table = []Family{
		{Name: "hill", Doc: hillDoc, Keys: []string{"constants"}, Build: buildHill},
		{Name: "adair", Doc: adairDoc, Keys: []string{"sites", "constants"}, Build: buildAdair},
		{Name: "mwc", Doc: mwcDoc, Keys: []string{"sites", "effectors", "turnover", "sees", "constants"}, Build: buildMWC},
		{Name: "sequential", Doc: sequentialDoc, Keys: []string{"contacts", "sites", "constants"}, Build: buildSequential},
		{Name: "independent", Doc: independentDoc, Keys: []string{"classes", "constants"}, Build: buildIndependent},
		{Name: "conformations", Doc: conformationsDoc,
			Keys: []string{"conformations", "effectors", "turnover", "sees", "constants"}, Build: buildConformations},
		{Name: "states", Doc: statesDoc, Keys: []string{"states", "effectors", "turnover", "sees", "constants"}, Build: buildStates},
		{Name: "cycle", Doc: cycleDoc, Keys: []string{"states", "steps", "effectors", "constants"}, Build: buildCycle},
		{Name: "mixture", Doc: mixtureDoc, Keys: []string{"parts", "constants"}, Build: buildMixture},
		{Name: "assembly", Doc: assemblyDoc, Keys: []string{"small", "large", "constants"}, Build: buildAssembly},
	}
}

// Families is the table of families, in the order in which they are listed.
func Families() []Family { return slices.Clone(table) }

// Lookup finds a family by name.
func Lookup(name string) (Family, bool) {
	for _, f := range table {
		if f.Name == name {
			return f, true
		}
	}
	return Family{}, false
}
