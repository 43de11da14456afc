package saturation

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
)

// PlanOutcome is the next measurement, and what it may be expected to tell.
type PlanOutcome struct {
	Aim    string  `json:"aim"` // "discriminate", "constants"
	Leader string  `json:"leader"`
	Rival  *string `json:"rival"` // null where the aim is constants
	// Of is the mechanism whose curve and constants the plan takes for right: the
	// leader or, where the rival can draw every curve of the leader, the rival.
	Of        string         `json:"of"`
	Measure   []PlanRow      `json:"measure"`
	Odds      []OddsRow      `json:"odds"`
	Precision []PrecisionRow `json:"precision"`
	Averaged  int            `json:"averaged"` // sets of constants over which the plan is averaged
}

// PlanRow is one ligand value to measure.
type PlanRow struct {
	Data       string `json:"data"`
	Curve      string `json:"curve"`
	X          Real   `json:"x"`
	Replicates int    `json:"replicates"`
	Response   Real   `json:"response"` // that the leader foretells
	Scatter    Real   `json:"scatter"`  // standard deviation of one reading
	// Apart is the distance of the refitted rival's curve from the leader's, in
	// standard deviations of one reading; null where the aim is constants.
	Apart Real `json:"apart"`
}

// OddsRow says how often the right mechanism is chosen once the plan is carried out.
type OddsRow struct {
	Right   string `json:"right"`   // the mechanism that the new readings are drawn from
	Chosen  Real   `json:"chosen"`  // share of studies in which it then has the lower AICc
	Studies int    `json:"studies"` // simulated
}

// PrecisionRow is one fitted number: how firmly the data hold it and would hold it, by
// the covariance: as a factor where Factor is set, else half the interval.
type PrecisionRow struct {
	Name   string `json:"name"`
	Curve  string `json:"curve"`
	Factor bool   `json:"factor"`
	Now    Real   `json:"now"`
	After  Real   `json:"after"`
}

// Defaults of a plan, and the size of its averages.
const (
	planPoints  = 12
	planGrid    = 41 // ligand values to choose from, where there is no dilution series
	planDraws   = 9  // the best constants and eight draws of them
	planStudies = 199
)

// NextMeasurement proposes what to measure next, beside what is measured. To hold
// constants it maximises ln det of the information (D-optimality); to discriminate, what
// is left between the leader's curve and a refit of the nearest open rival (Atkinson &
// Fedorov 1975 Biometrika 62:57); where the rival can draw every curve of the leader, the
// two change places. Both are averaged over the uncertainty of the
// constants. A plan is statistics: what can be dissolved and handled is not known here.
func (a *Analysis) NextMeasurement(ctx context.Context, rec Recorder) (*PlanOutcome, error) {
	if a.Plan == nil {
		return nil, errors.New("the study asks for no plan; write   plan: {aim: discriminate}")
	}
	a = a.withDefaults()
	if err := a.plannable(); err != nil {
		return nil, err
	}
	fits := a.fitAll(ctx, rec)
	order := a.compare(ctx, fits, rec)
	if ctx.Err() != nil {
		return nil, ctx.Err()
	}
	if len(order) == 0 || fits[order[0]].result == nil {
		return nil, errors.New("no mechanism could be fitted")
	}
	leader := fits[order[0]]
	out := &PlanOutcome{Aim: a.Plan.Aim, Leader: leader.row.Name, Odds: []OddsRow{}, Precision: []PrecisionRow{}}
	right, rival := leader, (*fitted)(nil)
	if out.Aim != "constants" {
		if rival = nearestOpen(fits, order); rival == nil {
			return nil, fmt.Errorf("no rival of %q is left open, so there is nothing to tell apart; write   plan: {aim: constants}", out.Leader)
		}
		out.Rival = &rival.row.Name
		if rival.holdsLead { // no reading that the leader foretells could part them
			right, rival = rival, leader
		}
	}
	p, err := newPlanner(a, right)
	if err != nil {
		return nil, err
	}
	out.Of = right.row.Name
	if rival == nil {
		err = p.holdConstants(ctx)
	} else if err = p.discriminate(ctx, rival, rec); err == nil {
		out.Odds, err = p.odds(ctx, rec)
	}
	if err != nil {
		return nil, err
	}
	out.Averaged, out.Measure = len(p.draws), p.rows()
	if right == leader {
		out.Precision = p.precision()
	}
	return out, nil
}

// plannable says why no plan can be made of these data.
func (a *Analysis) plannable() error {
	for i := range a.Data {
		d := &a.Data[i]
		switch {
		case d.Trace:
			return fmt.Errorf("%s is followed in time; a plan is of curves at rest", d.Name)
		case d.Noise == Replicates:
			return fmt.Errorf("the scatter of %s is taken from its replicates, which says nothing of other ligand values; for a plan write   noise: proportional   or another law", d.Name)
		}
	}
	if len(a.Data) == 0 {
		return errors.New("a plan needs data: what to measure next depends on what was found")
	}
	return nil
}

// nearestOpen is the mechanism next behind the leader that is not out, draws other
// curves, and is no freer version of the leader; nil where there is none.
func nearestOpen(fits []*fitted, order []int) *fitted {
	for _, i := range order[1:] {
		f := fits[i]
		if f.result != nil && f.twinOf < 0 && (f.row.Standing == "open" || f.row.Standing == "ties") {
			return f
		}
	}
	return nil
}

// rows are the values chosen, by curve and ligand.
func (p *planner) rows() []PlanRow {
	var out []PlanRow
	for i := range p.sites {
		if p.chosen[i] == 0 {
			continue
		}
		s := &p.sites[i]
		row := PlanRow{Data: p.a.Data[s.data].Name, Curve: s.curve, X: Real(s.point.X), Replicates: p.chosen[i],
			Response: Real(p.leads[0][i]), Scatter: Real(s.sd), Apart: nan}
		if p.rival != nil {
			row.Apart = Real(math.Abs(p.leads[0][i]-p.rivals[0][i]) / s.sd)
		}
		out = append(out, row)
	}
	slices.SortStableFunc(out, func(a, b PlanRow) int {
		switch {
		case a.Data != b.Data || a.Curve != b.Curve:
			return 0 // sites stand curve by curve
		case a.X < b.X:
			return -1
		case a.X > b.X:
			return 1
		}
		return 0
	})
	return out
}
