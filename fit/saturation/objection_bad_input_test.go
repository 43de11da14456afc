package saturation

import (
	"context"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"ligancy/mechanisms"
)

// Six points, one preparation, no replicates and no conditions: what cannot be
// asked is said, with the reason.
func TestPoorStudiesAreToldWhatCannotBeAsked(t *testing.T) {
	s := plain(bindingOf(t, "mwc", four(), math.Log(1e4), math.Log(0.01), 0))
	s.levels, s.replicates, s.names, s.scatter, s.low = 6, 1, []string{"A"}, 0.1, -0.5 // truth 12
	s.candidates = []Candidate{
		{Name: "concerted", Family: "mwc", Mechanism: build(t, "mwc", four())},
		{Name: "stepwise", Family: "adair", Mechanism: build(t, "adair", four())},
		{Name: "Hill equation", Family: "hill", Mechanism: build(t, "hill", mechanisms.Definition{})},
	}
	a := s.study(t)
	a.Kelvin = math.NaN()
	for name, list := range map[string][]Objection{"check": a.Objections(context.Background()),
		"fit": analysed(t, a).Objections} {
		for id, why := range map[string]string{
			"replicates":         "cannot be asked",
			"preparations":       "technical",
			"incubation-unknown": "cannot be judged",
			"conditions":         "still lacks: macromolecule",
			"temperature":        "not stated",
			"concentrations":     "Only six ligand values",
			"few-points":         "AICc",
			"dissociation":       "cannot be judged",
			"ligand-scatter":     "cannot be asked",
			"hidden-classes":     "",
			"n_H-above-sites":    "",
		} {
			o := objected(list, id)
			if why == "" {
				continue
			}
			if o.Group == foundGood || !strings.Contains(o.Text, why) {
				t.Errorf("%s, %s: %s | %s, want %q", name, id, o.Group, o.Text, why)
			}
		}
	}
}

// Every objection has a group that is known, a text that ends, and no number
// that is none; groups follow one another.
func soundObjections(t interface{ Errorf(string, ...any) }, list []Objection) {
	last := 0
	for _, o := range list {
		n, ok := groupOrder[o.Group]
		if !ok || n < last || o.ID == "" || !strings.HasSuffix(o.Text, ".") || o.Source == nil {
			t.Errorf("not sound: %+v", o)
		}
		last = n
		for _, s := range []string{o.Text, deref(o.Effect), deref(o.Remedy)} {
			if strings.Contains(s, "NaN") || strings.Contains(s, "Inf") || strings.Contains(s, "%!") ||
				strings.Contains(s, "\x00") {
				t.Errorf("%s says %q", o.ID, s)
			}
		}
	}
}

// No data set, however odd, makes an objection panic or print what is no number.
func TestObjectionsToOddStudies(t *testing.T) {
	mechs := []Candidate{
		{Name: "Hill equation", Family: "hill", Mechanism: build(t, "hill", mechanisms.Definition{})},
		{Name: "pair", Family: "adair", Mechanism: build(t, "adair", mechanisms.Definition{Sites: 2})},
		{Name: "concerted", Family: "mwc", Mechanism: build(t, "mwc", four())},
	}
	rapid.Check(t, func(t *rapid.T) {
		a := &Analysis{Ligand: Substance{Name: "ligand",
			Unit: rapid.SampledFrom([]string{"nM", "torr", ""}).Draw(t, "unit")}, Kelvin: math.NaN(),
			Candidates: mechs[:rapid.IntRange(0, 3).Draw(t, "mechanisms")],
			Settings:   Settings{Starts: 2, Seed: 1, Level: 0.95, Method: "profile"}}
		for range rapid.IntRange(0, 2).Draw(t, "data") {
			a.Data = append(a.Data, oddData(t))
		}
		soundObjections(t, a.Objections(context.Background()))
		if len(a.Candidates) == 0 || len(a.Data) == 0 || rapid.IntRange(0, 3).Draw(t, "run") > 0 {
			return // runs are costly
		}
		out, err := a.Run(context.Background(), nil)
		if err != nil {
			return
		}
		soundObjections(t, out.Objections)
		for _, r := range out.Explanations {
			if strings.Contains(deref(r.Why), "NaN") || strings.Contains(deref(r.Why), "\x00") {
				t.Errorf("%s: %s", r.Explanation, deref(r.Why))
			}
		}
	})
}

// oddData draws a data set that a table could hold.
func oddData(t *rapid.T) Dataset {
	setting := func(name string) Setting {
		return Setting{Free: rapid.Bool().Draw(t, name+" free"),
			Value: rapid.SampledFrom([]float64{0, 1, 100}).Draw(t, name)}
	}
	d := Dataset{Name: "odd", Noise: rapid.SampledFrom([]Noise{Constant, Proportional, Replicates,
		GivenSigma}).Draw(t, "noise"),
		Incubation: rapid.SampledFrom([]float64{math.NaN(), 60}).Draw(t, "incubation"),
		Total:      rapid.Bool().Draw(t, "total")}
	d.Response = Response{Kind: rapid.SampledFrom([]string{"saturation", "bound", "velocity",
		"signal"}).Draw(t, "kind"), Unit: "nM/s", Low: setting("low"), High: setting("high")}
	if d.Response.Kind == "bound" {
		d.Response.Nonspecific = setting("nonspecific")
	}
	if d.Response.High.Value == 0 {
		d.Response.High.Value = 1
	}
	if rapid.Bool().Draw(t, "sites") || d.Total {
		d.SitesPresent = SitesPresent{Value: 0.5, Unit: "nM"}
	}
	flat := rapid.Bool().Draw(t, "flat")
	for i := range rapid.IntRange(0, 24).Draw(t, "points") {
		p := Point{X: rapid.SampledFrom([]float64{0, 1e-9, 0.1, 0.3, 1, 2, 5, 10, 100}).Draw(t, "x"),
			Sigma: 0.1, Row: i + 2,
			Preparation: rapid.SampledFrom([]string{"", "A", "B"}).Draw(t, "preparation"),
			Blocked:     d.Response.Kind == "bound" && rapid.Bool().Draw(t, "blocked")}
		if p.Y = 0.5; !flat {
			p.Y = rapid.Float64Range(-1, 2).Draw(t, "y")
		}
		if rapid.IntRange(0, 9).Draw(t, "left out") == 0 {
			p.LeftOut = "why"
		}
		d.Points = append(d.Points, p)
	}
	return d
}
