package report

import (
	"io"
	"math"
	"strconv"
	"strings"

	"ligancy/fit/saturation"
)

// WriteGiven prints a document of curves from given constants: for each
// mechanism the ruler, the slopes and a short table of its curves.
func (d *Document) WriteGiven(w io.Writer, colour bool) error {
	p := &page{d: d, ink: ink{colour}, rows: d.index()}
	for _, l := range wrap(cut(d.Study.Title, 4*Width), Width) {
		p.line("%s", p.ink.bold(l))
	}
	p.line("%s", between("curves from given constants, against free ligand; nothing was fitted", cut(d.Study.File, 24), Width))
	if d.Study.Origin != "" {
		p.write(hanging("origin: ", cut(d.Study.Origin, 3*Width), Width))
	}
	p.line("")
	for i := range d.Mechanisms {
		if i == mostCurves {
			p.line("and %d more mechanisms: --json has every curve", len(d.Mechanisms)-mostCurves)
			break
		}
		p.givenMechanism(d.Mechanisms[i].Name)
	}
	p.line("Research use only, not for diagnosis or treatment.")
	_, err := io.WriteString(w, p.b.String())
	return err
}

// givenMechanism prints one mechanism.
func (p *page) givenMechanism(mechanism string) {
	var constants []string
	for _, q := range p.d.numbers(mechanism) {
		if q.Of == "constant" {
			constants = append(constants, strings.TrimSpace(p.d.constantName(q)+" "+plain(float64(q.Value))+" "+unitWord(q.Unit)))
		}
	}
	p.line("%s", p.ink.bold(cut(mechanism, Width)))
	p.write(hanging("  ", strings.Join(constants, "; "), Width))
	p.line("")
	curves := p.d.curvesOf(mechanism)
	curves = curves[:min(len(curves), mostCurves)]
	p.ruler(mechanism, curves)
	p.line("")
	p.slopes(mechanism, curves)
	p.line("")
	for _, c := range curves {
		p.curveTable(mechanism, c)
	}
}

// curveTable prints saturation and Hill coefficient at a dozen ligand values
// spread over the curve; curves.csv and --json have them all.
func (p *page) curveTable(mechanism, curve string) {
	var rows []*saturation.CurveRow
	for i := range p.d.Curves {
		if r := &p.d.Curves[i]; r.Mechanism == mechanism && r.Curve == curve {
			rows = append(rows, r)
		}
	}
	const most = 13
	unit := p.d.analysis.Ligand.Unit
	g := &grid{gap: 3, right: []bool{true, true, true}}
	label := cut(p.d.analysis.Ligand.Name, 20)
	if unit != "" {
		label += " / " + cut(unit, 12)
	}
	g.add(label, "saturation", "n_H")
	n := min(len(rows), most)
	for i := range n {
		r := rows[0]
		if n > 1 {
			r = rows[int(math.Round(float64(i)*float64(len(rows)-1)/float64(n-1)))]
		}
		g.add(significant(float64(r.X), 3), strconv.FormatFloat(float64(r.Saturation), 'f', 4, 64), slopeCell(float64(r.NH)))
	}
	if curve != "all" {
		p.line("  %s", cut(curve, Width-2))
	}
	for _, l := range g.lines(Width - 2) {
		p.line("  %s", l)
	}
	p.line("")
}

func slopeCell(n float64) string {
	if !finite(n) {
		return "–"
	}
	return strconv.FormatFloat(n, 'f', 3, 64)
}
