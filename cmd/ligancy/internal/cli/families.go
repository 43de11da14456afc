package cli

import (
	"fmt"
	"strings"

	"github.com/spf13/cobra"

	"ligancy/mechanisms"
)

const familiesHelp = `ligancy families [NAME]

Without a name, lists the families of mechanisms that a study can try. With one, prints its
formula, its constants with their units, its limits, what data hold what, and the reference.
`

func (p *program) familiesCommand() *cobra.Command {
	var all []string
	for _, f := range mechanisms.Families() {
		all = append(all, f.Name)
	}
	return &cobra.Command{
		Use:       "families [NAME]",
		Long:      familiesHelp,
		ValidArgs: all,
		Args:      cobra.ArbitraryArgs,
		RunE: func(c *cobra.Command, args []string) error {
			if len(args) == 0 {
				return p.listFamilies()
			}
			if len(args) > 1 {
				return names("family", 1)(c, args)
			}
			f, ok := mechanisms.Lookup(args[0])
			if !ok {
				return &usageError{problem: fmt.Sprintf("there is no family %q; there are %s", args[0], strings.Join(all, ", ")),
					write: "ligancy families " + nearestWord(args[0], all...)}
			}
			_, err := fmt.Fprintf(p.out, "%s\n", strings.TrimRight(f.Doc, "\n"))
			return err
		},
	}
}

// listFamilies prints every family with the first line of its text.
func (p *program) listFamilies() error {
	for _, f := range mechanisms.Families() {
		first, _, _ := strings.Cut(strings.TrimSpace(f.Doc), "\n")
		fmt.Fprintf(p.out, "  %-14s %s\n", f.Name, first)
	}
	_, err := fmt.Fprintln(p.out, "\nligancy families NAME   prints one of them in full.")
	return err
}
