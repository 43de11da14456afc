package report

import (
	"cmp"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"

	"ligancy/fit/saturation"
	"ligancy/specs/record"
)

// RepeatFormat names the layout of documents of a repeated fit.
const RepeatFormat = "ligancy-repeat/1"

// mostMoves are as many rows as a page shows.
const mostMoves = 40

// Repeat is a fit done again beside its record.
type Repeat struct {
	Format        string  `json:"format"`
	Program       Program `json:"program"`
	Study         Study   `json:"study"`
	Record        string  `json:"record"` // the file
	Same          bool    `json:"same"`   // within tolerance
	Tolerance     float64 `json:"tolerance"`
	Numbers       int     `json:"numbers_compared"`
	NotHeld       int     `json:"numbers_not_held"` // at neither end, and so not compared
	*record.Moved         // what moved
}

// NewRepeat assembles the document of a repeated fit; file is the record's name.
func NewRepeat(src Source, title, origin, file string, c *record.Comparison) *Repeat {
	r := &Repeat{Format: RepeatFormat, Program: Program{Version: src.Version},
		Study:  Study{Title: title, Origin: origin, File: src.File, SHA256: src.SHA256},
		Record: file, Same: c.Holds(), Tolerance: record.MovedTolerance, Moved: c.Moved()}
	for i := range c.Numbers {
		if c.Numbers[i].Free {
			r.NotHeld++
		} else {
			r.Numbers++
		}
	}
	return r
}

// WriteText says which files changed, then which numbers moved.
func (r *Repeat) WriteText(w io.Writer, colour bool) error {
	p := &page{ink: ink{colour}}
	p.line("%s", between(p.ink.bold(cut(r.Study.File, 50)+" fitted again"), "compared with "+cut(r.Record, 40), Width))
	if r.Study.Origin != "" {
		p.write(hanging("origin: ", cut(r.Study.Origin, 3*Width), Width))
	}
	p.line("")
	p.files(r.Files, "the record")
	for _, s := range r.Settings {
		p.write(hanging("  ", fmt.Sprintf("%s: %s in the record, %s now", s.What, orNone(s.Old), orNone(s.New)), Width))
	}
	p.line("")
	if r.Same {
		p.line("%s", p.ink.bold("THE SAME WITHIN TOLERANCE"))
	} else {
		p.line("%s", p.ink.bold("SOMETHING MOVED"))
		p.standingChanges(r.Mechanisms, "record", "now")
		p.moves(r.Moved.Numbers, "record", "now", fineCell)
	}
	p.write(hanging("  ", r.compared(), Width))
	_, err := io.WriteString(w, p.b.String())
	return err
}

// compared says how much was compared, and how finely.
func (r *Repeat) compared() string {
	s := fmt.Sprintf("%s compared, within %v of half an interval.", number(r.Numbers, "number"), r.Tolerance)
	if r.NotHeld > 0 {
		s += fmt.Sprintf(" Not compared: %d that the data hold at neither end.", r.NotHeld)
	}
	return s
}

// files says of every file whether it changed.
func (p *page) files(all []record.FileChange, than string) {
	g := &grid{gap: 3}
	for _, f := range all {
		word := "unchanged"
		switch {
		case !f.Changed:
		case f.Old == "":
			word = "not in " + than
		case f.New == "":
			word = "in " + than + " only"
		default:
			word = "changed since " + than + " was written"
		}
		g.add(cut(f.File, 60), word)
	}
	for _, l := range g.lines(Width - 2) {
		p.line("  %s", l)
	}
}

// standingChanges says how mechanisms stood and stand.
func (p *page) standingChanges(all []record.MechanismChange, then, now string) {
	g := &grid{gap: 2}
	g.add("mechanism", "", then, now)
	for _, m := range all {
		for i, c := range m.Differs {
			name := ""
			if i == 0 {
				name = cut(m.Name, 36)
			}
			g.add(name, c.What, orNone(c.Old), orNone(c.New))
		}
	}
	p.bounded(g)
}

// moves is the table of numbers that moved, under the names of their mechanisms;
// cell writes one number with its interval.
func (p *page) moves(all []record.Move, then, now string, cell func(*record.Number) string) {
	g := &grid{gap: 2, right: []bool{false, false, false, true}}
	g.add("", then, now, "moved")
	all = slices.Clone(all)
	slices.SortStableFunc(all, func(a, b record.Move) int { return cmp.Compare(ownerOf(&a), ownerOf(&b)) })
	shown := all[:min(len(all), mostMoves)]
	var owners []string
	for i := range shown {
		m := &shown[i]
		n := m.Number()
		if i == 0 || ownerOf(&shown[i-1]) != ownerOf(m) {
			owners = append(owners, ownerOf(m))
			g.add(mark)
		}
		name := "  " + cut(strings.TrimSpace(n.Name+" "+n.Site), 24)
		if unit := unitWord(n.Unit); unit != "" {
			name += " / " + cut(unit, 12)
		}
		g.add(name, cell(m.Old), cell(m.New), movedCell(m))
	}
	for _, l := range g.lines(Width - 2) {
		if l == mark && len(owners) > 0 {
			l, owners = cut(owners[0], Width-2), owners[1:]
		}
		if l != mark {
			p.line("  %s", l)
		}
	}
	if more := len(all) - len(shown); more > 0 {
		p.line("  and %d more: --json has them all", more)
	}
	p.line("")
}

// mark stands in a table of moves for the line that names a mechanism and a curve.
const mark = "\u00a0"

// ownerOf is what a number belongs to: its mechanism, and the curve where it is not of all.
func ownerOf(m *record.Move) string {
	if c := m.Number().Curve; c != "all" {
		return m.Mechanism + ", " + c
	}
	return m.Mechanism
}

// bounded sets a table with a head, if it has rows, cut to what a page bears.
func (p *page) bounded(g *grid) {
	if len(g.rows) < 2 {
		return
	}
	more := len(g.rows) - 1 - mostMoves
	if more > 0 {
		g.rows = g.rows[:mostMoves+1]
	}
	for _, l := range g.lines(Width - 2) {
		p.line("  %s", l)
	}
	if more > 0 {
		p.line("  and %d more: --json has them all", more)
	}
	p.line("")
}

// fineCell writes a number with its interval, with every digit of the record.
func fineCell(n *record.Number) string {
	if n == nil || n.Value == nil {
		return "–"
	}
	return intervalCell(n, fine(n.Value), fine(n.Low), fine(n.High))
}

// fine writes every digit; "" for what does not exist.
func fine(x *float64) string {
	if x == nil {
		return ""
	}
	return strconv.FormatFloat(*x, 'g', -1, 64)
}

// coarseCell writes a number with its interval, with the places that it allows.
func coarseCell(n *record.Number) string {
	if n == nil || n.Value == nil {
		return "–"
	}
	or := func(x *float64) saturation.Real {
		if x == nil {
			return saturation.Real(math.NaN())
		}
		return saturation.Real(*x)
	}
	value, low, high := rowFigures(&saturation.QuantityRow{Of: n.Of, Curve: n.Curve, Unit: n.Unit,
		Value: or(n.Value), Low: or(n.Low), High: or(n.High)})
	return intervalCell(n, value, low, high)
}

// intervalCell joins a number and its ends: 2.87 (2.81 to 2.92).
func intervalCell(n *record.Number, value, low, high string) string {
	switch {
	case low == "" && high == "" && n.Held == "neither":
		return value + " (not held)"
	case low == "" && high == "":
		return value
	case low == "":
		return value + " (up to " + high + ")"
	case high == "":
		return value + " (from " + low + ")"
	}
	return value + " (" + low + " to " + high + ")"
}

// movedCell is how far a number moved, in half widths of its older interval.
func movedCell(m *record.Move) string {
	v, ends := float64(m.Moved), float64(m.EndsMoved)
	switch {
	case m.Old == nil:
		return "new"
	case m.New == nil:
		return "gone"
	case m.Old.Held != m.New.Held:
		if m.New.Held == "neither" {
			return "not held now"
		}
		return "held: " + m.New.Held
	case !finite(v):
		return "–"
	case v == 0 && finite(ends) && ends > 0:
		return "its ends " + significant(ends, 2)
	}
	sign := "+"
	if v < 0 {
		sign = "−"
	}
	cell := sign + significant(math.Abs(v), 2)
	if m.Apart() {
		cell += ", apart"
	}
	return cell
}

// orNone writes a dash for what is not there.
func orNone(s string) string {
	if s == "" {
		return "–"
	}
	return cut(s, 48)
}
