package saturation

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"runtime"
	"strings"
	"testing"

	"ligancy/fit"
	"ligancy/mechanisms"
)

// coverageTruth is a mechanism from which studies are simulated: 24 ligand
// values, three readings each, scatter 0.01.
type coverageTruth struct {
	name, family string
	constants    map[string]float64 // as results quote them; +Inf and 0 do not exist
	low, high    float64            // ligand
	edge         string             // the constant whose truth lies on its edge
}

var coverageTruths = []coverageTruth{
	{"MWC, L 1e4, c 0.01", "mwc", map[string]float64{"L": 1e4, "c": 0.01, "K_R": 1}, 0.1, 1000, ""},
	{"MWC, L 1e6, c 1e-3", "mwc", map[string]float64{"L": 1e6, "c": 1e-3, "K_R": 1}, 0.1, 1000, ""},
	{"MWC, L 1e4, c 1e-4", "mwc", map[string]float64{"L": 1e4, "c": 1e-4, "K_R": 1}, 0.1, 1000, ""},
	{"Adair 60, 30, 6.6, 0.66", "adair", map[string]float64{"Kd1": 60, "Kd2": 30, "Kd3": 6.6, "Kd4": 0.66}, 0.1, 1000, ""},
	{"Adair, equal", "adair", map[string]float64{"Kd1": 10, "Kd2": 10, "Kd3": 10, "Kd4": 10}, 0.1, 1000, ""},
	{"Adair, rising", "adair", map[string]float64{"Kd1": 1, "Kd2": 3, "Kd3": 10, "Kd4": 30}, 0.1, 1000, ""},
	{"Adair, β3 zero", "adair", map[string]float64{"Kd1": 60, "Kd2": 30, "Kd3": math.Inf(1), "Kd4": 0}, 0.1, 1000, "Kd3"},
	{"Hill, n_H 2.8", "hill", map[string]float64{"K_half": 1, "n_H": 2.8}, 0.01, 100, ""},
	{"Hill, n_H 0.7", "hill", map[string]float64{"K_half": 1, "n_H": 0.7}, 0.01, 100, ""},
}

// theta is the truth on the fitted scales.
func (c *coverageTruth) theta(m mechanisms.Mechanism) []float64 {
	if c.family == "adair" {
		k := c.constants
		b1 := 4 / k["Kd1"]
		b2 := b1 * 1.5 / k["Kd2"]
		b4 := b2 * (2.0 / 3 / 6.6) / 4 / 0.66
		b3 := 0.0
		if !math.IsInf(k["Kd3"], 1) {
			b3 = b2 * (2.0 / 3) / k["Kd3"]
			b4 = b3 / 4 / k["Kd4"]
		}
		return []float64{b1, b2, b3, b4}
	}
	var theta []float64
	for _, k := range m.Constants() {
		theta = append(theta, scaled(k, c.constants[k.Name]))
	}
	return theta
}

// covered counts, for every number, the studies whose interval holds the truth.
type covered struct {
	held, open map[string]int
	studies    int
	failed     int
}

// simulateCoverage runs the studies side by side.
func simulateCoverage(t testing.TB, c *coverageTruth, studies int) covered {
	def := mechanisms.Definition{}
	if c.family != "hill" {
		def.Sites = 4
	}
	mech := build(t, c.family, def)
	theta := c.theta(mech)
	curve := mech.Curve()
	curve.Bind(theta, mechanisms.Environment{})
	truth := map[string]float64{"n_H_half": mechanisms.HillAtHalf(curve).Value}
	for k, v := range c.constants {
		truth[k] = v
	}
	lnx := make([]float64, 24)
	for i := range lnx {
		lnx[i] = math.Log(c.low) + math.Log(c.high/c.low)*float64(i)/23
	}
	y := make([]float64, len(lnx))
	curve.Saturation(y, lnx, nil)
	type result map[string][2]bool
	results := make([]result, studies)
	pool := &Analysis{Settings: Settings{Workers: runtime.GOMAXPROCS(0)}}
	pool.sideBySide(studies, func() worker {
		return worker{better: func() []float64 { return nil }, do: func(k int) {
			results[k] = oneCoverage(c, mech, truth, lnx, y, uint64(k))
		}}
	})
	out := covered{held: map[string]int{}, open: map[string]int{}, studies: studies}
	for _, r := range results {
		if r == nil {
			out.failed++
			continue
		}
		for name, v := range r {
			if v[0] {
				out.held[name]++
			}
			if v[1] {
				out.open[name]++
			}
		}
	}
	return out
}

// oneCoverage simulates and fits one study: for every number, whether its
// interval holds the truth, and whether it lacks an upper end.
func oneCoverage(c *coverageTruth, mech mechanisms.Mechanism, truth map[string]float64, lnx, y []float64, seed uint64) map[string][2]bool {
	rng := rand.New(rand.NewPCG(seed, 77))
	d := Dataset{Name: "one", Noise: Constant, Response: Response{Kind: "saturation", High: Setting{Value: 1}}}
	for i, l := range lnx {
		for range 3 {
			d.Points = append(d.Points, Point{X: math.Exp(l), Y: y[i] + 0.01*rng.NormFloat64()})
		}
	}
	a := &Analysis{Kelvin: math.NaN(), Data: []Dataset{d}, Settings: Settings{Level: 0.95, Method: "profile", Workers: 1, Seed: 1},
		Candidates: []Candidate{{Name: "truth", Family: c.family, Mechanism: mech}}}
	f := a.fitCandidate(context.Background(), &a.Candidates[0], fit.Settings{Starts: 12, Seed: 1, Workers: 1})
	if !f.answered() {
		return nil
	}
	out := map[string][2]bool{}
	pr := f.profiler(0.95)
	for _, w := range f.wantedRows() {
		want, ok := truth[w.row.Name]
		if !ok || w.row.Of != "constant" && w.row.Name != "n_H_half" {
			continue
		}
		q := f.withInterval(context.Background(), w, pr)
		low, high := float64(q.Low), float64(q.High)
		lowOpen, highOpen := math.IsNaN(low), math.IsNaN(high)
		holds := (lowOpen || low <= want*(1+1e-12)) && (highOpen || want*(1-1e-12) <= high)
		out[w.row.Name] = [2]bool{holds, highOpen}
	}
	return out
}

// TestCoverage prints what 95 % profile intervals cover. With
// LIGANCY_COVERAGE=2000 it is the full run (minutes); in the ordinary tests a
// few studies show that it works.
func TestCoverage(t *testing.T) {
	studies, full := 60, os.Getenv("LIGANCY_COVERAGE") != ""
	if full {
		if _, err := fmt.Sscan(os.Getenv("LIGANCY_COVERAGE"), &studies); err != nil {
			t.Fatal(err)
		}
	}
	for i := range coverageTruths {
		c := &coverageTruths[i]
		if !full && i%4 != 0 {
			continue
		}
		out := simulateCoverage(t, c, studies)
		var line []string
		for _, name := range []string{"L", "c", "K_R", "Kd1", "Kd2", "Kd3", "Kd4", "K_half", "n_H", "n_H_half"} {
			if _, ok := c.constants[name]; !ok && name != "n_H_half" || name == "n_H_half" && c.family == "hill" {
				continue
			}
			share := float64(out.held[name]) / float64(out.studies-out.failed)
			line = append(line, fmt.Sprintf("%s %.1f (%.0f without an upper end)", name, 100*share, 100*float64(out.open[name])/float64(out.studies)))
			if !full && share < 0.8 {
				t.Errorf("%s: %s is covered in %.0f %% of %d studies", c.name, name, 100*share, studies)
			}
		}
		t.Logf("%-24s %d studies, %d without an answer: %s", c.name, out.studies, out.failed, strings.Join(line, ", "))
	}
}
