package cli

import (
	"context"
	"io"
	"os"
	"os/signal"
	"time"

	"golang.org/x/term"

	"ligancy/fit/saturation"
)

// Env is everything that a command takes from outside. Tests fill it by hand.
type Env struct {
	Args           []string // without the program's name
	Stdout, Stderr io.Writer
	// StdoutTerminal and StderrTerminal say where somebody watches: colour and
	// progress go nowhere else.
	StdoutTerminal, StderrTerminal bool

	Dir    string // working directory; names on the command line are relative to it
	Getenv func(string) string
	Now    func() time.Time
	Disk   Disk // where results are written

	// Context ends when the user interrupts.
	Context context.Context
	// Analyse runs an analysis.
	Analyse func(context.Context, *saturation.Analysis, saturation.Recorder) (*saturation.Outcome, error)
}

// System is the environment of this process. The first interrupt ends the
// context, a second one the process.
func System() Env {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt)
	context.AfterFunc(ctx, stop)
	return Env{
		Args: os.Args[1:], Stdout: os.Stdout, Stderr: os.Stderr,
		StdoutTerminal: term.IsTerminal(int(os.Stdout.Fd())),
		StderrTerminal: term.IsTerminal(int(os.Stderr.Fd())),
		Dir:            ".",
		Getenv:         os.Getenv,
		Now:            time.Now,
		Disk:           osDisk{},
		Context:        ctx,
		Analyse:        analyse,
	}
}

// analyse runs an analysis.
func analyse(ctx context.Context, a *saturation.Analysis, rec saturation.Recorder) (*saturation.Outcome, error) {
	return a.Run(ctx, rec)
}

// colour says whether standard output may be painted: on a terminal that can,
// unless NO_COLOR is present and not empty.
func (e *Env) colour() bool {
	return e.StdoutTerminal && e.Getenv("NO_COLOR") == "" && e.Getenv("TERM") != "dumb"
}
