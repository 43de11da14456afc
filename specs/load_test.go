package specs

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"testing/fstest"
	"time"

	"github.com/google/go-cmp/cmp"

	"ligancy/fit/saturation"
	"ligancy/specs/diag"
	"ligancy/specs/gallery"
)

// build loads a study with its tables and builds it; nothing may be complained of.
func build(t *testing.T, study string, tables map[string]string) (*Study, *saturation.Analysis) {
	t.Helper()
	m := memory{"study.yaml": []byte(study)}
	for name, data := range tables {
		m[name] = []byte(data)
	}
	s, complaints := Load(m, "study.yaml")
	if len(complaints) > 0 {
		var b bytes.Buffer
		_ = diag.WriteText(&b, complaints)
		t.Fatalf("complaints:\n%s", b.String())
	}
	a, complaints := s.Build()
	if a == nil || len(complaints) > 0 {
		t.Fatalf("Build: %v, %v", a, complaints)
	}
	return s, a
}

// The gallery and the studies of published tables load without any complaint.
func TestStudiesThatWeCarry(t *testing.T) {
	for _, name := range gallery.Names() {
		s, complaints := Load(gallery.Files(name), name+".yaml")
		if len(complaints) > 0 {
			t.Fatalf("%s: %v", name, complaints)
		}
		if a, _ := s.Build(); a == nil || a.Origin != "invented data" {
			t.Errorf("%s does not say that its data are invented", name)
		}
	}
	points := map[string]int{
		"blood": 51, "blood_20_80": 15, "haemoglobin": 44, "galactosyltransferase_treated": 12,
		"galactosyltransferase_untreated": 11, "adsorption": 14, "elisa": 16,
	}
	for name, want := range points {
		s, complaints := Load(os.DirFS("../testdata"), name+".yaml")
		if len(complaints) > 0 {
			t.Fatalf("%s: %v", name, complaints)
		}
		a, _ := s.Build()
		if got := len(a.Data[0].Points); got != want {
			t.Errorf("%s has %d points, want %d", name, got, want)
		}
	}
}

// The draft's three faults are named as the draft names them.
func TestThreeFaultsOfTheDraft(t *testing.T) {
	study := `format: ligancy/1
title: Oxygen binding by ark-clam haemoglobin at two pH

conditions:
  macromolecule: red-cell haemoglobin, tetramer
  temperature: 15 degC

ligand: {name: oxygen, unit: torr}
effectors: [{name: 2,3-BPG, unit: mM}]

data:
  - name: curves
    file: clam.csv

    columns: {ligand: pO2, response: sat, preparation: prep}
    factors: {pH: pH}
    response: {kind: saturation, unit: fraction, low: 0, high: 1}

mechanisms:
  - {name: Hill equation, family: hill, differs: {K_half: pH, n_H: pH}}
`
	table := "pH,prep,pO2_torr,sat\n7.0,B,7,0.33\n7.0,B,9,\"0,83\"\n7.0,B,12,0.9\n"
	var b bytes.Buffer
	_, complaints := Load(memory{"clam.yaml": []byte(study), "clam.csv": []byte(table)},
		"clam.yaml")
	if err := diag.WriteText(&b, complaints); err != nil {
		t.Fatal(err)
	}
	want := `clam.yaml:9:20   a comma ended this name
     9 | effectors: [{name: 2,3-BPG, unit: mM}]
       |                    ‾‾‾‾‾‾‾
   Inside { } a comma begins the next entry, so the name would be "2".
   Write   name: "2,3-BPG"

clam.yaml:15:23   clam.csv has no column "pO2"
    15 |     columns: {ligand: pO2, response: sat, preparation: prep}
       |                       ‾‾‾
   Its columns are: pH, prep, pO2_torr, sat.
   Write   ligand: pO2_torr

clam.csv:3:9   column sat: "0,83" is not a number
     3 | 7.0,B,9,"0,83"
       |         ‾‾‾‾‾‾
   If the whole file has decimal commas, say   decimal: comma   under this data set in clam.yaml.
   If only this cell has one, write   0.83
`
	if diff := cmp.Diff(want, b.String()); diff != "" {
		t.Error(diff)
	}
}

const surface = `format: ligancy/1
title: Everything at once
origin: invented data
conditions: {temperature: 20 degC, pH: 7.5}
ligand: {name: PEP, symbol: S, unit: mM}
effectors:
  - {name: alanine, unit: mM}
  - {name: "2,3-BPG", unit: uM}
data:
  - name: surface
    file: a.csv
    columns: {ligand: {name: logS, unit: log10 M}, alanine: {name: ala_uM, unit: uM}, response: [v1, v2], sem: sem, n: 4, preparation: prep, left_out: why}
    at: {"2,3-BPG": 0.5 mM}
    response: {kind: velocity, unit: nkat/mg, differs: {V: preparation}}
    incubation: 90 min
  - name: alone
    file: b.tsv
    columns: {ligand: {name: S_uM, unit: uM}, response: {name: v_U, unit: U/mg}, weight: w}
    at: {alanine: 2, "2,3-BPG": 0, pH: 7.0}
    rows: {state: [ok, fine]}
    response: {kind: velocity, unit: nkat/mg, V: 100}
    sites_present: 3 uM
    noise: proportional
mechanisms:
  - name: both
    family: mwc
    sites: 4
    effectors: {alanine: {binds: both}}
    constants: {K_R: {start: 50 uM, range: [1 uM, 1 mM]}, c: 0.01, alanine: {K_T: {start: 500 uM}}}
    rates: {k_on: 1e7 1/(M s), exchange: [100 1/s, 60 1/min]}
  - {family: hill, differs: {K_half: alanine, n_H: pH}}
  - {family: adair, sites: 2, differs: [Kd1]}
contrasts:
  - {of: x_half, between: alanine}
curve: {from: 1 uM, to: 10 mM, points: 50, at: {alanine: [0, 500 uM]}}
course: {phases: [{add: 10 uM, for: 30 min}, {dilute: 100, for: 1 h}, {block: 1 mM, for: 5 min}, {wash: true, for: 10 s}]}
plan: {range: [1 uM, 10 mM], points: 12, series: 2-fold, at: {alanine: 5}}
`

var surfaceTables = map[string]string{
	"a.csv": "logS,ala_uM,v1,v2,sem,prep,why\n-4,0,1.0,1.1,0.1,A,\n-3.5,0,5,NA,0.2,A,\n-3,1000,9,9.5,0.3,B,\n-2,0,50,52,1,B,pipette slipped\n-2.5,1000,19,18.5,0.3,B,\n-5,0,0.1,0.2,0.1,A,\n-1,0,99,98,1,A,\n",
	"b.tsv": "# made up\nS_uM\tv_U\tw\tstate\n10\t0,06\t1\tok\n100\t0,6\t2\tfine\n1000\t3\t1\tbad\n5000\t4,5\t1\tok\n",
}

// near compares to 12 digits.
func near(t *testing.T, what string, got, want float64) {
	t.Helper()
	if !(math.Abs(got-want) <= 1e-12*math.Abs(want)) {
		t.Errorf("%s = %.15g, want %.15g", what, got, want)
	}
}

func TestEverythingArrivesInTheLigandsUnit(t *testing.T) {
	s, a := build(t, surface, surfaceTables)
	one, two := a.Data[0], a.Data[1]
	if len(one.Points) != 13 || len(two.Points) != 3 {
		t.Fatalf("%d and %d points", len(one.Points), len(two.Points))
	}
	p := one.Points[0]
	near(t, "10^-4 M in mM", p.X, 0.1)
	near(t, "sigma of sem and n", p.Sigma, 0.2)
	if diff := cmp.Diff([]float64{0, 500}, p.Effectors); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]float64{1, 500}, one.Points[3].Effectors); diff != "" {
		t.Error(diff)
	}
	if one.Points[5].LeftOut != "pipette slipped" || one.Points[2].Y != 5 ||
		one.Points[3].Row != 4 {
		t.Errorf("points %+v", one.Points)
	}
	near(t, "incubation", one.Incubation, 5400)
	near(t, "10 uM in mM", two.Points[0].X, 0.01)
	near(t, "0.06 U/mg in nkat/mg", two.Points[0].Y, 1)
	near(t, "sites present", two.SitesPresent.Value, 0.003)
	if two.Points[1].Weight != 2 || two.Noise != saturation.Proportional ||
		two.Response.High != (saturation.Setting{Value: 100}) {
		t.Errorf("data set %+v", two)
	}
	if one.Noise != saturation.GivenSigma || !one.Response.High.Free ||
		one.Response.Differs["V"] != "preparation" {
		t.Errorf("data set %+v", one)
	}
	// pH is asked for by a mechanism: from the conditions here, from `at` there.
	if diff := cmp.Diff([]string{"7.5"}, one.Points[0].Levels); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]string{"7.0"}, two.Points[0].Levels); diff != "" {
		t.Error(diff)
	}
	near(t, "kelvin", a.Kelvin, 293.15)
	if !strings.Contains(strings.Join(two.Notes, "; "), "decimal commas") ||
		!strings.Contains(strings.Join(two.Notes, "; "), "3 of its 4 rows") {
		t.Errorf("notes %q", two.Notes)
	}
	if s.Defaults["data.alone.response.low"] != "0" ||
		s.Defaults["data.surface.noise"] != "given" || s.Defaults["fit.decide.draws"] != "199" {
		t.Errorf("defaults %v", s.Defaults)
	}
	sum := sha256.Sum256([]byte(surfaceTables["a.csv"]))
	if one.SHA256 != hex.EncodeToString(sum[:]) {
		t.Error("the digest is not that of the file")
	}
}

func TestMechanismsArriveInTheLigandsUnit(t *testing.T) {
	_, a := build(t, surface, surfaceTables)
	both := a.Candidates[0]
	near(t, "start of K_R", *both.Given["K_R"].Start, 0.05)
	near(t, "low end of K_R", *both.Given["K_R"].Low, 0.001)
	near(t, "high end of K_R", *both.Given["K_R"].High, 1)
	near(t, "c", *both.Given["c"].Fixed, 0.01)
	near(t, "start of alanine.K_T", *both.Given["alanine.K_T"].Start, 0.5)
	k := both.Rates["k_on"]
	near(t, "k_on in 1/(mM s)", k.Each[0], 1e4)
	x := both.Rates["exchange"]
	if k.Order != 2 || x.Order != 1 || len(x.Each) != 2 {
		t.Errorf("rates %+v", both.Rates)
	}
	near(t, "60 per minute", x.Each[1], 1)
	if got := a.Candidates[1].Name; got != "hill, K_half and n_H differ" {
		t.Errorf("a name was made: %q", got)
	}
	if diff := cmp.Diff(map[string]string{"Kd1": "data"}, a.Candidates[2].Differs); diff != "" {
		t.Error(diff)
	}
}

func TestRequestsArriveInTheLigandsUnit(t *testing.T) {
	_, a := build(t, surface, surfaceTables)
	near(t, "from", a.Curve.From, 0.001)
	near(t, "to", a.Curve.To, 10)
	if diff := cmp.Diff([]saturation.Held{{Name: "alanine", Levels: []string{"0", "500 uM"},
		Values: []float64{0, 0.5}}}, a.Curve.At); diff != "" {
		t.Error(diff)
	}
	want := []saturation.Phase{{Add: 0.01, Seconds: 1800}, {Dilute: 100, Seconds: 3600},
		{Block: 1, Seconds: 300}, {Wash: true, Seconds: 10}}
	if diff := cmp.Diff(want, a.Course.Phases); diff != "" {
		t.Error(diff)
	}
	if a.Plan.Series != 2 || a.Plan.Low != 0.001 || a.Plan.Aim != "discriminate" ||
		a.Plan.At[0].Values[0] != 5 {
		t.Errorf("plan %+v", a.Plan)
	}
}

func TestSitesFromBmax(t *testing.T) {
	s, complaints := Load(gallery.Files("crab"), "crab.yaml")
	if len(complaints) > 0 {
		t.Fatal(complaints)
	}
	a, _ := s.Build()
	// 1 fmol/mg · 0.30 mg/mL = 0.30 fmol/mL = 0.30 pmol/L = 3.0e-4 nM
	near(t, "nM per fmol/mg", a.Data[0].SitesPresent.FromBmax, 3.0e-4)
	blocked := 0
	for _, p := range a.Data[0].Points {
		if p.Blocked {
			blocked++
		}
	}
	if blocked != 36 || !a.Data[0].Total {
		t.Errorf("%d blocked tubes", blocked)
	}
}

// What is said inside a part reaches the fit under the part's name.
func TestConstantsOfParts(t *testing.T) {
	study := spoil(t, base, []edit{{"family: mwc, sites: 4}",
		"family: mixture, parts: {tight: 1, loose: {family: mwc, sites: 4, constants: {K_R: {start: 2 kPa}}}}, constants: {tight: {Kd: {start: 3}}}}"}})
	s, complaints := Load(memory{"study.yaml": []byte(study), "clam.csv": []byte(baseTable)}, "study.yaml")
	if len(complaints) > 0 {
		t.Fatal(complaints)
	}
	a, _ := s.Build()
	given := a.Candidates[1].Given
	near(t, "tight.Kd", *given["tight.Kd"].Start, 3)
	near(t, "loose.K_R, kPa in torr", *given["loose.K_R"].Start, 2*760/101.325)
}

// All families and all forms of their keys can be written.
func TestFormsOfMechanisms(t *testing.T) {
	list := `
  - hill
  - {family: adair, sites: 3}
  - {name: m1, family: mwc, sites: {alpha: 2, beta: 2}, differs: {all: k}}
  - {name: s1, family: sequential, contacts: [[1, 2], [2, 3]]}
  - {name: s2, family: sequential, contacts: ring, sites: 5}
  - {name: i1, family: independent, classes: {tight: 2, loose: 2}}
  - {name: x1, family: mixture, parts: {tight: 1, loose: {family: mwc, sites: 4}}}
  - {name: c1, family: conformations, conformations: {A: {sites: 2, K: K_A}, I: {sites: 2, K: K_I, weight: L_I}, held: {like: A, weight: r}}, differs: {all: k}}
  - {name: a1, family: assembly, small: {family: independent, classes: {dimer: 2}}, large: {family: adair, sites: 4}}
  - {name: t1, family: states, states: [{name: E, ligands: 0}, {name: ES, ligands: 1, ways: 2, constants: {K_S: -1}}, {name: ES2, ligands: 2, constants: {K_S: -1, K_2: -1}}]}
`
	study := "format: ligancy/1\ntitle: forms\nligand: {name: L, unit: uM}\ndata:\n  - {name: d, file: t.csv, columns: {ligand: x, response: y}, factors: [k], response: {kind: saturation}, sites_present: 2 uM}\nmechanisms:" + list
	table := "x,y,k\n"
	for i := range 40 {
		table += strings.Join([]string{number(float64(i + 1)),
			number(float64(i+1) / (float64(i) + 9)), string(rune('a' + i%2))}, ",") + "\n"
	}
	_, a := build(t, study, map[string]string{"t.csv": table})
	for _, c := range a.Candidates {
		if c.Mechanism == nil {
			t.Errorf("%s was not built", c.Name)
		}
	}
}

func TestFilesThatAreNoStudies(t *testing.T) {
	for name, c := range map[string]struct{ data, code string }{
		"binary": {"\x7fELF\x02\x01\x01\x00\x00", "binary-file"}, "UTF-16": {"\xff\xfef\x00o\x00",
			"utf-16"}, "Latin-1": {"title: \xb5\n", "not-utf-8"},
		"10 MB line": {"title: " + strings.Repeat("x", 10<<20), "file-too-large"},
		"long line":  {"title: " + strings.Repeat("x", 1<<17), "line-too-long"},
		"nothing":    {"", "empty-study"}, "a list": {"- a\n- b\n", "wrong-form"},
		"a word": {"hello\n", "wrong-form"}, "a workbook": {"PK\x03\x04\x00\x00",
			"binary-file"},
	} {
		t.Run(name, func(t *testing.T) {
			_, complaints := Load(memory{"s.yaml": []byte(c.data)}, "s.yaml")
			if len(complaints) == 0 || complaints[0].Code != c.code {
				t.Errorf("complaints %v, want %s", complaints, c.code)
			}
		})
	}
	for _, name := range []string{"none.yaml", "../s.yaml", "/s.yaml", "folder"} {
		_, complaints := Load(fstest.MapFS{"folder/x": {}}, name)
		if !complaints.HasErrors() {
			t.Errorf("%s was read", name)
		}
	}
}

// On a disk, links are not followed out of the folder, nor inside it.
func TestLinksOnADisk(t *testing.T) {
	dir := t.TempDir()
	write := func(name, data string) {
		if err := os.MkdirAll(filepath.Dir(filepath.Join(dir, name)), 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(filepath.Join(dir, name), []byte(data), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	write("study/study.yaml", spoil(t, base, []edit{{"clam.csv", "tables/clam.csv"}}))
	write("outside/clam.csv", baseTable)
	if err := os.Symlink(filepath.Join(dir, "outside"), filepath.Join(dir, "study",
		"tables")); err != nil {
		t.Skip(err)
	}
	root, err := os.OpenRoot(filepath.Join(dir, "study"))
	if err != nil {
		t.Fatal(err)
	}
	defer root.Close()
	_, complaints := Load(root.FS(), "study.yaml")
	if len(complaints) != 1 || complaints[0].Code != "link" {
		t.Errorf("below a root: %v", complaints)
	}
	_, complaints = Load(os.DirFS(filepath.Join(dir, "study")), "study.yaml")
	if len(complaints) != 1 || complaints[0].Code != "link" {
		t.Errorf("in a folder: %v", complaints)
	}
}

func TestStudyInAFolder(t *testing.T) {
	s, complaints := Load(memory{"a/b/study.yaml": []byte(base), "a/b/clam.csv": []byte(baseTable)},
		"a/b/study.yaml")
	if len(complaints) > 0 || s == nil {
		t.Fatal(complaints)
	}
}

// A complaint of which there are very many is said some times and counted.
func TestManyComplaints(t *testing.T) {
	table := "pH,prep,pO2_torr,sat,sd\n" + strings.Repeat("7.0,A,5,low,0.1\n", 50_000)
	_, complaints := Load(memory{"study.yaml": []byte(base), "clam.csv": []byte(table)},
		"study.yaml")
	last := complaints[len(complaints)-1]
	if len(complaints) != maxComplaints ||
		last.Notes[len(last.Notes)-1] != "There are 49980 more of this kind in clam.csv." {
		t.Errorf("%d complaints; the last: %v", len(complaints), last)
	}
}

// Nothing that fits into a study file keeps the reader busy for long.
func TestHugeStudies(t *testing.T) {
	many := func(f func(i int) string) string {
		var b strings.Builder
		for i := 0; b.Len() < maxStudy/4; i++ {
			b.WriteString(f(i))
		}
		return b.String()
	}
	for name, text := range map[string]string{
		"unknown keys":  many(func(i int) string { return fmt.Sprintf("k%d: 1\n", i) }),
		"one key":       many(func(int) string { return "a: 1\n" }),
		"tabs":          many(func(int) string { return "a:\t1\n" }),
		"second colons": many(func(int) string { return "a: b: c\n" }),
		"dashes":        many(func(int) string { return "- " }),
		"deep":          many(func(i int) string { return strings.Repeat(" ", min(i, 900)) + "a:\n" }),
		"brackets":      many(func(int) string { return "[" }),
		"open quotes":   many(func(int) string { return "a: \"\n" }),
		"bad lines":     many(func(i int) string { return fmt.Sprintf("k%d: x\n  y: z\n", i) }),
		"mechanisms":    base + many(func(int) string { return "  - hill\n" }),
		"more of them":  strings.Replace(base, "mechanisms:", "mechanisms:\n"+many(func(int) string { return "  - hill\n" }), 1),
		"aliases":       many(func(i int) string { return fmt.Sprintf("a%d: &a%d [*a%d, *a%d]\n", i+1, i+1, i, i) }),
	} {
		t.Run(name, func(t *testing.T) {
			start := time.Now()
			_, complaints := Load(memory{"study.yaml": []byte(text), "clam.csv": []byte(baseTable)}, "study.yaml")
			if !complaints.HasErrors() {
				t.Error("nothing was complained of")
			}
			if d := time.Since(start); d > 20*time.Second {
				t.Errorf("it took %v", d)
			}
			t.Logf("%v, %d complaints", time.Since(start), len(complaints))
		})
	}
}

func FuzzLoad(f *testing.F) {
	f.Add([]byte(base), []byte(baseTable))
	f.Add([]byte(surface), []byte(surfaceTables["a.csv"]))
	for _, c := range complaintCases {
		study, table := base, baseTable
		for _, e := range c.study {
			if e.from != "" {
				study = strings.Replace(study, e.from, e.to, 1)
			}
		}
		if len(study) < 4000 {
			f.Add([]byte(study), []byte(table))
		}
	}
	f.Fuzz(func(t *testing.T, study, table []byte) {
		s, complaints := Load(memory{"study.yaml": study, "clam.csv": table, "a.csv": table},
			"study.yaml")
		for _, d := range complaints {
			if d.Problem == "" || d.Code == "" || d.Line < 0 || d.Column < 0 || d.Column > 0 &&
				d.End < d.Column {
				t.Fatalf("complaint %+v", d)
			}
		}
		if err := diag.WriteText(&bytes.Buffer{}, complaints); err != nil {
			t.Fatal(err)
		}
		if s == nil {
			return
		}
		a, errs := s.Build()
		if a == nil && !errs.HasErrors() {
			t.Fatal("nothing was built, and nothing complained of")
		}
		if a == nil {
			return
		}
		for _, c := range a.Candidates {
			if c.Mechanism == nil {
				t.Fatalf("mechanism %q was not built, and nothing complained of", c.Name)
			}
		}
		for _, d := range a.Data {
			for _, p := range d.Points {
				if p.LeftOut == "" && (math.IsNaN(p.X) || math.IsInf(p.X, 0) || p.X < 0 ||
					math.IsNaN(p.Y) || math.IsInf(p.Y, 0)) {
					t.Fatalf("point %+v", p)
				}
			}
		}
	})
}
