package mechanisms_test

import (
	"math"
	"slices"
	"strings"
	"testing"

	"ligancy/mechanisms"
)

// complaints is all that is wrong with a definition.
func complaints(err error) (list []*mechanisms.DefinitionError) {
	if err == nil {
		return nil
	}
	if many, ok := err.(interface{ Unwrap() []error }); ok {
		for _, e := range many.Unwrap() {
			list = append(list, complaints(e)...)
		}
		return list
	}
	return append(list, err.(*mechanisms.DefinitionError))
}

func number(v float64) *float64 { return &v }

type (
	def    = mechanisms.Definition
	given  = map[string]mechanisms.Given
	powers = map[string]float64
)

// bad is a definition that is refused: the keys of the complaints in order, and
// what the first says.
type bad struct {
	name, family string
	d            def
	keys         []string
	says         string
}

func conformationsOf(list ...mechanisms.Conformation) def { return def{Conformations: list} }

var badSites = []bad{
	{"no sites", "adair", def{}, []string{"sites"}, "missing"},
	{"too many sites", "mwc", def{Sites: 17}, []string{"sites"}, "17 sites"},
	{"classes of an Adair", "adair", def{SiteClasses: chains}, []string{"sites"}, "not classes"},
	{"a key of another family", "adair", def{Sites: 4, Contacts: "square"}, []string{"contacts"}, "no such key"},
	{"two at once", "hill", def{Sites: 4, Contacts: "square"}, []string{"sites", "contacts"}, "no such key"},
	{"no classes", "independent", def{}, []string{"classes"}, "no class"},
	{"class of nothing", "independent", def{Classes: []mechanisms.Count{{Name: "a"}}}, []string{"classes.a"}, "0 sites"},
	{"class twice", "independent", def{Classes: []mechanisms.Count{{Name: "a", Sites: 1}, {Name: "a", Sites: 1}}}, []string{"classes.a"}, "twice"},
	{"too many in classes", "independent", def{Classes: []mechanisms.Count{{Name: "a", Sites: 9}, {Name: "b", Sites: 9}}}, []string{"classes"}, "18 sites"},
}

var badConstants = []bad{
	{"unknown constant", "mwc", def{Sites: 4, Constants: given{"K_X": {}}}, []string{"constants.K_X"}, "no such constant"},
	{"zero start", "mwc", def{Sites: 4, Constants: given{"K_R": {Start: number(0)}}}, []string{"constants.K_R.start"}, "cannot be"},
	// Kelman 1966 (J. Appl. Physiol. 21:1375): an empirical fraction with negative coefficients, no Adair constants.
	{"negative Kd", "adair", def{Sites: 4, Constants: given{"Kd1": {Fixed: number(-8532.2289)}}}, []string{"constants.Kd1.fixed"}, "cannot be"},
	{"range backwards", "mwc", def{Sites: 4, Constants: given{"L": {Low: number(9), High: number(1)}}}, []string{"constants.L.range"}, "ends at 1"},
	{"start outside", "mwc", def{Sites: 4, Constants: given{"L": {Start: number(0.5), Low: number(1), High: number(9)}}},
		[]string{"constants.L.start"}, "outside"},
	{"not a number", "mwc", def{Sites: 4, Constants: given{"L": {Start: number(math.NaN())}}}, []string{"constants.L.start"}, "cannot be"},
	{"c above 1", "mwc", def{Sites: 4, Constants: given{"c": {Fixed: number(2)}}}, []string{"constants.c.fixed"}, "above 1"},
	{"two sites, three constants", "mwc", def{Sites: 2}, []string{"constants"}, "at most 2 constants"},
	{"one site", "mwc", def{Sites: 1}, []string{"constants"}, "one site holds"},
	{"K_AB of a square", "sequential", def{Contacts: "square", Constants: given{"K_AB": {Start: number(1)}}},
		[]string{"constants.K_AB"}, "cannot be told"},
	{"two wrong constants", "mwc", def{Sites: 4, Constants: given{"K_R": {Start: number(-1)}, "M": {}}},
		[]string{"constants.K_R.start", "constants.M"}, "cannot be"},
}

var badEffectors = []bad{
	{"an effector that binds nothing", "mwc", def{Sites: 4, Effectors: []mechanisms.Effector{{Name: "a"}}}, []string{"effectors.a.binds"}, "not a conformation"},
	{"an effector twice", "mwc", def{Sites: 4, Effectors: []mechanisms.Effector{{Name: "a", Binds: "T"}, {Name: "a", Binds: "R"}}},
		[]string{"effectors.a"}, "twice"},
	{"turnover of nobody", "mwc", def{Sites: 4, Turnover: []mechanisms.Weight{{Name: "A", Value: 1}}}, []string{"turnover.A"}, "no such conformation"},
	{"turnover all free", "mwc", def{Sites: 4, Turnover: []mechanisms.Weight{{Name: "R", Free: true}}}, []string{"turnover"}, "above 0"},
	{"negative turnover", "mwc", def{Sites: 4, Turnover: []mechanisms.Weight{{Name: "R", Value: -1}, {Name: "T", Value: 1}}}, []string{"turnover.R"}, "cannot be"},
	{"turnover and signal", "mwc", def{Sites: 4, Turnover: view("R", "T"), Sees: view("R", "T")}, []string{"sees"}, "not both"},
}

var badContacts = []bad{
	{"no contacts", "sequential", def{}, []string{"contacts"}, "missing"},
	{"unknown contacts", "sequential", def{Contacts: "cube"}, []string{"contacts"}, "not a layout"},
	{"square of three", "sequential", def{Contacts: "square", Sites: 3}, []string{"sites"}, "4 sites, not 3"},
	{"ring of how many", "sequential", def{Contacts: "ring"}, []string{"sites"}, "leave it open"},
	{"odd prism", "sequential", def{Contacts: "prism", Sites: 7}, []string{"sites"}, "cannot have 7"},
	{"missing site", "sequential", def{Graph: [][2]int{{1, 2}, {2, 4}}}, []string{"contacts"}, "site 3 has no contact"},
	{"doubled site", "sequential", def{Graph: [][2]int{{1, 1}, {1, 2}}}, []string{"contacts[0]"}, "with itself"},
	{"doubled contact", "sequential", def{Graph: [][2]int{{1, 2}, {2, 1}}}, []string{"contacts[1]"}, "twice"},
	{"site 0", "sequential", def{Graph: [][2]int{{0, 1}, {1, 2}}}, []string{"contacts[0]"}, "not there"},
	{"site beyond", "sequential", def{Sites: 2, Graph: [][2]int{{1, 2}, {2, 3}}}, []string{"contacts[1]"}, "not there"},
	{"falls apart", "sequential", def{Graph: [][2]int{{1, 2}, {3, 4}}}, []string{"contacts"}, "cannot be reached"},
	{"too large", "sequential", def{Graph: [][2]int{{1, 40}}}, []string{"contacts"}, "cannot be"},
	{"name and list", "sequential", def{Contacts: "square", Graph: [][2]int{{1, 2}}}, []string{"contacts"}, "both"},
	{"classes of sites", "sequential", def{Contacts: "square", SiteClasses: chains}, []string{"sites"}, "not classes"},
}

var badConformations = []bad{
	{"no conformations", "conformations", def{}, []string{"conformations"}, "no conformation"},
	{"no conformations, seen", "conformations", def{Sees: view("A", "B")}, []string{"conformations", "sees.A", "sees.B"}, "no conformation"},
	{"weight of the first", "conformations", conformationsOf(mechanisms.Conformation{Name: "A", Sites: 2, K: "K", Weight: "w"}),
		[]string{"conformations.A.weight"}, "reference"},
	{"no weight", "conformations", conformationsOf(mechanisms.Conformation{Name: "A", Sites: 2, K: "K"}, mechanisms.Conformation{Name: "B"}),
		[]string{"conformations.B.weight"}, "missing"},
	{"like nobody", "conformations", conformationsOf(mechanisms.Conformation{Name: "A", Sites: 2, K: "K"}, mechanisms.Conformation{Name: "B", Like: "C", Weight: "w"}),
		[]string{"conformations.B.like"}, `named "C"`},
	{"like itself", "conformations", conformationsOf(mechanisms.Conformation{Name: "A", Like: "A"}), []string{"conformations.A.like"}, `named "A"`},
	{"nobody binds", "conformations", conformationsOf(mechanisms.Conformation{Name: "A"}), []string{"conformations"}, "binds the ligand"},
	{"no number of sites", "conformations", conformationsOf(mechanisms.Conformation{Name: "A", K: "K"}), []string{"conformations.A.sites"}, "missing"},
	{"two roles", "conformations", conformationsOf(mechanisms.Conformation{Name: "A", Sites: 2, K: "K"}, mechanisms.Conformation{Name: "B", Weight: "K"}),
		[]string{"conformations.B.weight"}, "weight in one place"},
	{"more than the curve holds", "conformations", conformationsOf(mechanisms.Conformation{Name: "A", Sites: 2, K: "K"},
		mechanisms.Conformation{Name: "B", Sites: 2, K: "K_B", Weight: "w"}), []string{"constants"}, "at most 2"},
	{"an effector nobody binds", "conformations", def{Effectors: []mechanisms.Effector{{Name: "y"}},
		Conformations: []mechanisms.Conformation{{Name: "A", Sites: 2, K: "K"}}}, []string{"effectors.y"}, "no conformation binds it"},
}

var badStates = []bad{
	{"no states", "states", def{}, []string{"states"}, "no state"},
	{"no states, seen", "states", def{Sees: view("A", "B")}, []string{"states", "sees.A", "sees.B"}, "no state"},
	{"no reference", "states", def{States: []mechanisms.State{{Name: "E", Constants: powers{"a": 1}}, {Name: "ES", Ligands: 1, Constants: powers{"K": -1}}}},
		[]string{"states"}, "reference state"},
	{"none without ligand", "states", def{States: []mechanisms.State{{Name: "ES", Ligands: 1, Constants: powers{"K": -1}}}}, []string{"states"}, "without ligand"},
	{"none with ligand", "states", def{States: []mechanisms.State{{Name: "E"}}}, []string{"states"}, "holds the ligand"},
	{"no constant", "states", def{States: []mechanisms.State{{Name: "E"}, {Name: "ES", Ligands: 1}}}, []string{"states[1].constants"}, "without a constant"},
	{"state twice", "states", def{States: []mechanisms.State{{Name: "E"}, {Name: "E", Ligands: 1, Constants: powers{"K": -1}}}}, []string{"states[1].name"}, "twice"},
	{"no unit fits", "states", def{States: []mechanisms.State{{Name: "E"}, {Name: "ES", Ligands: 1, Constants: powers{"K": -1}},
		{Name: "ESS", Ligands: 2, Constants: powers{"K": -1}}}}, []string{"states"}, "units"},
	{"inseparable", "states", def{States: []mechanisms.State{{Name: "E"}, {Name: "ES", Ligands: 1, Constants: powers{"K": -1, "a": 1}}}},
		[]string{"states"}, "appear together"},
	{"two units in one", "states", def{States: []mechanisms.State{{Name: "E"}, {Name: "ESI", Ligands: 1, Effectors: map[string]int{"I": 1}, Constants: powers{"K": -1}}}},
		[]string{"states"}, "more than one ligand"},
	{"odd numbers", "states", def{States: []mechanisms.State{{Name: "E"}, {Name: "ES", Ligands: 99, Ways: -1, Effectors: map[string]int{"I": -1}, Constants: powers{"K": math.NaN()}}}},
		[]string{"states[1].ligands", "states[1].ways", "states[1].effectors.I", "states[1].constants.K"}, "99 ligands"},
}

var simpleParts = every["simple parts"].Definition.Parts

var badParts = []bad{
	{"one part", "mixture", def{Parts: []mechanisms.Part{{Name: "a", Sites: 1}}}, []string{"parts"}, "at least two"},
	{"part of nothing", "mixture", def{Parts: []mechanisms.Part{{Name: "a", Sites: 1}, {Name: "b"}}}, []string{"parts.b"}, "0 sites"},
	{"part twice", "mixture", def{Parts: []mechanisms.Part{{Name: "a", Sites: 1}, {Name: "a", Sites: 1}}}, []string{"parts.a"}, "twice"},
	{"part of no family", "mixture", def{Parts: []mechanisms.Part{{Name: "a", Sites: 1}, {Name: "b", Family: "x"}}}, []string{"parts.b.family"}, "no family"},
	{"inside a part", "mixture", def{Parts: []mechanisms.Part{{Name: "a", Sites: 1}, {Name: "b", Family: "mwc", Definition: &def{}}}},
		[]string{"parts.b.sites"}, "missing"},
	{"shares beyond 1", "mixture", def{Parts: simpleParts, Constants: given{"tight.share": {Fixed: number(0.6)}, "loose.share": {Fixed: number(0.6)}}},
		[]string{"constants.share"}, "sum to 1.2"},
	{"a share above 1", "mixture", def{Parts: simpleParts, Constants: given{"share": {Fixed: number(1.2)}}}, []string{"constants.share.fixed"}, "cannot be"},
	{"some shares", "mixture", def{Parts: threeParts.Parts, Constants: given{"tight.share": {Fixed: number(0.6)}}}, []string{"constants.share"}, "some parts only"},
	{"share of a part, free", "mixture", def{Parts: threeParts.Parts, Constants: given{"tight.share": {Start: number(0.6)}}},
		[]string{"constants.tight.share"}, "fixed share"},
	{"a part that watches", "mixture", def{Parts: []mechanisms.Part{{Name: "a", Sites: 1},
		{Name: "b", Family: "mwc", Definition: &def{Sites: 4, Turnover: view("R", "T")}}}}, []string{"parts.b"}, "turnover"},
	{"no species", "assembly", def{}, []string{"small", "large"}, "missing"},
	{"dimers into a trimer", "assembly", def{Small: &mechanisms.Part{Sites: 2}, Large: &mechanisms.Part{Sites: 3}}, []string{"large"}, "cannot be put together"},
	{"Hill as a species", "assembly", def{Small: &mechanisms.Part{Family: "hill"}, Large: &mechanisms.Part{Sites: 4}}, []string{"small.family"}, "no binding polynomial"},
	{"a mixture as a species", "assembly", def{Small: &mechanisms.Part{Sites: 2},
		Large: &mechanisms.Part{Family: "mixture", Definition: &def{Parts: simpleParts}}}, []string{"large.family"}, "no binding polynomial"},
}

// Every bad definition is refused, each fault named under its key, with what to
// write instead.
func TestBadDefinitions(t *testing.T) {
	for _, c := range slices.Concat(badSites, badConstants, badEffectors, badContacts, badConformations, badStates, badParts) {
		t.Run(c.name, func(t *testing.T) {
			f, _ := mechanisms.Lookup(c.family)
			m, err := f.Build(c.d)
			list := complaints(err)
			if m != nil || len(list) == 0 {
				t.Fatalf("accepted")
			}
			var keys []string
			for _, e := range list {
				keys = append(keys, e.Key)
				if e.Write == "" || strings.HasSuffix(e.Problem, ".") || !strings.HasPrefix(e.Error(), e.Key) {
					t.Errorf("%q, write %q", e, e.Write)
				}
			}
			if !slices.Equal(keys, c.keys) || !strings.Contains(list[0].Problem, c.says) {
				t.Errorf("complaints under %q: %v", keys, err)
			}
		})
	}
}

// Definitions that look odd but are sound, and the constants they leave.
func TestGoodDefinitions(t *testing.T) {
	for name, c := range map[string]struct {
		family    string
		d         def
		constants []string
	}{
		"two sites, c fixed":    {"mwc", def{Sites: 2, Constants: fixed("c", 0.1)}, []string{"L", "c", "K_R"}},
		"exclusive":             {"mwc", def{Sites: 2, Constants: fixed("c", 0)}, []string{"L", "K_R"}},
		"exclusive, given":      {"mwc", def{Sites: 2, Constants: given{"c": {Value: number(0)}}}, []string{"L", "K_R"}},
		"two sites, L differs":  {"mwc", def{Sites: 2, Differs: true}, []string{"L", "c", "K_R"}},
		"effectors":             {"mwc", def{Sites: 4, Effectors: twoEffectors}, []string{"L", "c", "K_R", "alanine.K_T", "FBP.K_R", "FBP.K_T"}},
		"chains":                {"mwc", def{SiteClasses: chains, Differs: true}, []string{"L", "alpha.c", "alpha.K_R", "beta.c", "beta.K_R"}},
		"turnover":              {"mwc", def{Sites: 4, Turnover: view("R", "T")}, []string{"L", "c", "K_R", "turnover_T"}},
		"K_AB of a square held": {"sequential", def{Contacts: "square", Constants: fixed("K_AB", 0.5)}, []string{"K", "K_BB", "K_AB"}},
		"Adair":                 {"adair", def{Sites: 2}, []string{"beta1", "beta2"}},
		"Adair, Kd2 fixed":      {"adair", def{Sites: 2, Constants: fixed("Kd2", 3)}, []string{"Kd1", "Kd2"}},
		"classes":               {"independent", def{Classes: twoClasses}, []string{"tight.Kd", "loose.ratio"}},
		"classes, one fixed":    {"independent", def{Classes: twoClasses, Constants: fixed("tight.Kd", 3)}, []string{"tight.Kd", "loose.Kd"}},
		"states by bare name":   {"states", def{States: listedStates.States, Constants: fixed("K_I", 3)}, []string{"K_S", "I.K_I", "a", "b"}},
		"shares given": {"mixture", def{Parts: simpleParts, Constants: given{"tight.share": {Fixed: number(0.4)}, "loose.share": {Fixed: number(0.6)}}},
			[]string{"tight.Kd", "loose.ratio"}},
		"part with c = 0": {"mixture", def{Parts: []mechanisms.Part{{Name: "a", Sites: 1}, {Name: "b", Family: "mwc", Definition: &def{Sites: 4}}},
			Constants: given{"b.c": {Fixed: number(0)}}}, []string{"a.Kd", "b.L", "b.K_R", "share"}},
		"part with c = 0 inside": {"mixture", def{Parts: []mechanisms.Part{{Name: "a", Sites: 1},
			{Name: "b", Family: "mwc", Definition: &def{Sites: 4, Constants: fixed("c", 0)}}}}, []string{"a.Kd", "b.L", "b.K_R", "share"}},
	} {
		f, _ := mechanisms.Lookup(c.family)
		m, err := f.Build(c.d)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		var keys []string
		for _, k := range m.Constants() {
			keys = append(keys, k.Key())
		}
		if !slices.Equal(keys, c.constants) {
			t.Errorf("%s: constants %q", name, keys)
		}
	}
}

// What a definition says of constants, parts included.
func TestAllGiven(t *testing.T) {
	d := def{
		Constants: started("share", 0.4),
		Small:     &mechanisms.Part{Sites: 1},
		Parts:     []mechanisms.Part{{Name: "a", Sites: 1}, {Name: "b", Family: "mwc", Definition: &def{Sites: 4, Constants: fixed("L", 9)}}},
	}
	all := d.AllGiven()
	if len(all) != 2 || *all["share"].Start != 0.4 || *all["b.L"].Fixed != 9 {
		t.Errorf("%v", all)
	}
}
