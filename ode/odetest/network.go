package odetest

import (
	"gonum.org/v1/gonum/mat"

	"ligancy/ode"
)

// reaction is one irreversible step of first or second order.
type reaction struct {
	rate float64
	a, b int   // reactants; b < 0: first order
	out  []int // products
}

// network is mass action over a list of reactions.
type network struct {
	n     int
	steps []reaction
}

func (w *network) Dim() int { return w.n }

func (w *network) Derivs(dst []float64, _ float64, y []float64) error {
	clear(dst)
	for i := range w.steps {
		r := &w.steps[i]
		v := r.rate * y[r.a]
		if r.b >= 0 {
			v *= y[r.b]
			dst[r.b] -= v
		}
		dst[r.a] -= v
		for _, k := range r.out {
			dst[k] += v
		}
	}
	return nil
}

func (w *network) Jacobian(dst *mat.Dense, _ float64, y []float64) error {
	J := dst.RawMatrix().Data
	for i := range w.steps {
		r := &w.steps[i]
		if r.b < 0 {
			w.column(J, r, r.a, r.rate)
			continue
		}
		w.column(J, r, r.a, r.rate*y[r.b])
		w.column(J, r, r.b, r.rate*y[r.a])
	}
	return nil
}

// column adds one reaction's share of ∂f/∂y_j, its rate having slope g there.
func (w *network) column(J []float64, r *reaction, j int, g float64) {
	J[r.a*w.n+j] -= g
	if r.b >= 0 {
		J[r.b*w.n+j] -= g
	}
	for _, k := range r.out {
		J[k*w.n+j] += g
	}
}

// pollution is the chemical part of an air pollution model.
func pollution() Problem {
	y := make([]float64, 20)
	y[1], y[3], y[6], y[7], y[8], y[16] = 0.2, 0.04, 0.1, 0.3, 0.01, 0.007
	return Problem{
		Name: "pollu", Title: "Air pollution, 20 species, 25 reactions", Stiff: true, Floor: 1e-10,
		Source: "J. G. Verwer, SIAM J. Sci. Comput. 15 (1994) 1243-1259",
		Start:  y,
		New: func() ode.System {
			return &network{20, []reaction{
				{.35, 0, -1, []int{1, 2}}, {26.6, 1, 3, []int{0}}, {12300, 4, 1, []int{5, 0}},
				{.00086, 6, -1, []int{4, 4, 7}}, {.00082, 6, -1, []int{7}}, {15000, 6, 5, []int{4, 7}},
				{.00013, 8, -1, []int{9, 4, 7}}, {24000, 8, 5, []int{10}}, {16500, 10, 1, []int{0, 9, 11}},
				{9000, 10, 0, []int{12}}, {.022, 12, -1, []int{10, 0}}, {12000, 9, 1, []int{13, 0}},
				{1.88, 13, -1, []int{6, 4}}, {16300, 0, 5, []int{14}}, {4800000, 2, -1, []int{3}},
				{.00035, 3, -1, []int{15}}, {.0175, 3, -1, []int{2}}, {1e8, 15, -1, []int{5, 5}},
				{4.44e11, 15, -1, []int{2}}, {1240, 16, 5, []int{17, 4}}, {2.1, 18, -1, []int{1}},
				{5.78, 18, -1, []int{0, 2}}, {.0474, 0, 3, []int{18}}, {1780, 18, 0, []int{19}},
				{3.12, 19, -1, []int{18, 0}},
			}}
		},
	}
}

// tetramer is a ligand with a concerted homotetramer, in M and s:
// y = L, R0 … R4, T0 … T4; kon = 1e7, K_R = 1e-6, K_T = 1e-4, [T0]/[R0] = 1e4.
func tetramer() Problem {
	y := make([]float64, 11)
	y[0], y[1], y[6] = 5e-6, 1e-6/10001, 1e-6*1e4/10001
	return Problem{
		Name: "tetramer", Title: "Ligand and a concerted homotetramer", Stiff: true, Floor: 1e-12,
		Source: "made for this project; scheme of J. Monod, J. Wyman and J.-P. Changeux, " +
			"J. Mol. Biol. 12 (1965) 88-118",
		Start: y,
		New: func() ode.System {
			w := &network{n: 11}
			for s, off := range []float64{10, 1000} {
				for i := range 4 {
					x := 1 + 5*s + i
					w.steps = append(w.steps,
						reaction{float64(4-i) * 1e7, 0, x, []int{x + 1}},
						reaction{float64(i+1) * off, x + 1, -1, []int{x, 0}})
				}
			}
			rt, tr := 1000.0, 0.1
			for i := range 5 {
				w.steps = append(w.steps,
					reaction{rt, 1 + i, -1, []int{6 + i}}, reaction{tr, 6 + i, -1, []int{1 + i}})
				rt, tr = rt/10, tr*10
			}
			return w
		},
	}
}
