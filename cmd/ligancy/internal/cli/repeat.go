package cli

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"path/filepath"

	"github.com/spf13/cobra"

	"ligancy/cmd/ligancy/internal/report"
	"ligancy/specs/diag"
	"ligancy/specs/record"
)

const repeatHelp = `ligancy repeat STUDY

Fits a study again and compares with its record, STUDY.record.yaml, which   ligancy fit --record
wrote beside it. Says first which files changed since, then which numbers moved. The tolerance is a
fiftieth of half an interval, wide beside what another processor does and narrow beside anything
that a reader would conclude. Nothing is written.

  --json   prints one JSON document instead

Exit codes: 0 the same within tolerance, 1 a study or record that cannot be used, 2 wrong usage,
3 something moved, 130 interrupted.
`

func (p *program) repeatCommand() *cobra.Command {
	var json bool
	c := &cobra.Command{
		Use:  "repeat STUDY",
		Long: repeatHelp,
		Args: names("study", 1),
		RunE: func(c *cobra.Command, args []string) error { return p.repeat(c.Context(), args[0], json) },
	}
	c.Flags().BoolVar(&json, "json", false, "one JSON document")
	return c
}

func (p *program) repeat(ctx context.Context, name string, json bool) error {
	o := p.open(name)
	if o.analysis == nil {
		if err := o.refuse(p.Stderr, "Nothing was fitted, nothing was compared."); err != nil {
			return err
		}
		return exit(Unusable)
	}
	if err := diag.WriteText(p.Stderr, o.complaints); err != nil {
		return err
	}
	file := record.FileName(name)
	old, err := p.readRecord(file)
	if errors.Is(err, fs.ErrNotExist) {
		return fmt.Errorf("there is no record %s; write it with   ligancy fit --record %s", file, name)
	}
	if err != nil {
		return err
	}
	d, err := p.analyse(ctx, o)
	if ctx.Err() != nil {
		p.complain("interrupted; nothing was compared")
		return exit(Interrupted)
	}
	if err != nil {
		return fmt.Errorf("%s: %w", name, err)
	}
	r := report.NewRepeat(o.source(), o.analysis.Title, o.analysis.Origin, filepath.Base(file),
		record.Compare(old, o.record(d)))
	if json {
		err = report.WriteJSON(p.out, r)
	} else {
		err = r.WriteText(p.out, p.colour())
	}
	if err == nil && !r.Same {
		return exit(NotHeld)
	}
	return err
}
