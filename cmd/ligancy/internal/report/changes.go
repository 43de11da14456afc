package report

import (
	"fmt"
	"io"
	"math"
	"slices"

	"ligancy/specs/changes"
	"ligancy/specs/record"
)

// ChangesFormat names the layout of documents of what differs.
const ChangesFormat = "ligancy-changes/1"

// Changes is how two studies, or two records, differ.
type Changes struct {
	Format  string               `json:"format"`
	Program Program              `json:"program"`
	Old     Compared             `json:"old"`
	New     Compared             `json:"new"`
	Same    bool                 `json:"same"`
	Written []changes.Difference `json:"written"` // of the studies; from records, as far as they tell
	// Found is what the fits found differently; nil where there are no records
	// of both, and Why says so.
	Found *record.Moved `json:"found"`
	Why   *string       `json:"why"`
}

// Compared is one side of a comparison.
type Compared struct {
	File   string  `json:"file"`
	SHA256 string  `json:"sha256"`
	Record *string `json:"record"` // the file with its numbers; null where there is none
}

// NewChanges assembles the document of what differs.
func NewChanges(version string, old, now Compared, written []changes.Difference, c *record.Comparison, why string) *Changes {
	d := &Changes{Format: ChangesFormat, Program: Program{Version: version}, Old: old, New: now,
		Written: list(written), Same: len(written) == 0}
	if c == nil {
		d.Why = &why
		return d
	}
	d.Found, d.Same = c.Moved(), d.Same && c.Holds()
	return d
}

// WriteText says what was measured, which mechanisms, how they were fitted, how
// they stand and which numbers moved.
func (d *Changes) WriteText(w io.Writer, colour bool) error {
	p := &page{ink: ink{colour}}
	p.write(hanging("", "From "+cut(d.Old.File, 200)+" to "+cut(d.New.File, 200), Width))
	p.line("")
	for _, s := range []struct{ about, title string }{
		{changes.Measured, "WHAT WAS MEASURED"}, {changes.Mechanisms, "MECHANISMS TRIED"}, {changes.Fitted, "HOW IT WAS FITTED"},
	} {
		p.writtenSection(s.title, s.about, d.Written)
	}
	switch {
	case d.Found == nil:
		p.write(hanging("", "Numbers were not compared: "+*d.Why, Width))
	case len(d.Found.Mechanisms)+len(d.Found.Numbers) == 0:
		p.line("No number that a fit found moved beyond tolerance.")
	default:
		p.found(d.Found)
	}
	_, err := io.WriteString(w, p.b.String())
	return err
}

// writtenSection is one section: where, was, is.
func (p *page) writtenSection(title, about string, all []changes.Difference) {
	p.line("%s", p.ink.bold(title))
	n := 0
	for _, c := range all {
		if c.About != about {
			continue
		}
		if n++; n > mostMoves {
			continue
		}
		where := cut(c.Where, 300)
		switch {
		case c.Old == "":
			p.write(hanging("  new       ", where+"   "+cut(c.New, 300), Width))
		case c.New == "":
			p.write(hanging("  gone      ", where+"   "+cut(c.Old, 300), Width))
		default:
			p.write(hanging("  changed   ", where+"   "+cut(c.Old, 300)+" → "+cut(c.New, 300), Width))
		}
	}
	switch {
	case n == 0:
		p.line("  as before")
	case n > mostMoves:
		p.line("  and %d more: --json has them all", n-mostMoves)
	}
	p.line("")
}

// least is how far a number has to move, in half widths, to be shown in text.
const least = 0.1

// found says how the mechanisms stand and which numbers moved: of mechanisms of
// both sides that are not out on both, and by a tenth of a half width at least.
func (p *page) found(m *record.Moved) {
	stand, quiet := []record.MechanismChange{}, map[string]bool{}
	for _, c := range m.Mechanisms {
		if c.Old == nil || c.New == nil { // everything of it is new, or gone
			quiet[c.Name] = true
			continue
		}
		quiet[c.Name] = c.Old.Standing == "out" && c.New.Standing == "out"
		if c.Differs = standingOnly(c.Differs); len(c.Differs) > 0 {
			stand = append(stand, c)
		}
	}
	p.line("%s", p.ink.bold("HOW THE MECHANISMS STAND"))
	if len(stand) > 0 {
		p.standingChanges(stand, "was", "is")
	} else {
		p.line("  as before")
		p.line("")
	}
	p.line("%s", p.ink.bold("NUMBERS THAT MOVED"))
	var shown []record.Move
	apart := 0
	for _, n := range m.Numbers {
		v := math.Abs(float64(n.Moved))
		if quiet[n.Mechanism] || v < least && n.Old.Held == n.New.Held {
			continue
		}
		shown = append(shown, n)
		if n.Apart() {
			apart++
		}
	}
	if len(shown) > 0 {
		p.moves(shown, "was", "is", coarseCell)
	}
	p.write(hanging("  ", aboutMoves(len(shown), len(m.Numbers)-len(shown), apart), Width))
}

// aboutMoves says what moved means, and how much is not shown.
func aboutMoves(shown, more, apart int) string {
	s := "None by as much as a tenth of half its interval."
	if shown > 0 {
		s = "Moved: in half widths of the older interval."
	}
	if apart > 0 {
		s += fmt.Sprintf(" Apart (%d): the two intervals do not meet.", apart)
	}
	if more > 0 {
		s += fmt.Sprintf(" Not shown: %d that moved by less than a tenth of that, or of a mechanism that is out on both sides or tried on one; --json has them.", more)
	}
	return s
}

// standingOnly leaves out what follows from other points: sums of squares and criteria.
func standingOnly(all []record.Change) []record.Change {
	return slices.DeleteFunc(slices.Clone(all), func(c record.Change) bool {
		return c.What == "points" || c.What == "sum of squares" || c.What == "AICc"
	})
}
