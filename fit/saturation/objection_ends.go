package saturation

import (
	"context"
	"fmt"
	"math"
)

const endsSource = fromPractice + ": fit the ends, or declare what they were set to and why"

// asksEnds asks what the results owe to ends that were set, by fitting again
// with free ones.
func (r *review) asksEnds(ctx context.Context) {
	set := r.setEnds()
	if len(set) == 0 {
		for di := range r.a.Data {
			if r.binds(di) {
				r.add(answer{id: "ends-set", group: foundGood, source: endsSource,
					text: "The ends of the response are fitted, not set."})
				return
			}
		}
		return
	}
	a := answer{id: "ends-set", group: sayInPaper, source: endsSource, remedy: "response: {low: free, " +
		set[0] + ": free}, or say how the ends were measured"}
	a.text = "The ends were set, not fitted (" + list(r.endsInWords()) + ")."
	if r.lead != nil {
		r.endsFreed(ctx, &a)
	}
	r.add(a)
}

// setEnds names the upper ends that are set, and the lower ones.
func (r *review) setEnds() []string {
	var names []string
	for di := range r.a.Data {
		if e := endsOf(r.a.Data[di].Response.Kind); r.binds(di) && r.upperSet(di) {
			names = append(names, e.high)
		}
	}
	return names
}

// upperSet says whether the upper end of a data set is held, its own number of
// sites or what 1 means in a saturation.
func (r *review) upperSet(di int) bool { return !r.a.Data[di].Response.High.Free }

// endsInWords lists the ends that are set.
func (r *review) endsInWords() []string {
	var words []string
	for di := range r.a.Data {
		if !r.binds(di) || !r.upperSet(di) {
			continue
		}
		d := &r.a.Data[di]
		e := endsOf(d.Response.Kind)
		s := fmt.Sprintf("%s%s %s", r.where(di), e.high, number(d.Response.High.Value))
		if d.Response.SitesPerMolecule && d.Response.High.Value == 0 {
			s = r.where(di) + "the number of sites"
		}
		if !d.Response.Low.Free {
			s += fmt.Sprintf(" and %s %s", e.low, number(d.Response.Low.Value))
		}
		words = append(words, s)
	}
	return words
}

// endsFreed fits the leader again with free ends and says what moves.
func (r *review) endsFreed(ctx context.Context, a *answer) {
	g := r.lead.refit(ctx, func(b *Analysis, c *Candidate) {
		c.Ends = nil
		for di := range b.Data {
			if r.binds(di) {
				b.Data[di].Response.Low.Free, b.Data[di].Response.High.Free = true, true
			}
		}
	})
	if g.result == nil {
		a.text += " Whether they matter cannot be asked: with free ends there is no fit."
		return
	}
	m := moveBetween(r.lead, g, r.halfInterval)
	factor, name := constantMove(r.lead, g)
	a.effect = "Fitted, " + m.inWords()
	if name != "" {
		a.effect += fmt.Sprintf(", and %s by %s", name, factorWords(factor))
	}
	a.effect += "."
	switch {
	case !m.compared:
	case m.ratio <= 1:
		a.effect += " That is less than the intervals."
	default:
		a.effect += " That is more than the intervals say."
		a.group = settleFirst
	}
}

// constantMove is the constant that moves most between two fits of one
// mechanism, with its factor.
func constantMove(f, g *fitted) (factor float64, name string) {
	labels, from := f.quotedConstants()
	others, to := g.quotedConstants()
	factor = 1
	for i, l := range labels {
		for j, o := range others {
			k := to[j] / from[i]
			if l != o || !(k > 0) || math.IsInf(k, 0) {
				continue
			}
			if name == "" || math.Abs(math.Log(k)) > math.Abs(math.Log(factor)) {
				factor, name = k, l
			}
		}
	}
	return factor, name
}

// factorWords writes a small change in percent and a large one as a factor.
func factorWords(k float64) string {
	if k > 0.7 && k < 1.4 {
		return figures(100*math.Abs(k-1), 2) + " %"
	}
	if k < 1 {
		k = 1 / k
	}
	return "a factor of " + figures(k, 3)
}

// signed writes a change with its sign.
func signed(v float64) string {
	if math.Abs(v) < 5e-4 {
		return "under 0.001"
	}
	if v < 0 {
		return "−" + figures(-v, 2)
	}
	return "+" + figures(v, 2)
}

// halfInterval is half of the width of the leader's interval of a number, of its
// logarithm for a position; NaN where it has not both ends.
func (r *review) halfInterval(name, curve string) float64 {
	q := r.leadRow(name, curve)
	switch {
	case q == nil:
		return math.NaN()
	case q.Of == "position":
		return math.Log(float64(q.High/q.Low)) / 2
	}
	return float64(q.High-q.Low) / 2
}

// leadRow is a row of the leader.
func (r *review) leadRow(name, curve string) *QuantityRow {
	for i := range r.out.Quantities {
		q := &r.out.Quantities[i]
		if q.Mechanism == r.lead.row.Name && q.Name == name && q.Curve == curve {
			return q
		}
	}
	return nil
}
