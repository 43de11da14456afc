package fit_test

import (
	"context"
	"testing"

	"ligancy/fit"
)

func TestProfileHill4(t *testing.T) {
	p := hill4(t, true)
	r := solve(t, p, fit.Settings{})
	f, err := fit.NewProfiler(p, r, 0.95)
	if err != nil {
		t.Fatal(err)
	}
	for j := range p.Parameters {
		iv := f.Parameter(context.Background(), j)
		t.Logf("%+v", iv)
	}
}

func BenchmarkProfileHill4(b *testing.B) {
	p := hill4(b, true)
	r := solve(b, p, fit.Settings{})
	b.ReportAllocs()
	for range b.N {
		f, _ := fit.NewProfiler(p, r, 0.95)
		for j := range p.Parameters {
			f.Parameter(context.Background(), j)
		}
	}
}
