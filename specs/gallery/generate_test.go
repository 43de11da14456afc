package gallery

import (
	"bytes"
	"flag"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"testing"
)

var update = flag.Bool("update", false, "write the invented tables anew")

// The data of oyster and crab are drawn here, so that everybody can see what
// the truth behind them is. Those of clam are invented too, and fixed.

// oyster: velocities of pyruvate kinase against PEP and alanine. Truth: MWC,
// four sites, alanine on both conformations at a site of its own; V differs
// between preparations; scatter proportional, 4 %.
func oyster() []byte {
	const (
		sites, kR, kT    = 4, 0.08, 8.0 // mM PEP
		l                = 2000.0
		alaninR, alaninT = 20.0, 0.6 // mM alanine
		scatter          = 0.04
	)
	v := []float64{96, 111, 87, 103} // nkat/mg
	r := rand.New(rand.NewPCG(1931, 4))
	var b bytes.Buffer
	fmt.Fprintln(&b, "prep,ala_mM,pep_mM,v_nkat_mg")
	for i, prep := range []string{"A", "B", "C", "D"} {
		for _, ala := range []float64{0, 0.5, 2, 8} {
			for _, pep := range []float64{0.02, 0.05, 0.1, 0.2, 0.4, 0.8, 1.5, 3, 6, 12} {
				a, c := pep/kR, kR/kT
				q := l * math.Pow((1+ala/alaninT)/(1+ala/alaninR), sites)
				bound := a*math.Pow(1+a, sites-1) + q*c*a*math.Pow(1+c*a, sites-1)
				y := bound / (math.Pow(1+a, sites) + q*math.Pow(1+c*a, sites))
				fmt.Fprintf(&b, "%s,%v,%v,%.4g\n", prep, ala, pep,
					v[i]*y*(1+scatter*r.NormFloat64()))
			}
		}
	}
	return b.Bytes()
}

// crab: octopamine bound to nerve membranes on filters against ligand added.
// Truth: two populations of simple sites, 35 % of them tight (0.8 nM), the rest
// loose (25 nM); 0.30 mg/mL of membranes; nonspecific binding 2 fmol/mg per nM
// free; Bmax differs between preparations; scatter proportional, 5 %.
func crab() []byte {
	const (
		tight, loose, share = 0.8, 25.0, 0.35 // nM, nM, of sites
		nonspecific         = 2.0             // fmol/mg per nM
		toNM                = 0.30e-3         // fmol/mg at 0.30 mg/mL in nM
		scatter             = 0.05
	)
	bmax := []float64{910, 1120, 1010} // fmol/mg
	r := rand.New(rand.NewPCG(1978, 7))
	var b bytes.Buffer
	fmt.Fprintln(&b, "prep,tube,added_nM,bound_fmol_mg")
	for i, prep := range []string{"A", "B", "C"} {
		for _, tube := range []string{"open", "blocked"} {
			for _, added := range []float64{0.1, 0.2, 0.4, 0.8, 1.5, 3, 6, 12, 25, 50, 100, 200} {
				sites := bmax[i]
				if tube == "blocked" {
					sites = 0
				}
				bound := func(x float64) float64 {
					return sites*(share*x/(tight+x)+(1-share)*x/(loose+x)) + nonspecific*x
				}
				low, high := 0.0, added // free ligand, by halving
				for range 200 {
					if x := (low + high) / 2; x+toNM*bound(x) < added {
						low = x
					} else {
						high = x
					}
				}
				fmt.Fprintf(&b, "%s,%s,%v,%.4g\n", prep, tube, added,
					bound(low)*(1+scatter*r.NormFloat64()))
			}
		}
	}
	return b.Bytes()
}

func TestInventedTables(t *testing.T) {
	for name, data := range map[string][]byte{"studies/oyster/oyster.csv": oyster(),
		"studies/crab/crab.csv": crab()} {
		if *update {
			if err := os.WriteFile(name, data, 0o644); err != nil {
				t.Fatal(err)
			}
		}
		kept, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		if !bytes.Equal(kept, data) {
			t.Errorf("%s is not what its truth draws; write it with -update", name)
		}
	}
}
