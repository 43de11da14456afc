package cli

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"

	"github.com/spf13/cobra"

	"ligancy/cmd/ligancy/internal/report"
	"ligancy/specs/diag"
	"ligancy/specs/record"
)

const fitHelp = `ligancy fit STUDY…

Fits every mechanism of a study and prints what the data say, how steep the curves are and where,
how firmly each constant is held, how the mechanisms stand, and what to know before believing it.
Writes STUDY.results/ beside the study: report.html, which needs nothing beside itself, result.json,
its lists as CSV tables, and figures as SVG and PDF. The folder is written whole or not at all; an
older result of this program is replaced, nothing else ever is.

  --json         prints the result as one JSON document instead (a list of them for several studies)
  --print-only   writes no folder
  --record       also writes STUDY.record.yaml beside the study: one small file for version control,
                 which   ligancy repeat STUDY   compares with; an older record is replaced

Ctrl-C stops the work; what was found so far is printed, labelled, and written unless it would
replace a whole result. Settings that change results are said in the study.
Exit codes: 0 fitted, 1 something to mend or a result that could not be written, 2 wrong usage,
130 interrupted.
`

type fitOptions struct{ json, printOnly, record bool }

func (p *program) fitCommand() *cobra.Command {
	var opts fitOptions
	c := &cobra.Command{
		Use:  "fit STUDY…",
		Long: fitHelp,
		Args: names("study", 0),
		RunE: func(c *cobra.Command, args []string) error { return p.fitAll(c.Context(), args, opts) },
	}
	c.Flags().BoolVar(&opts.json, "json", false, "one JSON document")
	c.Flags().BoolVar(&opts.printOnly, "print-only", false, "write no folder")
	c.Flags().BoolVar(&opts.record, "record", false, "write STUDY.record.yaml")
	return c
}

// fitAll fits one study after the other. A study that cannot be used does not
// keep the others from being fitted; an interrupt does.
func (p *program) fitAll(ctx context.Context, studies []string, opts fitOptions) error {
	worst := Success
	documents := []*report.Document{}
	for i, name := range studies {
		if i > 0 && !opts.json {
			fmt.Fprintln(p.out)
		}
		d, code := p.fitOne(ctx, name, opts)
		worst = max(worst, code)
		if d != nil {
			documents = append(documents, d)
		}
		if ctx.Err() != nil {
			break
		}
	}
	if opts.json {
		if err := p.writeDocuments(documents, len(studies) > 1); err != nil {
			return err
		}
	}
	if worst != Success {
		return exit(worst)
	}
	return nil
}

// writeDocuments prints one document, or a list where several were asked for.
func (p *program) writeDocuments(documents []*report.Document, several bool) error {
	if several {
		return report.WriteJSON(p.out, documents)
	}
	for _, d := range documents {
		return report.WriteJSON(p.out, d)
	}
	return nil
}

// fitOne fits one study, prints it unless a JSON document is wanted, and writes
// its folder. It says itself what goes wrong.
func (p *program) fitOne(ctx context.Context, name string, opts fitOptions) (*report.Document, int) {
	o := p.open(name)
	if o.analysis == nil {
		if err := o.refuse(p.Stderr, "Nothing was fitted, nothing was written."); err != nil {
			p.complain("%v", err)
		}
		return nil, Unusable
	}
	if err := diag.WriteText(p.Stderr, o.complaints); err != nil {
		p.complain("%v", err)
		return nil, Unusable
	}
	folder, stands := resultsFolder(p.path(name)), noResult
	if !opts.printOnly {
		var err error
		if stands, err = standing(p.Disk, folder); err != nil {
			p.complain("%v; or fit with   --print-only", err)
			return nil, Unusable
		}
	}
	if opts.record {
		if err := p.recordPlace(record.FileName(name)); err != nil {
			p.complain("%v", err)
			return nil, Unusable
		}
	}
	d, err := p.analyse(ctx, o)
	if err != nil {
		p.complain("%s: %v", name, err)
		return nil, max(Unusable, code(ctx))
	}
	if !opts.json {
		// A page that cannot be printed is complained of at the end, once; the
		// folder is written all the same.
		_ = d.WriteText(p.out, p.colour())
	}
	kept := Success
	if !opts.printOnly {
		kept = p.keep(d, resultsFolder(name), folder, stands, opts)
	}
	if opts.record {
		kept = max(kept, p.fitRecord(o, d, opts))
	}
	if !opts.json && len(d.Objections) > 0 {
		fmt.Fprintf(p.out, "  next      ligancy check %s   what a reviewer will ask, with sources and remedies\n", name)
	}
	return d, max(code(ctx), kept)
}

// code of a run that ended without an error of its own.
func code(ctx context.Context) int {
	if ctx.Err() != nil {
		return Interrupted
	}
	return Success
}

// analyse runs the analysis and assembles its document. After an interrupt it
// returns what was found so far, if anything was.
func (p *program) analyse(ctx context.Context, o *opened) (*report.Document, error) {
	progress := p.newProgress()
	outcome, err := p.Analyse(ctx, o.analysis, progress)
	progress.wipe()
	if ctx.Err() != nil && outcome != nil {
		outcome.Interrupted = true
		err = nil
	}
	if err != nil {
		if errors.Is(err, context.Canceled) {
			err = errors.New("interrupted before anything was found; nothing was written")
		}
		return nil, err
	}
	return report.New(o.analysis, outcome, o.source()), nil
}

// fitRecord writes the record of a whole result and says so.
func (p *program) fitRecord(o *opened, d *report.Document, opts fitOptions) int {
	name := record.FileName(o.name)
	if d.Interrupted {
		p.complain("%s was not written: the result is not whole", name)
		return Success
	}
	if err := p.keepRecord(name, o.record(d)); err != nil {
		p.complain("%v", err)
		return Unusable
	}
	if !opts.json {
		fmt.Fprintf(p.out, "  written   %s   for version control\n", name)
	}
	return Success
}

// keep writes the folder of a result and says so at the end of the page.
func (p *program) keep(d *report.Document, shown, folder string, stands standingResult, opts fitOptions) int {
	if d.Interrupted && stands == wholeResult {
		p.complain("%s holds a whole result and was left as it is", shown)
		return Success
	}
	files, err := resultFiles(d)
	if err == nil {
		err = writeResults(p.Disk, folder, files)
	}
	if err != nil {
		p.complain("%s was not written: %v", shown, bare(err))
		return Unusable
	}
	if !opts.json {
		fmt.Fprintf(p.out, "  written   %s%c   %s\n", shown, filepath.Separator, contents(files))
	}
	return Success
}
