package saturation

import (
	"context"
	"fmt"
	"math"
	"slices"
)

const sensitivitySource = fromPractice + ": results should not hang on one preparation, nor on the outermost points"

// asksSensitivity fits the leader again without each preparation and without the
// lowest and the highest ligand value of every curve.
func (r *review) asksSensitivity(ctx context.Context) {
	if r.lead == nil {
		return
	}
	r.withoutPreparations(ctx)
	r.withoutOuterPoints(ctx)
}

// omission is one refit with something left out.
type omission struct {
	what string
	drop func(di int, p *Point) bool
}

func (r *review) withoutPreparations(ctx context.Context) {
	var list []omission
	for _, name := range r.a.levels(byPreparation) {
		if name != "" {
			list = append(list, omission{"preparation " + name, func(_ int, p *Point) bool { return p.Preparation == name }})
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
			if p.LeftOut != "" || p.X <= 0 || p.Blocked {
				continue
			}
			k := key(di, p)
			if l, ok := lowest[k]; !ok || p.X < l {
				lowest[k] = p.X
			}
			highest[k] = math.Max(highest[k], p.X)
		}
	}
	r.sensitive(ctx, answer{id: "without-the-outermost", source: sensitivitySource}, []omission{
		{"the lowest ligand value", func(di int, p *Point) bool { return p.X > 0 && p.X == lowest[key(di, p)] }},
		{"the highest ligand value", func(di int, p *Point) bool { return p.X == highest[key(di, p)] }},
	})
}

// sensitive adds the answer: the omission that moves n_H most.
func (r *review) sensitive(ctx context.Context, a answer, omissions []omission) {
	var failed []string
	move, curve, what, ratio := 0.0, "", "", -1.0
	for _, o := range omissions {
		g := r.lead.refit(ctx, func(b *Analysis, _ *Candidate) {
			for di := range b.Data {
				b.Data[di].Points = slices.DeleteFunc(b.Data[di].Points, func(p Point) bool { return o.drop(di, &p) })
			}
		})
		if g.result == nil {
			failed = append(failed, o.what)
			continue
		}
		m, c := slopeMoves(r.lead, g)
		half := r.halfInterval("n_H_half", c)
		k := math.Abs(m) / half
		if math.IsNaN(k) {
			k = math.Abs(m)
		}
		if k > ratio {
			move, curve, what, ratio = m, c, o.what, k
		}
	}
	a.group = foundGood
	switch {
	case ratio < 0:
		a.group = sayInPaper
		a.text = "Without " + list(failed) + " there is no fit: what hangs on it cannot be asked."
		r.add(a)
		return
	case ratio > 1:
		a.group = sayInPaper
		a.text = fmt.Sprintf("Without %s n_H at half saturation%s moves by more than its interval.", what, atLabel(curve))
		a.remedy = "print the fit without it beside the fit with it"
		if ratio > 2 {
			a.group = settleFirst
		}
	default:
		a.text = fmt.Sprintf("Nothing hangs on %s: n_H at half saturation stays within its interval without it.", map[bool]string{true: "one preparation", false: "the outermost points"}[a.id == "without-a-preparation"])
	}
	a.effect = fmt.Sprintf("Most without %s: n_H moves by %s%s.", what, signed(move), atLabel(curve))
	if len(failed) > 0 {
		a.text += " There is no fit without " + list(failed) + "."
	}
	r.add(a)
}
