package saturation

import (
	"context"
	"testing"
)

// A study of one 72-point table with five mechanisms, 50 starts each and
// profile intervals for everything, the deciding bootstrap included.
func BenchmarkFiveMechanisms(b *testing.B) {
	a := clamStudy(b)
	a.Candidates = a.Candidates[:5]
	for b.Loop() {
		if _, err := a.Run(context.Background(), nil); err != nil {
			b.Fatal(err)
		}
	}
}
