package report

import (
	"fmt"
	"io"
	"strings"

	"ligancy/fit/saturation"
)

// page is a printed result in the making.
type page struct {
	d        *Document
	ink      ink
	rows     map[key]*saturation.QuantityRow
	cautions []caution
	b        strings.Builder
}

// WriteText prints a fitted result for a reader: the verdict first, then how
// steep and where, how firmly the constants are held, how the mechanisms
// stand, and what to know before believing it. Lines have at most Width columns.
func (d *Document) WriteText(w io.Writer, colour bool) error {
	leader := d.shown()
	p := &page{d: d, ink: ink{colour}, rows: d.index(), cautions: d.cautionsOn(leader)}
	p.top()
	p.verdict()
	if leader != "" {
		p.steepness(leader)
		p.constants(leader)
	}
	p.preparations()
	p.standing()
	p.explanations()
	p.before()
	_, err := io.WriteString(w, p.b.String())
	return err
}

// shown is the mechanism whose numbers are printed: the leader, or where
// nothing leads the first that has numbers.
func (d *Document) shown() string {
	if d.Verdict.Leads != "" {
		return d.Verdict.Leads
	}
	if len(d.Quantities) > 0 {
		return d.Quantities[0].Mechanism
	}
	return ""
}

func (p *page) write(s string)                  { p.b.WriteString(s) }
func (p *page) line(format string, args ...any) { fmt.Fprintf(&p.b, format+"\n", args...) }

// heading of a section, with a remark behind it.
func (p *page) heading(title, remark string) {
	if remark == "" {
		p.line("%s", p.ink.bold(title))
		return
	}
	p.line("%s%s%s", p.ink.bold(title), strings.Repeat(" ", max(3, 37-width(title))), p.ink.dim(remark))
}

// top says what was analysed.
func (p *page) top() {
	for _, l := range wrap(cut(p.d.Study.Title, 4*Width), Width) {
		p.line("%s", p.ink.bold(l))
	}
	p.line("%s", between(strings.Join(p.d.counts(), " · "), cut(p.d.Study.File, 60), Width))
	if p.d.Study.Origin != "" {
		p.write(hanging("origin: ", cut(p.d.Study.Origin, 3*Width), Width))
	}
	p.line("")
	if p.d.Interrupted {
		p.write(hanging("", "INTERRUPTED. What follows is whole as far as it goes, but part of the work is missing:"+
			" mechanisms may be unfitted and intervals absent. Do not quote it.", Width))
		p.line("")
	}
}

// counts lists points, curves, preparations and what was left out.
func (d *Document) counts() []string {
	points, leftOut := 0, 0
	for _, s := range d.Data {
		points, leftOut = points+s.Points, leftOut+s.LeftOut
	}
	out := []string{number(points, "point")}
	if curves := measuredCurves(d.analysis); len(curves) > 1 {
		named := number(len(curves), "curve")
		if list := shortList(curves); width(list) <= 30 {
			named += " (" + printable(list) + ")"
		}
		out = append(out, named)
	}
	if n := preparations(d.analysis); n > 0 {
		out = append(out, number(n, "preparation"))
	}
	if leftOut == 0 {
		return append(out, "none left out")
	}
	return append(out, fmt.Sprintf("%d left out", leftOut))
}

// number writes "1 curve", "2 curves".
func number(n int, noun string) string {
	if n == 1 {
		return "1 " + noun
	}
	return fmt.Sprintf("%d %ss", n, noun)
}

// verdict writes the answer in words.
func (p *page) verdict() {
	p.heading("WHAT THE DATA SAY", "")
	text := p.d.Verdict.Text
	if text == "" {
		text = "Nothing yet: no mechanism reached an answer."
	}
	for _, paragraph := range strings.Split(text, "\n") {
		p.write(hanging("  ", paragraph, Width))
	}
	p.line("")
}

// preparations counts the preparations of all kept points.
func preparations(a *saturation.Analysis) int {
	seen := map[string]bool{}
	for i := range a.Data {
		for j := range a.Data[i].Points {
			if pt := &a.Data[i].Points[j]; pt.LeftOut == "" && pt.Preparation != "" {
				seen[pt.Preparation] = true
			}
		}
	}
	return len(seen)
}
