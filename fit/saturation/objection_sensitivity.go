package saturation

import (
	"context"
	"fmt"
	"math"
	"slices"
)

const sensitivitySource = fromPractice +
	": results should not hang on one preparation, nor on the outermost points"

// farOut is the move, in halves of the interval, from which it is to be settled
// first what hangs on what was left out.
const farOut = 2

// asksSensitivity fits the leader again without each preparation and without the
// lowest and the highest ligand value of every curve.
func (r *review) asksSensitivity(ctx context.Context) {
	if r.lead == nil {
		return
	}
	r.withoutPreparations(ctx)
	r.withoutOuterPoints(ctx)
}

var omittedWords = map[string]string{"without-a-preparation": "one preparation",
	"without-the-outermost": "the outermost points"}

// omission is one refit with something left out.
type omission struct {
	what string
	drop func(di int, p *Point) bool
}

func (r *review) withoutPreparations(ctx context.Context) {
	var list []omission
	for _, name := range r.a.levels(byPreparation) {
		if name != "" {
			list = append(list, omission{"preparation " + name,
				func(_ int, p *Point) bool { return p.Preparation == name }})
		}
	}
	a := answer{id: "without-a-preparation", source: sensitivitySource}
	if len(list) < 2 {
		a.group = forCompleteness
		a.text = "What hangs on a single preparation cannot be asked: no two are named."
		r.add(a)
		return
	}
	r.sensitive(ctx, a, list)
}

func (r *review) withoutOuterPoints(ctx context.Context) {
	lowest, highest := map[string]float64{}, map[string]float64{}
	key := func(di int, p *Point) string {
		return fmt.Sprint(di, " ", r.a.pointLabel(&r.a.Data[di], p))
	}
	for di := range r.a.Data {
		for i := range r.a.Data[di].Points {
			p := &r.a.Data[di].Points[i]
			if p.LeftOut != "" || p.X <= 0 || p.Blocked || r.a.Data[di].Trace {
				continue
			}
			k := key(di, p)
			if l, ok := lowest[k]; !ok || p.X < l {
				lowest[k] = p.X
			}
			highest[k] = math.Max(highest[k], p.X)
		}
	}
	if len(lowest) == 0 {
		return // nothing but traces
	}
	r.sensitive(ctx, answer{id: "without-the-outermost", source: sensitivitySource}, []omission{
		{"the lowest ligand value", func(di int, p *Point) bool {
			return p.X > 0 &&
				p.X == lowest[key(di, p)]
		}},
		{"the highest ligand value", func(di int, p *Point) bool { return p.X > 0 && p.X == highest[key(di, p)] }},
	})
}

// sensitive adds the answer: the omission that moves half saturation or n_H most.
func (r *review) sensitive(ctx context.Context, a answer, omissions []omission) {
	worst, what, failed := r.omit(ctx, omissions)
	a.group = foundGood
	switch {
	case worst.ratio < 0 && len(failed) == 0:
		return // no curve is left to compare
	case worst.ratio < 0:
		a.group = sayInPaper
		a.text = "Without " + list(failed) + " there is no fit: what hangs on it cannot be asked."
		r.add(a)
		return
	case !worst.compared:
		a.group = forCompleteness
		a.text = "What hangs on " + omittedWords[a.id] +
			" cannot be judged: neither half saturation nor n_H has an interval that ends on both sides."
	case worst.ratio > 1:
		a.group = sayInPaper
		if worst.ratio > farOut {
			a.group = settleFirst
		}
		a.text = fmt.Sprintf("Without %s a result%s moves by more than its interval.", what,
			onCurve(worst.curve))
		a.remedy = "print the fit without it beside the fit with it"
	default:
		a.text = fmt.Sprintf("No result hangs on %s: half saturation and n_H stay within their "+
			"intervals without it.", omittedWords[a.id])
	}
	a.effect = fmt.Sprintf("Most without %s: %s.", what, worst.inWords())
	if len(failed) > 0 {
		a.text += " There is no fit without " + list(failed) + "."
	}
	r.add(a)
}

// omit makes the refits: the one that moves a result most, and those that failed.
func (r *review) omit(ctx context.Context, omissions []omission) (worst move, what string, failed []string) {
	worst.ratio = -1
	for _, o := range omissions {
		g := r.lead.refit(ctx, func(b *Analysis, _ *Candidate) {
			for di := range b.Data {
				b.Data[di].Points = slices.DeleteFunc(b.Data[di].Points,
					func(p Point) bool { return o.drop(di, &p) })
			}
		})
		if g.result == nil {
			failed = append(failed, o.what)
			continue
		}
		if m := moveBetween(r.lead, g, r.halfInterval); m.ratio > worst.ratio {
			worst, what = m, o.what
		}
	}
	return worst, what, failed
}
