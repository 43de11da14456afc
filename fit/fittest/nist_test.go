package fittest

import (
	"bytes"
	"context"
	"encoding/csv"
	"fmt"
	"math"
	"strings"
	"testing"

	"ligancy/fit"
)

func TestConformance(t *testing.T) {
	if err := Conform(context.Background(), Default); err != nil {
		t.Error(err)
	}
	lazy := func(_ context.Context, p *fit.Problem) (*fit.Result, error) {
		return &fit.Result{Theta: p.Starts[0], Status: fit.Converged}, nil
	}
	if err := Conform(context.Background(), lazy); err == nil || strings.Count(err.Error(), "\n") < 50 {
		t.Errorf("a solver that does nothing conforms: %v", err)
	}
}

// Source: NIST Statistical Reference Datasets. Every run from both certified
// starts, with default settings, has to be right.
func TestCertified(t *testing.T) {
	rows := Certify(context.Background(), "ligancy", Default)
	for i := range rows {
		r := &rows[i]
		if !r.Right() || r.Digits < 10 {
			t.Errorf("%s from start %d: %s, %.2f digits", r.Dataset, r.Start, r.Status, r.Digits)
		}
		// Lanczos1 leaves residuals of 1e-13: those are rounding, and with
		// them the sum of squares and all deviations.
		if r.Dataset == "Lanczos1" {
			continue
		}
		if r.DeviationDigits < 9.5 || r.RSSDigits < 9.5 {
			t.Errorf("%s from start %d: deviations %.2f, RSS %.2f digits", r.Dataset, r.Start, r.DeviationDigits, r.RSSDigits)
		}
		if r.PolishedDigits < 11.5 {
			t.Errorf("%s from start %d: %.2f digits of the polished values", r.Dataset, r.Start, r.PolishedDigits)
		}
		if r.Offset > 1e-9 {
			t.Errorf("%s from start %d: relative offset %g", r.Dataset, r.Start, r.Offset)
		}
	}
	s := Summarise(rows)
	t.Logf("%+v", s)
	if s.Runs != 54 || s.Right != 54 || s.Least < 10 || s.Mean < 10.6 || s.LeastRight != s.Least {
		t.Errorf("%+v", s)
	}
}

// Starts moved by up to 5 %: at least 1,060 of 1,080 runs right.
func TestMovedStarts(t *testing.T) {
	draws := 20
	if testing.Short() {
		draws = 3
	}
	right, wrong := Moved(context.Background(), Default, draws)
	if right+len(wrong) != 54*draws || right*1080 < 1060*54*draws {
		count := map[string]int{}
		for _, r := range wrong {
			count[fmt.Sprintf("%s %d: %s", r.Dataset, r.Start, r.Status)]++
		}
		t.Errorf("%d of %d right; not: %v", right, 54*draws, count)
	}
	t.Logf("%d of %d right", right, 54*draws)
}

// A solver that fails, or claims success elsewhere, is not right.
func TestOthersAreJudged(t *testing.T) {
	s := Sets()[0]
	fails := func(context.Context, *fit.Problem) (*fit.Result, error) { return nil, fmt.Errorf("no idea") }
	if r := s.Run(context.Background(), fails, s.Starts[0]); r.Right() || r.Status != "fail: no idea" {
		t.Errorf("%+v", r)
	}
	stays := func(_ context.Context, p *fit.Problem) (*fit.Result, error) {
		return &fit.Result{Theta: p.Starts[0], Status: fit.Converged, Objective: 1}, nil
	}
	if r := s.Run(context.Background(), stays, s.Starts[0]); r.Right() || r.Status != "ok" || r.Digits > 1 {
		t.Errorf("%+v", r)
	}
	stops := func(_ context.Context, p *fit.Problem) (*fit.Result, error) {
		return &fit.Result{Theta: s.Certified, Status: fit.Stopped}, nil
	}
	if r := s.Run(context.Background(), stops, s.Starts[0]); r.Right() || r.Digits != 11 {
		t.Errorf("%+v", r)
	}
}

// The sets are whole: as many observations and parameters as NIST gives, and
// the certified parameters leave the certified sum of squares.
func TestSetsAreWhole(t *testing.T) {
	sizes := map[string][2]int{ // observations, parameters: from NIST's table
		"Misra1a": {14, 2}, "Chwirut2": {54, 3}, "Chwirut1": {214, 3}, "Lanczos3": {24, 6},
		"Gauss1": {250, 8}, "Gauss2": {250, 8}, "DanWood": {6, 2}, "Misra1b": {14, 2},
		"Kirby2": {151, 5}, "Hahn1": {236, 7}, "Nelson": {128, 3}, "MGH17": {33, 5},
		"Lanczos1": {24, 6}, "Lanczos2": {24, 6}, "Gauss3": {250, 8}, "Misra1c": {14, 2},
		"Misra1d": {14, 2}, "Roszman1": {25, 4}, "ENSO": {168, 9}, "MGH09": {11, 4},
		"Thurber": {37, 7}, "BoxBOD": {6, 2}, "Rat42": {9, 3}, "MGH10": {16, 3},
		"Eckerle4": {35, 3}, "Rat43": {15, 4}, "Bennett5": {154, 3},
	}
	if len(Sets()) != 27 {
		t.Fatalf("%d sets", len(Sets()))
	}
	for _, s := range Sets() {
		want := sizes[s.Name]
		if s.Len() != want[0] || len(s.Certified) != want[1] || len(s.Deviations) != want[1] ||
			len(s.Polished) != want[1] || len(s.Starts[0]) != want[1] || len(s.Starts[1]) != want[1] {
			t.Errorf("%s: %d observations, %d parameters", s.Name, s.Len(), len(s.Certified))
		}
		res := make([]float64, s.Len())
		if err := s.Eval(res, nil, s.Polished); err != nil {
			t.Fatal(err)
		}
		var ss float64
		for _, r := range res {
			ss += r * r
		}
		if d := Digits(ss, s.RSS, 11); d < 10 && s.Name != "Lanczos1" {
			t.Errorf("%s: sum of squares %.11g, certified %.11g", s.Name, ss, s.RSS)
		}
		if worst(s.Polished, s.Certified, 11) < 9.9 {
			t.Errorf("%s: certified and polished values differ", s.Name)
		}
		if s.Level == "" || s.Origin == "" || s.Formula == "" {
			t.Errorf("%s: no level, origin or formula", s.Name)
		}
	}
}

func TestModelDerivatives(t *testing.T) {
	for _, s := range Sets() {
		for _, b := range [][]float64{s.Certified, s.Starts[1]} {
			d, err := Derivatives(s, b)
			if err != nil {
				t.Fatal(err)
			}
			if d.Worst > 1e-7 {
				t.Errorf("%s: %+v", s.Name, d)
			}
		}
	}
}

func TestDigits(t *testing.T) {
	for _, c := range []struct{ q, c, most, want float64 }{
		{1, 1, 11, 11},
		{1.001, 1, 11, 3},
		{-1, 1, 11, 0},
		{3, 1, 11, 0},
		{1 + 1e-13, 1, 11, 11},
		{math.NaN(), 1, 11, 0},
		{math.Inf(1), 1, 11, 0},
	} {
		if d := Digits(c.q, c.c, c.most); math.Abs(d-c.want) > 1e-9 {
			t.Errorf("Digits(%v, %v) = %v, want %v", c.q, c.c, d, c.want)
		}
	}
	if worst([]float64{1}, []float64{1, 2}, 11) != 0 {
		t.Error("a missing parameter has no digits")
	}
}

func TestCSV(t *testing.T) {
	rows := []Row{{Method: "m", Dataset: "d", Start: 2, Status: "ok", Evals: 7, RSS: 1e-25, Parameters: []float64{1, 1e-9}, Deviations: []float64{0.5, 2}}}
	var b bytes.Buffer
	if err := WriteCSV(&b, rows); err != nil {
		t.Fatal(err)
	}
	all, err := csv.NewReader(&b).ReadAll()
	if err != nil || len(all) != 2 || len(all[0]) != len(all[1]) {
		t.Fatal(all, err)
	}
	if got := strings.Join(all[1][:9], "|"); got != "m|d|2|ok|7|0.000|1e-25|1 1e-09|0.5 2" {
		t.Error(got)
	}
	if got := strings.Join(all[0][:9], ","); got != "method,dataset,start,status,nfev,cpu_ms,rss,params,sds" {
		t.Error(got)
	}
}

func TestReadSets(t *testing.T) {
	for text, want := range map[string]string{
		"set Nobody lower\n":           "line 1: no model of the name Nobody",
		"set Misra1a lower\nstart1 x":  "line 2:",
		"set Misra1a lower\n1.5 2 3x4": "line 2:",
	} {
		if _, err := readSets(text); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%q: %v", text, err)
		}
	}
}

func TestMedian(t *testing.T) {
	if median([]float64{3, 1, 2}) != 2 || median([]float64{4, 1, 2, 3}) != 2.5 || median(nil) != 0 {
		t.Error("median")
	}
}

func BenchmarkCertified(b *testing.B) {
	for range b.N {
		Certify(context.Background(), "ligancy", Default)
	}
}
