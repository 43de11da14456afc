package report

import (
	"fmt"
	"io"
	"strconv"
	"strings"

	"ligancy/fit/saturation"
)

// Course is a document of binding against time.
type Course struct {
	Format   string   `json:"format"`
	Program  Program  `json:"program"`
	Study    Study    `json:"study"`
	Data     []Data   `json:"data"`
	Settings Settings `json:"settings"`

	*saturation.CourseOutcome

	head     *Document
	analysis *saturation.Analysis
}

// NewCourse assembles the document of a course.
func NewCourse(a *saturation.Analysis, o *saturation.CourseOutcome, src Source) *Course {
	head := New(a, &saturation.Outcome{}, src)
	rows := *o
	rows.Mechanisms, rows.Quantities, rows.Course = list(rows.Mechanisms), list(rows.Quantities), list(rows.Course)
	rows.Relaxations, rows.Readings, rows.Partings = list(rows.Relaxations), list(rows.Readings), list(rows.Partings)
	rows.Cautions = list(rows.Cautions)
	return &Course{Format: head.Format, Program: head.Program, Study: head.Study, Data: head.Data, Settings: head.Settings,
		CourseOutcome: &rows, head: head, analysis: a}
}

// WriteText prints a course for a reader: for each mechanism its constants, a short
// table of the course, how long to wait, and what would be read too early; then what
// parts the mechanisms.
func (c *Course) WriteText(w io.Writer, colour bool) error {
	p := &page{d: c.head, ink: ink{colour}}
	for _, l := range wrap(cut(c.Study.Title, 4*Width), Width) {
		p.line("%s", p.ink.bold(l))
	}
	p.line("%s", between("binding against time", cut(c.Study.File, 40), Width))
	if c.Study.Origin != "" {
		p.write(hanging("origin: ", cut(c.Study.Origin, 3*Width), Width))
	}
	p.line("")
	for _, m := range c.Mechanisms {
		c.mechanism(p, m)
	}
	c.partings(p)
	for i, text := range c.Cautions {
		p.write(hanging(fmt.Sprintf("  [%d] ", i+1), text, Width))
	}
	p.line("Research use only, not for diagnosis or treatment.")
	_, err := io.WriteString(w, p.b.String())
	return err
}

// mechanism prints one mechanism.
func (c *Course) mechanism(p *page, m saturation.MechanismRow) {
	p.line("%s", between(p.ink.bold(cut(m.Name, Width-20)), statusWords(m.Status), Width))
	var constants []string
	for i := range c.Quantities {
		q := &c.Quantities[i]
		if q.Mechanism != m.Name {
			continue
		}
		value := plain(float64(q.Value))
		if m.Status != "given" {
			value = significant(float64(q.Value), 4)
		}
		constants = append(constants, strings.TrimSpace(c.head.constantName(q)+" "+value+" "+unitWord(q.Unit)))
	}
	p.write(hanging("  ", strings.Join(constants, "; "), Width))
	p.line("")
	c.times(p, m.Name)
	c.waits(p, m.Name)
	c.readings(p, m.Name)
}

func statusWords(status string) string {
	if status == "given" {
		return "constants as given"
	}
	return "fitted: " + status
}

// table prints a grid below a sentence, if it has rows.
func (p *page) table(head string, g *grid) {
	if len(g.rows) < 2 {
		return
	}
	p.line("  %s", head)
	for _, l := range g.lines(Width - 4) {
		p.line("    %s", l)
	}
	p.line("")
}

// timesShown is how many times of each phase the terminal shows.
const timesShown = 6

// times prints a few times of every phase; --json has them all.
func (c *Course) times(p *page, mechanism string) {
	byPhase := map[int][]*saturation.TimeRow{}
	last := 0
	for i := range c.Course {
		if r := &c.Course[i]; r.Mechanism == mechanism {
			byPhase[r.Phase] = append(byPhase[r.Phase], r)
			last = max(last, r.Phase)
		}
	}
	g := &grid{gap: 3, right: []bool{false, true, true, true, true, true, true}}
	g.add("phase", "time", "saturation", "product", "labelled", "free "+cut(c.analysis.Ligand.Unit, 12), "unlabelled "+cut(c.analysis.Ligand.Unit, 12))
	blocked, bound := false, false
	for ph := 1; ph <= last; ph++ {
		rows := byPhase[ph]
		n := min(len(rows), timesShown)
		for i := range n {
			r := rows[len(rows)-1]
			if n > 1 {
				r = rows[i*(len(rows)-1)/(n-1)]
			}
			name := ""
			if i == 0 {
				name = c.phaseName(ph)
			}
			blocked = blocked || r.Unlabelled > 0
			bound = bound || finite(float64(r.Saturation))
			g.add(name, timeWords(float64(r.Seconds)), share(float64(r.Saturation)), significant(float64(r.Response), 4), share(float64(r.Labelled)),
				significant(float64(r.Free), 3), significant(float64(r.Unlabelled), 3))
		}
	}
	if !blocked {
		g.without("labelled")
		g.without("unlabelled")
	}
	if bound {
		g.without("product")
	} else {
		g.without("saturation")
	}
	p.table("Course", g)
}

func share(v float64) string { return strconv.FormatFloat(v, 'f', 4, 64) }

// phaseName says what a phase does.
func (c *Course) phaseName(n int) string {
	if c.analysis.Course == nil || n > len(c.analysis.Course.Phases) {
		return strconv.Itoa(n)
	}
	ph, unit := c.analysis.Course.Phases[n-1], cut(c.analysis.Ligand.Unit, 12)
	switch {
	case ph.Add > 0:
		return fmt.Sprintf("add %s %s", significant(ph.Add, 3), unit)
	case ph.Dilute > 0:
		return fmt.Sprintf("dilute %s-fold", significant(ph.Dilute, 3))
	case ph.Block > 0:
		return fmt.Sprintf("block with %s %s", significant(ph.Block, 3), unit)
	case ph.Wash:
		return "wash"
	}
	return "wait"
}

// waits prints relaxation times and how long to wait.
func (c *Course) waits(p *page, mechanism string) {
	g := &grid{gap: 3, right: []bool{true, true, true, true}}
	g.add("free "+cut(c.analysis.Ligand.Name, 20)+" / "+cut(c.analysis.Ligand.Unit, 12), "slowest relaxation", "fastest", "wait for 99 %")
	for _, r := range c.Relaxations {
		if r.Mechanism == mechanism {
			g.add(significant(float64(r.X), 3), timeWords(float64(r.Slowest)), timeWords(float64(r.Fastest)), timeWords(float64(r.Wait99)))
		}
	}
	p.table("How long to wait, ligand added to a sample without any", g)
}

// readings prints what would be read too early.
func (c *Course) readings(p *page, mechanism string) {
	g := &grid{gap: 3, right: []bool{true, true, true}}
	g.add("after", "half saturation / "+cut(c.analysis.Ligand.Unit, 12), "n_H there")
	var rest *saturation.ReadingRow
	for i := range c.Readings {
		r := &c.Readings[i]
		if r.Mechanism != mechanism {
			continue
		}
		if !finite(float64(r.XHalf)) {
			g.add(timeWords(float64(r.Seconds)), "not reached", "–")
			continue
		}
		g.add(timeWords(float64(r.Seconds)), significant(float64(r.XHalf), 4), slopeCell(float64(r.NH)))
		rest = r
	}
	if rest != nil {
		g.add("at rest", significant(float64(rest.RestXHalf), 4), slopeCell(float64(rest.RestNH)))
	}
	p.table("What a curve would read, free ligand held", g)
}

// partings prints what parts the mechanisms.
func (c *Course) partings(p *page) {
	if len(c.Partings) == 0 {
		return
	}
	p.line("%s", p.ink.bold("What dissociation would part"))
	unit := cut(c.analysis.Ligand.Unit, 12)
	for _, r := range c.Partings {
		does := fmt.Sprintf("loaded with %s %s, diluted %s-fold", significant(float64(r.Loaded), 3), unit, significant(float64(r.Factor), 3))
		if r.Does == "dilute and block" {
			does += fmt.Sprintf(" into %s %s unlabelled", significant(float64(r.Unlabelled), 3), unit)
		}
		size := "the scatter of these data is not known"
		if finite(float64(r.InScatters)) {
			size = significant(float64(r.InScatters), 2) + " times the scatter of one measurement"
		}
		p.write(hanging("  ", fmt.Sprintf("%s and %s, %s: furthest apart after %s, %s and %s of all sites (%s).",
			cut(r.Mechanism, 40), cut(r.Other, 40), does, timeWords(float64(r.Seconds)), share(float64(r.Bound)), share(float64(r.OtherBound)), size), Width))
	}
	p.line("")
}

// timeWords writes seconds as the bench does.
func timeWords(t float64) string {
	switch {
	case !finite(t):
		return "–"
	case t >= 2*86400:
		return significant(t/86400, 3) + " d"
	case t >= 2*3600:
		return significant(t/3600, 3) + " h"
	case t >= 120:
		return significant(t/60, 3) + " min"
	case t >= 0.1 || t == 0:
		return significant(t, 3) + " s"
	}
	return significant(t*1000, 3) + " ms"
}
