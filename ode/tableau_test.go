package ode

import (
	"math"
	"testing"
)

// inverse is A⁻¹ = T Λ T⁻¹ of a table.
func (b *tableau) inverse() [][]float64 {
	s := b.s
	lambda := make([][]float64, s)
	for i := range lambda {
		lambda[i] = make([]float64, s)
	}
	lambda[0][0] = b.gamma
	for i := range s / 2 {
		k := 1 + 2*i
		lambda[k][k], lambda[k][k+1] = b.alpha[i], b.beta[i]
		lambda[k+1][k], lambda[k+1][k+1] = -b.beta[i], b.alpha[i]
	}
	out := make([][]float64, s)
	for i := range out {
		out[i] = make([]float64, s)
		for j := range s {
			for k := range s {
				for l := range s {
					out[i][j] += b.t[i][k] * lambda[k][l] * b.inv[l][j]
				}
			}
		}
	}
	return out
}

func close1(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol*(1+math.Abs(want))) {
		t.Errorf("%s: %.17g, not %.17g", what, got, want)
	}
}

// The defining property of collocation: A c^(q−1) = c^q/q for q = 1 … s, and the
// last row integrates exactly to degree 2s−2. Hairer and Wanner, IV.5.
func TestTableDefinition(t *testing.T) {
	for k := range radauTables {
		b := &radauTables[k]
		inv := b.inverse()
		for q := 1; q <= b.s; q++ {
			for i := range b.s {
				var sum float64
				for j := range b.s {
					sum += inv[i][j] * math.Pow(b.c[j], float64(q)) / float64(q)
				}
				close1(t, "A⁻¹c^q/q", sum, math.Pow(b.c[i], float64(q-1)), 1e-12)
			}
		}
		// e_sᵀA = weights: solve Aᵀ-free through w·A⁻¹ = e_s.
		lu := denseLU[float64]{}
		lu.resize(b.s)
		for i := range b.s {
			for j := range b.s {
				lu.a[i*b.s+j] = inv[i][j] // column-major: this is the transpose
			}
		}
		if !lu.factor() {
			t.Fatal("A⁻¹ is singular")
		}
		w := make([]float64, b.s)
		w[b.s-1] = 1
		lu.solve(w)
		for q := 1; q <= 2*b.s-1; q++ {
			var sum float64
			for j, v := range w {
				sum += v * math.Pow(b.c[j], float64(q-1))
			}
			close1(t, "quadrature", sum, 1/float64(q), 1e-13)
		}
	}
}

func TestTableTransform(t *testing.T) {
	for k := range radauTables {
		b := &radauTables[k]
		for i := range b.s {
			for j := range b.s {
				var sum float64
				for l := range b.s {
					sum += b.t[i][l] * b.inv[l][j]
				}
				want := 0.0
				if i == j {
					want = 1
				}
				close1(t, "T T⁻¹", sum, want, 1e-12)
			}
		}
		var z [maxStages][]float64
		var x [maxStages]float64
		for i := range b.s {
			x[i] = float64(i*i) - 2
			z[i] = []float64{99, x[i], 2 * x[i]}
		}
		for i := range b.s {
			var sum float64
			for j := range b.s {
				sum += b.t[i][j] * x[j]
			}
			var got [2]float64
			combine(got[:], &b.t[i], &z, b.s, 1)
			close1(t, "first", got[0], sum, 1e-15)
			close1(t, "second", got[1], 2*sum, 1e-15)
		}
	}
}

// A polynomial of degree s without constant term is reproduced from its values at
// the nodes, and so are its slopes and its leading coefficient.
func TestTablePolynomial(t *testing.T) {
	for k := range radauTables {
		b := &radauTables[k]
		for d := 1; d <= b.s; d++ {
			p := float64(d)
			var z [maxStages]float64
			for i := range b.s {
				z[i] = math.Pow(b.c[i], p)
			}
			sum := func(a *[maxStages]float64) (v float64) {
				for i := range b.s {
					v += a[i] * z[i]
				}
				return v
			}
			for _, x := range []float64{0, 0.1, 0.5, 1, 1.7} {
				var l [maxStages]float64
				b.basis(&l, x)
				close1(t, "value", sum(&l), math.Pow(x, p), 1e-12)
			}
			first, lead := 0.0, 0.0
			if d == 1 {
				first = 1
			}
			if d == b.s {
				lead = 1
			}
			close1(t, "slope at 0", sum(&b.slope), first, 1e-12)
			close1(t, "leading coefficient", sum(&b.lead), lead, 1e-11)
			close1(t, "value at the probe", sum(&b.probeZ), math.Pow(b.probe, p), 1e-13)
			close1(t, "slope at the probe", sum(&b.probeSlope), p*math.Pow(b.probe, p-1), 1e-12)
		}
	}
}

// tree is a rooted tree: the branches at its root.
type tree []tree

func (a tree) order() int {
	n := 1
	for _, b := range a {
		n += b.order()
	}
	return n
}

// density is γ(τ).
func (a tree) density() float64 {
	g := float64(a.order())
	for _, b := range a {
		g *= b.density()
	}
	return g
}

// weight is Φᵢ(τ) at each stage.
func (a tree) weight() [explicitAll]float64 {
	var phi [explicitAll]float64
	for i := range phi {
		phi[i] = 1
	}
	for _, b := range a {
		inner := b.weight()
		for i := range phi {
			var sum float64
			for j, v := range explicitA[i] {
				sum += v * inner[j]
			}
			phi[i] *= sum
		}
	}
	return phi
}

// trees lists the rooted trees of each order up to n, branches in falling order
// of their number in the list.
func trees(n int) [][]tree {
	all := make([][]tree, n+1)
	var flat []tree
	var grow func(left, most int, sofar tree, out *[]tree)
	grow = func(left, most int, sofar tree, out *[]tree) {
		if left == 0 {
			*out = append(*out, append(tree(nil), sofar...))
			return
		}
		for i := most; i >= 0; i-- {
			if o := flat[i].order(); o <= left {
				grow(left-o, i, append(sofar, flat[i]), out)
			}
		}
	}
	for o := 1; o <= n; o++ {
		grow(o-1, len(flat)-1, nil, &all[o])
		flat = append(flat, all[o]...)
	}
	return all
}

// Order conditions Σ bᵢΦᵢ(τ) = 1/γ(τ) for all trees: J. C. Butcher; Hairer,
// Nørsett and Wanner, II.2. Numbers of trees 1, 1, 2, 4, 9, 20, 48, 115.
func TestExplicitOrderConditions(t *testing.T) {
	all := trees(8)
	for o, want := range []int{0, 1, 1, 2, 4, 9, 20, 48, 115} {
		if len(all[o]) != want {
			t.Fatalf("%d trees of order %d, not %d", len(all[o]), o, want)
		}
	}
	for i := range explicitA {
		var sum float64
		for _, a := range explicitA[i] {
			sum += a
		}
		close1(t, "row sum", sum, explicitC[i], 1e-14)
	}
	var rest3, rest5 float64 // what the estimators see of the next order
	for o := 1; o <= 8; o++ {
		for _, tau := range all[o] {
			phi, want := tau.weight(), 1/tau.density()
			var step, e5, e3 float64
			for i := range explicitStages {
				b := explicitA[explicitStages][i]
				step += b * phi[i]
				e5 += explicitE5[i] * phi[i]
				e3 += (b - explicitE3[i]) * phi[i]
			}
			close1(t, "order 8", step, want, 1e-13)
			switch {
			case o <= 3:
				close1(t, "estimator of order 3", e3, 0, 1e-14)
				fallthrough
			case o <= 5:
				close1(t, "estimator of order 5", e5, 0, 1e-14)
			case o == 6:
				rest5 = max(rest5, math.Abs(e5))
			}
			if o == 4 {
				rest3 = max(rest3, math.Abs(e3))
			}
		}
	}
	if rest3 < 1e-6 || rest5 < 1e-6 {
		t.Errorf("the estimators see nothing: %g, %g", rest3, rest5)
	}
}

// The polynomial has order 7: Σ bᵢ(x)Φᵢ(τ) = x^order/γ(τ).
func TestExplicitPolynomialOrder(t *testing.T) {
	all := trees(7)
	for _, x := range []float64{0.1, 0.35, 0.5, 0.8, 1} {
		b := polynomialWeights(x)
		for o := 1; o <= 7; o++ {
			for _, tau := range all[o] {
				phi := tau.weight()
				var sum float64
				for i := range phi {
					sum += b[i] * phi[i]
				}
				close1(t, "polynomial", sum, math.Pow(x, float64(o))/tau.density(), 1e-11)
			}
		}
	}
}

// polynomialWeights are the bᵢ(x) in u(x) = y + h Σ bᵢ(x) kᵢ, from nest.
func polynomialWeights(x float64) (w [explicitAll]float64) {
	c := nest(x)
	for i := range w {
		rise, left, right := explicitA[explicitStages][i], 0.0, 0.0
		switch i {
		case 0:
			left = 1
		case explicitStages:
			right = 1
		}
		w[i] = rise + c[0]*rise + c[1]*(left-rise) + c[2]*(2*rise-left-right)
		for q := range explicitD {
			w[i] += c[3+q] * explicitD[q][i]
		}
	}
	return w
}
