package saturation

import (
	"context"
	"fmt"
	"math"

	"ligancy/mechanisms"
	"ligancy/mechanisms/kinetics"
)

// PartingRow is how far two mechanisms lie apart while ligand leaves after a
// dilution, with unlabelled ligand or without: what can part curves that are alike at
// rest. Times are since the dilution.
type PartingRow struct {
	Mechanism  string  `json:"mechanism"`
	Other      string  `json:"other"`
	Does       string  `json:"does"` // "dilute", "dilute and block"
	Loaded     Real    `json:"loaded"`
	Factor     Real    `json:"factor"`     // of the dilution
	Unlabelled Real    `json:"unlabelled"` // ligand, added after the dilution
	Seconds    Real    `json:"seconds"`    // at which they lie furthest apart
	Bound      Real    `json:"bound"`      // share of all sites with labelled ligand, by the one and the other
	OtherBound Real    `json:"other_bound"`
	Difference Real    `json:"difference"`
	InScatters Real    `json:"in_scatters"` // of one measurement
	Why        *string `json:"why"`
}

// What is done to part mechanisms where the study's phases do not say.
const (
	partDilution = 100.
	partExcess   = 100. // of unlabelled ligand, over what was loaded
	partPoints   = 400
	partLoaded   = 0.9 // saturation before
)

// rebinding is the caution that goes with every dissociation.
const rebinding = "Ligand that leaves binds again wherever sites are crowded (cells, membranes, beads, a chip): dilution alone then " +
	"looks slower than the molecules are, and faster loss with unlabelled ligand is no proof that sites interact. " +
	"Show that fewer sites give the same course before taking the difference for a mechanism."

// oneCourse warns that given rates bear on the answer.
const oneCourse = "The partings hold at the constants and rates in force; where rates are given, not fitted, other rates part the mechanisms otherwise."

// part compares every two mechanisms.
func (a *Analysis) part(ctx context.Context, list []*timed, out *CourseOutcome) error {
	if len(list) == 0 {
		return nil
	}
	if len(list) > 1 {
		out.Cautions = append(out.Cautions, rebinding, oneCourse)
	} else if a.dissociates() {
		out.Cautions = append(out.Cautions, rebinding)
	}
	for i, s := range list {
		for _, t := range list[i+1:] {
			for _, block := range []bool{false, true} {
				row, err := a.parting(ctx, s, t, block)
				if err != nil {
					return fmt.Errorf("%q and %q: %w", s.c.Name, t.c.Name, err)
				}
				out.Partings = append(out.Partings, row)
			}
		}
	}
	return nil
}

// dissociates says whether the course's phases take ligand away.
func (a *Analysis) dissociates() bool {
	if a.Course == nil {
		return false
	}
	for _, ph := range a.Course.Phases {
		if ph.Dilute > 0 || ph.Wash || ph.Block > 0 {
			return true
		}
	}
	return false
}

// partProgram is the dissociation that two mechanisms are held against.
func (a *Analysis) partProgram(s, t *timed, block bool) (kinetics.Program, []float64, error) {
	loaded, factor, excess := 0.0, partDilution, 0.0
	if a.Course != nil {
		for _, ph := range a.Course.Phases {
			switch {
			case ph.Add > 0 && loaded == 0:
				loaded = ph.Add
			case ph.Dilute > 0:
				factor = ph.Dilute
			case ph.Block > 0:
				excess = ph.Block
			}
		}
	}
	if loaded == 0 {
		curve := s.c.Mechanism.Curve()
		env, _ := a.courseEnvironment(s.c)
		curve.Bind(s.theta, env)
		at := mechanisms.XAt(curve, partLoaded)
		if at.Why != "" {
			return kinetics.Program{}, nil, fmt.Errorf("no ligand to load with: %s", at.Why)
		}
		loaded = math.Exp(at.Value)
	}
	if excess == 0 {
		excess = partExcess * loaded
	}
	long := 0.0
	for _, m := range []*timed{s, t} {
		tau, err := a.slowestTime(m, loaded/factor)
		if err != nil {
			return kinetics.Program{}, nil, err
		}
		long = math.Max(long, 5*tau)
	}
	p := kinetics.Program{Loaded: loaded, Phases: []kinetics.Phase{{Action: kinetics.Dilute, Amount: factor, Seconds: long}}}
	if base := a.courseProgram(); base != nil {
		p.Sites = base.Sites
	}
	if block {
		// The dilution takes no time of its own: unlabelled ligand comes with it.
		p.Phases[0].Seconds = long * 1e-9
		p.Phases = append(p.Phases, kinetics.Phase{Action: kinetics.Block, Amount: excess, Seconds: long})
	}
	times := make([]float64, partPoints)
	for i := range times {
		times[i] = long * math.Pow(1e-4, 1-float64(i)/(partPoints-1))
	}
	return p, times, nil
}

// slowestTime is the slowest relaxation of a mechanism at one free ligand.
func (a *Analysis) slowestTime(t *timed, x float64) (float64, error) {
	b, err := a.boundTimed(t)
	if err != nil {
		return 0, err
	}
	tau, err := b.Relaxations(x)
	if err != nil || len(tau) == 0 {
		return 1, err
	}
	return tau[0], nil
}

func (a *Analysis) boundTimed(t *timed) (*kinetics.Bound, error) {
	env, _ := a.courseEnvironment(t.c)
	b := t.model.Bound()
	return b, b.Bind(t.theta, t.phi, env)
}

// parting follows two mechanisms through one dissociation.
func (a *Analysis) parting(ctx context.Context, s, t *timed, block bool) (PartingRow, error) {
	row := PartingRow{Mechanism: s.c.Name, Other: t.c.Name, Does: "dilute", Unlabelled: nan, Seconds: nan, Bound: nan, OtherBound: nan,
		Difference: nan, InScatters: nan}
	p, times, err := a.partProgram(s, t, block)
	if err != nil {
		return row, err
	}
	row.Loaded, row.Factor = Real(p.Loaded), Real(p.Phases[0].Amount)
	if block {
		row.Does, row.Unlabelled = "dilute and block", Real(p.Phases[1].Amount)
	}
	var courses [2]*kinetics.Course
	for i, m := range []*timed{s, t} {
		b, err := a.boundTimed(m)
		if err != nil {
			return row, err
		}
		if courses[i], err = b.Run(ctx, &p, append([]float64{0}, times...), false); err != nil {
			return row, err
		}
	}
	one, other := courses[0], courses[1]
	worst := -1.0
	for i := range one.Seconds {
		if d := math.Abs(one.Labelled[i] - other.Labelled[i]); d > worst {
			worst = d
			row.Seconds = Real(one.Seconds[i])
			row.Bound, row.OtherBound = Real(one.Labelled[i]), Real(other.Labelled[i])
			row.Difference = Real(d)
		}
	}
	noise := s.noise
	if math.IsNaN(noise) || t.noise < noise {
		noise = t.noise
	}
	if noise > 0 {
		row.InScatters = Real(worst / noise)
	} else {
		row.Why = text("no scatter is known: nothing was fitted")
	}
	return row, nil
}
