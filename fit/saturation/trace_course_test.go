package saturation

import (
	"context"
	"math"
	"strings"
	"testing"

	"ligancy/mechanisms"
)

func built(t testing.TB, family string, d mechanisms.Definition) mechanisms.Mechanism {
	t.Helper()
	f, _ := mechanisms.Lookup(family)
	m, err := f.Build(d)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

func givenAs(v float64) mechanisms.Given { return mechanisms.Given{Value: &v} }

// courseStudy is one site and an interacting pair with their constants, in nM.
func courseStudy(t testing.TB) *Analysis {
	one := []mechanisms.Count{{Name: "only", Sites: 1}}
	return &Analysis{Ligand: Substance{Name: "octopamine", Unit: "nM"}, Kelvin: math.NaN(),
		Course: &CourseRequest{Phases: []Phase{{Add: 10, Seconds: 600}, {Dilute: 100, Seconds: 600}}, Points: 5},
		Candidates: []Candidate{
			{Name: "one", Family: "independent", Mechanism: built(t, "independent", mechanisms.Definition{Classes: one}),
				Given: map[string]mechanisms.Given{"Kd": givenAs(3)}, Rates: map[string]Rate{"k_on": rateOf(1e-3, 2)}},
			{Name: "pair", Family: "adair", Mechanism: built(t, "adair", mechanisms.Definition{Sites: 2, SiteScale: true}),
				Given: map[string]mechanisms.Given{"Kd1": givenAs(1), "Kd2": givenAs(20)}, Rates: map[string]Rate{"k_on": rateOf(1e-3, 2)}}}}
}

// The rows of one site are its closed forms.
func TestFollowOneSite(t *testing.T) {
	a := courseStudy(t)
	a.Data = []Dataset{{Name: "curve", Incubation: math.Ln2 / 3e-3}}
	out, err := a.Follow(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	const kOff, kOn = 3e-3, 1e-3
	rows := 0
	for _, r := range out.Course {
		if r.Mechanism != "one" {
			continue
		}
		rows++
		s, k := float64(r.Seconds), kOn*10+kOff
		want := 10. / 13 * -math.Expm1(-s*k)
		if r.Phase == 2 {
			k = kOn*0.1 + kOff
			rest := 0.1 / 3.1
			want = rest + (10./13*-math.Expm1(-600*(kOn*10+kOff))-rest)*math.Exp(-(s-600)*k)
		}
		if math.Abs(float64(r.Saturation)-want) > 1e-12 || math.Abs(float64(r.Free)-map[int]float64{1: 10, 2: 0.1}[r.Phase]) > 1e-15 {
			t.Errorf("at %g s: saturation %g, not %g; free %g", s, r.Saturation, want, r.Free)
		}
	}
	if rows != 9 {
		t.Errorf("%d times, not 9", rows)
	}
	for _, r := range out.Relaxations {
		if tau := 1 / (kOn*float64(r.X) + kOff); r.Mechanism == "one" &&
			(math.Abs(float64(r.Slowest)/tau-1) > 1e-12 || math.Abs(float64(r.Wait99)/tau/math.Log(100)-1) > 1e-8) {
			t.Errorf("at %g: relaxation %g, wait %g", r.X, r.Slowest, r.Wait99)
		}
	}
	// One half-life of dissociation: 1.530 and 1.235, computed from the closed form for
	// the project's notes on practice.
	if r := out.Readings[0]; math.Abs(float64(r.XHalf)/3-1.530) > 5e-4 || math.Abs(float64(r.NH)-1.235) > 5e-4 {
		t.Errorf("read after one half-life: %g K, n_H %g", r.XHalf/3, r.NH)
	}
}

// Unlabelled ligand speeds the loss of label from a pair with negative cooperativity,
// and hardly from a single site (De Meyts, Bianco & Roth 1976, J. Biol. Chem. 251:1877,
// the experiment; from memory).
func TestPartings(t *testing.T) {
	a := courseStudy(t)
	out, err := a.Follow(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	if len(out.Partings) != 2 || out.Partings[0].Does != "dilute" || out.Partings[1].Does != "dilute and block" {
		t.Fatalf("partings: %+v", out.Partings)
	}
	if r := out.Partings[0]; r.Why == nil || !math.IsNaN(float64(r.InScatters)) {
		t.Errorf("without a fit, in scatters: %+v", r)
	}
	if all := strings.Join(out.Cautions, " "); !strings.Contains(all, "binds again") {
		t.Errorf("no caution about rebinding: %q", all)
	}
}

// Where constants are fitted, partings are in units of the scatter.
func TestPartingsOfFits(t *testing.T) {
	a := courseStudy(t)
	d := Dataset{Name: "curve", Incubation: math.NaN(), Noise: Constant, Response: Response{Kind: "saturation", High: Setting{Value: 1}}}
	for i, y := range []float64{0.12, 0.27, 0.49, 0.75, 0.91, 0.96} {
		d.Points = append(d.Points, Point{X: 0.3 * math.Pow(3, float64(i)), Y: y, Row: i + 2})
	}
	a.Data = []Dataset{d}
	for i := range a.Candidates {
		a.Candidates[i].Given = nil
	}
	a.Settings.Starts = 5
	out, err := a.Follow(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range out.Partings {
		if !(r.InScatters > 0) || r.Why != nil {
			t.Errorf("%+v", r)
		}
	}
	if s := out.Mechanisms[0].Status; s != "converged" {
		t.Errorf("status %q", s)
	}
}

// What cannot be followed is left out, and said.
func TestFollowComplains(t *testing.T) {
	for words, change := range map[string]func(*Analysis){
		"has no rates":              func(a *Analysis) { a.Candidates[0].Rates = nil },
		"has no value for Kd":       func(a *Analysis) { a.Candidates[0].Given = nil },
		"has no partner":            func(a *Analysis) { a.Candidates[0].Rates["exchange"] = rateOf(1, 1) },
		"has no value for the rate": func(a *Analysis) { a.Candidates[0].Rates["k_on"] = Rate{} },
		"phase 2, from 600 s":       func(a *Analysis) { a.Course.Phases[1].Seconds = 0 },
	} {
		a := courseStudy(t)
		change(a)
		if _, err := a.Follow(context.Background(), nil); err == nil || !strings.Contains(err.Error(), words) {
			t.Errorf("the complaint is %v, without %q", err, words)
		}
	}
}

// A total axis whose sites are no concentration of the ligand's is said to be held.
func TestCourseSaysThatLigandIsHeld(t *testing.T) {
	a := courseStudy(t)
	a.Data = []Dataset{{Name: "curve", Total: true, SitesPresent: SitesPresent{FromBmax: 2}, Incubation: math.NaN()}}
	out, err := a.Follow(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	if all := strings.Join(out.Cautions, " "); !strings.Contains(all, "taken as not used up") {
		t.Errorf("no caution: %q", all)
	}
	a.Data[0].SitesPresent = SitesPresent{Value: 5, Unit: "nM"}
	if out, err = a.Follow(context.Background(), nil); err != nil {
		t.Fatal(err)
	}
	for _, r := range out.Course {
		if r.Phase == 1 && math.Abs(float64(r.Free)+5*float64(r.Saturation)-10) > 1e-6 {
			t.Errorf("at %g s ligand is lost: %g free, %g bound", r.Seconds, r.Free, 5*r.Saturation)
		}
	}
}
