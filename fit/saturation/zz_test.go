package saturation

import (
	"context"
	"testing"
)

func TestZZ(t *testing.T) {
	for _, tr := range truths(t) {
		ks := map[int][]int{2: {3}, 3: {8, 18}, 9: {1, 2}}[tr.number]
		for _, k := range ks {
			a := tr.study(t, k).withDefaults()
			out, err := a.Run(context.Background(), nil)
			if err != nil {
				t.Fatal(err)
			}
			for _, m := range out.Mechanisms {
				t.Log(tr.number, k, m.Name, m.Standing, m.Status, m.AICcBehind, m.LogLikelihood)
			}
			for _, q := range out.Quantities {
				if q.Name == "n_H_half_99" {
					t.Log(q.Mechanism, q.Value, q.Low, q.High, q.Held)
				}
			}
		}
	}
}
