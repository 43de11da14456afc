package fit_test

import (
	"context"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
)

// line is y = a + e^{b·x}, whose measured values change between fits.
type line struct{ x, y []float64 }

func (l *line) Len() int { return len(l.x) }
func (l *line) Eval(res []float64, jac *mat.Dense, p []float64) error {
	for i, x := range l.x {
		e := math.Exp(p[1] * x)
		res[i] = p[0] + e - l.y[i]
		if jac != nil {
			jac.Set(i, 0, 1)
			jac.Set(i, 1, x*e)
		}
	}
	return nil
}

// Pooled gives each set of values a sum of squares of its own within rows.
func (l *line) Pooled() (float64, int) { return l.y[0], 3 }

// Fits over and over give what single fits give, with what the blocks hold then.
func TestAgainGivesWhatSolveGives(t *testing.T) {
	l := &line{x: []float64{0, 0.5, 1, 1.5, 2, 2.5}, y: make([]float64, 6)}
	p := &fit.Problem{
		Parameters: []fit.Parameter{{Name: "a", Low: -10, High: 10, Linear: true}, {Name: "b", Low: 0, High: 3}},
		Blocks:     []fit.Block{l},
		Starts:     [][]float64{{0, 0.5}},
	}
	again, err := fit.NewAgain(p, 1e-6)
	if err != nil {
		t.Fatal(err)
	}
	for _, b := range []float64{0.3, 1.1, -0.4} { // the last lies beyond the bound of b
		for i, x := range l.x {
			l.y[i] = 2 + math.Exp(b*x) + 0.01*math.Sin(7*x+b)
		}
		if s := again.From(context.Background(), []float64{0, 0.5}, 100); s != fit.Converged {
			t.Errorf("b %v: %v", b, s)
		}
		want, err := fit.Solve(context.Background(), p, fit.Settings{Starts: 1, Workers: 1})
		if err != nil {
			t.Fatal(err)
		}
		if d := math.Abs(again.Objective()/want.Objective - 1); d > 1e-10 {
			t.Errorf("b %v: objective %v, %v", b, again.Objective(), want.Objective)
		}
		for j, v := range again.Theta() {
			if math.Abs(v-want.Theta[j]) > 1e-5 {
				t.Errorf("b %v: parameter %d is %v, %v", b, j, v, want.Theta[j])
			}
		}
	}
}
