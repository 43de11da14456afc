package fit_test

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"ligancy/fit"
)

// A line whose information matrix is known: J = [1, x], x = 0 … 4, σ² = 1.2, so
// that J'J = [[5, 10], [10, 30]] with eigenvalues (35 ± √1025)/2.
func TestCombinationsOfALine(t *testing.T) {
	p := fiveOnALine(false)
	r := solve(t, p, fit.Settings{})
	c, err := fit.Combinations(p, r, nil)
	if err != nil || len(c) != 2 {
		t.Fatal(c, err)
	}
	for i, lambda := range []float64{(35 + math.Sqrt(1025)) / 2, (35 - math.Sqrt(1025)) / 2} {
		// The eigenvector (10, λ−5), scaled so that its largest weight is 1.
		w := []float64{10, lambda - 5}
		top := w[0]
		if math.Abs(w[1]) > math.Abs(w[0]) {
			top = w[1]
		}
		length := math.Hypot(w[0], w[1]) / math.Abs(top)
		near(t, "a", c[i].Weights[0], w[0]/top, 1e-12)
		near(t, "b", c[i].Weights[1], w[1]/top, 1e-12)
		near(t, "sd", c[i].SD, math.Sqrt(1.2/lambda)*length, 1e-12)
		if c[i].Free {
			t.Error("held by the data")
		}
	}
	// Asked about one, the other follows: its own standard deviation.
	one, err := fit.Combinations(p, r, []int{1})
	if err != nil || len(one) != 1 {
		t.Fatal(one, err)
	}
	near(t, "sd of b", one[0].SD, math.Sqrt(r.Cov.At(1, 1)), 1e-12)
}

// K_R and L of the concerted protein are tied: the data hold about K_R·L^¼ much
// better than either, and say so.
func TestTies(t *testing.T) {
	p := hill4(t, true)
	r := solve(t, p, fit.Settings{})
	ties := fit.Ties(r, 0.99)
	if len(ties) != 1 || ties[0].I != 0 || ties[0].J != 1 {
		t.Fatalf("%+v", ties)
	}
	tie := ties[0]
	if tie.Correlation > -0.99 || tie.Power < 0.2 || tie.Power > 0.35 || tie.SD > tie.SDI/5 || tie.SDJ < tie.SDI {
		t.Errorf("%+v", tie)
	}
	near(t, "sd of K_R", tie.SDI, math.Sqrt(r.Cov.At(0, 0)), 1e-12)
	rho, ok := r.Correlation(0, 1)
	if !ok || rho != tie.Correlation {
		t.Errorf("correlation %v, %v", rho, tie.Correlation)
	}
	c, err := fit.Combinations(p, r, []int{0, 1})
	if err != nil {
		t.Fatal(err)
	}
	if c[0].SD > c[1].SD/10 || c[0].Weights[0] != 1 {
		t.Errorf("%+v", c)
	}
	cov := mat.NewSymDense(2, []float64{r.Cov.At(0, 0), r.Cov.At(0, 1), 0, r.Cov.At(1, 1)})
	v := mat.NewVecDense(2, c[0].Weights)
	near(t, "sd of the stiff one", c[0].SD, math.Sqrt(mat.Inner(v, cov, v)), 1e-8)
	s, ok := c[0].Simple(cov, 4)
	if !ok || s.Weights[0] != 1 || s.Weights[1] != 0.25 || s.SD > 2*c[0].SD {
		t.Errorf("rounded: %+v, %v", s, ok)
	}
	if _, ok := (fit.Combination{Weights: []float64{1, 0.47}, SD: 1e-9}).Simple(cov, 2); ok {
		t.Error("a fraction that costs far too much")
	}
}

// Two parameters that exist only as a product: one direction is free.
func TestFreeDirection(t *testing.T) {
	product := func(x float64, p, g []float64) float64 {
		f := math.Exp(p[0]+p[1]) * x
		g[0], g[1] = f, f
		return f
	}
	b := &simple{x: []float64{1, 2, 3, 4}, y: []float64{2.1, 3.9, 6.2, 7.8}, f: product}
	p := &fit.Problem{Parameters: free("ln a", "ln b"), Blocks: []fit.Block{b}}
	r := solve(t, p, fit.Settings{})
	c, err := fit.Combinations(p, r, nil)
	if err != nil {
		t.Fatal(err)
	}
	if c[0].Free || math.Abs(c[0].Weights[0]-c[0].Weights[1]) > 1e-9 || !(c[0].SD > 0 && c[0].SD < 0.1) {
		t.Errorf("the product: %+v", c[0])
	}
	if !c[1].Free || math.Abs(c[1].Weights[0]+c[1].Weights[1]) > 1e-9 || c[1].SD != 0 {
		t.Errorf("the ratio: %+v", c[1])
	}
	if fit.Ties(r, 0.9) != nil {
		t.Error("no covariance, no ties")
	}
	if _, ok := r.Correlation(0, 1); ok {
		t.Error("no covariance, no correlation")
	}
}

// What stands on a bound or is fixed has no part in any combination.
func TestCombinationsOnBounds(t *testing.T) {
	p := hill4(t, true)
	p.Parameters[2].Low, p.Parameters[2].High = -4.5, -4.5
	r := solve(t, p, fit.Settings{})
	c, err := fit.Combinations(p, r, nil)
	if err != nil || len(c) != 2 {
		t.Fatal(c, err)
	}
	for _, x := range c {
		if x.Weights[2] != 0 || len(x.Weights) != 3 {
			t.Errorf("%+v", x)
		}
	}
	if c, err := fit.Combinations(p, r, []int{2}); err != nil || len(c) != 0 {
		t.Errorf("%v, %v", c, err)
	}
	if _, ok := r.Correlation(0, 2); ok {
		t.Error("a fixed parameter is correlated with nothing")
	}
	perfect := *r
	perfect.Sigma = []float64{0}
	if _, err := fit.Combinations(p, &perfect, nil); err == nil {
		t.Error("without scatter nothing is loose")
	}
}
