package fit

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// decays is y = Σ_k a_k·e^{−x/τ_k}, θ = a_1, ln τ_1, a_2, ln τ_2 …
type decays struct{ x, y []float64 }

func (b *decays) Len() int { return len(b.x) }
func (b *decays) Eval(res []float64, jac *mat.Dense, p []float64) error {
	for i, x := range b.x {
		res[i] = -b.y[i]
		for k := 0; k+1 < len(p); k += 2 {
			tau := math.Exp(p[k+1])
			e := math.Exp(-x / tau)
			res[i] += p[k] * e
			if jac != nil {
				jac.Set(i, k, e)
				jac.Set(i, k+1, p[k]*e*x/tau)
			}
		}
	}
	return nil
}

func decaying(rng *rand.Rand, parameters int) (*Problem, []float64) {
	truth := []float64{3, 0, 2, 1.5, 1, 3}[:parameters]
	b := &decays{}
	for i := range 30 {
		b.x = append(b.x, math.Exp(float64(i)/6-2))
	}
	b.y = make([]float64, len(b.x))
	res := make([]float64, len(b.x))
	if err := b.Eval(res, nil, truth); err != nil {
		panic(err)
	}
	for i, r := range res {
		b.y[i] = r + 0.01*rng.NormFloat64()
	}
	p := &Problem{Blocks: []Block{b}}
	for range parameters {
		p.Parameters = append(p.Parameters, Parameter{Low: -20, High: 20})
	}
	return p, truth
}

// Where the brisk descent says that it has arrived, the careful one would not
// have gone anywhere else.
func TestBriskArrivesWhereTheCarefulDoes(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 1))
	arrived := 0
	for range 60 {
		p, truth := decaying(rng, 2*(1+rng.IntN(3)))
		start := make([]float64, len(truth))
		for j, v := range truth {
			start[j] = v + 0.2*rng.NormFloat64()
		}
		s := newSolver(p, false)
		if !s.easy() {
			t.Fatal("not taken on")
		}
		s.place(start)
		s.evaluate(s.cur)
		if !s.descendBriskly(1e-5) {
			continue
		}
		arrived++
		obj := s.cur.obj
		if s.begun(s.cur.theta); s.descend(nil, 1e-7, 200) != stationary {
			t.Error("the careful one does not arrive")
		}
		if obj > s.cur.obj*(1+1e-9) {
			t.Errorf("%d parameters: %.12g, carefully %.12g", len(truth), obj, s.cur.obj)
		}
	}
	if arrived < 45 {
		t.Errorf("arrived in %d of 60", arrived)
	}
}

func TestBriskHandsOver(t *testing.T) {
	rng := rand.New(rand.NewPCG(12, 1))
	p, truth := decaying(rng, 4)
	goes := func(change func(p *Problem, start []float64)) bool {
		q := *p
		q.Parameters = append([]Parameter(nil), p.Parameters...)
		start := append([]float64(nil), truth...)
		change(&q, start)
		s := newSolver(&q, false)
		s.place(start)
		return s.easy() && s.evaluate(s.cur) && s.descendBriskly(1e-5)
	}
	if !goes(func(*Problem, []float64) {}) {
		t.Fatal("the plain problem")
	}
	for name, change := range map[string]func(p *Problem, start []float64){
		"a bound":           func(p *Problem, _ []float64) { p.Parameters[0].High = 2.9 },
		"a fixed parameter": func(p *Problem, _ []float64) { p.Parameters[0].Low = 20 },
		"two blocks":        func(p *Problem, _ []float64) { p.Blocks = append(p.Blocks, p.Blocks[0]) },
		"one x": func(p *Problem, _ []float64) {
			p.Blocks = []Block{&decays{x: make([]float64, 8), y: []float64{5, 5, 5.1, 4.9, 5, 5, 5, 5}}}
		},
		"no amplitude": func(_ *Problem, s []float64) { s[0] = 0 },
	} {
		if goes(change) {
			t.Errorf("%s: not handed over", name)
		}
	}
}

// Outside reference: gonum's Cholesky on the damped normal equations.
func TestBriskSolve(t *testing.T) {
	rng := rand.New(rand.NewPCG(13, 1))
	for m := 1; m <= briskMost; m++ {
		rows := m + 5
		pt := &point{res: randomVector(rng, rows), jraw: randomVector(rng, rows*m)}
		b := &brisk{m: m}
		b.gather(pt)
		const lambda = 0.3
		gain, ok := b.solve(lambda)
		if !ok {
			t.Fatal("ill conditioned")
		}
		j := mat.NewDense(rows, m, pt.jraw)
		var a mat.Dense
		a.Mul(j.T(), j)
		sym := mat.NewSymDense(m, nil)
		for i := range m {
			for k := i; k < m; k++ {
				v := a.At(i, k)
				if i == k {
					v *= 1 + lambda
				}
				sym.SetSym(i, k, v)
			}
		}
		var g, want mat.VecDense
		g.MulVec(j.T(), mat.NewVecDense(rows, pt.res))
		var chol mat.Cholesky
		if !chol.Factorize(sym) {
			t.Fatal("gonum does not factor it")
		}
		if err := chol.SolveVecTo(&want, &g); err != nil {
			t.Fatal(err)
		}
		for i := range m {
			if math.Abs(b.delta[i]+want.AtVec(i)) > 1e-10 {
				t.Errorf("%d parameters: δ[%d] = %v, want %v", m, i, b.delta[i], -want.AtVec(i))
			}
		}
		if w := mat.Dot(&g, &want); math.Abs(gain-w) > 1e-10*w {
			t.Errorf("%d parameters: gain %v, want %v", m, gain, w)
		}
	}
}
