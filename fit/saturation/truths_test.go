package saturation

import (
	"context"
	"math"
	"math/rand/v2"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"
)

// Phrases that the verdict has to hold.
const (
	saysNotToldApart       = "not told apart"
	saysNoIndependentSites = "no set of independent sites gives this curve"
	saysSeveralReadings    = "several readings"
	saysSpread             = "SD of ln K"
	saysHillTwin           = "identical to a Hill curve"
	saysEndNotReached      = "upper end is not reached"
	saysSlopeOpen          = "n_H is left open"
	saysShift              = "shift of ln K by preparation"
	saysNothing            = "Nothing can be concluded"
)

// study simulates study k of a truth.
func (tr *truth) study(t testing.TB, k int) *Analysis {
	rng := rand.New(rand.NewPCG(uint64(tr.number), uint64(k)))
	return &Analysis{Title: tr.name, Ligand: Substance{Name: "ligand", Unit: "uM"}, Kelvin: math.NaN(),
		Data: []Dataset{tr.simulate(rng)}, Candidates: tr.candidates(t),
		Settings: Settings{Starts: 12, Seed: 1, Level: 0.95, Method: "covariance", Draws: 199}}
}

// decided is the part of Run that the verdict rests on.
func decided(a *Analysis) *Outcome {
	ctx := context.Background()
	a = a.withDefaults()
	out := &Outcome{}
	fits := a.fitAll(ctx, nil)
	rows := a.allQuantities(ctx, fits, nil)
	order := a.compare(ctx, fits, nil)
	report(out, fits, rows)
	out.Factors = a.factorRows(ctx, fits)
	out.Quantities = append(out.Quantities, a.verdictRows(ctx, out.Quantities, fits, order)...)
	out.Verdict = a.verdict(out, fits, order)
	return out
}

// finding is how one verdict measures up to its truth.
type finding struct {
	right, tie, wrong, truthOut bool
	why                         []string
}

// judge holds a verdict against the truth.
//
// Right: the truth or a twin of it is not out, all that must be out is out, the
// sentence on n_H is true, and what must be said is said. Confidently wrong: the
// truth and its twins are out, or the sentence on n_H is false, or one of a pair
// of twins is named alone. Tie: the truth is kept, and others with it.
func (tr *truth) judge(v *Verdict) (f finding) {
	kept := func(name string) bool { return !slices.Contains(v.Out, name) }
	f.truthOut = !slices.ContainsFunc(tr.holders, kept)
	f.tie = !f.truthOut && len(v.Ties)+len(v.Open) > 0
	miss := func(s string) { f.why = append(f.why, s) }
	if f.truthOut {
		miss("truth out")
	}
	for _, name := range tr.out {
		if kept(name) {
			miss(name + " kept")
		}
	}
	said := v.Slope
	if said != "" && said != "open" && said != tr.nH {
		f.wrong = true
		miss("n_H called " + said)
	}
	for _, s := range tr.said {
		if !strings.Contains(v.Text, s) {
			miss("unsaid: " + s)
		}
	}
	if !tr.silent && said != tr.nH {
		miss("n_H not called " + tr.nH + " but " + said)
	}
	for _, p := range tr.pairs {
		if !twinned(v, p[0], p[1]) || kept(p[0]) != kept(p[1]) {
			miss("twins not named: " + p[0] + ", " + p[1])
			f.wrong = true
		}
	}
	f.wrong = f.wrong || f.truthOut
	f.right = len(f.why) == 0
	return f
}

func twinned(v *Verdict, a, b string) bool {
	return slices.ContainsFunc(v.Twins, func(t []string) bool { return slices.Contains(t, a) && slices.Contains(t, b) })
}

// tally counts the findings of one truth.
type tally struct{ right, tie, wrong, truthOut int }

// runTruth judges studies [0, n) of a truth.
func runTruth(t *testing.T, tr *truth, n int) (s tally, reasons map[string]int) {
	reasons = map[string]int{}
	for k := range n {
		out := decided(tr.study(t, k))
		f := tr.judge(&out.Verdict)
		for _, w := range f.why {
			reasons[w]++
			if n > 2 && testing.Verbose() {
				t.Logf("study %d: %s", k, w)
			}
		}
		count := func(n *int, b bool) {
			if b {
				*n++
			}
		}
		count(&s.right, f.right)
		count(&s.tie, f.tie)
		count(&s.wrong, f.wrong)
		count(&s.truthOut, f.truthOut)
		if k == 0 && testing.Verbose() {
			t.Logf("%s\n%s", tr.name, out.Verdict.Text)
		}
	}
	return s, reasons
}

// TestTruths prints the table of the twelve constructed truths. LIGANCY_TRUTHS
// says how many studies of each (200 for the table of the goals), and
// LIGANCY_TRUTH, if set, which truth alone; without it a few are run.
func TestTruths(t *testing.T) {
	n, goals := 2, false
	if s := os.Getenv("LIGANCY_TRUTHS"); s != "" {
		n, _ = strconv.Atoi(s)
		goals = n >= 200
	}
	only := os.Getenv("LIGANCY_TRUTH")
	wrong, all := 0, 0
	for _, tr := range truths(t) {
		if only != "" && only != strconv.Itoa(tr.number) {
			continue
		}
		begin := time.Now()
		s, reasons := runTruth(t, &tr, n)
		t.Logf("%2d %-28s right %3d tie %3d wrong %3d truth out %3d of %d; %.2f s a study; %v", tr.number, tr.name,
			s.right, s.tie, s.wrong, s.truthOut, n, time.Since(begin).Seconds()/float64(n), reasons)
		wrong, all = wrong+s.wrong, all+n
		if goals && (s.right*200 < 188*n || s.wrong*200 > 8*n) || !goals && s.right < (n+1)/2 {
			t.Errorf("truth %d misses its goals", tr.number)
		}
	}
	if goals && wrong*50 > all {
		t.Errorf("confidently wrong %d of %d", wrong, all)
	}
}
