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

const siteNumberSource = fromPractice + ": n from structure; integers compared, never a real number"

// asksSiteNumber compares a concerted leader with one site fewer and one more.
func (r *review) asksSiteNumber(ctx context.Context) {
	f := r.standing("mwc")
	if f == nil {
		return
	}
	n := f.row.Sites
	a := answer{id: "site-number", group: sayInPaper, source: siteNumberSource,
		remedy: "take n from the structure, and say where it is from"}
	if len(f.m.consts) != 3 || f.m.shift != nil || len(f.m.c.Mechanism.Effectors()) > 0 {
		a.text = fmt.Sprintf("%s has %s; neighbouring numbers were not tried here.", quoted(f.row.Name),
			sitesWords(n))
		r.add(a)
		return
	}
	var words []string
	closest := math.Inf(1)
	for _, k := range []int{n - 1, n + 1} {
		if k < 2 || slices.ContainsFunc(f.m.consts,
			func(c mechanisms.Constant) bool { return c.Site != "" }) {
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
	a.text = fmt.Sprintf("%s has %s; with other numbers of sites its AICc changes (%s).",
		quoted(f.row.Name), sitesWords(n), list(words))
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
	g := r.a.fitCandidate(ctx, &c, fit.Settings{Starts: 6, Seed: r.a.Settings.Seed,
		Workers: r.a.Settings.Workers})
	if g.result == nil {
		return math.NaN()
	}
	if d := float64(g.row.AICc - f.row.AICc); !math.IsInf(d, 0) {
		return d
	}
	return math.NaN() // a perfect fit
}
