package ode

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// randomJacobian has entries over some decades in a share of the places.
func randomJacobian(r *rand.Rand, n int, share float64) []float64 {
	jac := make([]float64, n*n)
	for i := range jac {
		if r.Float64() < share {
			jac[i] = r.NormFloat64() * math.Pow(10, 2*r.NormFloat64())
		}
	}
	return jac
}

// Both factorisations solve what gonum's does.
func TestMatricesSolve(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 11))
	for trial := range 300 {
		n := 1 + trial%24
		jac := randomJacobian(r, n, 0.1+0.9*r.Float64())
		var m matrices
		m.begin(n)
		m.see(jac)
		b, h := &radauTables[trial%3], math.Pow(10, -4*r.Float64())
		if !m.factor(b, h, jac) {
			t.Fatalf("trial %d is singular", trial)
		}
		checkReal(t, &m, b, h, jac, r)
		checkPair(t, &m, b, h, jac, r)
		if m.planned != nil { // the dense way must agree
			m.dense = true
			if !m.factorDense(b, h, jac) {
				t.Fatalf("trial %d is singular", trial)
			}
			checkReal(t, &m, b, h, jac, r)
			checkPair(t, &m, b, h, jac, r)
		}
	}
}

func checkReal(t *testing.T, m *matrices, b *tableau, h float64, jac []float64, r *rand.Rand) {
	t.Helper()
	n := m.n
	a := mat.NewDense(n, n, nil)
	for i := range n {
		for j := range n {
			a.Set(i, j, -jac[i*n+j])
		}
		a.Set(i, i, a.At(i, i)+b.gamma/h)
	}
	const p = 3
	rhs := mat.NewDense(n, p, nil)
	for i := range rhs.RawMatrix().Data {
		rhs.RawMatrix().Data[i] = r.NormFloat64()
	}
	var want mat.Dense
	if err := want.Solve(a, rhs); err != nil {
		t.Skip("badly conditioned")
	}
	many := append([]float64(nil), rhs.RawMatrix().Data...)
	m.solveRealMany(many, p)
	for j := range p {
		one := make([]float64, n)
		mat.Col(one, j, rhs)
		m.solveReal(one)
		for i := range n {
			close1(t, "real", one[i], want.At(i, j), 1e-7)
			close1(t, "real, many", many[i*p+j], one[i], 1e-7)
		}
	}
}

// checkPair multiplies the solution with the matrix again.
func checkPair(t *testing.T, m *matrices, b *tableau, h float64, jac []float64, r *rand.Rand) {
	t.Helper()
	n := m.n
	const p = 2
	for q := range b.s / 2 {
		rhs := make([]complex128, n*p)
		for i := range rhs {
			rhs[i] = complex(r.NormFloat64(), r.NormFloat64())
		}
		many := append([]complex128(nil), rhs...)
		m.solvePairMany(q, many, p)
		for c := range p {
			x := make([]complex128, n)
			for i := range n {
				x[i] = rhs[i*p+c]
			}
			m.solvePair(q, x)
			for i := range n {
				sum := complex(b.alpha[q]/h, -b.beta[q]/h) * x[i]
				size := cmplx.Abs(sum)
				for j := range n {
					v := complex(jac[i*n+j], 0) * x[j]
					sum -= v
					size += cmplx.Abs(v)
				}
				if d := cmplx.Abs(sum - rhs[i*p+c]); d > 1e-9*(1+size) {
					t.Fatalf("pair %d of size %d is off by %g", q, n, d)
				}
				if d := cmplx.Abs(many[i*p+c] - x[i]); d > 1e-7*(1+cmplx.Abs(x[i])) {
					t.Fatalf("many right-hand sides differ by %g", d)
				}
			}
		}
	}
}

func TestMatricesSingular(t *testing.T) {
	b := &radauTables[0]
	const h = 0.5
	for _, n := range []int{1, 2, 6} {
		jac := make([]float64, n*n)
		jac[n*n-1] = b.gamma / h // a zero on the diagonal, nothing beside it
		var m matrices
		m.begin(n)
		m.see(jac)
		if m.factor(b, h, jac) {
			t.Errorf("size %d: a singular matrix was factored", n)
		}
		jac[0] = math.NaN()
		m.see(jac)
		if m.factor(b, h, jac) {
			t.Errorf("size %d: a matrix without numbers was factored", n)
		}
	}
}

// A zero pivot on the diagonal that an exchange of rows avoids.
func TestMatricesFallBack(t *testing.T) {
	b := &radauTables[0]
	const n, h = 8, 1.0
	jac := make([]float64, n*n)
	for i := range n {
		jac[i*n+i] = -1
	}
	jac[0], jac[1], jac[n], jac[n+1] = b.gamma/h, 5, 7, b.gamma/h
	var m matrices
	m.begin(n)
	m.see(jac)
	if m.planned == nil {
		t.Fatal("no plan for a pattern almost diagonal")
	}
	if !m.factor(b, h, jac) || !m.dense {
		t.Fatal("the dense way was not taken")
	}
	x := make([]float64, n)
	x[0] = 1
	m.solveReal(x)
	close1(t, "x₂", x[1], -1.0/5, 1e-14)
}

// An arrow costs n² multiplications if its point is eliminated last; from the
// other end it fills up.
func TestPlanArrow(t *testing.T) {
	const n = 70 // more than one word of bits
	jac := make([]float64, n*n)
	for i := range n {
		jac[i], jac[i*n], jac[i*n+i] = 1, 1, 1
	}
	var m matrices
	m.begin(n)
	m.see(jac)
	if m.planned == nil || m.planned.work() != 2*(n-1) {
		t.Fatalf("plan %v", m.planned != nil)
	}
	if fresh := m.pat.include(jac); fresh {
		t.Error("the same entries are new")
	}
}
