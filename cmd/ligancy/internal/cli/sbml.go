package cli

import (
	"context"
	"fmt"
	"strings"

	"github.com/spf13/cobra"

	"ligancy/cmd/ligancy/internal/sbml"
	"ligancy/fit/saturation"
)

const sbmlHelp = `ligancy sbml STUDY

Prints a mechanism that has rates (rates: {k_on: 1e6 1/(M s)}) as SBML Level 3 Version 1, for
programs that integrate reaction networks: its states, its steps, its constants and, following from
them, the rate constants of both directions. Constants are those of the study (constants: {K_R:
{value: 0.9}}) or, where it gives none, those that fit its data. Nothing is written.

  --mechanism NAME   which one, where several have rates

Exit codes: 0 printed, 1 something to mend or no mechanism with rates, 2 wrong usage,
130 interrupted.
`

func (p *program) sbmlCommand() *cobra.Command {
	var mechanism string
	c := &cobra.Command{
		Use:  "sbml STUDY",
		Long: sbmlHelp,
		Args: names("study", 1),
		RunE: func(c *cobra.Command, args []string) error { return p.sbml(c.Context(), args[0], mechanism) },
	}
	c.Flags().StringVar(&mechanism, "mechanism", "", "which one, where several have rates")
	return c
}

func (p *program) sbml(ctx context.Context, name, mechanism string) error {
	o, err := p.ready(name, "Nothing was printed.")
	if err != nil {
		return err
	}
	r := p.newProgress()
	all, err := o.analysis.Kinetics(ctx, r)
	r.wipe()
	if ctx.Err() != nil {
		return exit(Interrupted)
	}
	if len(all) == 0 {
		return fmt.Errorf("%s: %w", name, err)
	}
	k, err := chosen(all, mechanism)
	if err != nil {
		return err
	}
	m, err := sbml.New(k, o.analysis)
	if err != nil {
		return err
	}
	_, err = p.out.Write(m.Bytes())
	return err
}

// chosen is the mechanism of that name, or the only one.
func chosen(all []saturation.Kinetic, mechanism string) (*saturation.Kinetic, error) {
	if mechanism == "" && len(all) == 1 {
		return &all[0], nil
	}
	var have []string
	for i := range all {
		if all[i].Name == mechanism {
			return &all[i], nil
		}
		have = append(have, all[i].Name)
	}
	e := &usageError{problem: "several mechanisms have rates: " + strings.Join(have, ", "),
		write: fmt.Sprintf("ligancy sbml --mechanism %q STUDY", have[0])}
	if mechanism != "" {
		e.problem = fmt.Sprintf("no mechanism %q has rates; these have: %s", mechanism, strings.Join(have, ", "))
	}
	return nil, e
}
