package fit

import "math"

// RunsTest asks whether the signs of residuals, in the order of the curve,
// change as often as chance would have it.
type RunsTest struct {
	Runs           int
	Above, Below   int // residuals above and below zero; zeros are left out
	Expected       float64
	Few, Different float64 // probability of so few runs or fewer; of so unlikely a number, two-sided
}

// Runs tests residuals, which stand in the order of the curve. The distribution
// is exact:
//
//	P(2k) = 2·C(a−1,k−1)·C(b−1,k−1)/C(a+b,a)
//	P(2k+1) = [C(a−1,k−1)·C(b−1,k) + C(a−1,k)·C(b−1,k−1)]/C(a+b,a)
//
// with a above and b below. ok is false where all lie on one side.
//
// Wald A & Wolfowitz J (1940) Ann Math Stat 11, 147–162. The two-sided
// probability adds up all numbers of runs that are no likelier (common practice).
func Runs(residuals []float64) (t RunsTest, ok bool) {
	last := 0
	for _, r := range residuals {
		sign := 0
		switch {
		case r > 0:
			sign = 1
			t.Above++
		case r < 0:
			sign = -1
			t.Below++
		default:
			continue
		}
		if sign != last {
			t.Runs++
			last = sign
		}
	}
	if t.Above == 0 || t.Below == 0 {
		return t, false
	}
	a, b := float64(t.Above), float64(t.Below)
	t.Expected = 1 + 2*a*b/(a+b)
	here := runsProbability(t.Runs, a, b)
	for n := 2; n <= 2*min(t.Above, t.Below)+1; n++ {
		p := runsProbability(n, a, b)
		if n <= t.Runs {
			t.Few += p
		}
		if p <= here*(1+1e-9) {
			t.Different += p
		}
	}
	t.Few, t.Different = min(t.Few, 1), min(t.Different, 1)
	return t, true
}

// runsProbability is P(n) of the doc comment of Runs.
func runsProbability(n int, a, b float64) float64 {
	k := float64(n / 2)
	all := lnChoose(a+b, a)
	if n%2 == 0 {
		return 2 * math.Exp(lnChoose(a-1, k-1)+lnChoose(b-1, k-1)-all)
	}
	return math.Exp(lnChoose(a-1, k-1)+lnChoose(b-1, k)-all) +
		math.Exp(lnChoose(a-1, k)+lnChoose(b-1, k-1)-all)
}

// lnChoose is ln C(n, k), −Inf outside 0 ≤ k ≤ n.
func lnChoose(n, k float64) float64 {
	if k < 0 || k > n {
		return math.Inf(-1)
	}
	x, _ := math.Lgamma(n + 1)
	y, _ := math.Lgamma(k + 1)
	z, _ := math.Lgamma(n - k + 1)
	return x - y - z
}
