package report

import (
	"io"
	"regexp"
	"strings"

	"ligancy/fit/saturation"
)

// objectionGroups in the order in which they are printed: what to do first, first.
var objectionGroups = []string{"settle first", "say in the paper", "for completeness", "asked and found good"}

// WriteObjections writes what a careful reviewer will ask, grouped by what to
// do. Groups without rows are left out.
func WriteObjections(w io.Writer, all []saturation.Objection, colour bool) error {
	var b strings.Builder
	i := ink{colour}
	for n, group := range objectionGroups {
		first := true
		for k := range all {
			o := &all[k]
			if o.Group != group {
				continue
			}
			if first {
				b.WriteString(i.bold(strings.ToUpper(group)) + "\n")
				first = false
			}
			if n == len(objectionGroups)-1 {
				b.WriteString(hangingFrom("  ", "    ", sentence(o.Text)))
				continue
			}
			b.WriteString(objection(o, i))
		}
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// objection writes one question: what, how large its effect is, what to do,
// and where the criterion comes from.
func objection(o *saturation.Objection, i ink) string {
	text := sentence(o.Text)
	if o.Effect != nil {
		text += " " + sentence(*o.Effect)
	}
	s := hangingFrom("  ", "    ", text)
	if o.Remedy != nil {
		s += hanging("    "+remedyVerb(*o.Remedy), *o.Remedy, Width)
	}
	if o.Source != nil {
		for _, l := range strings.SplitAfter(hanging("    source        ", *o.Source, Width), "\n") {
			s += i.dim(strings.TrimSuffix(l, "\n")) + l[len(strings.TrimSuffix(l, "\n")):]
		}
	}
	return s
}

// studyKey begins a line that can be written into a study.
var studyKey = regexp.MustCompile(`^[\p{L}_ ]+: `)

// remedyVerb says whether a remedy is something to write into the study.
func remedyVerb(remedy string) string {
	if studyKey.MatchString(remedy) {
		return "answer with   "
	}
	return "to do         "
}

// hangingFrom writes a paragraph whose further lines are indented more than its first.
func hangingFrom(first, further, s string) string {
	var b strings.Builder
	for i, line := range wrap(s, Width-width(further)) {
		if i == 0 {
			b.WriteString(first)
		} else {
			b.WriteString(further)
		}
		b.WriteString(line + "\n")
	}
	return b.String()
}
