package cli

import (
	"fmt"

	"github.com/spf13/cobra"
)

const overview = `ligancy tells which binding mechanisms saturation data support, with which constants, and how surely.

  ligancy new TABLE            a starting study beside a table of data
  ligancy new --example clam   an example study with its invented data
  ligancy check STUDY          what is wrong with a study, else what a reviewer will ask
  ligancy fit STUDY            fits every mechanism and says what the data say
  ligancy curve STUDY          curves, Hill coefficients and populations from given constants
  ligancy course STUDY         binding against time: relaxation, how long to wait, dissociation
  ligancy plan STUDY           what to measure next, to part mechanisms or to hold constants
  ligancy repeat STUDY         fits again and compares with the record that   fit --record   wrote
  ligancy changes OLD NEW      how two studies, or two records, differ
  ligancy families [NAME]      the families of mechanisms: formula, constants, limits, reference
  ligancy numerics TEST        exact and certified values, reached on this machine
  ligancy sbml STUDY           a mechanism with rates as SBML, for programs that integrate networks
  ligancy schema               the JSON Schema of study files, for editors
  ligancy version              the program's version
  ligancy completion SHELL     completes commands in bash, zsh, fish or powershell
  ligancy help COMMAND         what a command does, its options and exit codes

A study is one YAML file; nothing that changes a result lives outside it.
Exit codes: 0 success, 1 a study or data that cannot be used, 2 wrong usage, 3 a check that did not
hold, 130 interrupted. Research use only, not for diagnosis or treatment.
`

// helpCommand prints what a command does.
func (p *program) helpCommand(root *cobra.Command) *cobra.Command {
	return &cobra.Command{
		Use:  "help [COMMAND]",
		Long: "ligancy help [COMMAND]\n\nPrints what a command does, its options and its exit codes.\n",
		RunE: func(_ *cobra.Command, args []string) error {
			if len(args) == 0 {
				fmt.Fprint(p.out, overview)
				return nil
			}
			c, rest, err := root.Find(args)
			if err != nil || c == root || len(rest) > 0 {
				return unknownCommand(root, args)
			}
			fmt.Fprint(p.out, c.Long)
			return nil
		},
	}
}
