package sbml

import (
	"context"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"testing/fstest"

	"ligancy/fit/saturation"
	"ligancy/ode"
	"ligancy/specs"
)

// studies on paper: every kind of step, ligand held and used up.
var studies = map[string]string{
	"one class": `ligand: {name: octopamine, unit: nM}
mechanisms:
  - {name: one class, family: independent, classes: {only: 1}, constants: {Kd: {value: 3}}, rates: {k_on: 1e6 1/(M s)}}
course: {phases: [{add: 10 nM, for: 30 min}]}
`,
	"pair": `ligand: {name: octopamine, unit: nM}
mechanisms:
  - {name: interacting pair, family: adair, sites: 2, constants: {Kd1: {value: 1}, Kd2: {value: 20}}, rates: {k_on: 1e6 1/(M s)}}
course: {phases: [{add: 10 nM, for: 30 min}]}
`,
	"concerted": `ligand: {name: oxygen, unit: torr}
mechanisms:
  - {name: "concerted <R & T>", family: mwc, sites: 4, constants: {L: {value: 9054}, c: {value: 0.014}, K_R: {value: 2}}, rates: {k_on: 5 1/(torr s), exchange: 1e3 1/s}}
course: {phases: [{add: 10 torr, for: 1 s}]}
`,
}

func model(t *testing.T, text string) (*saturation.Kinetic, *Model) {
	t.Helper()
	study, complaints := specs.Load(fstest.MapFS{"s.yaml": {Data: []byte("format: ligancy/1\norigin: invented data\n" + text)}}, "s.yaml")
	if complaints.HasErrors() {
		t.Fatal(complaints)
	}
	a, complaints := study.Build()
	if a == nil {
		t.Fatal(complaints)
	}
	all, err := a.Kinetics(context.Background(), nil)
	if err != nil || len(all) != 1 {
		t.Fatalf("%d mechanisms, %v", len(all), err)
	}
	m, err := New(&all[0], a)
	if err != nil {
		t.Fatal(err)
	}
	return &all[0], m
}

// A document that is read back, without the writer's knowledge, and integrated by
// package ode gives the course that package kinetics gives.
func TestADocumentReadBackGivesTheSameCourse(t *testing.T) {
	for name, text := range studies {
		for _, sites := range []float64{0, 4} {
			t.Run(name, func(t *testing.T) {
				k, m := model(t, text)
				if sites > 0 { // as if the study stated the concentration of sites
					k.Program.Sites, m.UsedUp = sites, true
					for i := range m.States {
						m.States[i].Initial *= sites
					}
				}
				compareCourses(t, k, m)
			})
		}
	}
}

func compareCourses(t *testing.T, k *saturation.Kinetic, m *Model) {
	t.Helper()
	keep(t, m)
	d := read(t, m.Bytes())
	end := k.Program.Phases[0].Seconds
	times := []float64{0, end / 100, end / 30, end / 10, end / 3, end}
	b := k.Model.Bound()
	if err := b.Bind(k.Theta, k.Phi, k.Environment); err != nil {
		t.Fatal(err)
	}
	want, err := b.Run(context.Background(), &k.Program, times, false)
	if err != nil {
		t.Fatal(err)
	}
	y0 := make([]float64, d.Dim())
	for i, s := range d.species {
		y0[i] = d.values[s]
	}
	got, err := ode.Solve(context.Background(), d, y0, times, ode.Options{Rtol: 1e-9, Atol: 1e-12})
	if err != nil {
		t.Fatal(err)
	}
	for i := range times {
		for j, s := range d.species {
			d.values[s] = got.States[i][j]
		}
		y := d.value(d.rules["Y"])
		if math.Abs(y-want.Saturation[i]) > 1e-7 {
			t.Errorf("at %g s: saturation %.10f, want %.10f", times[i], y, want.Saturation[i])
		}
		if free := d.values[LigandID]; math.Abs(free-want.Free[i]) > 1e-7*m.Ligand {
			t.Errorf("at %g s: free ligand %.10f, want %.10f", times[i], free, want.Free[i])
		}
	}
}

// keep writes a document where a validator can find it, if one is asked for:
// SBML_OUT=/some/folder go test.
func keep(t *testing.T, m *Model) {
	dir := os.Getenv("SBML_OUT")
	if dir == "" {
		return
	}
	name := strings.NewReplacer("/", "_", "#", "_").Replace(t.Name()) + ".xml"
	if err := os.WriteFile(filepath.Join(dir, name), m.Bytes(), 0o666); err != nil {
		t.Fatal(err)
	}
}

// Rates of a concerted protein are products of powers of its constants, so that a
// solver may change a constant and the balance stays: around the square of two
// conformations and one ligand the product of rates is the same both ways.
func TestRatesFollowFromConstants(t *testing.T) {
	_, m := model(t, studies["concerted"])
	if m.fixed != 0 {
		t.Errorf("%d rates are numbers", m.fixed)
	}
	d := read(t, m.Bytes())
	for i := range m.Parameters {
		d.values[m.Parameters[i].ID] *= 1.7 + 0.3*float64(i)
	}
	rate := func(r Rate) float64 {
		v := r.Factor
		for id, power := range r.Powers {
			v *= math.Pow(d.values[id], power)
		}
		return v
	}
	lnK := map[[2]string]float64{}
	for _, r := range m.Reactions {
		k := math.Log(rate(r.Up) / rate(r.Down))
		lnK[[2]string{r.From, r.To}], lnK[[2]string{r.To, r.From}] = k, -k
	}
	squares := 0
	for _, a := range m.States {
		for _, b := range m.States {
			for _, c := range m.States {
				for _, e := range m.States {
					k1, ok1 := lnK[[2]string{a.ID, b.ID}]
					k2, ok2 := lnK[[2]string{b.ID, c.ID}]
					k3, ok3 := lnK[[2]string{c.ID, e.ID}]
					k4, ok4 := lnK[[2]string{e.ID, a.ID}]
					if !ok1 || !ok2 || !ok3 || !ok4 || a.ID == c.ID || b.ID == e.ID {
						continue
					}
					if squares++; math.Abs(k1+k2+k3+k4) > 1e-9 {
						t.Errorf("%s, %s, %s, %s: out of balance by %g", a.ID, b.ID, c.ID, e.ID, k1+k2+k3+k4)
					}
				}
			}
		}
	}
	if squares == 0 {
		t.Error("no square was found")
	}
}

func TestIdentifiers(t *testing.T) {
	n := names{}
	for _, c := range [][2]string{{"R, 1 bound", "R_1_bound"}, {"R 1-bound", "R_1_bound_2"}, {"2 bound", "s_2_bound"}, {"µ", "s_"}, {"µ", "s__2"}} {
		if got := n.take(c[0]); got != c[1] {
			t.Errorf("%q: %q, want %q", c[0], got, c[1])
		}
	}
}
