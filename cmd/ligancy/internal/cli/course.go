package cli

import (
	"context"
	"fmt"

	"github.com/spf13/cobra"

	"ligancy/cmd/ligancy/internal/report"
)

const courseHelp = `ligancy course STUDY

Follows every mechanism that has rates (rates: {k_on: 1e6 1/(M s), exchange: 10 1/s}) against time:
through the phases of the block

  course: {phases: [{add: 10 nM, for: 30 min}, {dilute: 100, for: 60 min}, {wash: true, for: 1 h}]}

Prints the course, the relaxation times over the ligand, how long to wait for 99 %, what a curve
would read after the incubation, and where dissociation, with unlabelled ligand and without, would
part the mechanisms. Constants are those of the study (constants: {K_R: {value: 0.9}}) or, where it
gives none, those that fit its data. Nothing is written.

  --json   prints one JSON document instead, with every time

Exit codes: 0 printed, 1 something to mend or a mechanism that cannot be followed, 2 wrong usage,
130 interrupted.
`

func (p *program) courseCommand() *cobra.Command {
	var json bool
	c := &cobra.Command{
		Use:  "course STUDY",
		Long: courseHelp,
		Args: names("study", 1),
		RunE: func(c *cobra.Command, args []string) error { return p.course(c.Context(), args[0], json) },
	}
	c.Flags().BoolVar(&json, "json", false, "one JSON document")
	return c
}

func (p *program) course(ctx context.Context, name string, json bool) error {
	o, err := p.ready(name, "Nothing was calculated.")
	if err != nil {
		return err
	}
	r := p.newProgress()
	outcome, err := o.analysis.Follow(ctx, r)
	r.wipe()
	if ctx.Err() != nil {
		return exit(Interrupted)
	}
	if outcome == nil || len(outcome.Mechanisms) == 0 {
		return fmt.Errorf("%s: %w", name, err)
	}
	if err != nil {
		p.complain("left out: %v", err)
	}
	d := report.NewCourse(o.analysis, outcome, o.source())
	if json {
		return report.WriteJSON(p.out, d)
	}
	return d.WriteText(p.out, p.colour())
}
