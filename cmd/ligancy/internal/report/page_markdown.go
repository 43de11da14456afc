package report

import (
	"fmt"
	"io"
	"strings"
)

// Markdown writes a short summary of a result for a pull request or a
// laboratory's notes: the verdict, where and how steep, the constants, how the
// mechanisms stand, and what to know before believing it.
func Markdown(w io.Writer, d *Document) error {
	m := &markdown{v: newView(d)}
	m.top()
	m.table(m.v.keyNumbers())
	m.table(m.v.constantTable())
	m.standing()
	m.cautions()
	m.line("_Report page: report.html. Numbers: result.json and the CSV tables. Figures for print: figures/._")
	m.line("")
	m.line("_%s_", markdownText(researchUse))
	_, err := io.WriteString(w, m.b.String())
	return err
}

// markdown is a summary in the making.
type markdown struct {
	v *view
	b strings.Builder
}

func (m *markdown) line(format string, args ...any) { fmt.Fprintf(&m.b, format+"\n", args...) }

// markdownSigns are the signs that Markdown or HTML within it would read.
const markdownSigns = "\\`*_[]<>#|~&$"

// markdownText makes a text stand for itself in Markdown, on one line.
func markdownText(s string) string {
	var b strings.Builder
	for _, r := range printable(s) {
		if strings.ContainsRune(markdownSigns, r) {
			b.WriteByte('\\')
		}
		b.WriteRune(r)
	}
	return b.String()
}

// top writes the title, what was analysed, and the verdict.
func (m *markdown) top() {
	d := m.v.d
	m.line("# %s", markdownText(d.Study.Title))
	m.line("")
	facts := append(d.counts(), d.Study.File)
	if d.Study.Origin != "" {
		facts = append(facts, "origin: "+d.Study.Origin)
	}
	facts = append(facts, "ligancy "+d.Program.Version)
	for i, f := range facts {
		facts[i] = markdownText(f)
	}
	m.line("%s", strings.Join(facts, " · "))
	m.line("")
	if d.Interrupted {
		m.line("**Interrupted: part of the work is missing. Do not quote it.**")
		m.line("")
	}
	m.line("## What the data say")
	m.line("")
	text := d.Verdict.Text
	if text == "" {
		text = "Nothing yet: no mechanism reached an answer."
	}
	for _, p := range strings.Split(text, "\n") {
		if p = strings.TrimSpace(p); p != "" {
			m.line("%s", markdownText(p))
			m.line("")
		}
	}
}

// table writes a table of the page.
func (m *markdown) table(t *table) {
	if t == nil {
		return
	}
	m.line("### %s", markdownText(t.Caption))
	m.line("")
	row := func(cells []string) { m.line("| %s |", strings.Join(cells, " | ")) }
	head, rule := make([]string, len(t.Head)), make([]string, len(t.Head))
	for i, h := range t.Head {
		head[i], rule[i] = markdownText(h), "---"
	}
	row(head)
	row(rule)
	for _, r := range t.Rows[:min(len(t.Rows), mostStanding)] {
		cells := make([]string, len(r))
		for i, e := range r {
			text := strings.TrimSpace(e.Text + e.After + " " + e.Interval)
			for _, n := range e.Marks {
				text += fmt.Sprintf(" [%d]", n)
			}
			cells[i] = markdownText(text)
		}
		row(cells)
	}
	m.line("")
	if n := len(t.Rows) - mostStanding; n > 0 {
		m.line("and %d more: report.html", n)
		m.line("")
	}
	if t.Foot != "" {
		m.line("%s", markdownText(t.Foot))
		m.line("")
	}
}

// standing writes the table of mechanisms without what only the page shows.
func (m *markdown) standing() {
	if t := m.v.standingTable(); t != nil {
		for k, h := range t.Head {
			if h == "starts agreeing" {
				t.dropColumn(k)
				break
			}
		}
		m.table(t)
	}
}

// cautions writes what to know before believing it.
func (m *markdown) cautions() {
	all := m.v.cautions
	if len(all) == 0 {
		return
	}
	m.line("## Before you believe it")
	m.line("")
	for i, c := range all[:min(len(all), mostCautions)] {
		m.line("%d. %s", i+1, markdownText(strings.Join(strings.Fields(c.text), " ")))
	}
	if n := len(all) - mostCautions; n > 0 {
		m.line("")
		m.line("and %d more: report.html", n)
	}
	m.line("")
}
