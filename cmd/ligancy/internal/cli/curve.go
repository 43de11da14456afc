package cli

import (
	"fmt"

	"github.com/spf13/cobra"

	"ligancy/cmd/ligancy/internal/report"
)

const curveHelp = `ligancy curve STUDY

Prints the curves that follow from constants given in the study (constants: {K_R: {value: 0.9}}):
where they lie, their Hill coefficients, and saturation against free ligand. Nothing is fitted and
nothing is written. The block   curve: {from: 0.1 torr, to: 200 torr, points: 200}   says where.

  --json   prints one JSON document instead, with every point and the populations of the states

Exit codes: 0 printed, 1 something to mend or constants without a value, 2 wrong usage.
`

func (p *program) curveCommand() *cobra.Command {
	var json bool
	c := &cobra.Command{
		Use:  "curve STUDY",
		Long: curveHelp,
		Args: names("study", 1),
		RunE: func(_ *cobra.Command, args []string) error { return p.curve(args[0], json) },
	}
	c.Flags().BoolVar(&json, "json", false, "one JSON document")
	return c
}

func (p *program) curve(name string, json bool) error {
	o, err := p.ready(name, "Nothing was calculated.")
	if err != nil {
		return err
	}
	outcome, err := o.analysis.Given()
	if outcome == nil || len(outcome.Mechanisms) == 0 {
		return fmt.Errorf("%s: %w", name, err)
	}
	if err != nil {
		p.complain("left out: %v", err)
	}
	d := report.New(o.analysis, outcome, o.source())
	if json {
		return report.WriteJSON(p.out, d)
	}
	return d.WriteGiven(p.out, p.colour())
}
