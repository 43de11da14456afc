package saturation

import (
	"context"
	"fmt"
	"math"
)

const (
	evennessSource = "model the variance from replicates, do not weigh by the SD of two or three: " +
		"Mannervik et al. 1986 Biochem J 235:797"
	chi2One99 = 6.635 // χ² of one degree of freedom, 99 %
)

// twoLaws is the likelihood of replicate variances under σ² ∝ (1−λ)·a + λ·b:
// λ of greatest likelihood, and by how much −2 ln L rises from there to λ = 0
// and to λ = 1.
func twoLaws(list []group, a, b func(group) float64) (lambda, overFirst, overSecond float64) {
	cost := func(l float64) float64 {
		return replicateCost(len(list), func(i int) (freedom, variance, square float64) {
			g := list[i]
			return g.freedom, g.variance, (1-l)*a(g) + l*b(g)
		})
	}
	lambda = leastShare(cost)
	least := math.Min(cost(lambda), math.Min(cost(0), cost(1)))
	return lambda, cost(0) - least, cost(1) - least
}

// asksEvenness asks whether the scatter model is that of the replicates.
func (r *review) asksEvenness(ctx context.Context) {
	for di := range r.a.Data {
		d := &r.a.Data[di]
		if d.Trace {
			continue
		}
		if d.Noise == GivenSigma {
			r.givenSigmas(di)
			continue
		}
		list := r.replicateGroups(di)
		if freedom(list) < 10 || len(list) < 5 {
			continue // said under replicates
		}
		r.evennessOf(ctx, di, list)
	}
}

func (r *review) evennessOf(ctx context.Context, di int, list []group) {
	d := &r.a.Data[di]
	top, even := 0.0, 0.0
	for _, g := range list {
		top = math.Max(top, math.Abs(g.mean))
		even += g.mean * g.mean / float64(len(list))
	}
	f := proportionalFloor * top
	lambda, constant, proportional := twoLaws(list, func(group) float64 { return even + f*f },
		func(g group) float64 { return g.mean*g.mean + f*f })
	a := answer{id: "uneven-scatter", group: foundGood, source: evennessSource}
	switch {
	case d.Noise == Mixed || d.Noise == Replicates || d.Noise == StudentT:
		a.text = fmt.Sprintf("%sThe scatter is modelled (noise: %s), not taken from single SDs.",
			r.where(di), d.Noise)
		r.add(a)
		return
	case d.Noise == Proportional && proportional > chi2One99:
		a.text = r.where(di) + "Replicates do not scatter in proportion to the response, as the study says"
	case (d.Noise == Constant || d.Noise == "") && constant > chi2One99:
		a.text = r.where(di) +
			"Replicates scatter more the larger the response, and the study says they scatter evenly"
	default:
		a.text = fmt.Sprintf("%sReplicates scatter as the study says (noise: %s).", r.where(di),
			noiseName(d.Noise))
		r.add(a)
		return
	}
	a.group = settleFirst
	a.text += fmt.Sprintf(" (share that rises with the response %s; likelihood ratio %s).",
		figures(lambda, 2), figures(math.Max(constant, proportional), 2))
	a.remedy = "noise: replicates   or   noise: mixed"
	a.effect = r.underNoise(ctx, di, Replicates)
	r.add(a)
}

func noiseName(n Noise) Noise {
	if n == "" {
		return Constant
	}
	return n
}

// underNoise is what n_H of a Hill fit becomes with another scatter model.
func (r *review) underNoise(ctx context.Context, di int, n Noise) string {
	f := r.hills[di].f
	if f == nil {
		return ""
	}
	g := f.refit(ctx, func(b *Analysis, _ *Candidate) { b.Data[0].Noise = n })
	if g.result == nil {
		return ""
	}
	return fmt.Sprintf("With it, by a Hill fit, %s.", moveBetween(f, g, nil).inWords())
}

// givenSigmas asks whether given standard deviations are those of two or three
// replicates: such scatter about any smooth law by √ψ′(ν/2)/2 in ln, 0.64 for
// three values, 0.40 for five, 0.25 for ten.
func (r *review) givenSigmas(di int) {
	d := &r.a.Data[di]
	y, _ := r.predictions(di)
	var lnS, level []float64
	for i := range d.Points {
		if p := &d.Points[i]; p.LeftOut == "" && p.Sigma > 0 && !math.IsNaN(y[i]) {
			lnS, level = append(lnS, math.Log(p.Sigma)), append(level, y[i])
		}
	}
	if len(lnS) < 6 {
		return
	}
	_, sd := meanAndSD(lnS)
	rest := sd * math.Sqrt(1-math.Pow(correlation(lnS, level), 2))
	a := answer{id: "uneven-scatter", group: foundGood, source: evennessSource,
		text: r.where(di) + "The given standard deviations follow the response smoothly."}
	if rest > 0.3 {
		a.group = sayInPaper
		a.text = fmt.Sprintf("%sThe given standard deviations scatter by a factor of %s, as those of "+
			"few replicates do: as weights they favour points that agree by chance.",
			r.where(di), figures(math.Exp(rest), 2))
		a.remedy = "give the single values, and noise: replicates"
	}
	r.add(a)
}
