package cli

import (
	"context"
	"fmt"

	"github.com/spf13/cobra"

	"ligancy/cmd/ligancy/internal/report"
)

const planHelp = `ligancy plan STUDY

Fits a study and says what to measure next, beside what is measured. The block

  plan: {range: [0.1 torr, 200 torr], points: 12, replicates: 2, series: 2-fold, aim: discriminate}

says where. aim: discriminate tells the leader from the nearest rival that is open; aim: constants
holds the leader's constants more firmly. Prints ligand values, readings at each, how often the
right mechanism would then lead in simulated studies, and how firmly the constants would be held. A
plan is statistics, not a protocol: solubility and safety are not checked. Nothing is written.

  --json   prints one JSON document instead

Exit codes: 0 printed, 1 something to mend or nothing to plan, 2 wrong usage, 130 interrupted.
`

func (p *program) planCommand() *cobra.Command {
	var json bool
	c := &cobra.Command{
		Use:  "plan STUDY",
		Long: planHelp,
		Args: names("study", 1),
		RunE: func(c *cobra.Command, args []string) error { return p.plan(c.Context(), args[0], json) },
	}
	c.Flags().BoolVar(&json, "json", false, "one JSON document")
	return c
}

func (p *program) plan(ctx context.Context, name string, json bool) error {
	o, err := p.ready(name, "Nothing was planned.")
	if err != nil {
		return err
	}
	progress := p.newProgress()
	outcome, err := o.analysis.NextMeasurement(ctx, progress)
	progress.wipe()
	if ctx.Err() != nil {
		return exit(Interrupted)
	}
	if err != nil {
		return fmt.Errorf("%s: %w", name, err)
	}
	d := report.NewPlan(o.analysis, outcome, o.source())
	if json {
		return report.WriteJSON(p.out, d)
	}
	return d.WriteText(p.out, p.colour())
}
