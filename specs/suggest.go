package specs

import (
	"fmt"
	"path"
	"regexp"
	"slices"
	"strings"

	"ligancy/specs/diag"
	"ligancy/specs/table"
	"ligancy/specs/units"
)

// Suggest writes a commented starting study for a table: columns and units are
// guessed from its header and its values, and every guess is said in a comment.
// Where the table cannot be read there is no study, only complaints.
func Suggest(name string, data []byte) ([]byte, diag.List) {
	var g *guess
	var complaints diag.List
	sheets := table.Sheets(name, data)
	for _, sheet := range append(sheets, "")[:max(1, len(sheets))] { // of a workbook the first with a curve
		t, c := table.ReadSheet(name, sheet, data)
		if complaints == nil {
			complaints = c
		}
		if t == nil || c.HasErrors() {
			continue
		}
		if g = newGuess(t); g.ligand != nil && len(g.response) > 0 {
			g.sheets, g.sheet = sheets, sheet
			break
		}
	}
	if g == nil {
		return nil, complaints
	}
	if g.ligand == nil || len(g.response) == 0 {
		return nil, diag.List{{Code: "no-curve", Position: diag.Position{File: name},
			Problem:  name + " has no two columns of numbers that could be a curve",
			Notes:    []string{"Its columns are: " + shortList(g.t.Header(), 40) + "."},
			Remedies: []diag.Remedy{{Say: "Write the ligand and the response as two columns of numbers."}}}}
	}
	for {
		text := g.study()
		dropped := g.dropImpossible(text, data)
		if !dropped {
			return text, nil
		}
	}
}

// dropImpossible leaves out mechanisms that so few points cannot hold; false
// where there was none.
func (g *guess) dropImpossible(text, data []byte) bool {
	study := strings.TrimSuffix(path.Base(g.t.Name), path.Ext(g.t.Name)) + ".yaml"
	_, complaints := Load(memory{study: text, path.Base(g.t.Name): data}, study)
	lines := strings.Split(string(text), "\n")
	before := len(g.left)
	for _, d := range complaints {
		if d.Code != "too-few-points" || d.Line == 0 || d.Line > len(lines) {
			continue
		}
		for i, m := range g.mechanisms() {
			if strings.HasPrefix(lines[d.Line-1], "  - "+m) {
				g.left = append(g.left, g.kept()[i])
			}
		}
	}
	return len(g.left) > before && len(g.kept()) > 0
}

// candidate is a mechanism of a starting study.
type candidate struct {
	name, rest string // rest: "family: mwc, sites: 4"
	empirical  bool   // knows no effector
}

var candidates = []candidate{
	{"Hill equation", "family: hill", true},
	{"one class of sites", "family: independent, classes: {only: 1}", true},
	{"two classes of sites", "family: independent, classes: {tight: 1, loose: 1}", true},
	{"stepwise", "family: adair, sites: 4", true},
	{"concerted", "family: mwc, sites: 4", false},
	{"square of four", "family: sequential, contacts: square", true},
}

// kept are the candidates that were not dropped.
func (g *guess) kept() []candidate {
	return slices.DeleteFunc(slices.Clone(candidates),
		func(c candidate) bool { return slices.Contains(g.left, c) })
}

// mechanisms writes the entries of the list, each on one line.
func (g *guess) mechanisms() []string {
	var out []string
	for _, c := range g.kept() {
		entry := fmt.Sprintf("{name: %s, %s", c.name, c.rest)
		switch {
		case g.effector != nil && c.empirical:
			entry += fmt.Sprintf(", differs: {all: %s}", g.effectorName)
		case g.effector != nil:
			entry += fmt.Sprintf(", effectors: {%s: {binds: both}}", g.effectorName)
		case len(g.factors) > 0:
			entry += fmt.Sprintf(", differs: {all: %s}", plainOrQuoted(g.factors[0].name))
		}
		out = append(out, entry+"}")
	}
	return out
}

// study writes the whole study.
func (g *guess) study() []byte {
	var b strings.Builder
	line := func(format string, args ...any) { fmt.Fprintf(&b, format+"\n", args...) }
	base := strings.TrimSuffix(path.Base(g.t.Name), path.Ext(g.t.Name))
	line("format: ligancy/1")
	line("title: %s   # write one line that names the study", plainOrQuoted(base))
	line("# origin: where the data come from; printed in every result")
	line("")
	line("# conditions:                  # what a methods section states")
	line("#   macromolecule: name, number of subunits")
	line("#   temperature: 25 degC")
	line("#   pH: 7.4")
	line("#   buffer: 50 mM HEPES, 0.1 M NaCl")
	line("")
	g.writeLigand(line)
	g.writeData(line, base)
	line("")
	line("# Mechanisms to try. Where the number of sites is 4 it is a guess: write that of your macromolecule.")
	if len(g.factors) > 1 {
		line("# Only curves at different %s are kept apart; the other factors are pooled until you say otherwise.", oneLine(g.factors[0].name))
	}
	if len(g.factors) > 0 || g.effector != nil {
		line("# Everything differs between the curves here. To ask what changes, name constants: differs: {L: pH}")
	}
	line("mechanisms:")
	for _, m := range g.mechanisms() {
		line("  - %s", m)
	}
	if len(g.left) > 0 {
		line("# Left out, because these points are too few for it: %s.", strings.Join(g.leftNames(),
			", "))
	}
	if len(g.factors) > 0 {
		line("")
		line("contrasts:")
		line("  - {of: [x_half, n_H], between: %s}", plainOrQuoted(g.factors[0].name))
	}
	line("")
	line("fit: {starts: 50, seed: 1, interval: {level: 0.95, method: profile}, decide: {draws: 199}}")
	return []byte(b.String())
}

func (g *guess) leftNames() []string {
	var names []string
	for _, c := range g.left {
		names = append(names, c.name)
	}
	return names
}

func (g *guess) writeLigand(line func(string, ...any)) {
	unit, why := g.ligandUnit()
	name, whose := g.ligandName()
	line("ligand: {name: %s, unit: %s}   # %s; %s", name, unit, whose, why)
	if g.effector != nil {
		u, why := "1", "write its unit: the header names none"
		if g.effector.hasUnit {
			u, why = g.effector.unit.Linear().String(), "its unit is from the header"
		}
		line("effectors:")
		line("  - {name: %s, unit: %s}   # column %s looks like a second ligand; %s",
			g.effectorName, u, oneLine(g.effector.name), why)
	}
	line("")
}

// generic words of headers name no substance.
var generic = regexp.MustCompile(`(?i)^(.|conc|concentration|konz|konzentration|dose|dosis|added|free|frei|total|lig|ligand|substrate|inhibitor|agonist|pressure|log|log10|lg|column|unnamed|in|of|the|col)$`)

// ligandName is the substance that the header names, and where that comes from.
func (g *guess) ligandName() (name, why string) {
	stem, _, _ := splitHeader(g.ligand.name)
	for _, w := range words.FindAllString(stem, -1) {
		switch {
		case strings.EqualFold(w, "pO2"), strings.EqualFold(w, "O2"):
			return "oxygen, symbol: pO2", "its name is from the header"
		case generic.MatchString(w), w == g.effectorName,
			slices.Contains(keyNames(columnKeys()), w):
			continue
		}
		return plainOrQuoted(w), "its name is from the header: check this"
	}
	return "ligand", "write its name"
}

var words = regexp.MustCompile(`[A-Za-z][A-Za-z0-9]*`)

// logarithms says whether the ligand's values must be logarithms, though its
// header names no unit: most are negative, and all are those of concentrations.
func (g *guess) logarithms() bool {
	return !g.ligand.hasUnit && g.ligand.low < -2 && g.ligand.low > -16 && g.ligand.high < 1
}

func (g *guess) ligandUnit() (unit, why string) {
	switch {
	case g.logarithms():
		return "M", "its values are taken for decadic logarithms of M: check this"
	case !g.ligand.hasUnit:
		return `"unit not stated"`, "write its unit (uM, torr, …), which the header does not name"
	}
	return g.ligand.unit.Linear().String(), "its unit is from the header " + oneLine(g.ligand.name)
}

func (g *guess) writeData(line func(string, ...any), base string) {
	line("data:")
	line("  - name: %s", plainOrQuoted(base))
	line("    file: %s", plainOrQuoted(path.Base(g.t.Name)))
	if len(g.sheets) > 1 {
		line("    sheet: %s   # of %s", plainOrQuoted(g.sheet), oneLine(strings.Join(g.sheets, ", ")))
	}
	for _, n := range g.t.Notes {
		line("    # recognised in the table: %s", n)
	}
	line("    columns:")
	line("      ligand: %s   # %s", g.column(g.ligand), g.ligand.why)
	if g.effector != nil {
		line("      %s: %s", g.effectorName, g.column(g.effector))
	}
	if len(g.response) == 1 {
		line("      response: %s   # %s", g.column(g.response[0]), g.response[0].why)
	} else {
		var names []string
		for _, c := range g.response {
			names = append(names, g.column(c))
		}
		line("      response: [%s]   # columns of one name and a number are taken for replicates",
			strings.Join(names, ", "))
	}
	for _, r := range []struct {
		key, what string
		c         *columnGuess
	}{{"sem", "standard error of the mean", g.sem}, {"n", "how many values each mean is of", g.n},
		{"sigma", "standard deviation of the value in its row; of single values, where the row is a mean: use sem and n", g.sigma},
		{"preparation", "which preparation a row comes from", g.preparation},
		{"blocked", "which tubes see only nonspecific binding", g.blocked},
		{"left_out", "reason for leaving a row out; empty means kept", g.leftOut}} {
		if r.c != nil {
			line("      %s: %s   # %s", r.key, plainOrQuoted(r.c.name), r.what)
		}
	}
	if g.blocked != nil {
		line("    blocked_when: %s", plainOrQuoted(g.blockedWord))
	}
	g.writeFactors(line)
	line("    response: %s", g.responseKind())
	line("    # %s", g.responseWhy)
	line("    ligand_axis: free   # or total, with   sites_present: 80 uM   under it%s",
		g.axisHint())
	noise, why := "constant", "or proportional, mixed: look at the residuals"
	if g.sigma != nil || g.sem != nil && g.n != nil {
		noise, why = "given", "the standard deviations of the table"
	}
	line("    noise: %s   # %s", noise, why)
	if g.apart != nil {
		line("    # column %s looks like nonspecific binding: write it as rows of their own in column %s,",
			oneLine(g.apart.name), oneLine(g.response[0].name))
		line("    # with a further column that says which tubes were blocked, and   blocked: THAT COLUMN   under columns")
	}
	if len(g.ignored) > 0 {
		line("    # columns that are not used: %s", strings.Join(g.ignored, ", "))
	}
}

func (g *guess) writeFactors(line func(string, ...any)) {
	var factors []string
	for _, f := range g.factors {
		factors = append(factors, plainOrQuoted(f.name)+": "+plainOrQuoted(f.name))
	}
	if len(factors) > 0 {
		line("    factors: {%s}   # few values, many rows each: tells curves apart",
			strings.Join(factors, ", "))
	}
}

// axisHint says what the header says of free and total.
func (g *guess) axisHint() string {
	for _, word := range []string{"added", "total"} {
		if strings.Contains(strings.ToLower(g.ligand.name), word) {
			return fmt.Sprintf(" (the header says %q)", word)
		}
	}
	return ""
}

// column writes a column with its unit, where that is not the substance's own.
func (g *guess) column(c *columnGuess) string {
	switch {
	case c.hasUnit && c.unit.IsLogarithm():
		return fmt.Sprintf("{name: %s, unit: %s}", plainOrQuoted(c.name), c.unit)
	case c == g.ligand && g.logarithms():
		return fmt.Sprintf("{name: %s, unit: log10 M}", plainOrQuoted(c.name))
	case slices.Contains(g.response, c) && g.percent:
		return fmt.Sprintf("{name: %s, unit: percent}", plainOrQuoted(c.name))
	}
	return plainOrQuoted(c.name)
}

// responseKind writes what was measured, and keeps why.
func (g *guess) responseKind() string {
	c := g.response[0]
	unit := quoteText("unit not stated")
	if c.hasUnit && !c.unit.IsLogarithm() && !c.unit.IsNumber() {
		unit = c.unit.String()
	} else if label := labelInHeader(c.name); label != "" && !c.hasUnit {
		unit = quoteText(label)
	}
	differs := func(what string) string {
		if g.preparation == nil {
			return ""
		}
		return fmt.Sprintf(", differs: {%s: preparation}", what)
	}
	switch g.kind {
	case "saturation":
		g.responseWhy = "the ends are set to 0 and 1; where they were not measured, free them: low: free, high: free"
		return "{kind: saturation, unit: fraction, low: 0, high: 1}"
	case "bound":
		ns := ", nonspecific: 0"
		g.responseWhy = "no blocked tubes were found, so nonspecific binding is set to 0; or   nonspecific: free"
		if g.blocked != nil {
			ns = ", nonspecific: free"
			g.responseWhy = "nonspecific binding comes from the blocked tubes"
		}
		return fmt.Sprintf("{kind: bound, unit: %s, Bmax: free%s%s}", unit, ns, differs("Bmax"))
	case "velocity":
		g.responseWhy = "taken for velocities by the header or its unit"
		return fmt.Sprintf("{kind: velocity, unit: %s, V: free%s}", unit, differs("V"))
	}
	g.responseWhy = "nothing says what this is, so it is a signal with both ends free; or kind: saturation, bound, velocity"
	return fmt.Sprintf("{kind: signal, unit: %s, low: free, high: free%s}", unit, differs("high"))
}

// kindOf guesses what was measured.
func kindOf(c *columnGuess) (kind string, percent bool) {
	name := strings.ToLower(c.name)
	has := func(words ...string) bool {
		return slices.ContainsFunc(words, func(w string) bool { return strings.Contains(name, w) })
	}
	unit := units.Unit{}
	if c.hasUnit {
		unit = c.unit
	}
	switch {
	case has("sat", "sätt", "so2", "theta", "occupan", "fraction") || c.hasUnit && unit.IsPercent() || name == "y":
		if c.high > 2 && c.high <= 150 && c.low > -30 {
			return "saturation", true
		}
		if c.high <= 1.5 && c.low > -0.5 {
			return "saturation", false
		}
		return "signal", false
	case has("veloc", "rate", "activity", "geschw", "aktivit") || strings.HasPrefix(name, "v_") || name == "v" ||
		c.hasUnit && strings.HasPrefix(unit.Kind(), "a catalytic activity"):
		return "velocity", false
	case has("bound", "binding", "gebunden", "bindung") || c.hasUnit && unit.Kind() == "an amount per mass":
		return "bound", false
	}
	return "signal", false
}
