package odetest

import (
	"gonum.org/v1/gonum/mat"

	"ligancy/ode"
)

// analytic is a System with its Jacobian, from two functions. J is row-major.
type analytic struct {
	n int
	f func(d []float64, t float64, y []float64)
	j func(J []float64, t float64, y []float64)
}

func (a *analytic) Dim() int { return a.n }

func (a *analytic) Derivs(dst []float64, t float64, y []float64) error {
	a.f(dst, t, y)
	return nil
}

func (a *analytic) Jacobian(dst *mat.Dense, t float64, y []float64) error {
	a.j(dst.RawMatrix().Data, t, y)
	return nil
}

func system(n int, f, j func(dst []float64, t float64, y []float64)) func() ode.System {
	return func() ode.System { return &analytic{n, f, j} }
}

// robertson is an autocatalytic reaction with rates over nine decades; y₁+y₂+y₃ = 1.
func robertson() Problem {
	return Problem{
		Name: "rober", Title: "Robertson's reaction", Stiff: true, Floor: 1e-14,
		Source: "H. H. Robertson (1966); Hairer and Wanner, Solving ODEs II, IV.10",
		Start:  []float64{1, 0, 0},
		New: system(3, func(d []float64, _ float64, y []float64) {
			_, _ = d[2], y[2]
			d[0] = -0.04*y[0] + 1e4*y[1]*y[2]
			d[2] = 3e7 * y[1] * y[1]
			d[1] = -d[0] - d[2]
		}, func(J []float64, _ float64, y []float64) {
			_, _ = J[8], y[2]
			J[0], J[1], J[2] = -0.04, 1e4*y[2], 1e4*y[1]
			J[7] = 6e7 * y[1]
			J[3], J[4], J[5] = 0.04, -J[1]-J[7], -J[2]
		}),
	}
}

// hires is the high irradiance response of plants; y₇+y₈ = 0.0057.
func hires() Problem {
	return Problem{
		Name: "hires", Title: "High irradiance response", Stiff: true, Floor: 1e-4,
		Source: "E. Schäfer (1975); Hairer and Wanner, Solving ODEs II, IV.10",
		Start:  []float64{1, 0, 0, 0, 0, 0, 0, 0.0057},
		New: system(8, func(d []float64, _ float64, y []float64) {
			_, _ = d[7], y[7]
			a := 280 * y[5] * y[7]
			d[0] = -1.71*y[0] + 0.43*y[1] + 8.32*y[2] + 0.0007
			d[1] = 1.71*y[0] - 8.75*y[1]
			d[2] = -10.03*y[2] + 0.43*y[3] + 0.035*y[4]
			d[3] = 8.32*y[1] + 1.71*y[2] - 1.12*y[3]
			d[4] = -1.745*y[4] + 0.43*(y[5]+y[6])
			d[5] = -a + 0.69*y[3] + 1.71*y[4] - 0.43*y[5] + 0.69*y[6]
			d[6] = a - 1.81*y[6]
			d[7] = -d[6]
		}, hiresJacobian),
	}
}

func hiresJacobian(J []float64, _ float64, y []float64) {
	set := func(i, j int, v float64) { J[8*i+j] = v }
	set(0, 0, -1.71)
	set(0, 1, 0.43)
	set(0, 2, 8.32)
	set(1, 0, 1.71)
	set(1, 1, -8.75)
	set(2, 2, -10.03)
	set(2, 3, 0.43)
	set(2, 4, 0.035)
	set(3, 1, 8.32)
	set(3, 2, 1.71)
	set(3, 3, -1.12)
	set(4, 4, -1.745)
	set(4, 5, 0.43)
	set(4, 6, 0.43)
	u, v := 280*y[7], 280*y[5]
	set(5, 3, 0.69)
	set(5, 4, 1.71)
	set(5, 5, -u-0.43)
	set(5, 6, 0.69)
	set(5, 7, -v)
	set(6, 5, u)
	set(6, 6, -1.81)
	set(6, 7, v)
	set(7, 5, -u)
	set(7, 6, 1.81)
	set(7, 7, -v)
}

// oregonator is a relaxation oscillator of the Belousov–Zhabotinskii reaction.
func oregonator() Problem {
	return Problem{
		Name: "orego", Title: "Oregonator", Stiff: true, Floor: 1e-3,
		Source: "R. J. Field and R. M. Noyes (1974); Hairer and Wanner, Solving ODEs II, IV.10",
		Start:  []float64{1, 2, 3},
		New: system(3, func(d []float64, _ float64, y []float64) {
			_, _ = d[2], y[2]
			d[0] = 77.27 * (y[1] + y[0]*(1-8.375e-6*y[0]-y[1]))
			d[1] = (y[2] - (1+y[0])*y[1]) / 77.27
			d[2] = 0.161 * (y[0] - y[2])
		}, func(J []float64, _ float64, y []float64) {
			_, _ = J[8], y[2]
			J[0], J[1] = 77.27*(1-2*8.375e-6*y[0]-y[1]), 77.27*(1-y[0])
			J[3], J[4], J[5] = -y[1]/77.27, -(1+y[0])/77.27, 1/77.27
			J[6], J[8] = 0.161, -0.161
		}),
	}
}

func vanDerPolSystem(mu float64) func() ode.System {
	return system(2, func(d []float64, _ float64, y []float64) {
		_, _ = d[1], y[1]
		d[0] = y[1]
		d[1] = mu*(1-y[0]*y[0])*y[1] - y[0]
	}, func(J []float64, _ float64, y []float64) {
		_, _ = J[3], y[1]
		J[1] = 1
		J[2], J[3] = -2*mu*y[0]*y[1]-1, mu*(1-y[0]*y[0])
	})
}

func vanDerPol() Problem {
	return Problem{
		Name: "vdpol", Title: "van der Pol, μ = 1e3", Stiff: true, Floor: 1e-4,
		Source: "B. van der Pol; Hairer and Wanner, Solving ODEs II, IV.10",
		Start:  []float64{2, 0}, New: vanDerPolSystem(1e3),
	}
}

// vanDerPolScaled runs through eleven half periods.
func vanDerPolScaled() Problem {
	return Problem{
		Name: "vdpol_scaled", Title: "van der Pol, time scaled, ε = 1e-6", Stiff: true, Floor: 0.1,
		Source: "Hairer and Wanner, Solving ODEs II, IV.10",
		Start:  []float64{2, 0},
		New: system(2, func(d []float64, _ float64, y []float64) {
			_, _ = d[1], y[1]
			d[0] = y[1]
			d[1] = ((1-y[0]*y[0])*y[1] - y[0]) / 1e-6
		}, func(J []float64, _ float64, y []float64) {
			_, _ = J[3], y[1]
			J[1] = 1
			J[2], J[3] = (-2*y[0]*y[1]-1)/1e-6, (1-y[0]*y[0])/1e-6
		}),
	}
}

// vanDerPolHard has a jump that lasts 1e-6 near t = 8e5, where one unit in the
// last place of t is 1.2e-10.
func vanDerPolHard() Problem {
	return Problem{
		Name: "vdpol6", Title: "van der Pol, μ = 1e6", Stiff: true, Floor: 1e-7,
		Source: "B. van der Pol", Start: []float64{2, 0}, New: vanDerPolSystem(1e6),
	}
}
