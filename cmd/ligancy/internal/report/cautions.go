package report

import (
	"fmt"
	"math"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"ligancy/fit/saturation"
)

// Limits beyond which a caution is printed. They have no source: common practice.
const (
	definitionsDiffer = 0.1  // between n_H at half saturation and what a Hill fit would say
	tied              = 0.95 // correlation of two constants
	fewAgreeing       = 0.1  // share of starts that reached the minimum
	mostCautions      = 20
)

// researchUse closes every printed result.
const researchUse = "A good fit does not prove a mechanism. Research use only, not for diagnosis or treatment."

// caution is one numbered warning and the values that carry its number.
type caution struct {
	text  string
	about func(*saturation.QuantityRow) bool // nil: no single value
	edge  bool                               // about the mechanism's status
}

// cautionsOn lists what the reader must know about one mechanism's numbers,
// then what a reviewer will ask. Where a reviewer's question says the same as a
// warning of our own, the question stands and the values carry its number.
func (d *Document) cautionsOn(mechanism string) []caution {
	definitions, ties := d.onDefinitions(mechanism), d.onTies(mechanism)
	var asked []caution
	for _, group := range objectionGroups[:3] {
		for i := range d.Objections {
			o := &d.Objections[i]
			if o.Group != group {
				continue
			}
			c := caution{text: briefly(o)}
			switch o.ID {
			case "n_H-definition":
				c.about, definitions = anyOf(definitions), nil
			case "tied-constants":
				c.about, ties = anyOf(ties), nil
			case "plateau":
				c.about = func(q *saturation.QuantityRow) bool {
					return q.Mechanism == mechanism && q.Of == "response" && slices.Contains([]string{"high", "V", "Bmax"}, q.Name)
				}
			}
			asked = append(asked, c)
		}
	}
	return slices.Concat(definitions, d.onEdges(mechanism), ties, d.onStarts(mechanism), asked)
}

// anyOf is about what any of some cautions is about; nil if there are none.
func anyOf(cautions []caution) func(*saturation.QuantityRow) bool {
	if len(cautions) == 0 {
		return nil
	}
	return func(q *saturation.QuantityRow) bool {
		return slices.ContainsFunc(cautions, func(c caution) bool { return c.about(q) })
	}
}

// briefly is an objection as a caution: what must be done about it says how
// large its effect is, what completes the record does not.
func briefly(o *saturation.Objection) string {
	text := sentence(o.Text)
	if o.Effect != nil && o.Group != objectionGroups[2] {
		text += " " + sentence(*o.Effect)
	}
	return text
}

// onDefinitions warns where two things called n_H are two numbers.
func (d *Document) onDefinitions(mechanism string) []caution {
	rows := d.index()
	least, most := math.Inf(1), 0.0
	for _, c := range d.curvesOf(mechanism) {
		half, hill := rows[key{mechanism, c, "hill", "n_H_half"}], rows[key{mechanism, c, "hill", "n_H_hill_reading"}]
		if half == nil || hill == nil {
			continue
		}
		if gap := math.Abs(float64(half.Value - hill.Value)); gap >= definitionsDiffer {
			least, most = min(least, gap), max(most, gap)
		}
	}
	if most == 0 {
		return nil
	}
	by := strconv.FormatFloat(least, 'f', 1, 64)
	if to := strconv.FormatFloat(most, 'f', 1, 64); to != by {
		by += " to " + to
	}
	return []caution{{
		text:  "The midpoint slope and a fitted Hill exponent differ here by " + by + ". Say which you print.",
		about: func(q *saturation.QuantityRow) bool { return q.Mechanism == mechanism && q.Name == "n_H_hill_reading" },
	}}
}

// onEdges says why an end is open, a constant does not exist, or what an edge
// means. Rows that share a reason share a caution.
func (d *Document) onEdges(mechanism string) []caution {
	var reasons []string
	names := map[string][]string{}
	for _, q := range d.numbers(mechanism) {
		if q.Why == nil || !inConstants(q) {
			continue
		}
		if names[*q.Why] == nil {
			reasons = append(reasons, *q.Why)
		}
		names[*q.Why] = append(names[*q.Why], d.constantLabel(q))
	}
	var all []caution
	if m := d.mechanism(mechanism); m != nil && m.Edge != nil {
		all = append(all, caution{text: "At an edge, which is an answer: " + sentence(*m.Edge), edge: true})
	}
	for _, why := range reasons {
		all = append(all, caution{
			text: strings.Join(names[why], "; ") + ": " + sentence(why),
			about: func(q *saturation.QuantityRow) bool {
				return q.Mechanism == mechanism && inConstants(q) && q.Why != nil && *q.Why == why
			},
		})
	}
	return all
}

// inConstants says whether a row stands in the table of constants.
func inConstants(q *saturation.QuantityRow) bool {
	return q.Of == "constant" || q.Of == "combination" || q.Of == "response"
}

// onTies warns of constants that move together. The levels of one constant
// share a caution.
func (d *Document) onTies(mechanism string) []caution {
	type pair struct{ a, b string }
	strongest := map[pair]float64{}
	var order []pair
	for _, c := range d.Correlations {
		if c.Mechanism != mechanism || !(math.Abs(float64(c.R)) >= tied) {
			continue
		}
		p := pair{symbol(c.A), symbol(c.B)}
		if p.a == p.b || !d.quotes(mechanism, p.a) || !d.quotes(mechanism, p.b) {
			continue
		}
		if _, ok := strongest[pair{p.b, p.a}]; ok {
			p = pair{p.b, p.a}
		}
		if _, ok := strongest[p]; !ok {
			order = append(order, p)
		}
		if math.Abs(float64(c.R)) > math.Abs(strongest[p]) {
			strongest[p] = float64(c.R)
		}
	}
	var all []caution
	for _, p := range order {
		loose := d.looser(mechanism, p.a, p.b)
		all = append(all, caution{
			text: fmt.Sprintf("%s and %s move together (r = %s). Quote them together with this correlation, not %s alone.",
				p.a, p.b, correlation(strongest[p]), loose),
			about: func(q *saturation.QuantityRow) bool {
				return q.Mechanism == mechanism && q.Of == "constant" && d.constantName(q) == loose
			},
		})
	}
	return all
}

// quotes says whether a constant is printed under this symbol; what is fitted
// instead of it (overall constants) is not.
func (d *Document) quotes(mechanism, symbol string) bool {
	for _, q := range d.numbers(mechanism) {
		if q.Of == "constant" && d.constantName(q) == symbol {
			return true
		}
	}
	return false
}

// symbol of a correlated number without its curve: "L, pH 7.6" is L.
func symbol(name string) string {
	s, _, _ := strings.Cut(name, ", ")
	return s
}

// looser returns the one of two constants that is held less firmly.
func (d *Document) looser(mechanism, a, b string) string {
	widest := func(name string) float64 {
		w := 0.0
		for _, q := range d.numbers(mechanism) {
			if q.Of == "constant" && d.constantName(q) == name && q.Low > 0 {
				w = max(w, float64(q.High/q.Low))
			}
		}
		return w
	}
	if widest(b) > widest(a) {
		return b
	}
	return a
}

// correlation writes r so that its distance from ±1 stays visible.
func correlation(r float64) string {
	for places := 2; places < 6; places++ {
		if s := strconv.FormatFloat(r, 'f', places, 64); !strings.HasSuffix(s, "1."+strings.Repeat("0", places)) {
			return s
		}
	}
	return strconv.FormatFloat(r, 'f', 6, 64)
}

// onStarts warns where few starts reached the minimum.
func (d *Document) onStarts(mechanism string) []caution {
	m := d.mechanism(mechanism)
	if m == nil || m.Starts < 10 || float64(m.StartsAgreeing) >= fewAgreeing*float64(m.Starts) {
		return nil
	}
	return []caution{{text: fmt.Sprintf(
		"Only %d of %d starts reached this minimum; a better one may exist. Raise   starts   under   fit   in the study.",
		m.StartsAgreeing, m.Starts)}}
}

// marks returns the numbers of the cautions on a value: "[1] [3]".
func (p *page) marks(q *saturation.QuantityRow) string {
	var m []string
	for i, c := range p.cautions[:min(len(p.cautions), mostCautions)] {
		if c.about != nil && c.about(q) {
			m = append(m, fmt.Sprintf("[%d]", i+1))
		}
	}
	return strings.Join(m, " ")
}

// edgeMark is the number of the caution on a mechanism at an edge.
func (p *page) edgeMark() string {
	for i, c := range p.cautions {
		if c.edge {
			return fmt.Sprintf("[%d]", i+1)
		}
	}
	return ""
}

// before writes BEFORE YOU BELIEVE IT.
func (p *page) before() {
	p.heading("BEFORE YOU BELIEVE IT", "")
	shown := p.cautions[:min(len(p.cautions), mostCautions)]
	for i, c := range shown {
		p.write(hanging("  "+padLeft(fmt.Sprintf("[%d]", i+1), 3)+" ", c.text, Width))
	}
	if n := len(p.cautions) - len(shown); n > 0 {
		p.line("  and %d more: result.json", n)
	}
	p.line("  %s", researchUse)
	if radioactive.MatchString(p.d.analysis.Ligand.Name) {
		p.line("  %s", radioligands)
	}
	p.line("")
}

// radioactive labels, as the trade writes them in a ligand's name: [3H], [125I].
var radioactive = regexp.MustCompile(`\[\d{1,3}[A-Z][a-z]?\]`)

const radioligands = "Radioligands are handled under local rules, by licensed staff."

// sentence closes a text with a full stop.
func sentence(s string) string {
	s = strings.TrimSpace(s)
	if s == "" || slices.Contains([]string{".", "!", "?"}, s[len(s)-1:]) {
		return s
	}
	return s + "."
}
