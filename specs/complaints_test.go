package specs

import (
	"bytes"
	"flag"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"testing/fstest"

	"github.com/google/go-cmp/cmp"

	"ligancy/specs/diag"
)

var update = flag.Bool("update", false, "write the golden complaints anew")

// base is a study with nothing wrong; the cases below spoil it.
const base = `format: ligancy/1
title: Oxygen binding
conditions: {temperature: 15 degC}
ligand: {name: oxygen, unit: torr}
effectors: [{name: chloride, unit: mM}]
data:
  - name: curves
    file: clam.csv
    columns: {ligand: pO2_torr, response: sat, preparation: prep}
    factors: {pH: pH}
    at: {chloride: 5 mM}
    response: {kind: saturation, unit: fraction}
    noise: constant
mechanisms:
  - {name: Hill equation, family: hill, differs: {K_half: pH}}
  - {name: concerted, family: mwc, sites: 4}
contrasts:
  - {of: x_half, between: pH}
fit: {starts: 50, interval: {level: 0.95}}
`

const baseTable = `pH,prep,pO2_torr,sat,sd
7.6,A,0.5,0.02,0.01
7.6,A,2,0.07,0.01
7.6,A,5,0.44,0.01
7.6,A,9,0.79,0.01
7.6,B,16,0.92,0.01
7.6,B,50,0.98,0.01
7.0,A,0.5,0.01,0.01
7.0,A,2,0.03,0.01
7.0,A,5,0.16,0.01
7.0,B,9,0.48,0.01
7.0,B,16,0.84,0.01
7.0,B,50,0.98,0.01
`

// edit replaces text, which must be there.
type edit struct{ from, to string }

// spoil applies edits.
func spoil(t *testing.T, text string, edits []edit) string {
	t.Helper()
	for _, e := range edits {
		if e.from != "" && !strings.Contains(text, e.from) {
			t.Fatalf("%q is not in the text", e.from)
		}
		if e.from == "" {
			text = e.to
			continue
		}
		text = strings.Replace(text, e.from, e.to, 1)
	}
	return text
}

// complaintCases: a name, how the study is spoiled, how the table is.
var complaintCases = []struct {
	name         string
	study, table []edit
}{
	{name: "a sheet of a text file", study: []edit{{"file: clam.csv", "file: clam.csv\n    sheet: day 1"}}},
	// YAML's silent slips.
	{name: "comma ended a name", study: []edit{{"{name: chloride,", "{name: 2,3-BPG,"}}},
	{name: "comma ended a number",
		study: []edit{{"sites: 4}", "sites: 4, constants: {c: {start: 0,01}}}"}}},
	{name: "no blank after a colon inside brackets", study: []edit{{"{name: concerted,",
		"{name:concerted,"}}},
	{name: "no blank after a colon", study: []edit{{"noise: constant", "noise:constant"}}},
	{name: "no value inside brackets", study: []edit{{"sites: 4}", "sites}"}}},
	{name: "no value", study: []edit{{"title: Oxygen binding", "title:"}}},
	{name: "null", study: []edit{{"title: Oxygen binding", "title: ~"}}},
	{name: "remark without a blank", study: []edit{{"title: Oxygen binding",
		"title: Oxygen binding #2"}}},
	{name: "repeated key", study: []edit{{"noise: constant", "noise: constant\n    name: again"}}},
	{name: "second document", study: []edit{{"contrasts:", "---\ncontrasts:"}}},
	{name: "anchor and alias", study: []edit{{"{kind: saturation, unit: fraction}",
		"&r {kind: saturation, unit: fraction}"}, {"noise: constant", "noise: *r"}}},
	{name: "merge", study: []edit{{"noise: constant", "<<: {noise: constant}"}}},
	{name: "tag", study: []edit{{"noise: constant", "noise: !!str constant"}}},
	{name: "tab for indentation", study: []edit{{"    noise: constant", "\tnoise: constant"}}},
	{name: "tab after a colon", study: []edit{{"noise: constant", "noise:\tconstant"}}},
	{name: "no-break space", study: []edit{{"noise: constant", "noise:\u00a0constant"}}},
	{name: "zero-width blank", study: []edit{{"title: Oxygen", "title: \u200bOxygen"}}},
	{name: "percent sign as unit", study: []edit{{"unit: fraction", "unit: %"}}},
	{name: "at sign", study: []edit{{"noise: constant", "noise: @constant"}}},
	{name: "second colon", study: []edit{{"title: Oxygen binding", "title: Oxygen: binding"}}},
	{name: "second colon inside brackets", study: []edit{{"name: concerted, family: mwc",
		"name: concerted family: mwc"}}},
	{name: "name in brackets", study: []edit{{"{name: chloride,", "{name: [36Cl]chloride,"}}},
	{name: "name in brackets on a line", study: []edit{{"title: Oxygen binding",
		"title: [3H]octopamine"}}},
	{name: "text after a quotation", study: []edit{{"title: Oxygen binding",
		`title: "Oxygen" binding`}}},
	{name: "open quotation", study: []edit{{"title: Oxygen binding", `title: "Oxygen binding`}}},
	{name: "open bracket", study: []edit{{"prep}", "prep"}}},
	{name: "wrong bracket", study: []edit{{"prep}", "prep]"}}},
	{name: "directive", study: []edit{{"format:", "%YAML 1.2\nformat:"}}},
	{name: "yes for true", study: []edit{{"fit:",
		"course: {phases: [{wash: yes, for: 10 min}]}\nfit:"}}},
	{name: "decimal comma", study: []edit{{"level: 0.95}}",
		"level: 0.95}}\ncurve:\n  from: 0,1 torr"}}},
	{name: "alias bomb", study: []edit{{"title: Oxygen binding",
		"title: Oxygen binding\na: &a [x, x]\nb: &b [*a, *a, *a]\nc: [*b, *b, *b]"}}},
	{name: "twenty thousand brackets", study: []edit{{"title: Oxygen binding",
		"title: " + strings.Repeat("[", 20000)}}},
	{name: "many dashes", study: []edit{{"contrasts:\n", "contrasts:\n  " + strings.Repeat("- ",
		60) + "\n"}}},
	{name: "indentation", study: []edit{{"    noise: constant", "   noise: constant"}}},
	{name: "question mark", study: []edit{{"title: Oxygen binding", "? title\n: Oxygen binding"}}},
	{name: "key that is a list", study: []edit{{"title: Oxygen binding",
		"[a, b]: Oxygen binding"}}},
	{name: "two slips and a wrong key", study: []edit{{"title: Oxygen binding", "title: a: b"},
		{"noise:", "nosie:"}, {"unit: torr", "unit: %"}}},

	// Keys and forms.
	{name: "unknown key", study: []edit{{"noise: constant", "nosie: constant"}}},
	{name: "unknown key far from any", study: []edit{{"noise: constant", "zebra: constant"}}},
	{name: "missing format", study: []edit{{"format: ligancy/1\n", ""}}},
	{name: "other format", study: []edit{{"ligancy/1", "ligancy/2"}}},
	{name: "missing file key", study: []edit{{"    file: clam.csv\n", ""}}},
	{name: "list wanted", study: []edit{{"mechanisms:\n  - {name: Hill equation, family: hill, differs: {K_half: pH}}\n  - {name: concerted, family: mwc, sites: 4}", "mechanisms: {family: hill}"}}},
	{name: "mapping wanted", study: []edit{{"ligand: {name: oxygen, unit: torr}",
		"ligand: oxygen"}}},
	{name: "word wanted", study: []edit{{"noise: constant", "noise: [constant]"}}},
	{name: "unknown word", study: []edit{{"noise: constant", "noise: proportionl"}}},
	{name: "whole number wanted", study: []edit{{"starts: 50", "starts: 5.5"}}},
	{name: "number wanted", study: []edit{{"starts: 50", "starts: many"}}},
	{name: "out of bounds", study: []edit{{"level: 0.95", "level: 95"}}},
	{name: "setting misspelt", study: []edit{{"unit: fraction}", "unit: fraction, high: fre}"}}},
	{name: "empty text", study: []edit{{"title: Oxygen binding", `title: " "`}}},
	{name: "empty study", study: []edit{{"", "# nothing\n"}}},
	{name: "no data", study: []edit{{"",
		"format: ligancy/1\nligand: {name: oxygen, unit: torr}\nmechanisms: [hill]\n"}}},

	// Units.
	{name: "unknown unit", study: []edit{{"unit: torr", "unit: tor"}}},
	{name: "unit of one's own", study: []edit{{"unit: torr", "unit: scoops"}}},
	{name: "pressure for concentration", study: []edit{{"ligand: pO2_torr",
		"ligand: {name: pO2_torr, unit: uM}"}}},
	{name: "length for concentration", study: []edit{{"name: oxygen, unit: torr",
		"name: oxygen, unit: uM"}, {"ligand: pO2_torr", "ligand: {name: pO2_torr, unit: nm}"}}},
	{name: "logarithm for the ligand", study: []edit{{"unit: torr", "unit: log10 torr"}}},
	{name: "logarithm of a response", study: []edit{{"kind: saturation, unit: fraction",
		"kind: signal, unit: log10 mM"}}},
	{name: "saturation in another unit", study: []edit{{"unit: fraction", "unit: nM"}}},
	{name: "effector in the wrong unit", study: []edit{{"chloride: 5 mM", "chloride: 5 mg/mL"}}},
	{name: "effector not a quantity", study: []edit{{"chloride: 5 mM", "chloride: some"}}},
	{name: "temperature without unit", study: []edit{{"15 degC", "15"}}},
	{name: "temperature misspelt", study: []edit{{"15 degC", "15 C"}}},
	{name: "temperature out of reach", study: []edit{{"15 degC", "15 K"}}},
	{name: "incubation without unit", study: []edit{{"noise: constant", "incubation: 90"}}},
	{name: "header names another unit", study: []edit{{"unit: torr", "unit: kPa"}}},
	{name: "unit for a constant without one",
		study: []edit{{"sites: 4}",
			"sites: 4, constants: {L: {start: 5 torr}, K_R: {range: [1 nM, 2]}}}"}}},
	{name: "sites present in the wrong unit", study: []edit{{"noise: constant",
		"sites_present: 3 min"}}},
	{name: "sites present against total pressure", study: []edit{{"noise: constant",
		"sites_present: 80 uM\n    ligand_axis: total"}}},
	{name: "sites from no Bmax", study: []edit{{"noise: constant",
		"sites_present: {from: Bmax, at: 1 mg/mL}"}}},
	{name: "sites from Bmax in the wrong unit", study: []edit{{"unit: torr", "unit: nM"},
		{"kind: saturation, unit: fraction", "kind: bound, unit: fmol/mg"}, {"noise: constant",
			"sites_present: {from: Bmax, at: 3 mM}"}}},

	// Files.
	{name: "missing file", study: []edit{{"clam.csv", "clan.csv"}}},
	{name: "file above the folder", study: []edit{{"clam.csv", "../clam.csv"}}},
	{name: "absolute file", study: []edit{{"clam.csv", "/etc/passwd"}}},
	{name: "backslash", study: []edit{{"clam.csv", `tables\clam.csv`}}},
	{name: "folder for a file", study: []edit{{"clam.csv", "more"}}},
	{name: "link", study: []edit{{"clam.csv", "link.csv"}}},
	{name: "empty table", table: []edit{{"", ""}}},

	// Columns and rows.
	{name: "missing column", study: []edit{{"ligand: pO2_torr", "ligand: pO2"}}},
	{name: "missing ligand column", study: []edit{{"ligand: pO2_torr, ", ""}}},
	{name: "missing factor column", study: []edit{{"{pH: pH}", "{pH: acidity}"}}},
	{name: "misspelt column key", study: []edit{{"preparation: prep}", "preperation: prep}"}}},
	{name: "column of no effector", study: []edit{{"preparation: prep}",
		"preparation: prep, sulphate: sd}"}}},
	{name: "effector without a level", study: []edit{{"    at: {chloride: 5 mM}\n", ""}}},
	{name: "factor twice", study: []edit{{"{chloride: 5 mM}", "{chloride: 5 mM, pH: 7}"}}},
	{name: "factor with a reserved name", study: []edit{{"factors: {pH: pH}",
		"factors: {pH: pH, data: prep}"}}},
	{name: "effector with a reserved name", study: []edit{{"name: chloride", "name: weight"},
		{"{chloride: 5 mM}", "{weight: 5 mM}"}}},
	{name: "rows of a missing column", study: []edit{{"noise: constant", "rows: {acid: 7}"}}},
	{name: "rows that match nothing", study: []edit{{"noise: constant", "rows: {pH: 8}"}}},
	{name: "rows that match in part", study: []edit{{"noise: constant", "rows: {prep: [A, b]}"}}},
	{name: "rows in an empty range", study: []edit{{"noise: constant",
		"rows: {pO2_torr: {from: 100}}"}}},
	{name: "text where a number stands", table: []edit{{"0.44", "low"}}},
	{name: "decimal comma in a cell", table: []edit{{"0.44", `"0,44"`}}},
	{name: "point among decimal commas", study: []edit{{"noise: constant", "decimal: comma"}},
		table: []edit{{"", "pH;prep;pO2_torr;sat\n7,6;A;0,5;0,02\n7,6;A;1;0.5\n7;A;2;0,7\n"}}},
	{name: "NaN", table: []edit{{"0.44", "NaN"}}},
	{name: "empty cell", table: []edit{{"0.44", ""}}},
	{name: "negative concentration", table: []edit{{"A,5,0.44", "A,-5,0.44"}}},
	{name: "missing preparation", table: []edit{{"A,5,0.44", ",5,0.44"}}},
	{name: "missing level", table: []edit{{"7.6,A,5,0.44", ",A,5,0.44"}}},
	{name: "ragged row", table: []edit{{"0.44,0.01", "0.44"}}},
	{name: "repeated column", table: []edit{{"sat,sd", "sat,sat"}}},
	{name: "one column", table: []edit{{"", "pO2 sat\n1 2\n"}}},
	{name: "sem without n", study: []edit{{"preparation: prep}", "preparation: prep, sem: sd}"}}},
	{name: "sigma of zero", study: []edit{{"preparation: prep}", "preparation: prep, sigma: sd}"},
		{"noise: constant", "noise: given"}}, table: []edit{{"0.44,0.01", "0.44,0"}}},
	{name: "weight of zero", study: []edit{{"preparation: prep}",
		"preparation: prep, weight: sd}"}}, table: []edit{{"0.44,0.01", "0.44,0"}}},
	{name: "sigma and weight", study: []edit{{"preparation: prep}",
		"preparation: prep, sigma: sd, weight: sd}"}, {"noise: constant", "noise: given"}}},
	{name: "sigma and sem", study: []edit{{"preparation: prep}",
		"preparation: prep, sigma: sd, sem: sd, n: 3}"}, {"noise: constant", "noise: given"}}},
	{name: "given noise without sigma", study: []edit{{"noise: constant", "noise: given"}}},
	{name: "sigma not used", study: []edit{{"preparation: prep}",
		"preparation: prep, sigma: sd}"}}},
	{name: "replicate noise without replicates", study: []edit{{"noise: constant",
		"noise: replicates"}}},
	{name: "blocked without a column", study: []edit{{"noise: constant", "blocked_when: blocked"}}},
	{name: "nothing blocked", study: []edit{{"preparation: prep}",
		"preparation: prep, blocked: prep}"}}},
	{name: "all blocked", study: []edit{{"preparation: prep}", "preparation: prep, blocked: sd}"},
		{"noise: constant", "blocked_when: 0.01"}}},
	{name: "everything left out", study: []edit{{"preparation: prep}",
		"preparation: prep, left_out: prep}"}}},
	{name: "all responses equal", study: []edit{{"response: sat,", "response: sd,"}}},
	{name: "one ligand value", study: []edit{{"ligand: pO2_torr,", "ligand: sd,"}}},
	{name: "percent for fraction", study: []edit{{"unit: fraction", "unit: fraction"}},
		table: []edit{{"0.44", "44"}}},
	{name: "fraction for percent", study: []edit{{"unit: fraction", "unit: percent, high: 1"}}},
	{name: "time without phases", study: []edit{{"preparation: prep}",
		"preparation: prep, time: {name: sd, unit: min}}"}}},
	{name: "phase that does two things", study: []edit{{"noise: constant",
		"phases: [{add: 5 torr, wash: true, for: 3 min}, {add: 0, for: 3}]"}}},

	// Responses.
	{name: "key of another kind of response", study: []edit{{"unit: fraction}",
		"unit: fraction, Bmax: free}"}}},
	{name: "no span", study: []edit{{"unit: fraction}", "unit: fraction, low: 1}"}}},
	{name: "Bmax of zero", study: []edit{{"kind: saturation, unit: fraction",
		"kind: bound, unit: fmol/mg, Bmax: 0"}}},
	{name: "Bmax and sites", study: []edit{{"kind: saturation, unit: fraction",
		"kind: bound, sites: 4, Bmax: free"}}},
	{name: "Bmax is sites for a Hill equation", study: []edit{{"kind: saturation, unit: fraction",
		"kind: bound, Bmax: sites"}}},
	{name: "number that differs but is set", study: []edit{{"unit: fraction}",
		"unit: fraction, differs: {high: preparation}}"}}},
	{name: "number that does not exist differs", study: []edit{{"unit: fraction}",
		"unit: fraction, differs: {hihg: preparation}}"}}},
	{name: "differs by nothing known", study: []edit{{"unit: fraction}",
		"unit: fraction, high: free, differs: {high: salt}}"}}},
	{name: "counts an unknown ligand", study: []edit{{"unit: fraction}",
		"unit: fraction, of: tracer}"}}},
	{name: "counts a ligand that is not bound", study: []edit{{"unit: fraction}",
		"unit: fraction, of: chloride}"}}},
	{name: "total axis without sites", study: []edit{{"noise: constant", "ligand_axis: total"}}},
	{name: "Hill equation on a total axis", study: []edit{{"unit: torr", "unit: uM"},
		{"ligand: pO2_torr", "ligand: {name: pO2_torr, unit: uM}"}, {"noise: constant",
			"ligand_axis: total\n    sites_present: 1 uM"}}},

	// Mechanisms.
	{name: "unknown family", study: []edit{{"family: mwc", "family: mcw"}}},
	{name: "key of another family", study: []edit{{"sites: 4}", "sites: 4, classes: {tight: 2}}"}}},
	{name: "two mechanisms of one name", study: []edit{{"name: concerted", "name: Hill equation"}}},
	{name: "two mechanisms without a name",
		study: []edit{{"  - {name: concerted, family: mwc, sites: 4}",
			"  - {family: mwc, sites: 4}\n  - {family: mwc, sites: 2, constants: {c: 0}}"}}},
	{name: "differs by an unknown factor", study: []edit{{"{K_half: pH}", "{K_half: ph}"}}},
	{name: "differs by a preparation nobody names", study: []edit{{", preparation: prep", ""},
		{"{K_half: pH}", "{K_half: preparation}"}}},
	{name: "unknown constant differs", study: []edit{{"{K_half: pH}", "{K_haf: pH}"}}},
	{name: "factor with one level", study: []edit{{"noise: constant", "rows: {pH: 7}"}}},
	{name: "nothing said of a constant",
		study: []edit{{"sites: 4}", "sites: 4, constants: {K_R: {}}}"}}},
	{name: "constant fixed and started",
		study: []edit{{"sites: 4}", "sites: 4, constants: {K_R: {fixed: 1, start: 2}}}"}}},
	{name: "range of one number",
		study: []edit{{"sites: 4}", "sites: 4, constants: {K_R: {range: [1]}}}"}}},
	{name: "effector nobody knows",
		study: []edit{{"sites: 4}", "sites: 4, effectors: {sulphate: {binds: T}}}"}}},
	{name: "effector at the wrong place",
		study: []edit{{"sites: 4}", "sites: 4, effectors: {chloride: {binds: Q}}}"}}},
	{name: "too few points", study: []edit{{"noise: constant", "rows: {pO2_torr: {from: 16}}"},
		{"family: mwc, sites: 4", "family: adair, sites: 4"}}},
	{name: "assembly without sites present", study: []edit{{"family: mwc, sites: 4",
		"family: assembly, small: 2, large: 4"}}},
	{name: "unit of a rate", study: []edit{{"sites: 4}",
		"sites: 4, rates: {k_on: 1e7 1/(M s), k_off: 5, exchange: 3 mM}}"}}},
	{name: "shift without preparations", study: []edit{{", preparation: prep", ""},
		{"sites: 4}", "sites: 4, preparation: shift}"}}},
	{name: "own end that no response has",
		study: []edit{{"sites: 4}", "sites: 4, response: {V: free}}"}}},

	// Names, contrasts and requests.
	{name: "two data sets of one name", study: []edit{{"mechanisms:",
		"  - {name: curves, file: clam.csv, columns: {ligand: pO2_torr, response: sat}, factors: [pH], at: {chloride: 0}, response: {kind: saturation}}\nmechanisms:"}}},
	{name: "effector of the ligand's name", study: []edit{{"name: chloride", "name: oxygen"},
		{"{chloride: 5 mM}", "{oxygen: 5 mM}"}}},
	{name: "contrast of something unknown", study: []edit{{"of: x_half", "of: [x_haf]"}}},
	{name: "contrast between nothing known", study: []edit{{"between: pH", "between: ph"}}},
	{name: "contrast between one level", study: []edit{{"noise: constant", "rows: {pH: 7.0}"},
		{", differs: {K_half: pH}", ""}}},
	{name: "curve that ends before it begins",
		study: []edit{{"fit:", "curve: {from: 5 torr, to: 1 torr, at: {pH: [7, 8], acidity: 3, chloride: [1, -2]}}\nfit:"}}},
	{name: "plan with a strange series",
		study: []edit{{"fit:", "plan: {range: [1 torr, 0.5 torr], series: twofold}\nfit:"}}},
	{name: "curve without data or ends",
		study: []edit{{"", "format: ligancy/1\nligand: {name: oxygen, unit: torr}\nmechanisms: [hill]\ncurve: {points: 20}\n"}}},
}

// complaintsOf loads a spoiled study.
func complaintsOf(t *testing.T, study, table []edit) diag.List {
	t.Helper()
	fsys := fstest.MapFS{
		"study.yaml": {Data: []byte(spoil(t, base, study))},
		"clam.csv":   {Data: []byte(spoil(t, baseTable, table))},
		"more/a.csv": {Data: []byte("x")},
		"link.csv":   {Data: []byte("clam.csv"), Mode: os.ModeSymlink | 0o777},
	}
	_, complaints := Load(fsys, "study.yaml")
	return complaints
}

func TestComplaints(t *testing.T) {
	if got := complaintsOf(t, nil, nil); len(got) != 0 {
		t.Fatalf("the study without faults: %v", got)
	}
	seen := map[string]bool{}
	for _, c := range complaintCases {
		t.Run(c.name, func(t *testing.T) {
			golden := filepath.Join("testdata", "complaints", strings.NewReplacer(" ", "_", "'",
				"").Replace(c.name)+".txt")
			if seen[golden] {
				t.Fatal("two cases of one name")
			}
			seen[golden] = true
			complaints := complaintsOf(t, c.study, c.table)
			for _, d := range complaints {
				if len(d.Remedies) == 0 && len(d.Notes) == 0 {
					t.Errorf("%v: nothing is said of what to write", d)
				}
			}
			var b bytes.Buffer
			if err := diag.WriteText(&b, complaints); err != nil {
				t.Fatal(err)
			}
			if b.Len() == 0 {
				t.Fatal("no complaint")
			}
			if *update {
				if err := os.WriteFile(golden, b.Bytes(), 0o644); err != nil {
					t.Fatal(err)
				}
			}
			want, err := os.ReadFile(golden)
			if err != nil {
				t.Fatal(err)
			}
			if diff := cmp.Diff(string(want), b.String()); diff != "" {
				t.Error(diff)
			}
		})
	}
}

// Every code in the sources occurs in a case here, or in a test that is named.
func TestEveryComplaintHasACase(t *testing.T) {
	seen := map[string]bool{}
	for _, elsewhere := range []string{
		"bad-mechanism",                                                         // TestFaultsThatFamiliesFind
		"binary-file", "file-too-large", "line-too-long", "not-utf-8", "utf-16", // TestFilesThatAreNoStudies
		"no-curve",                                                                                  // TestNothingToSuggest
		"hidden-row", "no-header", "no-rows", "quotation-mark", "too-many-columns", "too-many-rows", // package table
		"truth-value", "formula-error", "which-sheet", "long-cell", "merged-cells", // package table, of workbooks
	} {
		seen[elsewhere] = true
	}
	for _, c := range complaintCases {
		for _, d := range complaintsOf(t, c.study, c.table) {
			seen[d.Code] = true
		}
	}
	code := regexp.MustCompile(`"([a-z0-9]+(?:-[a-z0-9]+)+)"`)
	for _, pattern := range []string{"*.go", "table/*.go", "diag/*.go"} {
		files, err := filepath.Glob(pattern)
		if err != nil {
			t.Fatal(err)
		}
		for _, f := range files {
			source, err := os.ReadFile(f)
			if err != nil || strings.HasSuffix(f, "_test.go") {
				continue
			}
			for _, m := range code.FindAllStringSubmatch(string(source), -1) {
				if !seen[m[1]] {
					t.Errorf("%s: no case complains of %s", f, m[1])
				}
			}
		}
	}
	golden, err := filepath.Glob("testdata/complaints/*.txt")
	if err != nil || len(golden) != len(complaintCases) {
		t.Errorf("%d golden files for %d cases, %v", len(golden), len(complaintCases), err)
	}
}

// What a family finds wrong is said at the key that it names, in its own words.
func TestFaultsThatFamiliesFind(t *testing.T) {
	for _, c := range []struct {
		name   string
		change edit
		marked string
	}{
		{"missing sites", edit{"family: mwc, sites: 4", "family: mwc"},
			"{name: concerted, family: mwc}"},
		{"unknown contacts", edit{"family: mwc, sites: 4", "family: sequential, contacts: squar"},
			"squar"},
		{"unknown constant", edit{"sites: 4}", "sites: 4, constants: {K_Q: {start: 1}}}"},
			"{start: 1}"},
		{"constant below zero", edit{"sites: 4}", "sites: 4, constants: {K_R: {start: -1}}}"},
			"-1"},
		{"in a part", edit{"family: mwc, sites: 4",
			"family: mixture, parts: {a: 1, b: {family: sequential, contacts: squar}}"}, "squar"},
	} {
		t.Run(c.name, func(t *testing.T) {
			complaints := complaintsOf(t, []edit{c.change}, nil)
			if len(complaints) != 1 || complaints[0].Code != "bad-mechanism" {
				t.Fatalf("complaints %v", complaints)
			}
			d := complaints[0]
			if got := d.Source[d.Column-1 : d.End-1]; got != c.marked {
				t.Errorf("%v: %q is marked, want %q", d, got, c.marked)
			}
		})
	}
}
