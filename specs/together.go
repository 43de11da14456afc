package specs

import (
	"fmt"
	"slices"
	"strings"

	"ligancy/fit/saturation"
	"ligancy/mechanisms"
	"ligancy/specs/diag"
)

// quantities are what a contrast may compare beside constants.
var quantities = []string{
	"x_half", "x_median", "x_10", "x_90", "n_H", "n_H_half", "n_H_max", "n_H_max_at", "n_H_10_90",
	"n_H_1_99", "width_1_99",
	"n_H_hill_reading", "dG_interaction", "low", "high", "V", "Bmax", "nonspecific",
}

// contrasts settles what is compared between the levels of a factor.
func (b *builder) contrasts() {
	known := slices.Clone(quantities)
	whole := len(b.analysis.Candidates) == len(b.study.Mechanisms)
	for _, c := range b.analysis.Candidates {
		if c.Mechanism == nil {
			whole = false
			continue
		}
		for _, k := range c.Mechanism.Constants() {
			known = append(known, k.Name, k.Key())
		}
		if r, ok := c.Mechanism.(mechanisms.Restated); ok {
			known = append(known, restatedNames(r)...)
		}
	}
	for i, c := range b.study.Contrasts {
		p := indexed("contrasts", i)
		for j, of := range c.Of {
			if slices.Contains(known, of) || !whole {
				continue // a constant of a mechanism that could not be built, perhaps
			}
			at := p + ".of"
			if b.said(indexed(at, j)) {
				at = indexed(at, j)
			}
			var remedies []diag.Remedy
			if near := diag.Nearest(of, known); near != "" {
				remedies = []diag.Remedy{{Write: near}}
			}
			b.fault(at, "unknown-name", fmt.Sprintf("no mechanism of the study has %q", of),
				[]string{"It is a constant, or one of: " + strings.Join(quantities, ", ") + "."},
				remedies...)
		}
		b.between(p+".between", c.Between)
		b.analysis.Contrasts = append(b.analysis.Contrasts, saturation.Contrast{Of: c.Of,
			Between: c.Between})
	}
}

// restatedNames are the constants that a mechanism quotes but does not fit.
func restatedNames(r mechanisms.Restated) []string {
	var names []string
	theta := make([]float64, len(r.Constants()))
	for i := range theta {
		theta[i] = 1
	}
	for _, q := range r.Restate(theta) {
		names = append(names, q.Constant.Name, q.Constant.Key())
	}
	return names
}

// between asks that a factor exists and has levels to compare.
func (b *builder) between(at, factor string) {
	if factor == "" || len(b.study.Data) == 0 {
		return
	}
	levels := b.levelsOf(factor)
	var known []string
	for _, d := range b.analysis.Data {
		known = append(known, d.Factors...)
	}
	for _, e := range b.study.Effectors {
		known = append(known, e.Name)
	}
	known = append(known, byPreparation, byData)
	switch {
	case !slices.Contains(known, factor):
		var remedies []diag.Remedy
		if near := diag.Nearest(factor, known); near != "" {
			remedies = []diag.Remedy{{Write: "between: " + near}}
		}
		b.fault(at, "unknown-factor", fmt.Sprintf("the study has no factor %q", factor),
			[]string{"It has: " + strings.Join(unique(known), ", ") + "."}, remedies...)
	case len(levels) == 1:
		b.fault(at, "one-level", fmt.Sprintf("%s has only one level, %s, so there is nothing to compare", factor, levels[0]), nil, diag.Remedy{Say: "Take the contrast out, or name a factor with two levels."})
	}
}

func unique(words []string) []string {
	var out []string
	for _, w := range words {
		if !slices.Contains(out, w) {
			out = append(out, w)
		}
	}
	return out
}

// together asks what only the whole study shows.
func (b *builder) together() {
	b.sitesOfMechanisms()
	for i := range b.analysis.Candidates {
		c := &b.analysis.Candidates[i]
		p := b.candidatePath(c.Name)
		if c.Mechanism == nil {
			continue
		}
		b.enoughPoints(p, c)
		if c.Family == "assembly" {
			b.assemblyNeedsSites(p)
		}
	}
	for i := range b.analysis.Data {
		b.displacement(i)
	}
}

func (b *builder) candidatePath(name string) string {
	i := slices.IndexFunc(b.study.Mechanisms, func(m Mechanism) bool { return m.Name == name })
	return indexed("mechanisms", max(i, 0))
}

// sitesOfMechanisms asks that every mechanism has the number of sites that
// `Bmax: sites` stands for.
func (b *builder) sitesOfMechanisms() {
	for i, d := range b.study.Data {
		if d.Response.Bmax.Word != "sites" {
			continue
		}
		for _, c := range b.analysis.Candidates {
			if _, own := c.Ends["Bmax"]; c.Mechanism == nil || c.Mechanism.Sites() > 0 || own {
				continue
			}
			b.fault(indexed("data", i)+".response.Bmax", "no-sites",
				fmt.Sprintf("mechanism %q has no number of sites for Bmax to be", c.Name), nil,
				diag.Remedy{Write: "Bmax: free"}, diag.Remedy{Say: "or say the number,",
					Write: "sites: 4"})
		}
	}
}

// enoughPoints counts constants against points.
func (b *builder) enoughPoints(p string, c *saturation.Candidate) {
	points := 0
	for i, d := range b.analysis.Data {
		if b.study.Data[i].faulty || b.study.Data[i].table == nil {
			return // some are missing because they could not be read
		}
		for _, pt := range d.Points {
			if pt.LeftOut == "" {
				points++
			}
		}
	}
	if points == 0 {
		return
	}
	free := 0
	for _, k := range c.Mechanism.Constants() {
		if g, ok := givenOf(c, k); ok && (g.Fixed != nil) {
			continue
		}
		free += b.curvesOf(c.Differs, k)
	}
	for _, d := range b.analysis.Data {
		free += b.freeEnds(d.Response, c.Ends)
	}
	if free >= points {
		b.fault(b.nameOf(p), "too-few-points", fmt.Sprintf("%d points cannot hold %d constants",
			points, free),
			[]string{"The free numbers of the response are counted, and each constant once for every level by which it differs."},
			diag.Remedy{Say: "Measure more points, share or fix constants, or take this mechanism out."})
	}
}

func givenOf(c *saturation.Candidate, k mechanisms.Constant) (mechanisms.Given, bool) {
	if g, ok := c.Given[k.Key()]; ok {
		return g, true
	}
	g, ok := c.Given[k.Name]
	return g, ok
}

// curvesOf is how many values a constant has.
func (b *builder) curvesOf(differs map[string]string, k mechanisms.Constant) int {
	for _, name := range []string{k.Key(), k.Name, "all"} {
		if key, ok := differs[name]; ok {
			return max(len(b.levelsOf(key)), 1)
		}
	}
	return 1
}

// freeEnds counts the free numbers of a response, as a candidate has them.
func (b *builder) freeEnds(r saturation.Response, own map[string]saturation.Setting) int {
	n := 0
	said := []saturation.Setting{r.Low, r.High, r.Nonspecific}
	for i, name := range ends[r.Kind] {
		s := said[i]
		if o, ok := own[name]; ok {
			s = o
		}
		if !s.Free {
			continue
		}
		if key, ok := r.Differs[name]; ok {
			n += max(len(b.levelsOf(key)), 1)
			continue
		}
		n++
	}
	return n
}

// assemblyNeedsSites asks for the concentration of sites in every data set.
func (b *builder) assemblyNeedsSites(p string) {
	for i, d := range b.analysis.Data {
		if d.SitesPresent.Value > 0 || b.said(indexed("data", i)+".sites_present") {
			continue
		}
		b.fault(p+".family", "missing-key",
			fmt.Sprintf("how far the parts assemble depends on their concentration, which data set %q does not say", d.Name), nil, diag.Remedy{Write: "sites_present: 80 uM", Where: "under the data set."})
	}
}

// displacement asks that a ligand whose binding is counted competes in every mechanism.
func (b *builder) displacement(i int) {
	of := b.study.Data[i].Response.Of
	if of == "" || b.effector(of) < 0 {
		return
	}
	for _, c := range b.analysis.Candidates {
		if c.Mechanism == nil || slices.Contains(c.Mechanism.Effectors(), of) {
			continue
		}
		b.fault(b.nameOf(b.candidatePath(c.Name)), "ligand-not-bound",
			fmt.Sprintf("data set %q counts %s, which this mechanism does not bind",
				b.study.Data[i].Name, of), nil,
			diag.Remedy{Write: fmt.Sprintf("effectors: {%s: {at: ligand site}}",
				plainOrQuoted(of))})
	}
}
