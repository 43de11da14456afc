package odetest

import (
	"bytes"
	"context"
	"encoding/csv"
	"errors"
	"math"
	"slices"
	"strings"
	"testing"
	"time"

	"gonum.org/v1/gonum/mat"

	"ligancy/ode"
)

// goal are the problems on which digits and time are held to a goal.
var goal = []string{"rober", "hires", "orego", "pollu", "vdpol", "tetramer"}

// At rtol = 1e-10 every reference state, transients included, has nine digits.
func TestNineDigits(t *testing.T) {
	rows, err := WorkPrecision(t.Context(), Precision{Problems: goal, Rtols: []float64{1e-10}, Repeats: -1})
	if err != nil {
		t.Fatal(err)
	}
	if len(rows) != len(goal) {
		t.Fatalf("%d rows", len(rows))
	}
	for _, r := range rows {
		if r.Err != nil || !(r.MescdMin >= 9) {
			t.Errorf("%s: %.2f digits, %v", r.Problem, r.MescdMin, r.Err)
		}
	}
}

// Digits follow the tolerance on all problems, whatever their condition: each
// problem may lose what it amplifies.
func TestDigitsFollowTolerance(t *testing.T) {
	lost := map[string]float64{
		"rober": 0, "hires": 0.5, "orego": 1, "pollu": 0.5, "vdpol": 1.5, "vdpol_scaled": 2, "vdpol6": 1.5,
		"arenstorf": 4.5, "lotka": 2.5, "tetramer": 0.5,
	}
	set := Precision{Rtols: []float64{1e-4, 1e-6, 1e-8, 1e-10, 1e-12}, Repeats: -1}
	rows, err := WorkPrecision(t.Context(), set)
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range rows {
		want := min(-math.Log10(r.Rtol)-lost[r.Problem], 11.5)
		if r.Problem == "arenstorf" {
			want = min(want, 8) // its start is rounded to binary64
		}
		if r.Err != nil || !(r.MescdMin >= want) {
			t.Errorf("%s, %s at %.0e: %.2f digits, not %.1f (%v)",
				r.Problem, r.Solver, r.Rtol, r.MescdMin, want, r.Err)
		}
	}
}

// End states of the Test Set for IVP Solvers, release 2.4 (F. Mazzia and
// C. Magherini, University of Bari, 2008): the table here agrees with them.
func TestPublishedStates(t *testing.T) {
	for _, c := range []struct {
		name   string
		digits float64 // of the agreement
		y      []float64
	}{
		{"rober", 13.5, []float64{0.2083340149701255e-07, 0.8333360770334713e-13, 0.9999999791665050}},
		{"hires", 15, []float64{0.7371312573325668e-3, 0.1442485726316185e-3, 0.5888729740967575e-4,
			0.1175651343283149e-2, 0.2386356198831331e-2, 0.6238968252742796e-2, 0.2849998395185769e-2,
			0.2850001604814231e-2}},
		{"orego", 12.5, []float64{0.1000814870318523e+01, 0.1228178521549917e+04, 0.1320554942846706e+03}},
		{"pollu", 15, []float64{0.5646255480022769e-01, 0.1342484130422339e+00, 0.4139734331099427e-08,
			0.5523140207484359e-02, 0.2018977262302196e-06, 0.1464541863493966e-06, 0.7784249118997964e-01,
			0.3245075353396018e+00, 0.7494013383880406e-02, 0.1622293157301561e-07, 0.1135863833257075e-07,
			0.2230505975721359e-02, 0.2087162882798630e-03, 0.1396921016840158e-04, 0.8964884856898295e-02,
			0.4352846369330103e-17, 0.6899219696263405e-02, 0.1007803037365946e-03, 0.1772146513969984e-05,
			0.5682943292316392e-04}},
		{"vdpol", 14, []float64{0.1706167732170469e1, -0.8928097010248125e-3}},
	} {
		p, err := ByName(c.name)
		if err != nil {
			t.Fatal(err)
		}
		end := p.Reference[len(p.Reference)-1]
		for i, v := range c.y {
			if d := math.Abs(end[i]-v) / math.Abs(v); d > math.Pow(10, -c.digits) {
				t.Errorf("%s, component %d: %.16g, published %.16g", c.name, i+1, end[i], v)
			}
		}
	}
}

// The Jacobians of the problems against central differences.
func TestProblemJacobians(t *testing.T) {
	for _, p := range Problems() {
		sys := p.New().(ode.Jacobianer)
		n := sys.Dim()
		jac := mat.NewDense(n, n, nil)
		for _, y := range append([][]float64{p.Start}, p.Reference[:2]...) {
			jac.Zero()
			if err := sys.Jacobian(jac, 0.5, y); err != nil {
				t.Fatal(err)
			}
			a, b, z := make([]float64, n), make([]float64, n), slices.Clone(y)
			for j := range n {
				h := 1e-6 * max(math.Abs(y[j]), p.Floor)
				z[j] = y[j] + h
				hi := z[j]
				_ = sys.Derivs(a, 0.5, z)
				z[j] = y[j] - h
				_ = sys.Derivs(b, 0.5, z)
				for i := range n {
					d := (a[i] - b[i]) / (hi - z[j])
					noise := 1e-15 * (math.Abs(a[i]) + math.Abs(b[i])) / h
					for k := range n { // rounding of the terms of fᵢ
						noise += 1e-15 * math.Abs(jac.At(i, k)*y[k]) / h
					}
					if math.Abs(jac.At(i, j)-d) > 1e-7*math.Abs(d)+noise {
						t.Errorf("%s: ∂f%d/∂y%d = %g, by differences %g", p.Name, i+1, j+1, jac.At(i, j), d)
					}
				}
				z[j] = y[j]
			}
		}
	}
}

// rated is Robertson's reaction with its three rates as constants.
type rated struct{ ode.Jacobianer }

func (rated) NumParams() int { return 3 }

func (rated) ParamJacobian(dst *mat.Dense, _ float64, y []float64) error {
	set := func(j int, d1, d3 float64) {
		dst.Set(0, j, d1)
		dst.Set(1, j, -d1-d3)
		dst.Set(2, j, d3)
	}
	set(0, -y[0], 0)
	set(1, y[1]*y[2], 0)
	set(2, 0, y[1]*y[1])
	return nil
}

// ∂y/∂k of Robertson's reaction. The figures were computed by Taylor series of
// degree 30 with 32 decimals; the states of that run agree with the table to 20.
func TestRobertsonSensitivities(t *testing.T) {
	want := [][]float64{
		{-0.35595256598285556725, 9.5423814278497685688e-8, -1.5831766355576349386e-11,
			0.00039025440538182185358, -2.1309610301936463973e-10, -5.2900410932148143281e-13,
			0.3555623115774737454, -9.5210718175478321048e-8, 1.6360770464897830819e-11},
		{-1.8760821737666475965, 2.9613771291453752582e-6, -4.9334368050928824494e-10,
			0.00017921805900102769273, -5.8304605662342277143e-10, -2.7626219610894632148e-13,
			1.8759029557076465688, -2.9607940830887518354e-6, 4.9361994270539719126e-10},
	}
	p, err := ByName("rober")
	if err != nil {
		t.Fatal(err)
	}
	full := rated{p.New().(ode.Jacobianer)}
	for _, c := range []struct {
		name string
		sys  ode.System
		o    ode.Options
		tol  float64
	}{
		{"radau", full, ode.Options{Rtol: 1e-8}, 1e-7},
		{"radau, differenced", plain{full}, ode.Options{Rtol: 1e-8}, 1e-7},
		{"radau, tight", full, ode.Options{Rtol: 1e-11}, 1e-9},
		{"explicit", full, ode.Options{Rtol: 1e-8, Method: ode.Explicit}, 1e-7},
	} {
		c.o.Atol = c.o.Rtol * 1e-8
		c.o.Sensitivity = &ode.Sensitivity{Scale: []float64{0.04, 1e4, 3e7}}
		sol, err := ode.Solve(t.Context(), c.sys, p.Start, []float64{0, 0.4, 4}, c.o)
		if err != nil {
			t.Fatal(c.name, err)
		}
		for k, w := range want {
			for i, v := range w {
				got := sol.Sensitivities[k+1].RawMatrix().Data[i]
				if math.Abs(got-v) > c.tol*math.Abs(v) {
					t.Errorf("%s: sensitivity %d at t = %g is %.12g, not %.12g", c.name, i+1, sol.Times[k+1], got, v)
				}
			}
		}
	}
}

// Without formulas for its Jacobian every stiff problem is still solved.
func TestDifferencedProblems(t *testing.T) {
	for _, p := range Problems() {
		if !p.Stiff || p.Name == "vdpol_scaled" {
			continue
		}
		sys := p.New()
		o := ode.Options{Rtol: 1e-7, Atol: 1e-7 * p.Floor}
		sol, err := ode.Solve(t.Context(), bare{sys}, p.Start, p.Times, o)
		if err != nil {
			t.Errorf("%s: %v", p.Name, err)
			continue
		}
		var r Row
		r.score(p, sol)
		if r.MescdMin < 5 {
			t.Errorf("%s: %.2f digits", p.Name, r.MescdMin)
		}
		if sol.Stats.Differences == 0 {
			t.Errorf("%s: no differences", p.Name)
		}
	}
}

// bare hides all but the right-hand side.
type bare struct{ ode.System }

func TestRows(t *testing.T) {
	set := Precision{Problems: []string{"rober", "lotka"}, Rtols: []float64{1e-4, 1e-6}, Repeats: 1}
	rows, err := WorkPrecision(t.Context(), set)
	if err != nil {
		t.Fatal(err)
	}
	if len(rows) != 6 { // two methods on the problem that is not stiff
		t.Fatalf("%d rows", len(rows))
	}
	rows = append(rows, Row{Problem: "rober", Solver: "radau", Err: errors.New("stopped")})
	var b bytes.Buffer
	if err := WriteRows(&b, rows); err != nil {
		t.Fatal(err)
	}
	table, err := csv.NewReader(&b).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	const head = "problem,solver,rtol,atol,status,scd_end,scd_min,mescd_end,mescd_min," +
		"steps,rhs,jac,lu,newton,cpu_ms,y1,y2,y3"
	if got := strings.Join(table[0], ","); got != head {
		t.Errorf("columns %s", got)
	}
	if first := table[1]; first[0] != "rober" || first[1] != "radau" || first[2] != "1e-04" ||
		first[3] != "1e-18" || first[4] != "ok" || first[14] == "" {
		t.Errorf("first row %v", first)
	}
	if last := table[len(table)-1]; last[4] != "stopped" || last[7] != "" || last[15] != "" {
		t.Errorf("row of a failure %v", last)
	}
}

func TestRowsStop(t *testing.T) {
	if _, err := WorkPrecision(t.Context(), Precision{Problems: []string{"nothing"}}); err == nil {
		t.Error("a problem without name was found")
	}
	ctx, cancel := context.WithTimeout(t.Context(), time.Millisecond)
	defer cancel()
	if _, err := WorkPrecision(ctx, Precision{}); !errors.Is(err, context.DeadlineExceeded) {
		t.Errorf("the error is %v", err)
	}
}

func BenchmarkProblems(b *testing.B) {
	for _, p := range Problems() {
		b.Run(p.Name, func(b *testing.B) {
			s := ode.Solver{Options: ode.Options{Rtol: 1e-6, Atol: 1e-6 * p.Floor}}
			sys := p.New()
			var sol *ode.Solution
			for b.Loop() {
				var err error
				if sol, err = s.Solve(b.Context(), sol, sys, p.Start, p.Times); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(float64(sol.Stats.Steps), "steps")
		})
	}
}
