package fit

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// dense is the Jacobian of a point, scaled as the solver sees it.
func (s *solver) dense(pt *point) *mat.Dense {
	a := mat.NewDense(len(pt.res), s.p, nil)
	for b, f := range pt.scale {
		for i := s.rows[b]; i < s.rows[b+1]; i++ {
			for j := range s.p {
				a.Set(i, j, f*pt.jraw[i*s.p+j])
			}
		}
	}
	return a
}

// Outside reference: the relative offset by gonum's QR, ‖Q₁ᵀr‖/‖r‖, whatever the
// parameters that are solved for and however many scatters there are.
func TestRelativeOffset(t *testing.T) {
	rng := rand.New(rand.NewPCG(41, 1))
	for _, blocks := range []int{1, 2} {
		for _, linear := range []bool{false, true} {
			p, truth := decaying(rng, 4)
			if blocks == 2 {
				q, _ := decaying(rng, 4)
				p.Blocks = append(p.Blocks, q.Blocks[0])
			}
			p.Parameters[0].Linear, p.Parameters[2].Linear = linear, linear
			s := newSolver(p, false)
			s.place(truth)
			if !s.evaluate(s.cur) {
				t.Fatal("not finite")
			}
			s.factor()
			a := s.dense(s.cur)
			r := make([]float64, len(s.cur.res))
			for b, f := range s.cur.scale {
				for i := s.rows[b]; i < s.rows[b+1]; i++ {
					r[i] = f * s.cur.res[i]
				}
			}
			var qr mat.QR
			qr.Factorize(a)
			var q mat.Dense
			qr.QTo(&q)
			var z, total float64
			for j := range s.p {
				var v float64
				for i := range r {
					v += q.At(i, j) * r[i]
				}
				z += v * v
			}
			for _, v := range r {
				total += v * v
			}
			if want := math.Sqrt(z / total); math.Abs(s.offset-want) > 1e-9*want {
				t.Errorf("%d blocks, linear %v: offset %v, want %v", blocks, linear, s.offset, want)
			}
		}
	}
}

// Settling the linear parameters leaves what a linear least-squares fit leaves,
// and the residuals at the new values are those of an evaluation there.
func TestSettle(t *testing.T) {
	rng := rand.New(rand.NewPCG(42, 1))
	for range 20 {
		p, truth := decaying(rng, 6)
		for _, j := range []int{0, 2, 4} {
			p.Parameters[j].Linear = true
			truth[j] = 5 * rng.NormFloat64()
		}
		s := newSolver(p, false)
		s.place(truth)
		s.evaluate(s.cur)
		before := append([]float64(nil), s.cur.res...)
		a := mat.NewDense(len(before), 3, nil)
		for i := range before {
			for k := range 3 {
				a.Set(i, k, s.cur.jraw[i*s.p+2*k])
			}
		}
		moved := s.settle(s.cur)
		var qr mat.QR
		qr.Factorize(a)
		var d mat.VecDense
		if err := qr.SolveVecTo(&d, false, mat.NewVecDense(len(before), before)); err != nil {
			t.Fatal(err)
		}
		for k := range 3 {
			want := truth[2*k] - d.AtVec(k)
			if math.Abs(s.cur.theta[2*k]-want) > 1e-9*(1+math.Abs(want)) {
				t.Errorf("amplitude %d is %v, want %v", k, s.cur.theta[2*k], want)
			}
		}
		var square float64
		for i, v := range s.cur.res {
			square += (v - before[i]) * (v - before[i])
		}
		if math.Abs(moved-square) > 1e-9*square {
			t.Errorf("moved by %v, said to be %v", square, moved)
		}
		ss := s.cur.ss[0]
		s.evaluate(s.cur)
		if math.Abs(s.cur.ss[0]-ss) > 1e-9*ss {
			t.Errorf("evaluated there: %v, settled to %v", s.cur.ss[0], ss)
		}
	}
}

func TestReplacedData(t *testing.T) {
	p, truth := decaying(rand.New(rand.NewPCG(43, 1)), 2)
	s := newSolver(p, false)
	s.place(truth)
	s.evaluate(s.cur)
	res, jac := append([]float64(nil), s.cur.res...), append([]float64(nil), s.cur.jraw...)
	n := len(res)
	s.shift, s.weight = make([]float64, n), make([]float64, n)
	for i := range n {
		s.shift[i], s.weight[i] = float64(i), float64(i%3)
	}
	s.evaluate(s.cur)
	for i := range n {
		if want := (res[i] + float64(i)) * float64(i%3); s.cur.res[i] != want {
			t.Errorf("residual %d is %v, want %v", i, s.cur.res[i], want)
		}
		for j := range 2 {
			if want := jac[2*i+j] * float64(i%3); s.cur.jraw[2*i+j] != want {
				t.Errorf("derivative %d, %d is %v, want %v", i, j, s.cur.jraw[2*i+j], want)
			}
		}
	}
}

func TestAllFinite(t *testing.T) {
	for n := range 10 {
		a := make([]float64, n)
		for i := range a {
			a[i] = float64(i)
		}
		if !allFinite(a) {
			t.Errorf("%v", a)
		}
		for i := range a {
			for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
				b := append([]float64(nil), a...)
				b[i] = bad
				if allFinite(b) {
					t.Errorf("%v", b)
				}
			}
		}
	}
}

// The covariance of two blocks by its definition, with gonum's inverse.
func TestCovarianceOfTwoBlocks(t *testing.T) {
	rng := rand.New(rand.NewPCG(44, 1))
	p, truth := decaying(rng, 4)
	q, _ := decaying(rng, 4)
	p.Blocks = append(p.Blocks, q.Blocks[0])
	p.Starts = [][]float64{truth}
	for _, scatter := range [][]Scatter{nil, {Known, Known}, {Unknown, Known}} {
		p.Scatter = scatter
		r, err := Solve(t.Context(), p, Settings{Starts: 1})
		if err != nil {
			t.Fatal(err)
		}
		info := mat.NewDense(4, 4, nil)
		for b, block := range p.Blocks {
			res, jac := make([]float64, block.Len()), mat.NewDense(block.Len(), 4, nil)
			if err := block.Eval(res, jac, r.Theta); err != nil {
				t.Fatal(err)
			}
			var part mat.Dense
			part.Mul(jac.T(), jac)
			part.Scale(1/(r.Sigma[b]*r.Sigma[b]), &part)
			info.Add(info, &part)
		}
		var want mat.Dense
		if err := want.Inverse(info); err != nil {
			t.Fatal(err)
		}
		for i := range 4 {
			for j := range 4 {
				scale := math.Sqrt(want.At(i, i) * want.At(j, j))
				if math.Abs(r.Cov.At(i, j)-want.At(i, j)) > 1e-8*scale {
					t.Errorf("scatter %v: cov %d, %d is %v, want %v", scatter, i, j, r.Cov.At(i, j), want.At(i, j))
				}
			}
		}
	}
}

// Starts that crawl go on only where they may still win.
func TestPromising(t *testing.T) {
	p, _ := decaying(rand.New(rand.NewPCG(45, 1)), 2)
	s := newSolver(p, false)
	runs := []*run{
		{end: stationary, obj: 2}, {end: exhausted, obj: 19}, {end: exhausted, obj: 21},
		{end: failed, obj: 0}, {end: stalled, obj: 1}, {end: exhausted, obj: 1},
	}
	if some := s.promising(runs); len(some) != 2 || some[0] != runs[1] || some[1] != runs[5] {
		t.Errorf("%d go on", len(some))
	}
	if some := s.promising(runs[1:4]); len(some) != 2 {
		t.Errorf("nothing has arrived, and %d go on", len(some))
	}
	s.joint, s.count = true, []float64{30}
	runs[0].obj, runs[1].obj, runs[2].obj = 0, 30*math.Log(9.9), 30*math.Log(10.1)
	if some := s.promising(runs[:3]); len(some) != 1 || some[0] != runs[1] {
		t.Errorf("likelihoods: %d go on", len(some))
	}
}

func TestSlack(t *testing.T) {
	p, _ := decaying(rand.New(rand.NewPCG(46, 1)), 2)
	s := newSolver(p, false)
	if got := s.slack(7); got != 7e-6 {
		t.Errorf("of a sum of squares: %v", got)
	}
	s.joint = true
	if got := s.slack(-1000); math.Abs(got-30e-6) > 1e-12 {
		t.Errorf("of a likelihood of 30 residuals: %v", got)
	}
}

// A radius that no step of use fits into shrinks until the descent stalls; it
// does not go on for ever.
func TestStalls(t *testing.T) {
	p := &Problem{Parameters: []Parameter{{Low: -10, High: 10}}, Blocks: []Block{liar{}}}
	s := newSolver(p, false)
	if !s.begun([]float64{1}) {
		t.Fatal("not begun")
	}
	if end := s.descend(nil, 1e-6, 1000); end != stalled {
		t.Errorf("ended %d", end)
	}
	if s.evals > 200 {
		t.Errorf("%d evaluations", s.evals)
	}
}

// liar has a derivative of the wrong sign.
type liar struct{}

func (liar) Len() int { return 2 }
func (liar) Eval(res []float64, jac *mat.Dense, th []float64) error {
	res[0], res[1] = 3+th[0], 1
	if jac != nil {
		jac.Set(0, 0, -1)
	}
	return nil
}
