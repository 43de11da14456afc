package saturation

import (
	"context"
	"fmt"
)

const pointsSource = "AICc is undefined at N ≤ K + 1, K counting σ: Hurvich & Tsai 1989 Biometrika " +
	"76:297, from memory"

// smallSample is the correction of AICc, 2K(K+1)/(N−K−1).
func smallSample(n, k int) float64 { return 2 * float64(k) * float64(k+1) / float64(n-k-1) }

// asksPoints asks whether there are points enough to compare mechanisms by AICc.
func (r *review) asksPoints(context.Context) {
	a := answer{id: "few-points", group: foundGood, source: pointsSource}
	worst := 0.0
	for i := range r.a.Candidates {
		c := &r.a.Candidates[i]
		n, k, ok := r.counts(i)
		if !ok {
			continue
		}
		if n <= k+1 {
			a.group, a.remedy = settleFirst, "measure more points, or leave this mechanism out"
			a.text = fmt.Sprintf("%d points for %d numbers of %s, σ counted: AICc does not exist.", n, k,
				quoted(c.Name))
			r.add(a)
			return
		}
		if s := smallSample(n, k); s > worst {
			worst = s
			a.text = fmt.Sprintf("%d points for %d numbers of %s, σ counted: AICc adds %s for it.", n, k,
				quoted(c.Name), figures(s, 3))
		}
	}
	if worst > r.limits.Correction {
		a.group, a.remedy = sayInPaper, "measure more points: this mechanism cannot win"
	}
	if a.text != "" {
		r.add(a)
	}
}

// counts is N and K of a candidate: from its fit, or by laying it out.
func (r *review) counts(i int) (n, k int, ok bool) {
	var m *model
	if r.fits != nil {
		m = r.fits[i].m
	} else {
		m, _ = newModel(r.a, &r.a.Candidates[i])
	}
	if m == nil || m.points() == 0 || len(m.blocks) == 0 || len(m.blocks[0].pts) == 0 {
		return 0, 0, false
	}
	k = m.free()
	for di := range r.a.Data {
		if r.a.Data[di].Noise != GivenSigma {
			k++
		}
	}
	if m.shift != nil {
		k++
	}
	return m.points(), k, true
}
