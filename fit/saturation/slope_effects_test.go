package saturation

import (
	"math"
	"testing"
)

// Figures of the tables below: computed with general-purpose tools
// (reference values of the project, three to four digits).

func TestDepletedMidpoint(t *testing.T) {
	for _, w := range [][2]float64{{0.1, 1.024}, {1, 1.200}, {10, 1.714}, {100, 1.962}} {
		if shift, n := depleted(w[0], 1); math.Abs(n-w[1]) > 6e-4 || shift != 1+w[0]/2 {
			t.Errorf("r %g: n_H %.5f, want %.3f; shift %g", w[0], n, w[1], shift)
		}
	}
}

func TestEarlyReading(t *testing.T) {
	for _, w := range [][3]float64{{0.25, 4.464, 1.347}, {0.5, 2.485, 1.308}, {1, 1.530, 1.235},
		{2, 1.119, 1.118}, {3, 1.030, 1.049}, {5, 1.002, 1.006}} {
		shift, n := early(w[0])
		if math.Abs(shift-w[1]) > 6e-4 || math.Abs(n-w[2]) > 6e-4 {
			t.Errorf("%g half-lives: %.4f, %.4f, want %.3f, %.3f", w[0], shift, n, w[1], w[2])
		}
		if m := halfLivesStood(w[0] * math.Ln2 * shift); math.Abs(m/w[0]-1) > 1e-9 {
			t.Errorf("%g half-lives read back as %g", w[0], m)
		}
	}
	if _, n := early(1e-6); math.Abs(n-2*math.Ln2) > 1e-5 {
		t.Errorf("limit of short times %.6f, want 2 ln 2", n)
	}
	if halfLivesStood(0.6) != 0 {
		t.Error("below ln 2 nothing has come to rest")
	}
}

func TestTwoClasses(t *testing.T) {
	for _, w := range [][3]float64{{2, 0.971, 0.977}, {4, 0.889, 0.916}, {10, 0.730, 0.803},
		{30, 0.522, 0.664}, {100, 0.331, 0.534}} {
		h, rms := twoClassFit(w[0])
		t.Logf("%g %.4f %.4f %.5f", w[0], twoClassHalf(w[0]), h, rms)
		if math.Abs(twoClassHalf(w[0])-w[1]) > 6e-4 || math.Abs(h-w[2]) > 6e-4 {
			t.Errorf("ratio %g: %.4f, %.4f, want %.3f, %.3f", w[0], twoClassHalf(w[0]), h, w[1], w[2])
		}
		if w[0] == 10 && math.Abs(rms-0.0071) > 6e-5 {
			t.Errorf("misfit at 10: %.5f, want 0.0071", rms)
		}
		if rho := hiddenRatio(h); math.Abs(rho/w[0]-1) > 1e-6 {
			t.Errorf("ratio %g read back as %g", w[0], rho)
		}
	}
}

func TestSipsSpread(t *testing.T) {
	for _, w := range [][2]float64{{0.9, 0.878}, {0.8, 1.360}, {0.7, 1.850}, {0.5, math.Pi}} {
		if s := sipsSpread(w[0]); math.Abs(s-w[1]) > 6e-4 {
			t.Errorf("h %g: %.4f, want %.3f", w[0], s, w[1])
		}
	}
}

// Substrate used up: the implicit product equation solved by bisection and its
// slope by differences.
func TestConsumed(t *testing.T) {
	for _, tau := range []float64{0, 0.1, 1, 5} {
		shift, n := consumed(tau)
		y := func(lnS float64) float64 { // p/τ
			s := math.Exp(lnS)
			low, high := 0.0, math.Min(s, tau)
			for range 200 {
				p := (low + high) / 2
				if p-math.Log1p(-p/s) < tau {
					low = p
				} else {
					high = p
				}
			}
			return (low + high) / 2 / tau
		}
		if tau == 0 {
			if shift != 1 || n != 1 {
				t.Error("nothing used, nothing changed")
			}
			continue
		}
		u, d := math.Log(shift), 1e-4
		logit := func(y float64) float64 { return math.Log(y / (1 - y)) }
		slope := (logit(y(u+d)) - logit(y(u-d))) / (2 * d)
		if math.Abs(y(u)-0.5) > 1e-9 || math.Abs(slope-n) > 1e-5 {
			t.Errorf("τ %g: y %.6f, n_H %.6f, differences %.6f", tau, y(u), n, slope)
		}
	}
}
