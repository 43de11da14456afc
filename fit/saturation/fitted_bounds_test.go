package saturation

import (
	"context"
	"testing"

	"ligancy/fit"
)

// Concerted binding cannot be shallower than one site. On shallow curves its sum
// of squares falls for ever towards that of one site, with the conformations
// becoming alike: the fit ends on a bound, no worse than one site, and is compared.
func TestShallowCurvesPutConcertedOnItsBound(t *testing.T) {
	for _, number := range []int{7, 8, 10} {
		tr := truths(t)[number-1]
		for k := range 3 {
			a := tr.study(t, k).withDefaults()
			a.Candidates = among("one site", "concerted")(t)
			one, four := fitOf(a, 0), fitOf(a, 1)
			if !four.answered() {
				t.Errorf("truth %d, study %d: %s", number, k, four.row.Status)
				continue
			}
			if four.ss > one.ss*(1+1e-6) {
				t.Errorf("truth %d, study %d: sum of squares %v, one site %v", number, k, four.ss, one.ss)
			}
		}
	}
}

// fitOf fits one candidate of a study.
func fitOf(a *Analysis, i int) *fitted {
	return a.fitCandidate(context.Background(), &a.Candidates[i], fit.Settings{Starts: 12, Seed: 1, Workers: 1})
}

// A fit that was interrupted, or that arrived, is left as it is.
func TestBoundsAreTriedOnlyWhereNeeded(t *testing.T) {
	a := truths(t)[1].study(t, 0).withDefaults()
	f := fitOf(a, 0)
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if got := f.ontoBounds(ctx, f.result); got != f.result {
		t.Error("an interrupted fit was followed to its bounds")
	}
	if got := f.ontoBounds(context.Background(), f.result); got.Objective > f.result.Objective*(1+boundSlack) {
		t.Errorf("objective %v from %v", got.Objective, f.result.Objective)
	}
}

// A candidate's own ends of the response stand in the place of the data set's.
func TestCandidateEnds(t *testing.T) {
	tr := truths(t)[8]
	a := tr.study(t, 0).withDefaults()
	for i := range a.Candidates {
		f := fitOf(a, i)
		without := a.Candidates[i].Ends != nil
		n := 0
		for _, p := range f.m.params {
			if p.quantity == "nonspecific" {
				n++
			}
		}
		if (n == 0) != without {
			t.Errorf("%s: %d numbers of nonspecific binding", f.row.Name, n)
		}
	}
}
