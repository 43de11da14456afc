package fit

import (
	"math"
	"slices"
	"testing"
)

func boxed(n int) *Problem {
	p := &Problem{}
	for range n {
		p.Parameters = append(p.Parameters, Parameter{Low: -10, High: 10, StartLow: -1, StartHigh: 3})
	}
	return p
}

func TestStartsLieInTheirBox(t *testing.T) {
	p := boxed(3)
	p.Parameters[1].Linear = true
	p.Parameters[2] = Parameter{Low: 2, High: 10, StartLow: math.NaN(), StartHigh: math.NaN()}
	for _, theta := range starts(p, 100, 5) {
		if theta[0] < -1 || theta[0] > 3 {
			t.Errorf("start at %v", theta[0])
		}
		if theta[1] != 1 || theta[2] != 2 {
			t.Errorf("what is not drawn stands at %v", theta[1:])
		}
	}
}

// The same number gives the same starts; those of the problem come before all.
func TestStartsOrder(t *testing.T) {
	p := boxed(2)
	once, again := starts(p, 5, 9), starts(p, 5, 9)
	for i := range once {
		if !slices.Equal(once[i], again[i]) {
			t.Errorf("start %d: %v and %v", i, once[i], again[i])
		}
	}
	if slices.Equal(starts(p, 5, 10)[0], once[0]) {
		t.Error("another number, the same starts")
	}
	p.Starts = [][]float64{{7, 8}, {1, 2}}
	own := starts(p, 4, 9)
	if len(own) != 4 || own[0][0] != 7 || own[1][1] != 2 {
		t.Errorf("%v", own)
	}
	if n := len(starts(p, 1, 9)); n != 2 {
		t.Errorf("%d starts, the problem has 2", n)
	}
}

func TestStartsWithoutBox(t *testing.T) {
	p := boxed(2)
	for j := range p.Parameters {
		p.Parameters[j].StartLow, p.Parameters[j].StartHigh = math.NaN(), math.NaN()
	}
	p.Parameters[0].Low = 3
	if s := starts(p, 20, 0); len(s) != 1 || s[0][0] != 3 || s[0][1] != 0 {
		t.Errorf("%v", s)
	}
	p.Starts = [][]float64{{4, 5}}
	if s := starts(p, 20, 0); len(s) != 1 || s[0][0] != 4 {
		t.Errorf("%v", s)
	}
}

// Fewer gaps than random points leave: the squared discrepancy of Warnock
// (1972) of 64 points against its expectation for random ones,
// (2⁻ᵈ − 3⁻ᵈ)/n (Morokoff & Caflisch 1994, SIAM J Sci Comput 15, 1251).
func TestStartsFillTheBox(t *testing.T) {
	for _, d := range []int{1, 2, 3, 5} {
		p := boxed(d)
		const n = 64
		x := starts(p, n, 3)
		for _, v := range x {
			for j := range v {
				v[j] = (v[j] + 1) / 4
			}
		}
		var pairs, single float64
		for _, a := range x {
			q := 1.0
			for _, v := range a {
				q *= 1 - v*v
			}
			single += q
			for _, b := range x {
				q := 1.0
				for j := range a {
					q *= 1 - max(a[j], b[j])
				}
				pairs += q
			}
		}
		k := float64(d)
		got := math.Pow(3, -k) - math.Pow(2, 1-k)/n*single + pairs/(n*n)
		random := (math.Pow(2, -k) - math.Pow(3, -k)) / n
		if got > 0.6*random {
			t.Errorf("%d dimensions: squared discrepancy %.3g, random points %.3g", d, got, random)
		}
	}
}
