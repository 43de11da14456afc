package saturation

import (
	"fmt"
	"math"
)

// explained says what else may explain slopes other than 1, where anything can
// be said of them at all.
func (w *verdictWriter) explained() string { return explanationWords(w.out.Explanations) }

// explanationWords says of explanations that are not among the study's mechanisms
// which of them are not excluded and which are. Every number in it stands in
// the rows.
func explanationWords(rows []ExplanationRow) string {
	var sentences []string
	for _, slope := range []string{"shallow", "steep"} {
		var open, out []string
		test := ""
		for i := range rows {
			r := &rows[i]
			if r.Slope != slope || r.Mechanism != nil {
				continue
			}
			switch r.Standing {
			case "open":
				open = append(open, r.inWords())
			case "twin":
				open = append(open, r.inWords()+" (the same curve as "+*r.TwinOf+")")
			case "out":
				out = append(out, r.Explanation)
			}
			if r.Standing == "open" && test == "" && r.Test != nil {
				test = *r.Test
			}
		}
		if len(open) > 0 {
			s := fmt.Sprintf("Not among the mechanisms, but not excluded by the %s curve either: %s.", slope, list(open))
			if test != "" {
				s += " To be settled by " + test + "."
			}
			sentences = append(sentences, s)
		}
		if len(out) > 0 {
			sentences = append(sentences, fmt.Sprintf("What does not make it so %s: %s.", slope, list(out)))
		}
	}
	return join(sentences...)
}

// inWords is an explanation with its number.
func (r *ExplanationRow) inWords() string {
	if r.Name == nil || math.IsNaN(float64(r.Value)) {
		return r.Explanation
	}
	v, low, high := float64(r.Value), float64(r.Low), float64(r.High)
	switch *r.Name {
	case spreadOfK:
		return fmt.Sprintf("%s with an SD of ln K of %s (%s)", r.Explanation, toInterval(v, low, high), endWords(low, high))
	case shareExplained:
		return fmt.Sprintf("%s, which explain %s of the shallowness", r.Explanation, percent(v))
	case halfLivesStoodName:
		return fmt.Sprintf("%s (after %s half-lives)", r.Explanation, figures(v, 2))
	case sitesNeededName:
		return fmt.Sprintf("%s (%s of sites)", r.Explanation, withUnit(v, r.Unit, 2))
	}
	return r.Explanation
}
