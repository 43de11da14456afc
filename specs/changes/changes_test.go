package changes

import (
	"testing"

	"github.com/google/go-cmp/cmp"

	"ligancy/fit/saturation"
	"ligancy/specs/record"
)

func TestWritten(t *testing.T) {
	old := `format: ligancy/1
title: Oxygen
conditions: {temperature: 15 degC, pH: 7.0}
data:
  - name: curves   # a remark
    file: clam.csv
    response: {kind: saturation, low: 0, high: 1}
    noise: constant
mechanisms:
  - hill
  - {name: stepwise, family: adair, sites: 4}
  - {family: mwc, sites: 4, differs: {L: pH}}
fit: {starts: 50, seed: 1}
`
	now := `format: ligancy/1
conditions: {pH: 7, temperature: 25 degC}
title: Oxygen
fit: {seed: 1, starts: 100}
mechanisms:
  - {family: mwc, sites: 4, differs: {L: pH}, constants: {c: {fixed: 0}}}
  - {name: stepwise, family: adair, sites: 2}
  - {name: ring, family: sequential, contacts: square}
data:
  - name: curves
    file: clam.csv
    noise: constant
    response: {kind: saturation, high: free, low: 0}
  - {name: more, file: b.csv}
`
	got, err := Written([]byte(old), []byte(now))
	if err != nil {
		t.Fatal(err)
	}
	want := []Difference{
		{Measured, "temperature", "15 degC", "25 degC"},
		{Measured, "curves: response: high", "1", "free"},
		{Measured, "more", "", "{file: b.csv, name: more}"},
		{Mechanisms, "hill", "hill", ""},
		{Mechanisms, "stepwise: sites", "4", "2"},
		{Mechanisms, "mwc {L: pH}: constants", "", "{c: {fixed: 0}}"},
		{Mechanisms, "ring", "", "{contacts: square, family: sequential, name: ring}"},
		{Fitted, "starts", "50", "100"},
	}
	if d := cmp.Diff(want, got); d != "" {
		t.Error(d)
	}
}

func TestWrittenInAnotherOrderIsTheSame(t *testing.T) {
	a := "title: x\ndata: [{name: a, file: f}, {name: b, file: g}]\nmechanisms: [hill]\n"
	b := "mechanisms:\n- hill\ndata:\n- {file: g, name: b}\n- {file: f, name: a}\ntitle: x  # as before\n"
	if got, err := Written([]byte(a), []byte(b)); err != nil || len(got) != 0 {
		t.Errorf("%v, %v", got, err)
	}
}

func TestPoints(t *testing.T) {
	at := func(points ...saturation.Point) *saturation.Analysis {
		return &saturation.Analysis{Data: []saturation.Dataset{{Name: "curves", Points: points}}}
	}
	old := at(saturation.Point{X: 1, Y: 0.1, Row: 2}, saturation.Point{X: 1, Y: 0.1, Row: 3}, saturation.Point{X: 2, Y: 0.2},
		saturation.Point{X: 3, Y: 0.3}, saturation.Point{X: 4, Y: 0.4, LeftOut: "spilt"})
	now := at(saturation.Point{X: 2, Y: 0.25}, saturation.Point{X: 1, Y: 0.1, Row: 9}, saturation.Point{X: 3, Y: 0.3, LeftOut: "bubble"},
		saturation.Point{X: 4, Y: 0.4}, saturation.Point{X: 8, Y: 0.8})
	want := []Difference{{Measured, "curves: points", "4, 1 left out",
		"4, 1 left out: 1 added, 1 removed, 1 with another value, 1 newly left out (bubble), 1 no longer left out"}}
	if d := cmp.Diff(want, Points(old, now)); d != "" {
		t.Error(d)
	}
	if got := Points(old, old); len(got) != 0 {
		t.Error(got)
	}
}

func TestRecords(t *testing.T) {
	old := &record.Record{Title: "x", Settings: record.Settings{Seed: 1},
		Data:       []record.Data{{Name: "a", File: "a.csv", SHA256: "1", Points: 5}, {Name: "b", File: "b.csv", SHA256: "2", Points: 5}},
		Mechanisms: []record.Mechanism{{Name: "m", Family: "mwc", Sites: 4}, {Name: "h", Family: "hill"}}}
	now := &record.Record{Title: "x", Settings: record.Settings{Seed: 2},
		Data:       []record.Data{{Name: "a", File: "a.csv", SHA256: "3", Points: 4, LeftOut: 1}, {Name: "c", File: "c.csv", SHA256: "2", Points: 5}},
		Mechanisms: []record.Mechanism{{Name: "m", Family: "mwc", Sites: 2}, {Name: "s", Family: "adair", Sites: 4}}}
	want := []Difference{
		{Measured, "a", "5 points", "4 points, 1 left out, in a changed table"},
		{Measured, "c", "", "5 points"},
		{Measured, "b", "5 points", ""},
		{Mechanisms, "m", "mwc, 4 sites", "mwc, 2 sites"},
		{Mechanisms, "h", "hill", ""},
		{Mechanisms, "s", "", "adair, 4 sites"},
		{Fitted, "seed", "1", "2"},
	}
	if d := cmp.Diff(want, Records(old, now, record.Compare(old, now))); d != "" {
		t.Error(d)
	}
}
