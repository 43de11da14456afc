package fit_test

import (
	"context"
	"testing"

	"ligancy/fit"
)

func benchRefit(b *testing.B, p *fit.Problem) {
	r := solve(b, p, fit.Settings{})
	rep, err := fit.Parametric(p, r, 1)
	if err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for range b.N {
		d, err := fit.Refit(context.Background(), p, [][]float64{r.Theta}, rep, fit.RefitSettings{Draws: 1000, Workers: 1})
		if err != nil {
			b.Fatal(err)
		}
		n := 0
		for _, s := range d.Status {
			if s == fit.Stopped || s == fit.NoAnswer {
				n++
			}
		}
		b.ReportMetric(float64(n), "failed")
	}
}

func BenchmarkRefitHill4(b *testing.B)  { benchRefit(b, hill4(b, true)) }
func BenchmarkRefitAdair4(b *testing.B) { benchRefit(b, adair4(b)) }
func BenchmarkRefitGlobal(b *testing.B) { benchRefit(b, global(b)) }
