package kinetics

import "slices"

// StepRates is one step of a bound model: rate constants without the ligand, the
// effectors contained, and ∂ln/∂Θ. Both are zero where a state has no weight or
// the step no rate.
type StepRates struct {
	Up, Down   float64
	DUp, DDown []float64
}

// Step is the rates of step e of the network.
func (b *Bound) Step(e int) StepRates {
	return StepRates{b.up[e], b.down[e], slices.Clone(b.dUp.RawRowView(e)), slices.Clone(b.dDown.RawRowView(e))}
}
