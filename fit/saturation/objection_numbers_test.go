package saturation

import (
	"context"
	"fmt"
	"math"
	"strings"
	"testing"

	"ligancy/mechanisms"
)

// The figures of these tests were computed with general-purpose tools and stand
// in the project's reference values; what is read off here is what the
// objections print of studies without scatter.

// silent is plain with scatter far below what is printed.
func silent(y func(float64) float64) sketch {
	s := plain(y)
	s.scatter = 1e-7
	return s
}

// Ligand depletion: one site, r = sites/K.
func TestDepletionIsPrinted(t *testing.T) {
	for _, w := range []struct {
		r  float64
		nH string
	}{{0.1, "1.024"}, {1, "1.200"}, {10, "1.714"}, {100, "1.962"}} {
		a := silent(hyperbola).study(t)
		a.Data[0].SitesPresent = SitesPresent{Value: w.r, Unit: "nM"}
		o := objected(a.Objections(context.Background()), "ligand-depletion")
		want := fmt.Sprintf("K %.3f times too high and n_H %s.", 1+w.r/2, w.nH)
		if !strings.Contains(deref(o.Effect), want) {
			t.Errorf("r %g: %q, want %q", w.r, deref(o.Effect), want)
		}
		s := silent(depletedSite(w.r))
		s.low, s.high = -2, 4
		b := s.study(t)
		b.Data[0].SitesPresent, b.Data[0].Total = SitesPresent{Value: w.r, Unit: "nM"}, true
		o = objected(b.Objections(context.Background()), "ligand-depletion")
		if want = "1.000 against free and " + w.nH + " against total"; !strings.Contains(deref(o.Effect),
			want) {
			t.Errorf("r %g on a total axis: %q, want %q", w.r, deref(o.Effect), want)
		}
	}
}

// Too short an incubation: one site after m half-lives. EC50 of a Hill fit is
// not quite half saturation of this curve, so that m is read back from it to a
// few per cent at best, and below one half-life as too small; where k_off is
// given it is exact.
func TestIncubationIsPrinted(t *testing.T) {
	for _, w := range []struct {
		m         float64
		shift, nH string
	}{{0.25, "4.464", "1.347"}, {0.5, "2.485", "1.308"}, {1, "1.530", "1.235"}, {2, "1.119", "1.118"},
		{3, "1.030", "1.049"}, {5, "1.002", "1.006"}} {
		a := silent(func(x float64) float64 { return earlyShare(x, w.m*math.Ln2) }).study(t)
		kOff := 1e-3
		a.Data[0].Incubation = w.m * math.Ln2 / kOff * (1 + 1e-12)
		a.Candidates[0].Rates = map[string]Rate{"k_off": {Given: mechanisms.Given{Value: &kOff}, Order: 1}}
		o := objected(a.Objections(context.Background()), "incubation")
		if want := "EC50 " + w.shift + " K and n_H " + w.nH; !strings.Contains(deref(o.Effect), want) {
			t.Errorf("%g half-lives: %q, want %q", w.m, deref(o.Effect), want)
		}
		if (o.Group == foundGood) != (w.m >= 5) {
			t.Errorf("%g half-lives: %s", w.m, o.Group)
		}
		a.Candidates[0].Rates = map[string]Rate{"k_on": {Given: mechanisms.Given{Value: &kOff},
			Order: 2}} // K is 1
		r := &review{a: a.withDefaults(), hills: a.hillStudies(context.Background())}
		if m, _ := r.halfLives(0); w.m >= 1 && math.Abs(m/w.m-1) > 0.15 || w.m < 1 && m > w.m {
			t.Errorf("%g half-lives read back from EC50 as %g", w.m, m)
		}
	}
}

// Pooling: six curves of slope 3.9, eleven log-spaced points from 0.1 to 30 µM.
func TestPoolingIsPrinted(t *testing.T) {
	pEC50 := map[string]float64{"A": 6.20, "B": 6.06, "C": 5.92, "D": 5.78, "E": 5.64, "F": 5.50}
	s := sketch{y: func(float64) float64 { return 0 }, low: -1, high: math.Log10(30), levels: 11,
		replicates: 6,
		names:      []string{"A", "B", "C", "D", "E", "F"}}
	a := s.study(t)
	for i := range a.Data[0].Points {
		p := &a.Data[0].Points[i]
		p.Y = expit(3.9 * (math.Log(p.X) - math.Log(1e6) + pEC50[p.Preparation]*math.Ln10)) // X in µM
	}
	o := objected(a.Objections(context.Background()), "pooling")
	if o.Group != settleFirst || !strings.Contains(o.Text, "n_H 2.30") ||
		!strings.Contains(o.Text, "3.90 on average") || !strings.Contains(o.Text, "flattens") {
		t.Errorf("%s: %s", o.Group, o.Text)
	}
	if want := figures(flattened(3.9, 0.2619*math.Ln10), 3); !strings.Contains(deref(o.Effect),
		"to about "+want) {
		t.Errorf("%q, want the rough guide %s (SD of pEC50 0.2619)", deref(o.Effect), want)
	}
}

// Two classes tenfold apart hide behind a Hill curve of 0.803: misfit 0.0071.
func TestHiddenClassesArePrinted(t *testing.T) {
	a := plain(hyperbola).study(t)
	r := &review{a: a, hills: []*hillStudy{{readings: []reading{{curve: "all", h: 0.9, low: 0.80335,
		high: 1.05}}}}}
	r.asksOneClass(context.Background())
	o := r.list[0]
	if !strings.Contains(o.Text, "up to 10-fold") || !strings.Contains(o.Text, "rms misfit 0.0071") ||
		!strings.Contains(deref(o.Effect), "n_H 0.730") {
		t.Errorf("%s %s", o.Text, deref(o.Effect))
	}
}

// L and K_R: four sites, 16 points over three decades around half saturation.
func TestTiesArePrinted(t *testing.T) {
	for _, w := range []struct {
		l, c float64
		r    string
	}{{1e3, 0.01, "-0.9961"}, {1e4, 0.01, "-0.9989"}, {1e6, 1e-3, "-0.9999"}} {
		y := bindingOf(t, "mwc", four(), math.Log(w.l), math.Log(w.c), 0)
		c := build(t, "mwc", four()).Curve()
		c.Bind([]float64{math.Log(w.l), math.Log(w.c), 0}, env())
		half := mechanisms.XAt(c, 0.5).Value / math.Ln10
		s := sketch{y: y, low: half - 1.5, high: half + 1.5, levels: 16, replicates: 1, scatter: 1e-6,
			seed:       5,
			candidates: []Candidate{{Name: "concerted", Family: "mwc", Mechanism: build(t, "mwc", four())}}}
		o := objected(analysed(t, s.study(t)).Objections, "tied-constants")
		if !strings.Contains(o.Text, "(r = "+w.r+")") {
			t.Errorf("L %g, c %g: %s, want r = %s", w.l, w.c, o.Text, w.r)
		}
	}
}

// AICc: N = 8 and K = 4 adds 13.3.
func TestSmallSampleIsPrinted(t *testing.T) {
	s := plain(hillOf(1))
	s.levels, s.replicates = 8, 1
	s.response = Response{Kind: "velocity", High: Setting{Free: true}}
	a := s.study(t)
	o := objected(a.Objections(context.Background()), "few-points")
	if o.Group != sayInPaper || !strings.Contains(o.Text, "8 points for 4 numbers") ||
		!strings.Contains(o.Text, "adds 13.3") {
		t.Errorf("%s: %s", o.Group, o.Text)
	}
}

// A Hill curve of 0.7 has an SD of ln K of 1.850 (Sips 1948).
func TestSpreadIsPrinted(t *testing.T) {
	for _, w := range [][2]string{{"0.9", "0.878"}, {"0.8", "1.36"}, {"0.7", "1.85"}, {"0.5", "3.14"}} {
		var h float64
		fmt.Sscan(w[0], &h)
		s := silent(hillOf(h))
		s.low, s.high = -3, 3
		o := objected(s.study(t).Objections(context.Background()), "shallow")
		if !strings.Contains(deref(o.Effect), "SD of ln K of "+w[1]) {
			t.Errorf("h %s: %s, want %s", w[0], deref(o.Effect), w[1])
		}
	}
}

// Four sites mimicked by three: with L 1e6 and c 1e-3 three sites miss by
// 1.6 % of saturation, in ordinary sets three or five by 0.5 to 0.7 %.
func TestSitesMimicked(t *testing.T) {
	y := bindingOf(t, "mwc", four(), math.Log(1e6), math.Log(1e-3), 0)
	c := build(t, "mwc", four()).Curve()
	c.Bind([]float64{math.Log(1e6), math.Log(1e-3), 0}, env())
	half := mechanisms.XAt(c, 0.5).Value / math.Ln10
	s := sketch{y: y, low: half - 1.5, high: half + 1.5, levels: 16, replicates: 1, scatter: 1e-7, seed: 5,
		candidates: []Candidate{{Name: "three", Family: "mwc",
			Mechanism: build(t, "mwc", mechanisms.Definition{Sites: 3})}}}
	out := analysed(t, s.study(t))
	if rms := math.Sqrt(float64(out.Mechanisms[0].SumOfSquares) / 16); math.Abs(rms-0.016) > 0.0015 {
		t.Errorf("three sites miss four by %.4f rms, want 0.016", rms)
	}
}
