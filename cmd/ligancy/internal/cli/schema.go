package cli

import (
	"github.com/spf13/cobra"

	"ligancy/specs"
)

const schemaHelp = `ligancy schema

Prints the JSON Schema (draft-07) of study files, by which editors complete keys and check them
while they are written. Keep it beside the studies, and say so in the first line of each:

  ligancy schema > ligancy.schema.json
  # yaml-language-server: $schema=ligancy.schema.json

A study that fits the schema may still be wrong; ligancy check says in what.
`

func (p *program) schemaCommand() *cobra.Command {
	return &cobra.Command{
		Use:  "schema",
		Long: schemaHelp,
		Args: nothing,
		RunE: func(*cobra.Command, []string) error {
			_, err := p.out.Write(specs.Schema())
			return err
		},
	}
}
