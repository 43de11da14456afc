package kinetics_test

import (
	"fmt"
	"math"
	"testing"
)

// One site after m half-lives of dissociation: half saturation in units of K, and
// the Hill coefficient there, to the places of the table. Source: computed from the
// closed form z/(1+z)·(1 − e^(−(1+z)τ)), τ = m ln 2, for the project's notes on
// practice, by other means than this package.
func TestReadTooEarly(t *testing.T) {
	b := bound(t, build(t, site), []float64{3e-9}, []float64{1e6})
	halfLife := math.Ln2 / (3e-9 * 1e6)
	for _, row := range [][3]float64{{0.25, 4.464, 1.347}, {0.5, 2.485, 1.308}, {1, 1.530, 1.235}, {2, 1.119, 1.118}, {3, 1.030, 1.049}, {5, 1.002, 1.006}} {
		r, err := b.ReadAt(row[0] * halfLife)
		if err != nil {
			t.Fatal(err)
		}
		near(t, fmt.Sprintf("EC50/K after %g half-lives", row[0]), r.XHalf/3e-9, row[1], 5e-4)
		near(t, fmt.Sprintf("n_H after %g half-lives", row[0]), r.NH, row[2], 5e-4)
		near(t, "EC50 at rest", r.AtRestXHalf/3e-9, 1, 1e-13)
		near(t, "n_H at rest", r.AtRestNH, 1, 1e-12)
	}
	// m → 0: n_H → 2 ln 2 (same source).
	if r, err := b.ReadAt(1e-6 * halfLife); err != nil || math.Abs(r.NH-2*math.Ln2) > 1e-5 {
		t.Errorf("very early, n_H is %g: %v", r.NH, err)
	}
}

// One site is within 1 % of rest after ln 100 relaxation times.
func TestWaitOfOneSite(t *testing.T) {
	b := bound(t, build(t, site), []float64{2}, []float64{0.5})
	for _, x := range []float64{1e-3, 1, 2, 50} {
		got, err := b.Wait(x, 0.01)
		if err != nil {
			t.Fatal(err)
		}
		near(t, fmt.Sprintf("wait at %g", x), got*(0.5*x+1), math.Log(100), 1e-8)
	}
}

// The slope of a tetramer read at once is no less than that at rest, and one read
// late is that at rest.
func TestReadTetramer(t *testing.T) {
	b := bound(t, build(t, tetramer), []float64{1000, 0.01, 1}, []float64{10, 100})
	late, err := b.ReadAt(1e6)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "late n_H", late.NH, late.AtRestNH, 1e-10)
	early, err := b.ReadAt(1e-3)
	if err != nil {
		t.Fatal(err)
	}
	if early.XHalf <= late.XHalf {
		t.Errorf("read early, half saturation is at %g, not above %g", early.XHalf, late.XHalf)
	}
}
