package kinetics_test

import (
	"context"
	"math"
	"testing"

	"ligancy/mechanisms"
	"ligancy/mechanisms/kinetics"
	"ligancy/mechanisms/mechtest"
)

func TestRatesWithoutPartner(t *testing.T) {
	for _, c := range []struct {
		of    mechtest.Case
		rates []kinetics.Rate
		words []string
	}{
		{site, []kinetics.Rate{{Key: "k_on"}, {Key: "exchange"}}, []string{"rates.exchange", "has no partner"}},
		{site, nil, []string{"no rate leads to the state", "1 bound"}},
		{site, []kinetics.Rate{{Key: "k_on"}, {Key: "k_off"}}, []string{"this rate and k_on as well"}},
		{site, []kinetics.Rate{{Key: "tight.k_on"}}, []string{"no site of that name"}},
		{site, []kinetics.Rate{{Key: "k_cat"}}, []string{"is no rate constant"}},
		{tetramer, []kinetics.Rate{{Key: "k_on"}}, []string{`"T, 0 bound"`, "cut off"}},
		{tetramer, []kinetics.Rate{{Key: "k_on"}, {Key: "exchange", Count: 4}}, []string{"4 values for 5 ligations"}},
		{mechtest.Case{Family: "hill"}, []kinetics.Rate{{Key: "k_on"}}, []string{"has no kinetics"}},
	} {
		_, err := kinetics.New(c.of.Build(), c.rates)
		complains(t, err, c.words...)
	}
}

// Rates meant for one class or conformation rule over those for all; k_off in the
// place of k_on gives the same course.
func TestRatesByName(t *testing.T) {
	m, err := kinetics.New(tetramer.Build(), []kinetics.Rate{{Key: "k_on"}, {Key: "T.k_on"}, {Key: "exchange", Count: 5}})
	if err != nil {
		t.Fatal(err)
	}
	if n := len(m.Rates()); n != 7 {
		t.Errorf("%d rates, not 7", n)
	}
	const kd, x = 2.0, 3.0
	on := bound(t, build(t, site, "k_on"), []float64{kd}, []float64{0.5})
	off := bound(t, build(t, site, "k_off"), []float64{kd}, []float64{0.5 * kd})
	p := &kinetics.Program{Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: x, Seconds: 3}}}
	a, b := run(t, on, p, []float64{1, 2}), run(t, off, p, []float64{1, 2})
	near(t, "with k_off", b.Saturation[0], a.Saturation[0], 1e-15)
}

// Listed states are joined where one ligand, effector or conformation is between them.
func TestListedStates(t *testing.T) {
	c := mechtest.Case{Family: "states", Definition: mechanisms.Definition{Differs: true, Effectors: []mechanisms.Effector{{Name: "I"}}, States: []mechanisms.State{
		{Name: "E"}, {Name: "F", Constants: map[string]float64{"L": 1}}, {Name: "ES", Ligands: 1, Constants: map[string]float64{"K_S": -1}},
		{Name: "EI", Effectors: map[string]int{"I": 1}, Constants: map[string]float64{"K_I": -1}}}}}
	_, err := kinetics.New(c.Build(), []kinetics.Rate{{Key: "k_on"}, {Key: "exchange"}})
	complains(t, err, `"EI"`, "cut off")
	m, err := kinetics.New(c.Build(), []kinetics.Rate{{Key: "ES.k_on"}, {Key: "exchange"}, {Key: "I.k_on"}})
	if err != nil {
		t.Fatal(err)
	}
	b := m.Bound()
	theta := make([]float64, len(m.Mechanism().Constants()))
	if err := b.Bind(theta, make([]float64, 3), mechanisms.Environment{Effectors: []float64{2}}); err != nil {
		t.Fatal(err)
	}
	got := run(t, b, &kinetics.Program{Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: 1, Seconds: 1e3}}}, []float64{1e3})
	near(t, "saturation", got.Saturation[0], 1./5, 1e-13) // weights 1, 1, 1, 2
}

func TestBadPrograms(t *testing.T) {
	b := bound(t, build(t, site), []float64{1}, []float64{1})
	add := kinetics.Phase{Action: kinetics.Add, Amount: 1, Seconds: 10}
	for _, c := range []struct {
		p     kinetics.Program
		times []float64
		words []string
	}{
		{kinetics.Program{}, nil, []string{"there is no phase"}},
		{kinetics.Program{Phases: []kinetics.Phase{add, {Seconds: -5}}}, nil, []string{"phase 2, from 10 s", "before it ends"}},
		{kinetics.Program{Phases: []kinetics.Phase{add}}, []float64{-1}, []string{"time 1 is -1 s", "before the first phase"}},
		{kinetics.Program{Phases: []kinetics.Phase{add}}, []float64{11}, []string{"the last phase ends at 10 s"}},
		{kinetics.Program{Phases: []kinetics.Phase{add}}, []float64{5, 4}, []string{"time 2 is 4 s"}},
		{kinetics.Program{Phases: []kinetics.Phase{{Action: kinetics.Dilute, Amount: 0.5, Seconds: 1}}}, nil, []string{"dilution by 0.5"}},
		{kinetics.Program{Phases: []kinetics.Phase{{Action: kinetics.Block, Seconds: 1}}}, nil, []string{"phase 1", "unlabelled"}},
		{kinetics.Program{Phases: []kinetics.Phase{add}, Sites: math.NaN()}, nil, []string{"sites of NaN"}},
		{kinetics.Program{Loaded: 5, Sites: 4, Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: 1, Seconds: 1}}}, []float64{1}, []string{"phase 1", "bound already"}},
	} {
		_, err := b.Run(context.Background(), &c.p, c.times, false)
		complains(t, err, c.words...)
	}
}

// A state whose weight is zero on the way to others cuts them off, by name; a rate
// out of range is no number to go on with.
func TestCutOffAtConstants(t *testing.T) {
	m := build(t, mechtest.Case{Family: "adair", Definition: mechanisms.Definition{Sites: 2}})
	err := m.Bound().Bind([]float64{0, 1}, []float64{0}, mechanisms.Environment{})
	complains(t, err, `"2 bound"`, "cut off")
	err = m.Bound().Bind([]float64{1, 1}, []float64{800}, mechanisms.Environment{})
	complains(t, err, `"0 bound"`, "+Inf")
}

// An integration that is stopped is an error that says so, and no course.
func TestStoppedIntegration(t *testing.T) {
	b := bound(t, build(t, site), []float64{1}, []float64{1})
	ctx, stop := context.WithCancel(context.Background())
	stop()
	p := &kinetics.Program{Sites: 1, Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: 1, Seconds: 10}}}
	c, err := b.Run(ctx, p, []float64{1, 10}, false)
	if c != nil {
		t.Error("a course in spite of it")
	}
	complains(t, err, "phase 1", "stopped")
}

// A tolerance beyond rounding is refused, not approximated.
func TestUnreachableTolerance(t *testing.T) {
	b := bound(t, build(t, site), []float64{1}, []float64{1})
	p := &kinetics.Program{Sites: 1, Tolerance: 1e-20, Phases: []kinetics.Phase{{Action: kinetics.Add, Amount: 1, Seconds: 10}}}
	_, err := b.Run(context.Background(), p, []float64{1, 10}, false)
	complains(t, err, "cannot be followed", "tolerance 1e-20")
}
