// Package cli is the command line: one file per command. Streams, clock,
// environment, working directory and disk are injected; exit codes come back
// as numbers.
package cli

import (
	"bufio"
	"errors"
	"fmt"
	"strings"

	"github.com/spf13/cobra"
	"github.com/spf13/pflag"
)

// Exit codes.
const (
	Success     = 0
	Unusable    = 1   // a study or data that cannot be used, or a result that cannot be written
	WrongUsage  = 2   // of the command line
	NotHeld     = 3   // a check that did not hold
	Interrupted = 130 // by the user
)

// exit ends a command with a code after everything has been said.
type exit int

func (e exit) Error() string { return fmt.Sprintf("exit %d", int(e)) }

// usageError is wrong usage of the command line.
type usageError struct{ problem, write string }

func (e *usageError) Error() string { return e.problem }

// program is one run of the command line.
type program struct {
	Env
	out *bufio.Writer // standard output; its error is checked once, at the end
}

// Main runs one command line and returns its exit code.
func Main(env Env) int {
	p := &program{Env: env, out: bufio.NewWriter(env.Stdout)}
	err := p.root().ExecuteContext(env.Context)
	if flushed := p.out.Flush(); flushed != nil && !isExit(err, Interrupted) {
		p.complain("standard output was not written: %v", bare(flushed))
		return Unusable
	}
	return p.code(err)
}

func isExit(err error, code exit) bool {
	var e exit
	return errors.As(err, &e) && e == code
}

// code says what has not been said of an error, and returns its exit code.
func (p *program) code(err error) int {
	var code exit
	var usage *usageError
	switch {
	case err == nil:
		return Success
	case errors.As(err, &code):
		return int(code)
	case errors.As(err, &usage):
		p.complain("%s", usage.problem)
		if usage.write != "" {
			fmt.Fprintf(p.Stderr, "   Write   %s\n", usage.write)
		}
		return WrongUsage
	}
	p.complain("%v", err)
	return Unusable
}

// complain writes one message to standard error.
func (p *program) complain(format string, args ...any) {
	fmt.Fprintf(p.Stderr, "ligancy: "+format+"\n", args...)
}

// root is the command without a word.
func (p *program) root() *cobra.Command {
	root := &cobra.Command{
		Use:  "ligancy",
		Long: overview,
		Args: func(c *cobra.Command, args []string) error { return unknownCommand(c, args) },
		RunE: func(c *cobra.Command, _ []string) error {
			fmt.Fprint(p.Stderr, overview)
			return exit(WrongUsage)
		},
		SilenceErrors: true, SilenceUsage: true,
		SuggestionsMinimumDistance: 2,
	}
	root.AddCommand(p.newCommand(), p.checkCommand(), p.fitCommand(), p.curveCommand(), p.courseCommand(), p.planCommand(), p.repeatCommand(), p.changesCommand(), p.sbmlCommand(), p.schemaCommand(), p.familiesCommand(), p.numericsCommand(),
		p.versionCommand(), p.completionCommand())
	root.SetArgs(p.Args)
	root.SetOut(p.out)
	root.SetErr(p.Stderr)
	root.CompletionOptions.DisableDefaultCmd = true
	root.SetHelpCommand(p.helpCommand(root))
	root.SetHelpFunc(func(c *cobra.Command, _ []string) { fmt.Fprint(p.out, c.Long) })
	root.SetFlagErrorFunc(unknownOption)
	for _, c := range root.Commands() {
		c.DisableFlagsInUseLine = true
		c.Flags().SortFlags = false
	}
	return root
}

// unknownCommand complains of a word that is no command.
func unknownCommand(root *cobra.Command, args []string) error {
	if len(args) == 0 {
		return nil
	}
	e := &usageError{problem: fmt.Sprintf("there is no command %q", args[0]), write: "ligancy help"}
	if near := root.SuggestionsFor(args[0]); len(near) > 0 {
		e.write = "ligancy " + near[0]
	}
	return e
}

// unknownOption complains of an option that a command does not have, or of its value.
func unknownOption(c *cobra.Command, err error) error {
	e := &usageError{problem: c.Name() + ": " + err.Error(), write: c.CommandPath() + " --help"}
	var missing *pflag.NotExistError
	if errors.As(err, &missing) {
		name := missing.GetSpecifiedName()
		dashes := "--"
		if missing.GetSpecifiedShortnames() != "" {
			dashes = "-"
		}
		e.problem = fmt.Sprintf("%s has no option %s%s; it has %s", c.Name(), dashes, name, strings.Join(options(c), ", "))
	}
	var needed *pflag.ValueRequiredError
	if errors.As(err, &needed) {
		e.problem = fmt.Sprintf("%s: the option --%s needs a value", c.Name(), needed.GetSpecifiedName())
	}
	var value *pflag.InvalidValueError
	if errors.As(err, &value) {
		e.problem = fmt.Sprintf("%s: the option --%s cannot be %q", c.Name(), value.GetFlag().Name, value.GetValue())
	}
	return e
}

// options of a command, as written.
func options(c *cobra.Command) []string {
	var all []string
	c.Flags().VisitAll(func(f *pflag.Flag) { all = append(all, "--"+f.Name) })
	return all
}

// names asks for one argument or more, called by the given word.
func names(word string, most int) cobra.PositionalArgs {
	return func(c *cobra.Command, args []string) error {
		switch {
		case len(args) == 0:
			return &usageError{problem: fmt.Sprintf("%s needs the name of a %s", c.Name(), word), write: c.UseLine()}
		case most > 0 && len(args) > most:
			return &usageError{problem: fmt.Sprintf("%s takes one %s, not %d", c.Name(), word, len(args)), write: c.UseLine()}
		}
		return nil
	}
}
