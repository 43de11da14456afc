package kinetics_test

import (
	"context"
	"math"
	"testing"

	"ligancy/mechanisms/kinetics"
)

// benchmarkTrace follows one trace of 200 points of the tetramer network with its
// gradient by three constants and two rates.
func benchmarkTrace(b *testing.B, sites float64, time func(i int) float64) {
	m := bound(b, build(b, tetramer), []float64{200, 0.02, 1.5}, []float64{5, 2})
	var times []float64
	for i := range 200 {
		times = append(times, time(i+1))
	}
	p := &kinetics.Program{Sites: sites, Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: 4, Seconds: times[199]}}}
	b.ReportAllocs()
	for b.Loop() {
		if _, err := m.Run(context.Background(), p, times, true); err != nil {
			b.Fatal(err)
		}
	}
}

func evenly(i int) float64 { return 0.02 * float64(i) }
func spread(i int) float64 { return 4e-4 * math.Pow(1e4, float64(i)/200) }

func BenchmarkTraceEvenTimes(b *testing.B)   { benchmarkTrace(b, 0, evenly) }
func BenchmarkTraceSpreadTimes(b *testing.B) { benchmarkTrace(b, 0, spread) }
func BenchmarkTraceUsedUp(b *testing.B)      { benchmarkTrace(b, 1, evenly) }
