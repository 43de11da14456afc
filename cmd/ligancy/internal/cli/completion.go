package cli

import (
	"fmt"

	"github.com/spf13/cobra"
)

const completionHelp = `ligancy completion bash|zsh|fish|powershell

Prints a script that lets a shell complete the words and options of this program. For bash:

  source <(ligancy completion bash)
`

func (p *program) completionCommand() *cobra.Command {
	shells := []string{"bash", "zsh", "fish", "powershell"}
	return &cobra.Command{
		Use:       "completion SHELL",
		Long:      completionHelp,
		ValidArgs: shells,
		Args:      names("shell", 1),
		RunE: func(c *cobra.Command, args []string) error {
			root := c.Root()
			switch args[0] {
			case "bash":
				return root.GenBashCompletionV2(p.out, true)
			case "zsh":
				return root.GenZshCompletion(p.out)
			case "fish":
				return root.GenFishCompletion(p.out, true)
			case "powershell":
				return root.GenPowerShellCompletionWithDesc(p.out)
			}
			return &usageError{problem: fmt.Sprintf("no completion for the shell %q", args[0]),
				write: "ligancy completion bash, zsh, fish or powershell"}
		},
	}
}
