package cli

import (
	"fmt"

	"github.com/spf13/cobra"
)

// Version of the program and of what it writes into results.
const Version = "0.1.0"

func (p *program) versionCommand() *cobra.Command {
	return &cobra.Command{
		Use:  "version",
		Long: "ligancy version\n\nPrints the version, which every result carries.\n",
		Args: nothing,
		RunE: func(*cobra.Command, []string) error {
			_, err := fmt.Fprintln(p.out, "ligancy", Version)
			return err
		},
	}
}

// nothing refuses arguments.
func nothing(c *cobra.Command, args []string) error {
	if len(args) > 0 {
		return &usageError{problem: fmt.Sprintf("%s takes no names, but %q was given", c.Name(), args[0]), write: c.UseLine()}
	}
	return nil
}
