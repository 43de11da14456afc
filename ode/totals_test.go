package ode

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// The sum of 1, 1e100, 1 and −1e100 is 2.
func TestDot(t *testing.T) {
	sum, size := dot([]float64{1, 1, 1, -1}, []float64{1, 1e100, 1, 1e100})
	if sum != 2 || size != 2e100 {
		t.Errorf("%g of %g", sum, size)
	}
}

// Projection restores the totals and moves each component by its weight squared.
func TestHoldTotals(t *testing.T) {
	p := point{
		y:  []float64{1.01, 2, 1e-12, 0.1, 0.2, 0.3},
		f:  make([]float64, 6),
		iw: []float64{1e6, 5e5, 1e18, 1, 1, 1},
	}
	o := Options{Totals: mat.NewDense(1, 3, []float64{1, 1, 1}), HoldTotals: true}
	var tot totals
	if err := tot.begin(&o, &p, 3, 1); err != nil {
		t.Fatal(err)
	}
	p.y[0], p.y[3] = 1, 0.4
	var drift float64
	if !tot.step(&p, &drift) {
		t.Fatal("not projected")
	}
	close1(t, "total", p.y[0]+p.y[1]+p.y[2], 3.01+1e-12, 1e-15)
	close1(t, "share of the first", p.y[0]-1, 0.01/5, 1e-13)
	close1(t, "share of the third", p.y[2], 1e-12, 1e-20)
	close1(t, "sensitivity", p.y[3]+p.y[4]+p.y[5], 0.6, 1e-15)
	close1(t, "drift", drift, 0.01/3, 1e-12)
}

// Totals that say the same twice cannot be held.
func TestHoldTwice(t *testing.T) {
	c := mat.NewDense(2, 2, []float64{1, 1, 1, 1})
	_, err := Solve(t.Context(), swap{}, []float64{1, 0}, []float64{0, 1},
		Options{Totals: c, HoldTotals: true})
	if f, ok := err.(*Failure); !ok || f.Reason != BadInput {
		t.Errorf("the error is %v", err)
	}
}

// swap is A ⇌ B with equal rates, from which A = ½ + (A₀−½)e^(−2t).
type swap struct{}

func (swap) Dim() int { return 2 }

func (swap) Derivs(dst []float64, _ float64, y []float64) error {
	dst[0], dst[1] = y[1]-y[0], y[0]-y[1]
	return nil
}

func TestHoldAlongTheWay(t *testing.T) {
	for _, m := range []Method{Radau, Explicit} {
		sol, err := Solve(t.Context(), swap{}, []float64{1, 0}, []float64{0, 1, 50},
			Options{Method: m, Rtol: 1e-8, Totals: mat.NewDense(1, 2, []float64{1, 1}), HoldTotals: true})
		if err != nil {
			t.Fatal(err)
		}
		close1(t, "state", sol.States[1][0], 0.5+0.5*math.Exp(-2), 1e-7)
		close1(t, "end", sol.States[2][0], 0.5, 1e-10)
	}
}
