package report

import (
	"fmt"
	"html/template"
	"math"
	"slices"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	"ligancy/cmd/ligancy/internal/figure"
	"ligancy/fit/saturation"
)

// sayingSection answers: what did you find?
func (v *view) sayingSection() (section, error) {
	s := section{ID: "say", Title: "What the data say"}
	text := v.d.Verdict.Text
	if text == "" {
		text = "Nothing yet: no mechanism reached an answer."
	}
	s.Blocks = v.paragraphs(text)
	if t := v.keyNumbers(); t != nil {
		s.Blocks = append(s.Blocks, block{Table: t})
	}
	return s, nil
}

// keyNumbers is where each curve lies and how steep it is there.
func (v *view) keyNumbers() *table {
	curves := v.d.curvesOf(v.leader)
	if len(curves) == 0 {
		return nil
	}
	t := &table{Caption: "Where and how steep: " + v.basis(), Head: []string{"", v.halfTitle(), "n_H at half saturation"}, Class: "key"}
	for i, c := range curves[:min(len(curves), mostPanels)] {
		name := entry{Text: printable(curveLabel(c)), Head: true}
		if len(curves) > 1 && len(curves) <= figure.Colours {
			name.Colour = i + 1
		}
		t.Rows = append(t.Rows, []entry{name, v.number(v.row(c, "position", "x_half")), v.number(v.row(c, "hill", "n_H_half"))})
	}
	if n := len(curves) - mostPanels; n > 0 {
		t.Foot = fmt.Sprintf("and %d more curves: quantities.csv", n)
	}
	return t
}

// curvesSection answers: do I believe the curve?
func (v *view) curvesSection() (section, error) {
	s := section{ID: "curves", Title: "The points and the curves"}
	for i, f := range v.curvesFigures() {
		d, err := draw("curves"+suffix(i), f)
		if err != nil {
			return s, err
		}
		d.Reads = true
		if i == 0 {
			d.Keys = len(v.axis.Tested) > 0
			d.Buttons = v.buttons()
			d.Table = v.levelsTable()
		}
		s.Blocks = append(s.Blocks, block{Figure: d})
	}
	if len(s.Blocks) == 0 {
		return section{}, nil
	}
	if n := len(v.measured[v.leader]); n > mostMarks {
		s.Blocks = append(s.Blocks, block{Remark: template.HTML(fmt.Sprintf(
			"%d points: one dot stands for all that fall on one place; no mark tells preparations apart.", n))})
	}
	s.Blocks = append(s.Blocks, block{Remark: template.HTML(v.figureNote())})
	return s, nil
}

func suffix(i int) string {
	if i == 0 {
		return ""
	}
	return "-" + strconv.Itoa(i+1)
}

// figureNote says how the figure is to be read.
func (v *view) figureNote() string {
	text := "Curves are thick where points were measured and thin beyond; the hatched field was not tested. " +
		"The ruler below is thick from 10 to 90 % and thin from 1 to 99 %, upright at half saturation, pale beyond the tested range."
	if len(v.preps) > figure.Shapes {
		text += fmt.Sprintf(" %d preparations are more than marks can tell apart.", len(v.preps))
	}
	for i := range v.d.analysis.Data {
		if v.d.analysis.Data[i].Total {
			text += " Points stand at the free ligand that the fit finds at each total."
			break
		}
	}
	return text
}

// levelsTable is the first figure as numbers: every tested level of every curve.
func (v *view) levelsTable() *table {
	groups := v.groups()
	lines := v.lines[v.leader]
	if len(groups) == 0 || len(lines) == 0 {
		return nil
	}
	g, rival := groups[0], v.rival()
	t := &table{Caption: "The figure as a table: measured and calculated at every tested level",
		Head: []string{"", printable(v.d.ligandTitle()), "measured", "rows", printable(v.leader), "n_H"}}
	if rival != "" {
		t.Head = append(t.Head, printable(rival))
	}
	for i, c := range lines[:min(len(lines), mostPanels)] {
		for _, x := range v.axis.Tested {
			if len(t.Rows) == mostRows {
				t.Foot = "and more: points.csv"
				return t
			}
			if row := v.levelRow(g, i, c, x, rival); row != nil {
				t.Rows = append(t.Rows, row)
			}
		}
	}
	return t.dropEmpty()
}

// mostAtLevel bounds the measurements that are listed singly at one level.
const mostAtLevel = 8

// levelRow is one level of one curve; nil where nothing was measured there.
func (v *view) levelRow(g *responseGroup, line int, c *curveLine, x float64, rival string) []entry {
	var values, rows []string
	var sum float64
	for _, r := range v.atLevel(line, x) {
		if g.has(r.Data) {
			y := r.drawn(g)
			sum += y
			text := plain(y)
			if g.scaled {
				text = significant(y, 3)
			}
			values, rows = append(values, text), append(rows, strconv.Itoa(r.Row))
		}
	}
	n := len(values)
	if n == 0 {
		return nil
	}
	if n > mostAtLevel {
		values = []string{fmt.Sprintf("mean %s of %d", significant(sum/float64(n), 3), n)}
		rows = []string{rows[0] + " …"}
	}
	at := func(c *curveLine, values []float64) entry {
		return entry{Text: minus(significant(c.at(values, x), 3)), Number: true}
	}
	row := []entry{{Text: printable(curveLabel(c.name)), Head: true}, {Text: axisText(x), Number: true},
		{Text: minus(strings.Join(values, ", "))}, {Text: strings.Join(rows, ", ")}, at(c, g.values(c)), at(c, c.slope)}
	if rival != "" {
		e := entry{}
		for k, ok := range v.through(rival, []int{line}) {
			if o := v.lines[rival][k]; ok && e.Text == "" {
				e = at(o, v.overlaid(g, rival, k))
			}
		}
		row = append(row, e)
	}
	return row
}

// axisText writes a tested level.
func axisText(x float64) string {
	if x == 0 {
		return "0"
	}
	return axisNumber(roundTo(x, 4))
}

// atLevel lists the kept measurements on a curve of the leader at one level.
func (v *view) atLevel(line int, x float64) []reading {
	if v.levels == nil {
		v.levels = map[levelKey][]reading{}
		for _, r := range v.measured[v.leader] {
			if r.LeftOut == nil && !r.blocked {
				k := levelKey{r.line, r.level}
				v.levels[k] = append(v.levels[k], r)
			}
		}
	}
	return v.levels[levelKey{line, x}]
}

// levelKey is one level of one curve.
type levelKey struct {
	line int
	x    float64
}

// steepSection answers: how steep, and where?
func (v *view) steepSection() (section, error) {
	s := section{ID: "steep", Title: "Steepness along the curve"}
	f := v.slopeFigure()
	if f == nil {
		return section{}, nil
	}
	d, err := draw("steep", f)
	if err != nil {
		return s, err
	}
	d.Reads = true
	s.Blocks = append(s.Blocks, block{Figure: d})
	if t := v.slopeTable(); t != nil {
		s.Blocks = append(s.Blocks, block{Table: t})
	}
	if t := v.contrastTable(); t != nil {
		s.Blocks = append(s.Blocks, block{Table: t})
	}
	s.Blocks = append(s.Blocks, block{Remark: prose("n_H is a different number at every saturation and in every definition; "+
		"none of them counts sites. Bands are quick ones, from the covariance.", nil)})
	return s, nil
}

// standSection answers: what else would fit?
func (v *view) standSection() (section, error) {
	s := section{ID: "stand", Title: "How the mechanisms stand"}
	if f := v.standingFigure(); f != nil {
		d, err := draw("stand", f)
		if err != nil {
			return s, err
		}
		s.Blocks = append(s.Blocks, block{Figure: d})
	}
	if t := v.standingTable(); t != nil {
		s.Blocks = append(s.Blocks, block{Table: t})
	}
	if t := v.nestedTable(); t != nil {
		s.Blocks = append(s.Blocks, block{Table: t})
	}
	return s, nil
}

// heldSection answers: can I quote the constants?
func (v *view) heldSection() (section, error) {
	s := section{ID: "held", Title: "How firmly each constant is held"}
	f := v.strips()
	if f != nil {
		d, err := draw("held", f)
		if err != nil {
			return s, err
		}
		s.Blocks = append(s.Blocks, block{Figure: d})
	}
	if t := v.constantTable(); t != nil {
		s.Blocks = append(s.Blocks, block{Table: t})
	}
	return s, nil
}

// statesSection answers: what is bound when?
func (v *view) statesSection() (section, error) {
	s := section{ID: "states", Title: "Which states are filled"}
	f := v.populations()
	if f == nil {
		return section{}, nil
	}
	d, err := draw("states", f)
	if err != nil {
		return s, err
	}
	d.Reads = true
	s.Blocks = append(s.Blocks, block{Figure: d})
	return s, nil
}

// hillSection shows it the classical way.
func (v *view) hillSection() (section, error) {
	s := section{ID: "hill", Title: "Hill plot"}
	f := v.hillPlot()
	if f == nil {
		return section{}, nil
	}
	d, err := draw("hill", f)
	if err != nil {
		return s, err
	}
	d.Reads = true
	s.Blocks = append(s.Blocks, block{Remark: "For display only, not fitted."}, block{Figure: d}, block{Remark: prose(v.hillNote(), nil)})
	return s, nil
}

// hillNote says what the asymptotes are, or why they do not exist.
func (v *view) hillNote() string {
	var parts, whys []string
	for _, c := range v.lines[v.leader] {
		q := v.row(c.name, "energy", "dG_interaction")
		if q == nil || len(parts) == figure.Colours {
			continue
		}
		if value, lo, hi := rowFigures(q); value != "" {
			parts = append(parts, strings.TrimSpace(c.name+": "+minus(value)+" "+q.Unit+" "+minus(intervalWords(lo, hi))))
		} else if q.Why != nil && !slices.Contains(whys, *q.Why) {
			whys = append(whys, *q.Why)
		}
	}
	text := ""
	if len(parts) > 0 {
		text = "Dashed lines are the asymptotes of slope 1; their distance is the interaction energy, last ligand against first. " +
			strings.Join(parts, "; ") + "."
	}
	for _, w := range whys {
		text += " No interaction energy: " + sentence(w)
	}
	return strings.TrimSpace(strings.ReplaceAll(text, "all: ", ""))
}

// preparationsSection answers: each preparation?
func (v *view) preparationsSection() (section, error) {
	s := section{ID: "preparations", Title: "Preparation by preparation"}
	rows := v.d.Preparations
	if len(rows) == 0 {
		return section{}, nil
	}
	t := &table{Caption: "Each preparation fitted alone by a Hill equation; means of logarithms, SD over preparations",
		Head: []string{"", "preparation", "points", v.halfTitle(), "n_H"}}
	for i := range rows[:min(len(rows), mostRows/4)] {
		r := &rows[i]
		cells := preparationCells(r)
		row := []entry{{Text: printable(curveLabel(r.Curve)), Head: true}, {Text: cells[0]}, {Text: cells[1], Number: true},
			{Text: minus(cells[2])}, {Text: minus(cells[3])}}
		t.Rows = append(t.Rows, row)
	}
	if n := len(rows) - mostRows/4; n > 0 {
		t.Foot = fmt.Sprintf("and %d more rows: preparations.csv", n)
	}
	s.Blocks = append(s.Blocks, block{Table: t})
	return s, nil
}

// nextSection answers: what next?
func (v *view) nextSection() (section, error) {
	return section{ID: "next", Title: "The next measurement", Blocks: []block{
		{Paragraph: template.HTML("Which concentrations would tell the mechanisms apart, or hold the constants more firmly, is computed for these data and their scatter by")},
		{Code: "ligancy plan " + printable(v.d.Study.File)},
		{Remark: "A plan is statistics, not a protocol: solubility and safety are for you and local rules."},
	}}, nil
}

// conditionsSection answers: under what conditions?
func (v *view) conditionsSection() (section, error) {
	return section{ID: "conditions", Title: "Conditions", Blocks: []block{
		{Table: v.conditionsTable()},
		{Remark: "STRENDA-style, adapted to binding: what level 1A of that standard asks for."},
	}}, nil
}

// pointsSection answers: which points?
func (v *view) pointsSection() (section, error) {
	s := section{ID: "points", Title: "Every point"}
	rows := v.measured[v.leader]
	if len(rows) == 0 {
		return section{}, nil
	}
	if t := v.leftOutTable(rows); t != nil {
		s.Blocks = append(s.Blocks, block{Table: t})
	}
	t := &table{Caption: "Every point beside " + printable(v.leader) + "; residuals in units of scatter", Class: "points",
		Head: []string{"data", "row", "curve", "preparation", printable(v.pointTitle()), "measured", "calculated", "residual"}}
	kept := 0
	for i := range rows {
		r := &rows[i]
		if r.LeftOut != nil {
			continue
		}
		if kept++; kept <= mostRows {
			t.Rows = append(t.Rows, pointCells(r))
		}
	}
	if n := kept - mostRows; n > 0 {
		t.Foot = fmt.Sprintf("and %d more: points.csv", n)
	}
	if len(v.d.analysis.Data) == 1 {
		t.dropColumn(0)
	}
	if len(t.Rows) > 0 {
		s.Blocks = append(s.Blocks, block{Table: t.dropEmpty()})
	}
	return s, nil
}

// pointTitle heads the column of ligand values as the table of the study gives them.
func (v *view) pointTitle() string {
	title := v.d.ligandTitle()
	if rest, ok := strings.CutPrefix(title, "free "); ok {
		return "total " + rest
	}
	return title
}

func pointCells(r *reading) []entry {
	num := func(s string) entry { return entry{Text: minus(s), Number: true} }
	prep := ""
	if r.Preparation != nil {
		prep = printable(*r.Preparation)
	}
	curve := ""
	if r.Curve != "all" {
		curve = printable(r.Curve)
	}
	return []entry{{Text: printable(r.Data)}, num(strconv.Itoa(r.Row)), {Text: curve}, {Text: prep},
		num(plain(float64(r.X))), num(plain(float64(r.Y))), num(significant(float64(r.Fitted), 4)), num(fixed(float64(r.Residual), 2))}
}

// fixed writes a number with so many places; nothing where it does not exist.
func fixed(x float64, places int) string {
	if !finite(x) {
		return ""
	}
	return strconv.FormatFloat(x, 'f', places, 64)
}

// leftOutTable lists what was left out, with the reasons.
func (v *view) leftOutTable(rows []reading) *table {
	t := &table{Caption: "Left out: drawn crossed, counted, never used", Head: []string{"data", "row", "curve", "preparation",
		printable(v.pointTitle()), "measured", "reason"}}
	n := 0
	for i := range rows {
		r := &rows[i]
		if r.LeftOut == nil {
			continue
		}
		if n++; n <= mostListed {
			t.Rows = append(t.Rows, append(pointCells(r)[:6:6], entry{Text: printable(*r.LeftOut)}))
		}
	}
	if n > mostListed {
		t.Foot = fmt.Sprintf("and %d more: points.csv", n-mostListed)
	}
	if n == 0 {
		return nil
	}
	return t.dropEmpty()
}

// repeatSection answers: the same digits?
func (v *view) repeatSection() (section, error) {
	d := v.d
	t := &table{Caption: "What these digits came from", Head: []string{"", "value"}}
	add := func(name, value string) {
		if value != "" {
			t.Rows = append(t.Rows, []entry{{Text: name, Head: true}, {Text: value}})
		}
	}
	add("program", "ligancy "+printable(d.Program.Version))
	add("study", printable(d.Study.File))
	add("SHA-256 of the study", printable(d.Study.SHA256))
	for _, set := range d.Data[:min(len(d.Data), mostPanels)] {
		add("data", printable(set.File)+", "+number(set.Points, "point"))
		add("SHA-256 of the data", printable(set.SHA256))
	}
	add("seed", strconv.FormatUint(d.Settings.Seed, 10))
	add("starts", strconv.Itoa(d.Settings.Starts))
	return section{ID: "repeat", Title: "To repeat this", Blocks: []block{
		{Table: t}, {Code: "ligancy fit " + printable(d.Study.File)},
		{Paragraph: template.HTML("The same study, data, program version and kind of processor give the same digits, whatever the number of cores.")},
		{Remark: researchUse},
	}}, nil
}

// twinsSection answers: heterogeneity instead?
func (v *view) twinsSection() (section, error) {
	s := section{ID: "twins", Title: "Same curve, other story"}
	symbols := v.symbols()
	var pairs []template.HTML
	for _, t := range v.d.Verdict.Twins {
		names := make([]string, len(t))
		for i, n := range t {
			names[i] = "“" + n + "”"
		}
		pairs = append(pairs, prose(strings.Join(names, " and ")+" give the same curves; they count once, and these data cannot part them.", symbols))
	}
	if len(pairs) > 0 {
		s.Blocks = append(s.Blocks, block{List: pairs})
	}
	if told := v.factorWords(); len(told) > 0 {
		s.Blocks = append(s.Blocks, block{Heading: "Could independent sites give these curves?"}, block{List: told})
	}
	if t := v.explanationTable(); t != nil {
		s.Blocks = append(s.Blocks, block{Heading: "Other readings of the slope"}, block{Table: t})
	} else if text := v.shallowText(); text != "" {
		s.Blocks = append(s.Blocks, block{Paragraph: prose(text, symbols)})
	}
	switch {
	case len(pairs) > 0:
		s.Blocks = append(s.Blocks, block{Remark: "What could part them: dissociation after dilution with and without excess unlabelled ligand " +
			"(where rebinding is excluded), a signal that sees one class of sites, an effector or mutation that acts on one of them."})
	case len(s.Blocks) == 0 && len(v.ranked) > 1:
		s.Blocks = append(s.Blocks, block{Paragraph: "No two of the mechanisms tried give the same curves."})
	}
	return s, nil
}

// factorWords says of each of the leader's curves whether independent sites
// give it too; of another mechanism's where the leader was not asked.
func (v *view) factorWords() []template.HTML {
	var out []template.HTML
	symbols := v.symbols()
	for i := range v.d.Factors {
		f := &v.d.Factors[i]
		if f.Mechanism != v.leader || len(out) == mostPanels {
			continue
		}
		if text := factorText(f); text != "" {
			if f.Curve != "all" {
				text = f.Curve + ": " + text
			}
			out = append(out, prose(sentence(text), symbols))
		}
	}
	return out
}

// factorText says whether a binding polynomial factors into independent sites.
func factorText(f *saturation.FactorRow) string {
	share := ""
	if finite(float64(f.Share)) && f.Draws > 0 {
		in := percentOf(float64(f.Share)) + " %"
		if f.Share == 0 {
			in = "none"
		}
		share = fmt.Sprintf("; of %d studies simulated from the fit, the polynomial factors in %s", f.Draws, in)
	}
	text := ""
	switch f.Standing {
	case "factors":
		text = fmt.Sprintf("yes, %d independent sites cannot be refused", f.Sites)
		var kd []string
		for _, k := range f.Kd {
			if value := significant(float64(k.Value), 3); value != "" {
				kd = append(kd, value)
			}
		}
		if len(kd) > 0 {
			text += ", of Kd " + strings.Join(kd, ", ") + " " + unitWord(f.Kd[0].Unit)
		}
	case "refused":
		text = "no set of independent sites gives this curve"
	case "by construction":
		return "yes, by construction: the mechanism is one of independent sites"
	default:
		return ""
	}
	return text + share
}

// capital begins a text with a capital letter.
func capital(s string) string {
	r, n := utf8.DecodeRuneInString(s)
	if n == 0 {
		return s
	}
	return string(unicode.ToUpper(r)) + s[n:]
}

// percentOf writes a share in percent, as coarse as it is known.
func percentOf(share float64) string { return strconv.FormatFloat(100*share, 'f', 0, 64) }

// explanationTable lists what else makes curves steeper or shallower than one
// site, and the measurement that would decide.
func (v *view) explanationTable() *table {
	rows := v.d.Explanations
	if len(rows) == 0 {
		return nil
	}
	t := &table{Caption: "What else makes a curve steeper or shallower than one site", Head: []string{"reading", "curve", "stands", "AICc behind", "with it", "what would decide, or why it is out"}}
	curves := map[string]bool{}
	for i := range rows {
		curves[rows[i].Curve] = true
	}
	for i := range rows[:min(len(rows), mostListed)] {
		r := &rows[i]
		behind, with, test := "", "", ""
		if x := float64(r.AICcBehind); finite(x) {
			behind = strconv.FormatFloat(x, 'f', 1, 64)
		}
		if value := significant(float64(r.Value), 2); value != "" && r.Name != nil {
			with = strings.TrimSpace(*r.Name + " " + value + " " + unitWord(r.Unit))
		}
		if r.Standing != "out" && r.Test != nil {
			test = *r.Test
		} else if r.Why != nil {
			test = *r.Why
		}
		row := []entry{{Text: printable(r.Explanation), Head: true}, {Text: printable(r.Slope + ", " + curveLabel(r.Curve))},
			{Text: printable(explanationStanding(r))}, {Text: behind, Number: true}, {Text: minus(printable(with))}, {Text: printable(test)}}
		t.Rows = append(t.Rows, row)
	}
	if n := len(rows) - mostListed; n > 0 {
		t.Foot = fmt.Sprintf("and %d more: explanations.csv", n)
	}
	if len(curves) == 1 {
		t.Caption += ": " + t.Rows[0][1].Text
		t.dropColumn(1)
	}
	return t.dropEmpty()
}

// shallowText reads a slope below 1 as a spread of affinities: a Hill curve of
// exponent h < 1 is that of simple sites whose ln K is spread with the standard
// deviation (π/√3)·√(1/h² − 1) (Sips 1948).
func (v *view) shallowText() string {
	var parts []string
	for _, c := range v.d.curvesOf(v.leader) {
		h := v.value(c, "hill", "n_H_hill_reading")
		if !(h > 0 && h < 0.95) || len(parts) == figure.Colours {
			continue
		}
		sd := math.Pi / math.Sqrt(3) * math.Sqrt(1/(h*h)-1)
		text := fmt.Sprintf("a Hill exponent of %s is also that of simple sites whose dissociation constants are spread by a factor of %s either way (one standard deviation of ln K)",
			significant(h, 2), significant(math.Exp(sd), 2))
		if c != "all" {
			text = c + ": " + text
		}
		parts = append(parts, text)
	}
	if len(parts) == 0 {
		return ""
	}
	return capital(strings.Join(parts, "; ")) + " (Sips 1948). Mixed or partly degraded preparations do the same; a shallow slope alone proves neither two classes of sites nor negative cooperativity."
}

// reviewerSection answers: what would a referee say?
func (v *view) reviewerSection() (section, error) {
	s := section{ID: "reviewer", Title: "What a reviewer will ask"}
	symbols := v.symbols()
	own := len(v.cautions)
	for _, o := range v.d.Objections {
		if slices.Contains(objectionGroups[:3], o.Group) {
			own--
		}
	}
	own = max(own, 0)
	var numbered []term
	for i, c := range v.cautions[:min(own, mostCautions)] {
		numbered = append(numbered, term{Number: i + 1, Text: prose(strings.Join(strings.Fields(c.text), " "), symbols)})
	}
	if len(numbered) > 0 {
		s.Blocks = append(s.Blocks, block{Heading: "About these numbers"}, block{Terms: numbered})
	}
	n := own
	for g, group := range objectionGroups {
		var terms []term
		for i := range v.d.Objections {
			o := &v.d.Objections[i]
			if o.Group != group || len(terms) == mostListed {
				continue
			}
			t := objectionTerm(o, symbols)
			if n++; g < 3 && n <= mostCautions {
				t.Number = n
			}
			terms = append(terms, t)
		}
		if len(terms) > 0 {
			s.Blocks = append(s.Blocks, block{Heading: capital(group)}, block{Terms: terms})
		}
	}
	return s, nil
}

func objectionTerm(o *saturation.Objection, symbols map[string]bool) term {
	t := term{Text: prose(sentence(o.Text), symbols)}
	if o.Effect != nil {
		t.Text += template.HTML(" ") + prose(sentence(*o.Effect), symbols)
	}
	if o.Source != nil {
		t.Text += template.HTML(` <span class="source">`) + prose(capital(sentence(*o.Source)), nil) + "</span>"
	}
	if o.Remedy != nil {
		t.Code = printable(*o.Remedy)
	}
	return t
}
