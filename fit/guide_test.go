package fit

import (
	"math"
	"math/rand/v2"
	"testing"
)

// profiled is a problem with its result and a profiler.
func profiled(t *testing.T, parameters int) (*Problem, *Result, *Profiler) {
	t.Helper()
	p, truth := decaying(rand.New(rand.NewPCG(51, 1)), parameters)
	p.Starts = [][]float64{truth}
	r, err := Solve(t.Context(), p, Settings{Starts: 1})
	if err != nil {
		t.Fatal(err)
	}
	f, err := NewProfiler(p, r, 0.95)
	if err != nil {
		t.Fatal(err)
	}
	return p, r, f
}

// area is Σ a·τ, the integral of the decays.
func area(theta, grad []float64) float64 {
	var v float64
	for k := 0; k+1 < len(theta); k += 2 {
		tau := math.Exp(theta[k+1])
		v += theta[k] * tau
		grad[k], grad[k+1] = tau, theta[k]*tau
	}
	return v
}

// Where a pull ends, the gradient of the objective is along that of the
// quantity: the point lies on the profile.
func TestPullEndsOnTheProfile(t *testing.T) {
	_, r, f := profiled(t, 4)
	grad := make([]float64, 4)
	v := area(r.Theta, grad)
	g := f.pull(area, 100)
	for _, dial := range []float64{v - 0.5, v - 0.05, v, v + 0.05, v + 0.5} {
		at, ok := g.turn(t.Context(), dial, r.Theta)
		if !ok {
			t.Fatal("not finite")
		}
		if got := area(at.theta, grad); got != at.value {
			t.Errorf("value %v, said to be %v", got, at.value)
		}
		s := f.s
		s.place(at.theta)
		s.evaluate(s.cur)
		if math.Abs(s.cur.obj-at.objective) > 1e-9*s.cur.obj {
			t.Errorf("objective %v, said to be %v", s.cur.obj, at.objective)
		}
		down := make([]float64, 4) // ∇SS/2
		for i, res := range s.cur.res {
			for j := range down {
				down[j] += res * s.cur.jraw[i*4+j]
			}
		}
		var dd, gg, dg float64
		for j := range down {
			dd, gg, dg = dd+down[j]*down[j], gg+grad[j]*grad[j], dg+down[j]*grad[j]
		}
		if across := dd - dg*dg/gg; dial != v && across > 1e-6*dd {
			t.Errorf("dial %v: %.2g of the gradient lies across", dial, across/dd)
		}
	}
}

// A parameter held at a value, and the same parameter pulled to where it then
// is, leave the same objective.
func TestHoldAndPullAgree(t *testing.T) {
	_, r, f := profiled(t, 4)
	second := func(theta, grad []float64) float64 {
		clear(grad)
		grad[1] = 1
		return theta[1]
	}
	pulled, ok := f.pull(second, 50).turn(t.Context(), r.Theta[1]+0.05, r.Theta)
	if !ok {
		t.Fatal("not finite")
	}
	held, ok := f.hold(1).turn(t.Context(), pulled.value, r.Theta)
	if !ok || math.Abs(held.objective-pulled.objective) > 1e-9*held.objective {
		t.Errorf("held %v, pulled %v", held.objective, pulled.objective)
	}
	for j := range held.theta {
		if math.Abs(held.theta[j]-pulled.theta[j]) > 1e-4 {
			t.Errorf("held at %v, pulled to %v", held.theta, pulled.theta)
		}
	}
}

// Leaping and following are two ways to one end, for parameters and quantities,
// of one block and of several.
func TestLeapAndFollowAgree(t *testing.T) {
	for _, parameters := range []int{2, 4} {
		p, r, f := profiled(t, parameters)
		other, _ := decaying(rand.New(rand.NewPCG(52, 1)), parameters)
		joint := *p
		joint.Blocks = []Block{p.Blocks[0], other.Blocks[0]}
		rj, err := Solve(t.Context(), &joint, Settings{Starts: 1})
		if err != nil {
			t.Fatal(err)
		}
		fj, err := NewProfiler(&joint, rj, 0.95)
		if err != nil {
			t.Fatal(err)
		}
		for _, c := range []struct {
			r *Result
			f *Profiler
		}{{r, f}, {rj, fj}} {
			for j := -1; j < parameters; j++ {
				g := area
				if j >= 0 {
					g = func(theta, grad []float64) float64 {
						clear(grad)
						grad[j] = 1
						return theta[j]
					}
				}
				target := target{value: g, parameter: j}
				v := g(c.r.Theta, make([]float64, parameters))
				for _, d := range []float64{-1, 1} {
					leapt, _, ok := c.f.leap(target, v, d)
					if !ok {
						t.Errorf("%d of %d: no leap", j, parameters)
						continue
					}
					e := c.f.follow(t.Context(), target, v, d)
					if e.open || e.edge || math.Abs(e.value-leapt) > 1e-8*(1+math.Abs(leapt)) {
						t.Errorf("%d of %d, direction %v: leapt to %v, followed to %+v", j, parameters, d, leapt, e)
					}
				}
			}
		}
	}
}

func TestFlat(t *testing.T) {
	f := &Profiler{result: &Result{Objective: 1}, limit: 2}
	at := func(objective float64) station { return station{objective: objective} }
	for _, c := range []struct {
		last, next, times float64
		want              bool
	}{
		{1.5, 1.5 + 1e-6, 1e5, true},
		{1.5, 1.5 + 1e-6, 100, false}, // not far enough to say
		{1.4, 1.6, 1e5, false},
		{1, 1, 1e5, true},
	} {
		if got := f.flat(at(c.last), at(c.next), c.times); got != c.want {
			t.Errorf("%+v: %v", c, got)
		}
	}
}

func TestStride(t *testing.T) {
	f := &Profiler{result: &Result{Objective: 0}, limit: 4}
	at := func(dial, root float64) station { return station{dial: dial, objective: root * root} }
	if s := f.stride(at(0, 0), at(1, 0.01), 1); s != 2 {
		t.Errorf("flat: %v", s)
	}
	// The root is 1 after 1 and has to be 2: 1.1 further.
	if s := f.stride(at(0, 0), at(1, 1), 1); math.Abs(s-1.1) > 1e-12 {
		t.Errorf("half way: %v", s)
	}
	if s := f.stride(at(0, 0), at(1, 1.99), 1); s != 0.1 {
		t.Errorf("nearly there: %v", s)
	}
}
