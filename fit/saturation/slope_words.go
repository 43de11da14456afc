package saturation

import (
	"fmt"
	"math"
	"strings"
)

// explained says what casts doubt on n_H, and what else may explain slopes other
// than 1.
func (w *verdictWriter) explained() string {
	return join(doubtWords(w.out.Objections), explanationWords(w.out.Explanations))
}

// doubts are the objections that make n_H an artefact where they have to be
// settled first; their numbers stand in the objections.
var doubts = []struct{ id, words string }{
	{"transformed-axes",
		"the response looks like a transform of what was measured, and K and n_H of a fit to it mean " +
			"nothing"},
	{"ligand-depletion", "there are so many sites that n_H is too high unless free ligand was measured"},
	{"incubation", "the incubation was too short, which makes half saturation and n_H too high"},
	{"incubation-doubled", "a longer incubation moves the curve"},
	{"initial-rates", "the velocities are not initial ones everywhere, which makes n_H too high"},
	{"n_H-above-sites",
		"n_H exceeds the number of sites: this is not an equilibrium mechanism with that many, or an " +
			"artefact"},
	{"pooling", "pooling the preparations flattens the curve"},
}

func doubtWords(list []Objection) string {
	var words []string
	for _, d := range doubts {
		for i := range list {
			if list[i].ID == d.id && list[i].Group == settleFirst {
				words = append(words, d.words)
				break
			}
		}
	}
	if len(words) == 0 {
		return ""
	}
	return "To be settled before n_H is believed: " + strings.Join(words, "; ") + "."
}

// explanationWords says of explanations that are not among the study's mechanisms
// which of them are better than all of these, which are not excluded and which
// are. Every number in it stands in the rows.
func explanationWords(rows []ExplanationRow) string {
	return join(slopeExplained("shallow", rows), slopeExplained("steep", rows))
}

func slopeExplained(slope string, rows []ExplanationRow) string {
	var open, out []string
	ahead, test := 0.0, ""
	for i := range rows {
		r := &rows[i]
		if r.Slope != slope || r.Mechanism != nil {
			continue
		}
		switch r.Standing {
		case "open":
			open = append(open, r.inWords())
			if test == "" && r.Test != nil {
				test = *r.Test
			}
		case "twin":
			open = append(open, r.inWords()+" (the same curve as "+*r.TwinOf+")")
		case "out":
			out = append(out, r.Explanation)
		}
		if r.AICcAhead > tieWidth {
			ahead = math.Max(ahead, float64(r.AICcAhead))
		}
	}
	var s []string
	if ahead > 0 {
		s = append(s,
			fmt.Sprintf("Something else describes the %s curve better than any mechanism tried (AICc %s "+
				"lower).",
				slope, figures(ahead, 2)))
	}
	if len(open) > 0 {
		s = append(s, fmt.Sprintf("Not among the mechanisms, but not excluded by the %s curve either: %s.",
			slope, list(open)))
	}
	if test != "" {
		s = append(s, "To settle it: "+test+".")
	}
	if len(out) > 0 {
		s = append(s, fmt.Sprintf("Not what makes it %s: %s.", slope, list(out)))
	}
	return join(s...)
}

// inWords is an explanation with its number.
func (r *ExplanationRow) inWords() string {
	if r.Name == nil || math.IsNaN(float64(r.Value)) {
		return r.Explanation
	}
	v, low, high := float64(r.Value), float64(r.Low), float64(r.High)
	switch *r.Name {
	case spreadOfK:
		return fmt.Sprintf("%s with an SD of ln K of %s (%s)", r.Explanation, toInterval(v, low, high),
			endWords(low, high))
	case shareExplained:
		return fmt.Sprintf("%s, which explain %s of the shallowness", r.Explanation, percent(v))
	case halfLivesStoodName:
		return fmt.Sprintf("%s (after %s half-lives)", r.Explanation, figures(v, 2))
	case sitesNeededName:
		return fmt.Sprintf("%s (%s of sites)", r.Explanation, withUnit(v, r.Unit, 2))
	}
	return r.Explanation
}
