package cli

import (
	"errors"
	"fmt"
	"io/fs"

	"github.com/spf13/cobra"

	"ligancy/cmd/ligancy/internal/report"
	"ligancy/specs/changes"
	"ligancy/specs/record"
)

const changesHelp = `ligancy changes OLD NEW

Says how two studies differ, or two records: what was measured and which points came, went or are
left out; which mechanisms are tried; how they are fitted; and, where both sides have a record (of a
study: the one beside it, if it was written from that very file), how the mechanisms stand and which
numbers moved, by how many half widths of their intervals. Nothing is fitted and nothing is written.

  --json   prints one JSON document instead

Exit codes: 0 compared, 1 a study or record that cannot be used, 2 wrong usage.
`

func (p *program) changesCommand() *cobra.Command {
	var json bool
	c := &cobra.Command{
		Use:  "changes OLD NEW",
		Long: changesHelp,
		Args: func(c *cobra.Command, args []string) error {
			if len(args) != 2 {
				return &usageError{problem: fmt.Sprintf("changes takes two studies or two records, not %d", len(args)), write: c.UseLine()}
			}
			return nil
		},
		RunE: func(_ *cobra.Command, args []string) error { return p.changes(args[0], args[1], json) },
	}
	c.Flags().BoolVar(&json, "json", false, "one JSON document")
	return c
}

// side is one of two things that are compared.
type side struct {
	report.Compared
	study  *opened        // nil where a record was named
	text   []byte         // of the study
	record *record.Record // nil where there is none
	why    string         // there is none
}

func (p *program) changes(oldName, newName string, json bool) error {
	old, first := p.side(oldName)
	now, second := p.side(newName)
	if err := errors.Join(first, second); err != nil {
		if isExit(err, Unusable) {
			return exit(Unusable) // all was said
		}
		return err
	}
	d, err := compareSides(old, now)
	if err != nil {
		return err
	}
	if json {
		return report.WriteJSON(p.out, d)
	}
	return d.WriteText(p.out, p.colour())
}

// side reads a study with the record beside it, or a record.
func (p *program) side(name string) (*side, error) {
	content, err := p.readSmall(name, record.MaxBytes)
	if errors.Is(err, fs.ErrNotExist) {
		err = fmt.Errorf("there is no file %s", name)
	}
	if err != nil {
		p.complain("%v", err)
		return nil, exit(Unusable)
	}
	s := &side{Compared: report.Compared{File: name}}
	if record.IsRecord(content) {
		if s.record, err = p.readRecord(name); err == nil {
			s.SHA256, s.Record = s.record.Study.SHA256, &name
		}
		return s, err
	}
	s.study, s.text = p.open(name), content
	if s.study.analysis == nil {
		if err := s.study.refuse(p.Stderr, "Nothing was compared."); err != nil {
			return nil, err
		}
		return nil, exit(Unusable)
	}
	s.SHA256 = s.study.study.SHA256
	return s, p.recordBeside(s)
}

// recordBeside takes the record of a study, if it was written from that very study.
func (p *program) recordBeside(s *side) error {
	name := record.FileName(s.File)
	r, err := p.readRecord(name)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		s.why = fmt.Sprintf("%s has no record; write it with   ligancy fit --record %s", s.File, s.File)
	case err != nil:
		return err
	case r.Study.SHA256 != s.SHA256 || !sameTables(r, s.study.digests):
		s.why = fmt.Sprintf("%s is older than its study or tables; write it again with   ligancy fit --record %s", name, s.File)
	default:
		s.record, s.Record = r, &name
	}
	return nil
}

func sameTables(r *record.Record, digests map[string]string) bool {
	for _, d := range r.Data {
		if digests[d.File] != d.SHA256 {
			return false
		}
	}
	return true
}

// compareSides compares two studies, or two records.
func compareSides(old, now *side) (*report.Changes, error) {
	if (old.study == nil) != (now.study == nil) {
		return nil, &usageError{problem: "a study and a record are not compared with each other: name two studies, or two records",
			write: "ligancy changes OLD.yaml NEW.yaml"}
	}
	var c *record.Comparison
	why := old.why
	if why == "" {
		why = now.why
	}
	if old.record != nil && now.record != nil {
		c = record.Compare(old.record, now.record)
	}
	if old.study == nil {
		return report.NewChanges(Version, old.Compared, now.Compared, changes.Records(old.record, now.record, c), c, ""), nil
	}
	written, err := changes.Written(old.text, now.text)
	if err != nil {
		return nil, err
	}
	written = append(changes.Points(old.study.analysis, now.study.analysis), written...)
	return report.NewChanges(Version, old.Compared, now.Compared, written, c, why), nil
}
