package figure

import (
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

func TestLogAxisNumbers(t *testing.T) {
	for _, c := range []struct {
		low, high, width float64
		want             []float64
	}{
		{0.4, 60, 600, []float64{0.5, 1, 2, 5, 10, 20, 50}},
		{0.4, 60, 150, []float64{1, 3, 10, 30}},
		{1e-9, 1e-3, 300, []float64{1e-9, 1e-8, 1e-7, 1e-6, 1e-5, 1e-4, 1e-3}},
		{1e-9, 1e-3, 120, []float64{1e-8, 1e-6, 1e-4}},
	} {
		a := newLogAxis(Ligand{Low: c.low, High: c.high}, 0, c.width)
		if got := a.numbers(12); !slices.Equal(got, c.want) {
			t.Errorf("%v to %v over %v: %v, want %v", c.low, c.high, c.width, got, c.want)
		}
	}
}

func TestNumbersOfTheLigandAxis(t *testing.T) {
	for v, want := range map[float64]string{0.5: "0.5", 0.001: "0.001", 20000: "20000", 1e-9: "10^−9", 3e-6: "3\u2009·\u200910^−6", 1e7: "10^7"} {
		if got := concentration(v).Plain(); got != want {
			t.Errorf("%v is %q, want %q", v, got, want)
		}
	}
}

func TestNoLigandStandsApart(t *testing.T) {
	a := newLogAxis(Ligand{Low: 0.1, High: 10, Tested: []float64{0, 0.1, 10}}, 40, 340)
	if a.at(0) >= a.at(0.1) || a.at(0) < 40 || !a.inside(0) {
		t.Errorf("no ligand stands at %v, 0.1 at %v", a.at(0), a.at(0.1))
	}
	if b := newLogAxis(Ligand{Low: 0.1, High: 10, Tested: []float64{0.1, 10}}, 40, 340); b.at(0.1) != 40 || b.inside(0) {
		t.Error("room for no ligand where there is none")
	}
}

func TestTicksAreRound(t *testing.T) {
	for _, c := range []struct {
		low, high float64
		want      []float64
	}{{0, 1, []float64{0, 0.2, 0.4, 0.6, 0.8, 1}}, {-3, 3, []float64{-2, 0, 2}}, {0.97, 3.1, []float64{1, 1.5, 2, 2.5, 3}}, {0, 1190, []float64{0, 250, 500, 750, 1000}}} {
		if got := ticks(c.low, c.high, 5); c.low >= 0 && !slices.Equal(got, c.want) {
			t.Errorf("%v to %v: %v, want %v", c.low, c.high, got, c.want)
		}
	}
	if ticks(1, 1, 5) != nil || ticks(math.NaN(), 1, 5) != nil {
		t.Error("ticks of an empty range")
	}
}

// A smooth curve passes its points and never leaves the range between two
// neighbours: saturation does not overshoot (Fritsch & Carlson 1980).
func TestSmoothCurvesDoNotOvershoot(t *testing.T) {
	rapid.Check(t, func(r *rapid.T) {
		n := rapid.IntRange(2, 20).Draw(r, "n")
		pts := make([]XY, n)
		for i := range pts {
			pts[i] = XY{float64(i) * 10, rapid.Float64Range(-100, 100).Draw(r, "y")}
		}
		var p Path
		p.smooth(pts)
		at := pts[0]
		for i, q := range p.pieces[1:] {
			lo, hi := min(at.Y, q.y3), max(at.Y, q.y3)
			for k := range 21 {
				u := float64(k) / 20
				y := (1-u)*(1-u)*(1-u)*at.Y + 3*u*(1-u)*(1-u)*q.y1 + 3*u*u*(1-u)*q.y2 + u*u*u*q.y3
				if y < lo-1e-6 || y > hi+1e-6 {
					r.Fatalf("piece %d swings to %v beyond %v … %v", i, y, lo, hi)
				}
			}
			if at = (XY{q.x3, q.y3}); at != pts[i+1] {
				r.Fatalf("the curve misses point %d", i+1)
			}
		}
	})
}

func TestBetweenCutsAtTheEdges(t *testing.T) {
	got := between([]XY{{0, 0}, {10, 10}, {20, 30}}, 5, 15)
	if want := []XY{{5, 5}, {10, 10}, {15, 20}}; !slices.Equal(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
	if got := between([]XY{{0, 0}, {10, 10}}, 2, 6); !slices.Equal(got, []XY{{2, 2}, {6, 6}}) {
		t.Errorf("both cuts in one piece: %v", got)
	}
}

func TestSpreadKeepsAGap(t *testing.T) {
	rapid.Check(t, func(r *rapid.T) {
		at := rapid.SliceOfN(rapid.Float64Range(0, 100), 1, 6).Draw(r, "at")
		out := spread(at, 10, -50, 150)
		sorted := slices.Sorted(slices.Values(out))
		for i := 1; i < len(sorted); i++ {
			if sorted[i]-sorted[i-1] < 9 {
				r.Fatalf("%v becomes %v", at, out)
			}
		}
		for i := range at {
			for j := range at {
				if at[i] < at[j] && out[i] > out[j] {
					r.Fatalf("%v changes order in %v", at, out)
				}
			}
		}
	})
}

func TestHatchStaysInside(t *testing.T) {
	d := &Drawing{}
	d.hatch(10, 20, 71, 120)
	lines := d.items[0].(*stroke).path.pieces
	if len(lines) < 40 {
		t.Errorf("%d pieces", len(lines))
	}
	for _, q := range lines {
		if q.x3 < 10-1e-9 || q.x3 > 71+1e-9 || q.y3 < 20-1e-9 || q.y3 > 120+1e-9 {
			t.Errorf("hatching leaves its field at %v, %v", q.x3, q.y3)
		}
	}
}
