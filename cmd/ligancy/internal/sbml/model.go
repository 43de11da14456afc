// Package sbml writes a mechanism with rates as SBML Level 3 Version 1 core
// (Hucka et al. 2010, doi:10.1038/npre.2010.4959), for programs that integrate
// reaction networks.
//
// One compartment holds a species for each state of the molecule and one for the
// ligand. Constants and rates are parameters; the rate constants of both directions
// of each step follow from them by initial assignments, so that cycles stay
// balanced when a constant is changed.
package sbml

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"

	"ligancy/fit/saturation"
	"ligancy/mechanisms"
	"ligancy/mechanisms/kinetics"
	"ligancy/specs/units"
)

// Parameter is a constant or a rate, not on a logarithm.
type Parameter struct {
	ID, Name string
	Value    float64
}

// Rate is a rate constant Factor·∏ parameterᵖᵒʷᵉʳ. Where its dependence is not of
// that form, Powers is empty and Factor the number.
type Rate struct {
	ID     string
	Factor float64
	Powers map[string]float64
	Value  float64
}

// Species is a state of the molecule.
type Species struct {
	ID, Name string
	Initial  float64 // molecules, as concentration
	Ligands  int
	Sites    int
}

// Reaction is one step, From → To, with the ligand where it binds.
type Reaction struct {
	ID, Name string
	Kind     mechanisms.StepKind
	From, To string
	Up, Down Rate
}

// Model is what is written.
type Model struct {
	Name       string
	Notes      []string
	Unit       string  // of the ligand
	Mole       float64 // one unit of the ligand in mol/L; 0 where it is no concentration
	Ligand     float64 // at the beginning
	UsedUp     bool    // the ligand
	States     []Species
	Parameters []Parameter
	Reactions  []Reaction
	fixed      int // rates that do not follow from the parameters
}

// LigandID is the species of the ligand.
const LigandID = "ligand"

// New assembles the model of one mechanism. The molecule begins at rest without
// ligand; the ligand is what the first phase of the study's course adds, else 1 of its
// unit, and is used up where the study states the concentration of sites.
func New(k *saturation.Kinetic, a *saturation.Analysis) (*Model, error) {
	b := k.Model.Bound()
	if err := b.Bind(k.Theta, k.Phi, k.Environment); err != nil {
		return nil, fmt.Errorf("mechanism %q: %w", k.Name, err)
	}
	m := &Model{Name: k.Name, Unit: a.Ligand.Unit, Ligand: 1, UsedUp: k.Program.Sites > 0}
	if u, err := units.Parse(a.Ligand.Unit); err == nil && u.IsConcentration() {
		if mole, err := (units.Quantity{Value: 1, Unit: u}).In(units.MustParse("M")); err == nil {
			m.Mole = mole
		}
	}
	for _, p := range k.Program.Phases {
		if p.Action == kinetics.Add {
			m.Ligand = p.Amount
			break
		}
	}
	ids := names{LigandID: true, "cell": true, "Y": true}
	m.parameters(k, ids)
	m.states(b, k, ids)
	m.reactions(b, k, ids)
	m.notes(k, a)
	return m, nil
}

func (m *Model) notes(k *saturation.Kinetic, a *saturation.Analysis) {
	m.Notes = append(m.Notes, fmt.Sprintf("Mechanism %s (family %s), constants: %s.", k.Name, k.Family, k.Status))
	if a.Origin != "" {
		m.Notes = append(m.Notes, "Origin: "+a.Origin+".")
	}
	if k.Curve != "" {
		m.Notes = append(m.Notes, "Effectors, held and contained in the rates: "+k.Curve+".")
	}
	held := "held at its concentration"
	if m.UsedUp {
		held = "used up by binding"
	}
	m.Notes = append(m.Notes, fmt.Sprintf("Free ligand in %s, %s; time in seconds. Y is the saturation.", a.Ligand.Unit, held))
	if m.fixed > 0 {
		m.Notes = append(m.Notes, fmt.Sprintf("%d rate constants are numbers: they do not follow from the constants as products of powers.", m.fixed))
	}
	m.Notes = append(m.Notes, "Research use only, not for diagnosis or treatment.")
}

// parameters are the constants on a logarithm, and the rates.
func (m *Model) parameters(k *saturation.Kinetic, ids names) {
	for i, c := range k.Model.Mechanism().Constants() {
		if c.Scale == mechanisms.Log && !math.IsInf(k.Theta[i], 0) {
			m.Parameters = append(m.Parameters, Parameter{ids.take(c.Key()), c.Key(), math.Exp(k.Theta[i])})
		} else {
			m.Parameters = append(m.Parameters, Parameter{Name: c.Key()})
		}
	}
	for i, c := range k.Model.Rates() {
		m.Parameters = append(m.Parameters, Parameter{ids.take(c.Key()), c.Key(), math.Exp(k.Phi[i])})
	}
}

// states begin at rest without ligand; p_s is a share of sites, p_s/n_s of molecules.
func (m *Model) states(b *kinetics.Bound, k *saturation.Kinetic, ids names) {
	net := k.Model.Network()
	share := b.AtRest(make([]float64, len(net.States)), nil, 0)
	total := 1.0
	if m.UsedUp {
		total = k.Program.Sites
	}
	for i, s := range net.States {
		m.States = append(m.States, Species{ids.take(s.Name), s.Name, total * share[i] / float64(s.Sites), s.Ligands, s.Sites})
	}
}

// reactions are the steps that have rates.
func (m *Model) reactions(b *kinetics.Bound, k *saturation.Kinetic, ids names) {
	net := k.Model.Network()
	far := shifted(b.Model(), k)
	for e, s := range net.Steps {
		r := b.Step(e)
		if !(r.Up > 0) {
			continue
		}
		var up, down float64
		if far != nil {
			f := far.Step(e)
			up, down = f.Up, f.Down
		}
		from, to := m.States[s.From], m.States[s.To]
		id := ids.take(from.ID + "_to_" + to.ID)
		m.Reactions = append(m.Reactions, Reaction{ID: id, Name: from.Name + " to " + to.Name, Kind: s.Kind, From: from.ID, To: to.ID,
			Up: m.rate(ids.take("up_"+id), r.Up, r.DUp, up, k), Down: m.rate(ids.take("down_"+id), r.Down, r.DDown, down, k)})
	}
}

// shift is a step of every ln constant that tells a product of powers from anything
// else; the steps differ so that none cancels another.
func shift(i int) float64 { return 0.1 + 0.03*float64(i%11) }

// shifted binds the model at shifted constants; nil where it cannot be.
func shifted(model *kinetics.Model, k *saturation.Kinetic) *kinetics.Bound {
	theta, phi := append([]float64{}, k.Theta...), append([]float64{}, k.Phi...)
	for i, c := range model.Mechanism().Constants() {
		if c.Scale == mechanisms.Log {
			theta[i] += shift(i)
		}
	}
	for i := range phi {
		phi[i] += shift(len(theta) + i)
	}
	b := model.Bound()
	if b.Bind(theta, phi, k.Environment) != nil {
		return nil
	}
	return b
}

// rate writes a rate constant as a product of powers, if it is one: if ln of it
// moves as its derivatives say over a wide step.
func (m *Model) rate(id string, value float64, d []float64, far float64, k *saturation.Kinetic) Rate {
	r := Rate{ID: id, Value: value, Factor: value}
	powers, foretold, factor := map[string]float64{}, math.Log(value), value
	for i, p := range m.Parameters {
		power := math.Round(d[i]*1e9) / 1e9
		if power == 0 {
			continue
		}
		if p.ID == "" {
			m.fixed++
			return r
		}
		powers[p.ID] = power
		foretold += power * shift(i)
		factor /= math.Pow(p.Value, power)
	}
	if !(far > 0) || math.Abs(foretold-math.Log(far)) > 1e-9*math.Max(1, math.Abs(foretold)) || !(factor > 0) || math.IsInf(factor, 0) {
		m.fixed++
		return r
	}
	if whole := math.Round(factor); whole > 0 && math.Abs(factor-whole) < 1e-12*whole {
		factor = whole
	}
	r.Factor, r.Powers = factor, powers
	return r
}

// names are the identifiers that are taken.
type names map[string]bool

var unfit = regexp.MustCompile(`[^A-Za-z0-9_]+`)

// take makes an identifier (SId) of a name, one of its own.
func (n names) take(name string) string {
	id := strings.Trim(unfit.ReplaceAllString(name, "_"), "_")
	if id == "" || id[0] >= '0' && id[0] <= '9' {
		id = "s_" + id
	}
	base := id
	for i := 2; n[id]; i++ {
		id = base + "_" + strconv.Itoa(i)
	}
	n[id] = true
	return id
}
