package saturation

import (
	"context"
	"errors"

	"ligancy/mechanisms"
	"ligancy/mechanisms/kinetics"
)

// Kinetic is one mechanism with rates at the constants that the study gives, or
// those that fit its data.
type Kinetic struct {
	Name, Family, Status string // Status: "given", or that of the fit
	Model                *kinetics.Model
	Theta, Phi           []float64 // constants on their scales, ln of the rates
	Environment          mechanisms.Environment
	Curve                string           // the effectors in force
	Program              kinetics.Program // without phases where the study has no course
}

// Kinetics settles every candidate that has rates. The error says which were left
// out, and why.
func (a *Analysis) Kinetics(ctx context.Context, rec Recorder) ([]Kinetic, error) {
	a = a.withDefaults()
	var all []Kinetic
	var faults []error
	for i := range a.Candidates {
		t, err := a.timed(ctx, &a.Candidates[i], rec)
		if err != nil {
			faults = append(faults, err)
			continue
		}
		k := Kinetic{Name: t.c.Name, Family: t.c.Family, Status: t.status, Model: t.model, Theta: t.theta, Phi: t.phi}
		k.Environment, k.Curve = a.courseEnvironment(t.c)
		if p := a.courseProgram(); p != nil {
			k.Program = *p
		}
		all = append(all, k)
	}
	return all, errors.Join(faults...)
}
