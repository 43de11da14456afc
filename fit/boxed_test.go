package fit

import (
	"math"
	"math/rand/v2"
	"testing"
)

// bruteBox minimises ‖S·t + z‖ over a box by trying every set of bounds.
func bruteBox(s, z, low, high []float64, m int) (best float64, at []float64) {
	best = math.Inf(1)
	state := make([]int, m) // 0 free, 1 low, 2 high
	for {
		t := make([]float64, m)
		var free []int
		for j, k := range state {
			switch k {
			case 0:
				free = append(free, j)
			case 1:
				t[j] = low[j]
			case 2:
				t[j] = high[j]
			}
		}
		c := newColumns(m, m)
		for i := range m {
			c.rhs[i] = z[i]
			for j := i; j < m; j++ {
				c.rhs[i] += s[i*m+j] * t[j]
			}
		}
		for _, j := range free {
			a := c.next()
			clear(a)
			for i := 0; i <= j; i++ {
				a[i] = s[i*m+j]
			}
			c.push()
		}
		v := make([]float64, m)
		c.solve(v, c.z, c.m)
		inside := true
		for k, j := range free {
			t[j] = v[k]
			inside = inside && v[k] >= low[j] && v[k] <= high[j]
		}
		if ss := dot(c.rhs, c.rhs); inside && ss < best {
			best, at = ss, t
		}
		k := 0
		for ; k < m; k++ {
			if state[k]++; state[k] < 3 {
				break
			}
			state[k] = 0
		}
		if k == m {
			return best, at
		}
	}
}

func squared(s, z, t []float64, m int) float64 {
	var ss float64
	for i := range m {
		v := z[i] + dot(s[i*m+i:i*m+m], t[i:m])
		ss += v * v
	}
	return ss
}

// Brute force over all 3^m sets of bounds.
func TestLeastSquaresInBox(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 1))
	for range 300 {
		m := 1 + rng.IntN(5)
		b := newBoxedStep(m)
		copy(b.s, triangle(rng, m))
		copy(b.z, randomVector(rng, m))
		for j := range m {
			b.low[j], b.high[j] = -rng.Float64(), rng.Float64()
			if rng.IntN(3) == 0 {
				b.low[j] = 0 // already on its bound
			}
		}
		got := make([]float64, m)
		b.leastSquares(got, m)
		want, at := bruteBox(b.s, b.z, b.low, b.high, m)
		if ss := squared(b.s, b.z, got, m); ss > want*(1+1e-9)+1e-12 {
			t.Errorf("%v leaves %g, %v leaves %g", got, ss, at, want)
		}
	}
}

// A step stays inside radius and box, gains what it says, and gains something
// wherever something can be gained.
func TestBoxedStep(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 1))
	for range 2000 {
		m := 1 + rng.IntN(5)
		b := newBoxedStep(m)
		copy(b.s, triangle(rng, m))
		copy(b.z, randomVector(rng, m))
		for j := range m {
			b.low[j], b.high[j] = -math.Exp(2*rng.NormFloat64()), math.Exp(2*rng.NormFloat64())
			var g float64
			for i := 0; i <= j; i++ {
				g += b.s[i*m+j] * b.z[i]
			}
			// What lies on a bound takes part only where the gradient leads inside.
			if rng.IntN(3) == 0 && g < 0 {
				b.low[j] = 0
			}
			if rng.IntN(3) == 0 && g > 0 {
				b.high[j] = 0
			}
		}
		radius := math.Exp(2 * rng.NormFloat64())
		b.solve(m, m, radius)
		for j, v := range b.t[:m] {
			if v < b.low[j] || v > b.high[j] {
				t.Fatalf("t[%d] = %g lies outside %g to %g", j, v, b.low[j], b.high[j])
			}
		}
		if l := norm(b.t[:m]); l > 1.01*radius {
			t.Fatalf("length %g exceeds the radius %g", l, radius)
		}
		gain := dot(b.z, b.z) - squared(b.s, b.z, b.t, m)
		if math.Abs(gain-b.gain) > 1e-10*(1+math.Abs(gain)) {
			t.Fatalf("gain %g, said to be %g", gain, b.gain)
		}
		if b.gain <= 0 {
			t.Fatalf("nothing gained: S %v z %v box %v %v", b.s, b.z, b.low, b.high)
		}
	}
}

// extremeAt is the quantity at s and how far ‖z + R·s‖² exceeds ρ².
func extremeAt(e *extreme, s []float64, m int, rho2 float64) (value, excess float64) {
	return dot(e.c[:m], s[:m]), squared(e.r, e.z, s, m) - rho2
}

// Random feasible points never get further than the extreme.
func TestExtreme(t *testing.T) {
	rng := rand.New(rand.NewPCG(6, 1))
	bounded := 0
	for range 300 {
		m := 1 + rng.IntN(4)
		e := newExtreme(m)
		copy(e.r, triangle(rng, m))
		for j := range m {
			e.r[j*m+j] = 0.5 + rng.Float64()
			e.z[j], e.c[j] = 0.2*rng.NormFloat64(), rng.NormFloat64()
			e.low[j], e.high[j] = -math.Exp(rng.NormFloat64()), math.Exp(rng.NormFloat64())
		}
		rho2 := 0.5 + rng.Float64()
		for _, d := range []float64{-1, 1} {
			e.solve(m, rho2, d)
			value, excess := extremeAt(e, e.s, m, rho2)
			if excess > 1e-9 {
				t.Fatalf("lies outside its region by %g", excess)
			}
			for j := range m {
				if e.s[j] < e.low[j] || e.s[j] > e.high[j] {
					t.Fatalf("s[%d] outside its bounds", j)
				}
				if e.stop[j] != 0 {
					bounded++
				}
			}
			s := make([]float64, m)
			for range 2000 {
				for j := range m {
					s[j] = e.low[j] + rng.Float64()*(e.high[j]-e.low[j])
				}
				if v, x := extremeAt(e, s, m, rho2); x <= 0 && d*v > d*value+1e-9 {
					t.Fatalf("%v gives %g, further than %v with %g (direction %g)", s, v, e.s, value, d)
				}
			}
		}
	}
	if bounded < 100 {
		t.Errorf("only %d bounds were met", bounded)
	}
}
