package report

import (
	"io"
	"strings"

	"ligancy/fit/saturation"
)

// objectionGroups in the order in which they are printed: what to do first, first.
var objectionGroups = []string{"settle first", "say in the paper", "for completeness", "asked and found good"}

// objectionText joins what a caution says of an objection.
func objectionText(o *saturation.Objection) string {
	text := strings.TrimSpace(o.Text)
	if o.Source != nil {
		text = strings.TrimRight(text, ".") + " (" + *o.Source + ")"
	}
	text = sentence(text)
	if o.Effect != nil {
		text += " " + sentence(*o.Effect)
	}
	return text
}

// WriteObjections writes what a careful reviewer will ask, grouped by what to
// do. Groups without rows are left out.
func WriteObjections(w io.Writer, all []saturation.Objection, colour bool) error {
	var b strings.Builder
	i := ink{colour}
	for _, group := range objectionGroups {
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
			b.WriteString(hangingFrom("  ", "    ", objectionText(o)))
			if o.Remedy != nil {
				b.WriteString("    answer with   " + cut(*o.Remedy, Width-18) + "\n")
			}
		}
	}
	_, err := io.WriteString(w, b.String())
	return err
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
