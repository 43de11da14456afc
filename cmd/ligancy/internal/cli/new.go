package cli

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/spf13/cobra"

	"ligancy/specs"
	"ligancy/specs/diag"
	"ligancy/specs/gallery"
	"ligancy/specs/table"
)

const newHelp = `ligancy new TABLE
ligancy new --example NAME

Writes a starting study beside a table: columns and units guessed, each guess said in a comment.
With --example it writes a study of the gallery with its invented data into this folder:

  clam     oxygen binding by ark-clam haemoglobin at two pH
  oyster   an oyster's pyruvate kinase and an inhibitor
  crab     a receptor of crab nerve, bound and blocked

A file that exists is never written over.
Exit codes: 0 written, 1 a table that cannot be used or a file that exists, 2 wrong usage.
`

func (p *program) newCommand() *cobra.Command {
	var example string
	c := &cobra.Command{
		Use:  "new TABLE",
		Long: newHelp,
		Args: func(c *cobra.Command, args []string) error {
			switch {
			case !c.Flags().Changed("example"):
				return names("table", 1)(c, args)
			case len(args) > 0:
				return &usageError{problem: "new takes a table or --example, not both", write: "ligancy new --example " + example}
			case !slices.Contains(gallery.Names(), example):
				return &usageError{problem: fmt.Sprintf("the gallery has no study %q; it has %s", example, strings.Join(gallery.Names(), ", ")),
					write: "ligancy new --example " + gallery.Names()[0]}
			}
			return nil
		},
		RunE: func(_ *cobra.Command, args []string) error {
			if example != "" {
				return p.newExample(example)
			}
			return p.newStudy(args[0])
		},
	}
	c.Flags().StringVar(&example, "example", "", "a study of the gallery")
	return c
}

// newStudy writes the study of a table beside it: its name with .yaml.
func (p *program) newStudy(name string) error {
	study := strings.TrimSuffix(name, filepath.Ext(name)) + ".yaml"
	if study == name {
		return &usageError{problem: name + " is a study's name, not a table's", write: "ligancy new TABLE"}
	}
	if err := p.absent(study); err != nil {
		return err
	}
	content, err := readTable(p.path(name))
	if err != nil {
		return fmt.Errorf("%s cannot be read: %w", name, bare(err))
	}
	text, complaints := specs.Suggest(filepath.Base(name), content)
	for i := range complaints {
		complaints[i].File = filepath.Join(filepath.Dir(name), complaints[i].File)
	}
	if err := diag.WriteText(p.Stderr, complaints); err != nil {
		return err
	}
	if complaints.HasErrors() {
		return exit(Unusable)
	}
	if err := p.create(study, text); err != nil {
		return err
	}
	fmt.Fprintf(p.out, "written   %s\nnext      read it, mend what was guessed wrongly, then   ligancy check %s\n", study, study)
	return nil
}

// readTable reads a file, but no more of it than shows that it is too large.
func readTable(path string) ([]byte, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	return io.ReadAll(io.LimitReader(f, table.MaxBytes+1))
}

// newExample writes the files of a gallery study, all or none.
func (p *program) newExample(example string) error {
	files := gallery.Files(example)
	entries, err := fs.ReadDir(files, ".")
	if err != nil {
		return err
	}
	var written []string
	for _, e := range entries {
		if err := p.absent(e.Name()); err != nil {
			return err
		}
	}
	for _, e := range entries {
		content, err := fs.ReadFile(files, e.Name())
		if err == nil {
			err = p.create(e.Name(), content)
		}
		if err != nil {
			for _, name := range written {
				p.Disk.RemoveAll(p.path(name))
			}
			return err
		}
		written = append(written, e.Name())
	}
	fmt.Fprintf(p.out, "written   %s   (invented data)\nnext      ligancy fit %s.yaml\n", strings.Join(written, "  "), example)
	return nil
}

// absent complains where a file stands already.
func (p *program) absent(name string) error {
	_, err := p.Disk.Lstat(p.path(name))
	switch {
	case err == nil:
		return fmt.Errorf("%s exists and is never written over; move it away", name)
	case errors.Is(err, fs.ErrNotExist):
		return nil
	}
	return fmt.Errorf("%s: %w", name, bare(err))
}

// create writes a file that does not exist yet, whole or not at all.
func (p *program) create(name string, content []byte) error {
	if err := p.Disk.Create(p.path(name), content); err != nil {
		return fmt.Errorf("%s was not written: %w", name, bare(err))
	}
	return nil
}

// bare is an error without the operation and path that the system puts before it.
func bare(err error) error {
	var path *fs.PathError
	if errors.As(err, &path) {
		return path.Err
	}
	var link *os.LinkError
	if errors.As(err, &link) {
		return link.Err
	}
	return err
}
