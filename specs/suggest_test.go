package specs

import (
	"bytes"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"ligancy/specs/diag"
	"ligancy/specs/gallery"
)

// started loads the starting study of a table; what it complains of is returned too.
func started(t *testing.T, name string, data []byte) (string, *Study, diag.List) {
	t.Helper()
	text, complaints := Suggest(name, data)
	if complaints != nil {
		t.Fatalf("%s: %v", name, complaints)
	}
	study := strings.TrimSuffix(name, filepath.Ext(name)) + ".yaml"
	s, l := Load(memory{study: text, name: data}, study)
	return string(text), s, l
}

// Every table that the project carries has a starting study without faults.
func TestSuggestedStudiesLoad(t *testing.T) {
	tables := map[string][]byte{}
	for _, name := range gallery.Names() {
		data, err := fs.ReadFile(gallery.Files(name), name+".csv")
		if err != nil {
			t.Fatal(err)
		}
		tables[name+".csv"] = data
	}
	files, err := filepath.Glob("../testdata/*.csv")
	if err != nil || len(files) < 5 {
		t.Fatalf("%v, %v", files, err)
	}
	for _, f := range files {
		data, err := os.ReadFile(f)
		if err != nil {
			t.Fatal(err)
		}
		tables[filepath.Base(f)] = data
	}
	for name, data := range tables {
		t.Run(name, func(t *testing.T) {
			text, _, complaints := started(t, name, data)
			if complaints.HasErrors() {
				t.Errorf("%s\n%v", text, complaints)
			}
		})
	}
}

func TestSuggestions(t *testing.T) {
	for _, c := range []struct {
		name, table string
		has         []string
	}{
		{"replicates and a decimal comma",
			"conc_uM;sat_1;sat_2\n0,1;0,05;0,06\n0,5;0,2;0,25\n2;0,5;0,6\n8;0,8;0,9\n32;0,95;0,97\n128;0,98;0,99\n", []string{
				"unit: uM}", "response: [sat_1, sat_2]", "decimal commas were read",
				"kind: saturation, unit: fraction"}},
		{"percent", "pO2_kPa,saturation\n1,4\n2,20\n4,60\n6,80\n9,92\n12,97\n20,99\n",
			[]string{"unit: kPa}", "{name: saturation, unit: percent}", "kind: saturation"}},
		{"logarithms", "log10_M,signal\n-9,1\n-8,2\n-7,5\n-6,9\n-5,10\n-4,10.5\n-3,10.4\n",
			[]string{"{name: log10_M, unit: log10 M}", "unit: M}", "kind: signal"}},
		{"no units at all", "a,b\n1,0.1\n2,0.2\n3,0.3\n5,0.35\n8,0.4\n13,0.45\n",
			[]string{`unit: "unit not stated"`, "which the header does not name", "check this"}},
		{"mean, sem and n", "dose_nM,response,sem,n\n1,2,0.1,3\n3,4,0.1,3\n10,9,0.2,3\n30,15,0.2,3\n100,18,0.1,3\n300,19,0.1,3\n", []string{"sem: sem", "n: n", "noise: given"}},
		{"few points", "conc_uM,sat\n1,0.1\n2,0.3\n4,0.6\n8,0.8\n",
			[]string{"Left out, because these points are too few", "Hill equation"}},
		{"replicates with units in brackets", "[ATP] (mM),v rep1 (nkat/mg),v rep2 (nkat/mg),other\n0.1,1,1.1,5\n0.3,2,2.1,6\n1,4,4.1,7\n3,6,6.2,5\n10,7,7.2,4\n30,8,8.1,8\n",
			[]string{`response: ["v rep1 (nkat/mg)", "v rep2 (nkat/mg)"]`, "{name: ATP, unit: mM}", "unit: nkat/mg"}},
		{"umlauts", "Konz. (µM);Sättigung 1;Sättigung 2;Präparation\n0,1;0,05;0,06;A\n0,5;0,2;0,25;A\n2;0,5;0,6;A\n8;0,8;0,9;B\n32;0,95;0,97;B\n128;0,98;0,99;B\n",
			[]string{`preparation: "Präparation"`, `response: ["Sättigung 1", "Sättigung 2"]`, "kind: saturation"}},
		{"logarithms in brackets", "Agonist [log M]\tResponse (% of max)\n-9\t1\n-8\t5\n-7\t22\n-6\t60\n-5\t90\n-4\t98\n",
			[]string{`{name: "Agonist [log M]", unit: log10 M}`, `unit: "% of max"`, "unit: M}"}},
		{"logarithms unsaid", "dose,y\n-9,1\n-8,5\n-7,22\n-6,60\n-5,90\n-4,98\n",
			[]string{"{name: dose, unit: log10 M}", "taken for decadic logarithms of M"}},
		{"oxygen in per cent", "pO2 [kPa],SO2 %,pH\n1,5,7.4\n2,20,7.4\n3,40,7.4\n4,60,7.4\n6,80,7.4\n10,95,7.4\n1,3,7.2\n2,12,7.2\n3,28,7.2\n4,48,7.2\n6,72,7.2\n10,90,7.2\n",
			[]string{"name: oxygen, symbol: pO2, unit: kPa", `{name: "SO2 %", unit: percent}`, "kind: saturation", "factors: {pH: pH}"}},
		{"nonspecific in a column", "Added [nM],Total bound (dpm),NSB (dpm)\n0.1,100,10\n0.3,280,30\n1,700,100\n3,1500,300\n10,3000,1000\n30,5500,3000\n",
			[]string{`unit: "dpm"`, "column NSB (dpm) looks like nonspecific binding", "{name: ligand, unit: nM}"}},
		{"added ligand", "added_nM,bound_fmol_mg\n1,20\n2,40\n4,70\n8,100\n16,120\n32,130\n",
			[]string{`the header says "added"`, "kind: bound, unit: fmol/mg"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			text, _, complaints := started(t, "t.csv", []byte(c.table))
			if complaints.HasErrors() {
				t.Errorf("%s\n%v", text, complaints)
			}
			for _, want := range c.has {
				if !strings.Contains(text, want) {
					t.Errorf("%q is not in\n%s", want, text)
				}
			}
		})
	}
}

func TestNothingToSuggest(t *testing.T) {
	for table, code := range map[string]string{"": "empty-table",
		"name,place\nA,here\nB,there\n": "no-curve", "x y\n1 2\n": "one-column"} {
		text, complaints := Suggest("t.csv", []byte(table))
		if text != nil || len(complaints) == 0 || complaints[0].Code != code {
			t.Errorf("%q: %q, %v; want %s", table, text, complaints, code)
		}
	}
}

func TestUnitsInHeaders(t *testing.T) {
	for header, want := range map[string]string{
		"pO2_torr": "torr", "conc (uM)": "uM", "L / nM": "nM", "conc_ng_per_ml": "ng/mL",
		"log10_M": "log10 M", "v_nkat_mg": "nkat/mg",
		"bound [fmol/mg]": "fmol/mg", "saturation_percent": "percent", "sat": "", "pH": "", "K": "",
		"prep_A": "", "x_m": "", "t_min": "min", "SO2 %": "percent", "A [log M]": "log10 M",
		"log[ATP] (M)": "log10 M", "log(conc) [mM]": "log10 mM", "%": "",
	} {
		u, ok := unitInHeader(header)
		got := ""
		if ok {
			got = u.String()
		}
		if diff := cmp.Diff(want, got); diff != "" {
			t.Errorf("%s: %s", header, diff)
		}
	}
}

func FuzzSuggest(f *testing.F) {
	for _, s := range []string{"conc_uM,sat\n1,0.1\n2,0.3\n", "a;b\n0,5;1\n1;2\n3;4\n",
		"\"x\ny\",null\n1,2\n2,3\n4,5\n", "~,a: b\n1,2\n2,3\n4,5\n", "[x],#y\n1,2\n2,3\n4,5\n"} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		text, complaints := Suggest("t.csv", data)
		if text == nil {
			if !complaints.HasErrors() {
				t.Fatal("no study and no complaint")
			}
			return
		}
		_, complaints = Load(memory{"t.yaml": text, "t.csv": data}, "t.yaml")
		for _, d := range complaints {
			switch d.Code {
			case "not-yaml", "unknown-key", "missing-column", "wrong-form", "second-colon",
				"odd-blank", "open-quotation", "open-bracket", "unknown-unit", "repeated-key",
				"missing-key":
				var b bytes.Buffer
				_ = diag.WriteText(&b, complaints)
				t.Fatalf("%s\n%s", text, b.String())
			}
		}
	})
}
