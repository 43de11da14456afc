package cli

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"strings"

	"github.com/spf13/cobra"

	"ligancy/cmd/ligancy/internal/numerics"
	"ligancy/cmd/ligancy/internal/report"
	"ligancy/fit/fittest"
	"ligancy/ode/odetest"
)

const numericsHelp = `ligancy numerics identities
ligancy numerics regression
ligancy numerics stiff

Shows on this machine that the numerics reach what they must, for a laboratory that records it.
identities compares binding curves with exact mathematics; regression fits the 27 certified
problems of NIST's nonlinear collection from both starts with default settings; stiff integrates
initial-value problems with known solutions over a range of tolerances.

  --json       prints one JSON document instead
  --csv FILE   also writes the rows as a table; a file that exists is not written over

Exit codes: 0 everything held, 1 the table was not written, 2 wrong usage, 3 something did not hold,
130 interrupted.
`

type numericsOptions struct {
	json bool
	csv  string
}

// tests of the numerics.
var tests = []string{"identities", "regression", "stiff"}

// tested is what one test of the numerics hands over.
type tested struct {
	held bool
	rows any
	text func(io.Writer) error
	csv  func(io.Writer) error
}

func (p *program) numericsCommand() *cobra.Command {
	var opts numericsOptions
	c := &cobra.Command{
		Use:       "numerics TEST",
		Long:      numericsHelp,
		ValidArgs: tests,
		Args:      names("test", 1),
		RunE:      func(c *cobra.Command, args []string) error { return p.testNumerics(c.Context(), args[0], opts) },
	}
	c.Flags().BoolVar(&opts.json, "json", false, "one JSON document")
	c.Flags().StringVar(&opts.csv, "csv", "", "a table of the rows")
	return c
}

func (p *program) testNumerics(ctx context.Context, name string, opts numericsOptions) error {
	if opts.csv != "" {
		if err := p.absent(opts.csv); err != nil {
			return err
		}
	}
	var t tested
	switch name {
	case "identities":
		t = p.identities()
	case "regression":
		t = p.regression(ctx)
	case "stiff":
		t = p.stiff(ctx)
	default:
		return &usageError{problem: fmt.Sprintf("there is no test %q of the numerics; there are %s", name, strings.Join(tests, ", ")),
			write: "ligancy numerics " + nearestWord(name, tests...)}
	}
	if ctx.Err() != nil {
		return exit(Interrupted)
	}
	if err := p.printTested(name, t, opts.json); err != nil {
		return err
	}
	if opts.csv != "" {
		var b bytes.Buffer
		if err := t.csv(&b); err != nil {
			return err
		}
		if err := p.create(opts.csv, b.Bytes()); err != nil {
			return err
		}
	}
	if !t.held {
		return exit(NotHeld)
	}
	return nil
}

func (p *program) printTested(name string, t tested, json bool) error {
	if json {
		return report.WriteJSON(p.out, report.NewNumerics(Version, name, t.held, t.rows))
	}
	return t.text(p.out)
}

func (p *program) identities() tested {
	rows := numerics.Identities()
	held := true
	for _, r := range rows {
		held = held && r.Held
	}
	return tested{held: held, rows: rows,
		text: func(w io.Writer) error { return report.WriteIdentities(w, rows, p.colour()) },
		csv:  func(w io.Writer) error { return numerics.WriteCSV(w, rows) }}
}

func (p *program) regression(ctx context.Context) tested {
	runs := fittest.Certify(ctx, "ligancy", fittest.Default)
	s := fittest.Summarise(runs)
	return tested{held: s.Right == s.Runs, rows: report.CertifiedRows(runs),
		text: func(w io.Writer) error { return report.WriteCertified(w, runs, p.colour()) },
		csv:  func(w io.Writer) error { return fittest.WriteCSV(w, runs) }}
}

// stiff integrates every problem with a known solution; at the smallest
// tolerance that is judged each stiff one has to reach its digits.
func (p *program) stiff(ctx context.Context) tested {
	rows, err := odetest.WorkPrecision(ctx, odetest.Precision{Repeats: 3})
	return tested{held: err == nil && report.StiffHeld(rows), rows: report.StiffRows(rows),
		text: func(w io.Writer) error { return report.WriteStiff(w, rows, p.colour()) },
		csv:  func(w io.Writer) error { return odetest.WriteRows(w, rows) }}
}

// nearestWord is the word that begins like the one given, else the first.
func nearestWord(word string, words ...string) string {
	for _, w := range words {
		if len(word) > 0 && strings.HasPrefix(w, word[:1]) {
			return w
		}
	}
	return words[0]
}
