package saturation

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strconv"

	"ligancy/fit"
	"ligancy/mechanisms"
)

const countSource = "one equilibrium curve holds at most n constants: Middendorf & Aldrich 2017 J Gen Physiol 149:105, 121"

// asksConstants counts constants before they are fitted.
func (r *review) asksConstants(context.Context) {
	single := []string{"adair", "mwc", "sequential", "independent", "conformations", "states"}
	asked := false
	for i := range r.a.Candidates {
		c := &r.a.Candidates[i]
		n := c.Mechanism.Sites()
		if n == 0 || !slices.Contains(single, c.Family) {
			continue
		}
		m, _ := newModel(r.a, c)
		if m == nil || len(m.cells) == 0 {
			continue
		}
		asked = true
		k, curves := 0, len(m.curveCells())
		for _, p := range m.params {
			if p.kind == ofConstant && !p.fixed {
				k++
			}
		}
		if k > n*curves {
			r.add(answer{id: "constants-counted", group: settleFirst, source: countSource, remedy: "constants: {c: {fixed: 0}}, or measure with an effector",
				text: fmt.Sprintf("%s has %d constants for %d curve(s) of %s, which hold %d at most.", quoted(c.Name), k, curves, sitesWords(n), n*curves)})
			return
		}
	}
	if asked {
		r.add(answer{id: "constants-counted", group: foundGood, source: countSource, text: "No mechanism has more constants than its curves can hold."})
	}
}

const siteNumberSource = fromPractice + ": n from structure; integers compared, never a real number"

// asksSiteNumber compares a concerted leader with one site fewer and one more.
func (r *review) asksSiteNumber(ctx context.Context) {
	f := r.standing("mwc")
	if f == nil {
		return
	}
	n := f.row.Sites
	a := answer{id: "site-number", group: sayInPaper, source: siteNumberSource, remedy: "take n from the structure, and say where it is from"}
	if len(f.m.consts) != 3 || f.m.shift != nil || len(f.m.c.Mechanism.Effectors()) > 0 {
		a.text = fmt.Sprintf("%s has %s; neighbouring numbers were not tried here.", quoted(f.row.Name), sitesWords(n))
		r.add(a)
		return
	}
	var words []string
	closest := math.Inf(1)
	for _, k := range []int{n - 1, n + 1} {
		if k < 2 || slices.ContainsFunc(f.m.consts, func(c mechanisms.Constant) bool { return c.Site != "" }) {
			continue
		}
		if behind := r.behindWithSites(ctx, f, k); !math.IsNaN(behind) {
			words = append(words, fmt.Sprintf("%d by %s", k, figures(behind, 2)))
			closest = math.Min(closest, behind)
		}
	}
	if len(words) == 0 {
		return
	}
	a.text = fmt.Sprintf("%s has %s; with other numbers of sites its AICc changes (%s).", quoted(f.row.Name), sitesWords(n), list(words))
	if closest > 10 {
		a.group, a.remedy = foundGood, ""
	} else {
		a.text += " The curve does not count sites."
	}
	r.add(a)
}

// standing is the first mechanism of a family that is not out; nil for none.
func (r *review) standing(family string) *fitted {
	for _, i := range r.order {
		if f := r.fits[i]; f.row.Family == family && f.row.Standing != "out" {
			return f
		}
	}
	return nil
}

// behindWithSites is how far AICc falls behind with another number of sites.
func (r *review) behindWithSites(ctx context.Context, f *fitted, n int) float64 {
	family, _ := mechanisms.Lookup("mwc")
	def := mechanisms.Definition{Sites: n, Differs: len(f.m.c.Differs) > 0}
	mech, err := family.Build(def)
	if err != nil || len(mech.Constants()) != 3 {
		return math.NaN()
	}
	c := *f.m.c
	c.Name, c.Mechanism = c.Name+" with "+strconv.Itoa(n), mech
	g := r.a.fitCandidate(ctx, &c, fit.Settings{Starts: 6, Seed: r.a.Settings.Seed, Workers: r.a.Settings.Workers})
	if g.result == nil {
		return math.NaN()
	}
	return float64(g.row.AICc - f.row.AICc)
}

const (
	tiesSource = "Middendorf & Aldrich 2017 J Gen Physiol 149:105, 121"
	tied       = 0.95
)

// asksTies asks how L and K_R of concerted mechanisms are tied.
func (r *review) asksTies(context.Context) {
	f := r.standing("mwc")
	if f == nil || f.result.Cov == nil {
		return
	}
	strongest, name := 0.0, ""
	for i, p := range f.m.params {
		for j, q := range f.m.params {
			if p.kind != ofConstant || q.kind != ofConstant || f.m.consts[p.constant].Name != "L" || f.m.consts[q.constant].Name != "K_R" || f.m.consts[q.constant].Ligand != "" {
				continue
			}
			v := f.result.Cov.At(i, j) / math.Sqrt(f.result.Cov.At(i, i)*f.result.Cov.At(j, j))
			if math.Abs(v) > math.Abs(strongest) && math.Abs(v) < 1+1e-9 { // edges have no variance
				strongest, name = v, p.title()
			}
		}
	}
	if name == "" {
		r.add(answer{id: "tied-constants", group: foundGood, source: tiesSource, text: "L and K_R are not both fitted, and so not tied."})
		return
	}
	a := answer{id: "tied-constants", group: foundGood, source: tiesSource,
		text: fmt.Sprintf("ln %s and ln K_R of %s are correlated by %s.", name, quoted(f.row.Name), fourPlaces(strongest))}
	if math.Abs(strongest) >= tied {
		a.group = sayInPaper
		a.text = fmt.Sprintf("ln %s and ln K_R of %s are tied (r = %s): the data hold K_R·L^(1/%d), not each.", name, quoted(f.row.Name), fourPlaces(strongest), f.row.Sites)
		a.effect = "n_H is held better than either."
		a.remedy = "print L with K_R and r, or an effector series that parts them"
	}
	r.add(a)
}

// fourPlaces writes a correlation.
func fourPlaces(v float64) string { return strconv.FormatFloat(v, 'f', 4, 64) }

const intervalsSource = "profile or bootstrap intervals need not be symmetric: JCGM 101; Raue et al. 2009 Bioinformatics 25:1923, from memory"

// asksIntervals compares profile intervals of the leader's constants with the
// symmetric ones, value ± t·se.
func (r *review) asksIntervals(context.Context) {
	if r.lead == nil {
		return
	}
	a := answer{id: "symmetric-intervals", group: foundGood, source: intervalsSource}
	if r.a.Settings.Method == "covariance" {
		a.group = sayInPaper
		a.text = "Intervals are from the covariance, symmetric on the fitted scale, and never without an end."
		a.remedy = "fit: {interval: {method: profile}}"
		r.add(a)
		return
	}
	worst, skew, open := (*QuantityRow)(nil), 0.0, []string(nil)
	for i := range r.out.Quantities {
		q := &r.out.Quantities[i]
		if q.Mechanism != r.lead.row.Name || q.Of != "constant" || q.Held == "fixed" || math.IsNaN(float64(q.Value)) {
			continue
		}
		name := q.Name
		if q.Curve != "all" {
			name += " (" + q.Curve + ")"
		}
		if q.Held != "both" {
			open = append(open, name)
			continue
		}
		if up, down := float64(q.High-q.Value), float64(q.Value-q.Low); up > 0 && down > 0 {
			if s := math.Max(up/down, down/up); s > skew {
				worst, skew = q, s
			}
		}
	}
	a.text = "Intervals are profiles"
	if worst != nil {
		a.text += fmt.Sprintf("; the most lopsided, of %s, reaches %s times as far on one side", worst.Name, figures(skew, 2))
	}
	if len(open) > 0 {
		a.group = sayInPaper
		a.text += "; not ended on both sides: " + list(open)
		a.remedy = "print such a constant as a limit, not as a value with an error"
	}
	a.text += "."
	r.add(a)
}
