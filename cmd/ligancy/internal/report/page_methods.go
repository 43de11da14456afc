package report

import (
	"fmt"
	"html/template"
	"maps"
	"slices"
	"strings"

	"ligancy/fit/saturation"
	"ligancy/mechanisms"
)

// howSection answers: how was it done?
func (v *view) howSection() (section, error) {
	s := section{ID: "how", Title: "How this was calculated"}
	s.Blocks = append(s.Blocks, block{Paragraph: prose(v.methods(), v.symbols())})
	s.Blocks = append(s.Blocks, block{Paragraph: prose(v.whatLeadsMeans(), nil)})
	s.Blocks = append(s.Blocks, v.equations()...)
	if t := v.settingsTable(); t != nil {
		s.Blocks = append(s.Blocks, block{Table: t})
	}
	s.Blocks = append(s.Blocks, block{Heading: "References"}, block{List: v.references()})
	return s, nil
}

// noiseWords says what each scatter model means.
var noiseWords = map[saturation.Noise]string{
	saturation.Constant:     "scatter of one size",
	"":                      "scatter of one size",
	saturation.Proportional: "scatter proportional to the response",
	saturation.Mixed:        "scatter of a constant and a proportional part, found with the curves",
	saturation.GivenSigma:   "the standard deviations given with the data",
	saturation.Replicates:   "the scatter of replicates",
	saturation.StudentT:     "scatter with the long tails of Student's t",
}

// methods is the methods paragraph.
func (v *view) methods() string {
	d := v.d
	points, sets := 0, len(d.Data)
	for _, s := range d.Data {
		points += s.Points
	}
	var noise []string
	for i := range d.analysis.Data {
		if w := noiseWords[d.analysis.Data[i].Noise]; w != "" && !slices.Contains(noise, w) {
			noise = append(noise, w)
		}
	}
	text := fmt.Sprintf("%s in %s, untransformed, were fitted by least squares under %s",
		number(points, "point"), number(sets, "table"), strings.Join(noise, " and under "))
	text += ", with numbers that enter linearly projected out (Golub and Pereyra 1973) where the scatter model allows it. "
	text += fmt.Sprintf("Every one of %s was fitted from %d starts with analytic derivatives by a trust-region method; constants are fitted as logarithms, shares as logits. ",
		number(len(d.Mechanisms), "mechanism"), d.Settings.Starts)
	switch d.Settings.Method {
	case "covariance":
		text += fmt.Sprintf("Intervals (%s %%) come from the covariance of the fit. ", percent(d.Settings.Level))
	default:
		text += fmt.Sprintf("Intervals (%s %%) come from the profile of the likelihood (Venzon and Moolgavkar 1988; Bates and Watts 1988), which shows where an end does not exist; those marked covariance are quick ones. ",
			percent(d.Settings.Level))
	}
	text += "n_H is the slope of ln[Ȳ/(1−Ȳ)] against the logarithm of the free ligand, from the mechanism itself; each number is named by its definition."
	return text
}

// whatLeadsMeans says how mechanisms are compared.
func (v *view) whatLeadsMeans() string {
	text := "The mechanism with the lowest AICc (Hurvich and Tsai 1989) leads; those within 2 of it tie."
	if n := v.d.Settings.Draws; n > 0 {
		text += fmt.Sprintf(" One is out when hardly any of up to %d studies simulated from it lets another win by as much as it did here; else it stays open. ", n)
	} else {
		text += " The others stay open. "
	}
	return text + "“Open: leader, freer” has the leader's form with more of its constants set free. To lead is not to be true: mechanisms that were not tried are not excluded."
}

// equations are those of the leader's family, from the family's own text.
func (v *view) equations() []block {
	m := v.d.mechanism(v.leader)
	if m == nil {
		return nil
	}
	f, ok := mechanisms.Lookup(m.Family)
	if !ok {
		return nil
	}
	head, lines, _ := familyText(f.Doc)
	if len(lines) == 0 {
		return nil
	}
	out := block{}
	for _, l := range lines {
		out.Equations = append(out.Equations, formulaHTML(l))
	}
	return []block{{Paragraph: prose("“"+v.leader+"”: "+head, v.symbols())}, out}
}

// familyText takes a family's text apart: its first sentence, its equations
// (the first lines that are set in), its references (the last paragraph).
func familyText(doc string) (head string, equations []string, references string) {
	paragraphs := strings.Split(strings.TrimSpace(doc), "\n\n")
	if len(paragraphs) == 0 {
		return "", nil, ""
	}
	head = paragraphs[0]
	for _, p := range paragraphs[1:] {
		if strings.HasPrefix(p, "\t") {
			for _, l := range strings.Split(p, "\n") {
				equations = append(equations, strings.TrimSpace(l))
			}
			break
		}
	}
	references = strings.Join(strings.Fields(paragraphs[len(paragraphs)-1]), " ")
	return head, equations, references
}

// settingsTable lists the settings in force that the study does not say.
func (v *view) settingsTable() *table {
	t := &table{Caption: "In force without being said in the study", Head: []string{"setting", "value"}}
	for _, k := range slices.Sorted(maps.Keys(v.d.Settings.Defaults)) {
		if len(t.Rows) == mostListed {
			t.Foot = "and more: result.json"
			break
		}
		t.Rows = append(t.Rows, []entry{{Text: printable(k), Head: true}, {Text: printable(v.d.Settings.Defaults[k])}})
	}
	if len(t.Rows) == 0 {
		return nil
	}
	return t
}

// generalReferences are those of the methods, whatever the mechanism.
var generalReferences = []string{
	"Bates, Watts 1988, Nonlinear Regression Analysis and Its Applications, Wiley (intervals by profile)",
	"Golub, Pereyra 1973, SIAM J Numer Anal 10:413 (linear parameters projected out)",
	"Goldbeter, Koshland 1981, PNAS 78:6840 (slope from the 10–90 % ratio)",
	"Hill 1910, J Physiol 40:iv",
	"Hurvich, Tsai 1989, Biometrika 76:297 (AICc)",
	"Venzon, Moolgavkar 1988, Appl Stat 37:87 (profile likelihood)",
	"Wyman 1964, Adv Protein Chem 19:223 (Hill plot, interaction energy)",
}

// references are those of the families tried and of the methods.
func (v *view) references() []template.HTML {
	var all []string
	for i := range v.d.Mechanisms {
		f, ok := mechanisms.Lookup(v.d.Mechanisms[i].Family)
		if !ok {
			continue
		}
		_, _, refs := familyText(f.Doc)
		if refs = strings.TrimSuffix(refs, "."); refs != "" {
			line := v.d.Mechanisms[i].Family + ": " + refs
			if !slices.Contains(all, line) {
				all = append(all, line)
			}
		}
	}
	var out []template.HTML
	for _, r := range append(all, generalReferences...) {
		out = append(out, prose(sentence(r), nil))
	}
	return out
}
