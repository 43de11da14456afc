package saturation

import (
	"context"
	"fmt"

	"ligancy/mechanisms/kinetics"
)

// followCycle writes the rows of a cycle of catalysis: the response is the product, in
// the substrate's unit where the enzyme is given by sites_present, else turnovers per
// enzyme; saturation does not exist. A caution says whether the cycle is driven.
func (a *Analysis) followCycle(ctx context.Context, t *timed, out *CourseOutcome) error {
	env, label := a.courseEnvironment(t.c)
	g := kinetics.NewProgress(t.driven)
	if err := g.Bind(t.theta, nil, env); err != nil {
		return fmt.Errorf("mechanism %q: %w", t.c.Name, err)
	}
	if p := a.courseProgram(); p != nil {
		c, err := g.Run(ctx, p, a.courseTimes(p), false)
		if err != nil {
			return fmt.Errorf("mechanism %q: %w", t.c.Name, err)
		}
		for i, s := range c.Seconds {
			out.Course = append(out.Course, TimeRow{t.c.Name, label, c.Phase[i] + 1, Real(s), nan, nan, Real(c.Seen[i]), Real(c.Free[i]), 0})
		}
	}
	out.Mechanisms = append(out.Mechanisms, t.row())
	a.courseConstants(t, out)
	words := "“" + t.c.Name + "” is in detailed balance: nothing drives it, and it is equilibrium binding."
	if holds, why := t.driven.Balance(t.theta, env); !holds {
		words = "“" + t.c.Name + "” is not in detailed balance: " + why + ". Its Hill coefficient may differ from 1 by kinetics alone."
	}
	out.Cautions = append(out.Cautions, words)
	return nil
}
