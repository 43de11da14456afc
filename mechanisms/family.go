package mechanisms

// Definition is what a study says about one mechanism below its family name.
// Each family reads the fields it knows and complains of the others.
type Definition struct {
	Sites         int              // `sites: 4`
	SiteClasses   []Count          // `sites: {alpha: 2, beta: 2}`
	Classes       []Count          // `classes: {tight: 2, loose: 2}`
	Contacts      string           // `contacts: square`
	Graph         [][2]int         // `contacts: [[1, 2], [2, 3]]`, sites counted from 1
	Effectors     []Effector       // `effectors: {alanine: {binds: T}}`
	Turnover      []Weight         // `turnover: {R: 1, T: free}`
	Sees          []Weight         // `sees: {R: 1}`, or `sees: [A, I]` with weight 1 each
	Parts         []Part           // `parts: {tight: 1, loose: 1}` or a mechanism per part
	Small, Large  *Part            // `small: …`, `large: …` of an assembly
	Conformations []Conformation   // `conformations: {A: {sites: 2, K: K_A}}`
	States        []State          // `states: [{name: E, ligands: 0}]`; of a cycle, names alone
	Steps         []Step           // `steps: [{from: E, to: ES, ligand: 1, rate: k1, back: k2}]` of a cycle
	Constants     map[string]Given // `constants: {K_R: {start: 1}}`, keys as Constant.Key writes them

	// SiteScale asks for the site constants themselves to be fitted, on ln
	// scale, where the family would fit something else (Adair: overall β;
	// independent: ratios): set where a single one of them is to differ
	// between curves. A start, range or fixed value does the same.
	SiteScale bool
	// Differs says that some constant differs between curves, so that the data
	// hold more than one curve's worth of constants.
	Differs bool
}

// Count is a named number of sites.
type Count struct {
	Name  string
	Sites int
}

// Weight is a number, or free, for one conformation.
type Weight struct {
	Name  string
	Value float64
	Free  bool
}

// Effector says how another ligand binds.
type Effector struct {
	Name         string
	Binds        string // "R", "T", "both"
	AtLigandSite bool   // `at: ligand site`: competes with the varied ligand
}

// Part is one population of a mixture or one species of an assembly: a plain
// number of equal sites, or a whole mechanism.
type Part struct {
	Name       string
	Sites      int
	Family     string
	Definition *Definition // nil for plain sites
}

// Conformation is one conformation with its sites, constants and weight by name.
type Conformation struct {
	Name          string
	Sites         int
	K             string            // name of its site constant; "" binds nothing
	Weight        string            // name of its weight constant; "" for the reference
	Like          string            // takes sites and constants of another conformation
	Ligands       map[string]string // effector → name of its dissociation constant
	EffectorSites map[string]int    // effector → number of its sites (default: Sites)
}

// State is one listed state of `states`.
type State struct {
	Name      string
	Ligands   int
	Effectors map[string]int
	Ways      int                // degeneracy; 0 means 1
	Constants map[string]float64 // exponents that multiply the weight
}

// Step is one step of a cycle.
type Step struct {
	From, To   string
	Ligands    int    // of the varied ligand, taken up on the way
	Effector   string // another ligand taken up; "" for none
	Rate, Back string // names of the rate constants; Back "" where there is no way back
	Product    bool   // `yields: product`: the step is counted as turnover
}

// Given is what the study says of one constant; nil means not said.
type Given struct {
	Start, Fixed, Value, Low, High *float64
}

// Family is one entry of the table of families.
type Family struct {
	Name string
	// Doc is the family's text: formula, constants with units, limits, what
	// data hold what, reference. `ligancy families NAME` prints it.
	Doc string
	// Keys are the Definition keys it reads, as a study writes them.
	Keys []string
	// Build settles a mechanism, or says all that is wrong with the definition
	// as a joined error of *DefinitionError.
	Build func(d Definition) (Mechanism, error)
}

// DefinitionError is one thing wrong with a definition.
type DefinitionError struct {
	Key     string // where: "contacts", "constants.K_R", "effectors.alanine.binds"
	Problem string // one sentence without a full stop
	Write   string // what to write instead; may be empty
}

func (e *DefinitionError) Error() string { return e.Key + ": " + e.Problem }
