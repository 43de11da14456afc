package fit_test

import (
	"context"
	"fmt"
	"os"
	"slices"
	"strings"
	"testing"
	"time"

	"ligancy/fit"
)

// TestSideBySide times one task as other programs time theirs, inside the
// process and on one core, and prints lines name,dataset,task,key,value. It
// runs where SIDE says which: "single hill4", "boot adair4", "profile hill4",
// "screen" or "screen thorough" (with SCREEN_FOLDER, see screen_test.go). Each
// figure is the median of nine.
//
//	go test -c ./fit && SIDE="boot hill4" ./fit.test -test.run SideBySide
func TestSideBySide(t *testing.T) {
	task, set, _ := strings.Cut(os.Getenv("SIDE"), " ")
	studies := map[string]func(testing.TB) *fit.Problem{
		"hill4":  func(tb testing.TB) *fit.Problem { return hill4(tb, true) },
		"adair4": adair4, "shallow": shallow, "global": global,
	}
	say := func(key string, value float64) { fmt.Printf("ligancy,%s,%s,%s,%.9g\n", set, task, key, value) }
	one := fit.Settings{Workers: 1}
	switch task {
	case "":
		t.Skip("SIDE names no task")
	case "single":
		p := studies[set](t)
		var r *fit.Result
		say("fit_s", median(func() { r = solve(t, p, one) }))
		say("ss", r.Objective)
		say("hit", float64(r.Agreeing))
	case "boot":
		p := studies[set](t)
		r := solve(t, p, one)
		data := parametric(t, p, r, 1)
		var d *fit.Refitted
		say("boot_s", median(func() { d = refit(t, p, r.Theta, data, fit.RefitSettings{Draws: 1000, Workers: 1}) }))
		say("fail", float64(unreached(d)))
	case "profile":
		p := studies[set](t)
		r := solve(t, p, one)
		say("profile_s", median(func() {
			f := profiler(t, p, r, 0.95)
			for j := range p.Parameters {
				f.Parameter(context.Background(), j)
			}
		}))
	case "screen":
		s := screenOf(t)
		s.thorough = set == "thorough"
		set = "screen"
		p := s.problem()
		var d *fit.Refitted
		say("fit_s", median(func() { d = s.fit(t, p) }))
		say("fail", float64(unreached(d)))
		say("missed", float64(s.missed(d)))
	default:
		t.Errorf("SIDE names no task that there is: %q", task)
	}
}

// median of nine runs, seconds.
func median(run func()) float64 {
	var s []float64
	for range 9 {
		began := time.Now()
		run()
		s = append(s, time.Since(began).Seconds())
	}
	slices.Sort(s)
	return s[4]
}

// unreached counts the draws without an answer.
func unreached(d *fit.Refitted) (n int) {
	for _, s := range d.Status {
		if s == fit.Stopped || s == fit.NoAnswer {
			n++
		}
	}
	return n
}
