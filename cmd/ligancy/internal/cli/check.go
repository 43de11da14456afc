package cli

import (
	"context"
	"fmt"

	"github.com/spf13/cobra"

	"ligancy/cmd/ligancy/internal/report"
	"ligancy/fit/saturation"
)

const checkHelp = `ligancy check STUDY…

Reads a study and its tables and says all that must be mended, each with its place and what to
write. Of a study that can be used it says what a careful reviewer will ask, grouped by what to do:
settle first, say in the paper, for completeness, asked and found good. Nothing is written, and only
a Hill equation is fitted; fit asks more.

  --json     prints one JSON document instead (a list of them for several studies)
  --strict   exits 3 where a warning stands or something is left to settle first

Exit codes: 0 the study can be used, 1 something to mend, 2 wrong usage, 3 see --strict,
130 interrupted.
`

type checkOptions struct{ json, strict bool }

func (p *program) checkCommand() *cobra.Command {
	var opts checkOptions
	c := &cobra.Command{
		Use:  "check STUDY…",
		Long: checkHelp,
		Args: names("study", 0),
		RunE: func(c *cobra.Command, args []string) error { return p.checkAll(c.Context(), args, opts) },
	}
	c.Flags().BoolVar(&opts.json, "json", false, "one JSON document")
	c.Flags().BoolVar(&opts.strict, "strict", false, "exit 3 where something is left to settle")
	return c
}

func (p *program) checkAll(ctx context.Context, studies []string, opts checkOptions) error {
	documents := []*report.Check{}
	mend, held := false, true
	for i, name := range studies {
		o := p.open(name)
		var asked []saturation.Objection
		if o.analysis != nil {
			asked = o.analysis.Objections(ctx)
		}
		if ctx.Err() != nil {
			return exit(Interrupted)
		}
		c := report.NewCheck(o.analysis, o.source(), o.complaints, asked)
		documents = append(documents, c)
		mend, held = mend || !c.Usable, held && c.Holds()
		if opts.json {
			continue
		}
		if i > 0 {
			fmt.Fprintln(p.out)
		}
		if err := p.printCheck(o, c); err != nil {
			return err
		}
	}
	if err := p.writeChecks(documents, opts.json); err != nil {
		return err
	}
	switch {
	case mend:
		return exit(Unusable)
	case opts.strict && !held:
		return exit(NotHeld)
	}
	return nil
}

func (p *program) printCheck(o *opened, c *report.Check) error {
	if !c.Usable {
		return o.refuse(p.out, "Nothing was fitted, nothing was written.")
	}
	return c.WriteText(p.out, o.name, p.colour())
}

func (p *program) writeChecks(documents []*report.Check, json bool) error {
	switch {
	case !json:
		return nil
	case len(documents) == 1:
		return report.WriteJSON(p.out, documents[0])
	}
	return report.WriteJSON(p.out, documents)
}
