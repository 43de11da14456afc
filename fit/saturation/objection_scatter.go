package saturation

import (
	"context"
	"fmt"
	"math"
)

const (
	evennessSource = "model the variance from replicates, do not weigh by the SD of two or three: Mannervik et al. 1986 Biochem J 235:797"
	chi2One99      = 6.635 // χ² of one degree of freedom, 99 %
)

// group is a set of measurements that differ by scatter alone.
type group struct {
	lnx, mean, variance, freedom float64
}

// replicateGroups gathers measurements of one curve, ligand value and
// preparation; where no preparation was measured twice, of all preparations.
func (r *review) replicateGroups(di int) []group {
	d := &r.a.Data[di]
	if list := groupsBy(d, func(p *Point) string { return p.Preparation }, r.a); freedom(list) >= 10 {
		return list
	}
	return groupsBy(d, func(*Point) string { return "" }, r.a)
}

func freedom(list []group) (nu float64) {
	for _, g := range list {
		nu += g.freedom
	}
	return nu
}

func groupsBy(d *Dataset, also func(*Point) string, a *Analysis) []group {
	type key struct {
		curve, also string
		x           float64
		blocked     bool
	}
	at := map[key]int{}
	var n []float64
	var list []group
	for i := range d.Points {
		p := &d.Points[i]
		if p.LeftOut != "" {
			continue
		}
		k := key{a.pointLabel(d, p), also(p), p.X, p.Blocked}
		g, ok := at[k]
		if !ok {
			g = len(list)
			at[k] = g
			list, n = append(list, group{lnx: math.Log(p.X)}), append(n, 0)
		}
		n[g]++ // Welford
		e := p.Y - list[g].mean
		list[g].mean += e / n[g]
		list[g].variance += e * (p.Y - list[g].mean)
	}
	var kept []group
	for g := range list {
		if n[g] > 1 {
			list[g].freedom = n[g] - 1
			list[g].variance /= n[g] - 1
			kept = append(kept, list[g])
		}
	}
	return kept
}

// twoLaws is the likelihood of replicate variances under σ² ∝ (1−λ)·a + λ·b:
// λ of greatest likelihood, and by how much −2 ln L rises from there to λ = 0
// and to λ = 1.
func twoLaws(list []group, a, b func(group) float64) (lambda, overFirst, overSecond float64) {
	cost := func(l float64) float64 {
		nu, ratio, lnG := 0.0, 0.0, 0.0
		for _, g := range list {
			g2 := (1-l)*a(g) + l*b(g)
			nu += g.freedom
			ratio += g.freedom * g.variance / g2
			lnG += g.freedom * math.Log(g2)
		}
		return nu*math.Log(ratio/nu) + lnG
	}
	const scan = 64
	best := 0
	for i := 1; i <= scan; i++ {
		if cost(float64(i)/scan) < cost(float64(best)/scan) {
			best = i
		}
	}
	lambda = goldenSection(cost, math.Max(0, float64(best-1)/scan), math.Min(1, float64(best+1)/scan))
	least := math.Min(cost(lambda), math.Min(cost(0), cost(1)))
	return lambda, cost(0) - least, cost(1) - least
}

// asksReplicates asks whether there are any.
func (r *review) asksReplicates(context.Context) {
	for di := range r.a.Data {
		if r.a.Data[di].Trace {
			continue
		}
		nu := freedom(r.replicateGroups(di))
		a := answer{id: "replicates", group: foundGood, source: fromPractice,
			text: fmt.Sprintf("%sReplicates measure the scatter (%.0f degrees of freedom).", r.where(di), nu)}
		switch {
		case nu == 0:
			a.group = sayInPaper
			a.text = r.where(di) + "There are no replicates: scatter is told from misfit by the mechanisms alone, and whether it is even cannot be asked."
			a.remedy = "repeat some of the points"
		case nu < 10:
			a.group = forCompleteness
			a.text = fmt.Sprintf("%sReplicates give the scatter only %.0f degrees of freedom: whether it is even can hardly be asked.", r.where(di), nu)
			a.remedy = "repeat some of the points"
		}
		r.add(a)
	}
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
	lambda, constant, proportional := twoLaws(list, func(group) float64 { return even + f*f }, func(g group) float64 { return g.mean*g.mean + f*f })
	a := answer{id: "uneven-scatter", group: foundGood, source: evennessSource}
	switch {
	case d.Noise == Mixed || d.Noise == Replicates || d.Noise == StudentT:
		a.text = fmt.Sprintf("%sThe scatter is modelled (noise: %s), not taken from single SDs.", r.where(di), d.Noise)
		r.add(a)
		return
	case d.Noise == Proportional && proportional > chi2One99:
		a.text = r.where(di) + "Replicates do not scatter in proportion to the response, as the study says"
	case (d.Noise == Constant || d.Noise == "") && constant > chi2One99:
		a.text = r.where(di) + "Replicates scatter more the larger the response, and the study says they scatter evenly"
	default:
		a.text = fmt.Sprintf("%sReplicates scatter as the study says (noise: %s).", r.where(di), noiseName(d.Noise))
		r.add(a)
		return
	}
	a.group = settleFirst
	a.text += fmt.Sprintf(" (share that rises with the response %s; likelihood ratio %s).", figures(lambda, 2), figures(math.Max(constant, proportional), 2))
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
		a.text = fmt.Sprintf("%sThe given standard deviations scatter by a factor of %s, as those of few replicates do: as weights they favour points that agree by chance.", r.where(di), figures(math.Exp(rest), 2))
		a.remedy = "give the single values, and noise: replicates"
	}
	r.add(a)
}

const ligandScatterSource = fromPractice + ": an error of the ligand value is one of the response, times the slope"

// asksLigandScatter asks whether points scatter more where the curve is steep,
// as they do when it is the ligand value that scatters: σ² ∝ 1 + (σ_x dy/d ln x)².
func (r *review) asksLigandScatter(context.Context) {
	for di := range r.a.Data {
		if !r.binds(di) {
			continue
		}
		for _, c := range r.readings(di) {
			if c.h < steepCurve {
				continue
			}
			r.ligandScatterOn(c)
			break
		}
	}
}

// steepCurve is the n_H above which ligand values are asked about.
const steepCurve = 1.5

func (r *review) ligandScatterOn(c *reading) {
	d := &r.a.Data[c.data]
	y, sd := r.predictions(c.data)
	high, _, _ := r.hills[c.data].end(c, highEnd, highSetting)
	low, _, _ := r.hills[c.data].end(c, lowEnd, lowSetting)
	span := high - low
	if r.hills[c.data].f.m.blocks[0].ends.span {
		span = high
	}
	var list []group
	for _, i := range c.points {
		l := c.lnFree(d, i)
		if math.IsNaN(y[i]) || math.IsInf(l, -1) {
			continue
		}
		s := c.at(l)
		slope := c.h * s * (1 - s) * span / sd[i]
		e := (d.Points[i].Y - y[i]) / sd[i]
		list = append(list, group{mean: slope, variance: e * e, freedom: 1})
	}
	if len(list) < 10 {
		r.add(answer{id: "ligand-scatter", group: forCompleteness, source: ligandScatterSource,
			text: fmt.Sprintf("%sWhether the ligand values scatter cannot be asked of %d points on a steep curve.", r.where(c.data), len(list))})
		return
	}
	top := 0.0
	for _, g := range list {
		top = math.Max(top, g.mean*g.mean)
	}
	lambda, over, _ := twoLaws(list, func(group) float64 { return 1 }, func(g group) float64 { return g.mean*g.mean/top + 1e-6 })
	a := answer{id: "ligand-scatter", group: foundGood, source: ligandScatterSource,
		text: fmt.Sprintf("%sPoints do not scatter more where the curve%s is steep: ligand values are good enough.", r.where(c.data), r.onCurve(c))}
	if over > chi2One99 {
		ratio := 0.0
		for _, g := range list {
			ratio += g.variance / ((1 - lambda) + lambda*(g.mean*g.mean/top+1e-6)) / float64(len(list))
		}
		sx := math.Sqrt(ratio * lambda / top)
		a.group = sayInPaper
		a.text = fmt.Sprintf("%sPoints scatter more where the curve%s is steep (likelihood ratio %s): the ligand values themselves scatter, by about %s.", r.where(c.data), r.onCurve(c), figures(over, 2), percent(sx))
		a.effect = fmt.Sprintf("Such scatter takes an n_H of %s to %s.", figures(c.h, 3), figures(flattened(c.h, sx), 3))
		a.remedy = "measure the ligand in every sample, or prepare samples from one series"
	}
	r.add(a)
}
