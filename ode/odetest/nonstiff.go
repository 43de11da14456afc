package odetest

import "math"

// arenstorf is a periodic orbit of the restricted three-body problem.
func arenstorf() Problem {
	const m, q = 0.012277471, 1 - 0.012277471
	return Problem{
		Name: "arenstorf", Title: "Arenstorf orbit", Floor: 1,
		Source: "R. F. Arenstorf (1963); Hairer, Nørsett and Wanner, Solving ODEs I, II.0",
		Start:  []float64{0.994, 0, 0, -2.00158510637908252240537862224},
		New: system(4, func(d []float64, _ float64, y []float64) {
			_, _ = d[3], y[3]
			a, b := y[0]+m, y[0]-q
			s1, s2 := a*a+y[1]*y[1], b*b+y[1]*y[1]
			d1, d2 := s1*math.Sqrt(s1), s2*math.Sqrt(s2)
			d[0], d[1] = y[2], y[3]
			d[2] = y[0] + 2*y[3] - q*a/d1 - m*b/d2
			d[3] = y[1] - 2*y[2] - q*y[1]/d1 - m*y[1]/d2
		}, func(J []float64, _ float64, y []float64) {
			a, b, c := y[0]+m, y[0]-q, y[1]
			s1, s2 := a*a+c*c, b*b+c*c
			d1, d2 := s1*math.Sqrt(s1), s2*math.Sqrt(s2)
			J[2], J[7] = 1, 1
			J[8] = 1 - q/d1 - m/d2 + 3*q*a*a/(d1*s1) + 3*m*b*b/(d2*s2)
			J[9] = 3*q*a*c/(d1*s1) + 3*m*b*c/(d2*s2)
			J[11] = 2
			J[12] = J[9]
			J[13] = 1 - q/d1 - m/d2 + 3*q*c*c/(d1*s1) + 3*m*c*c/(d2*s2)
			J[14] = -2
		}),
	}
}

// lotkaVolterra keeps y₁ − 3 ln y₁ + y₂ − 1.5 ln y₂ = 2.
func lotkaVolterra() Problem {
	return Problem{
		Name: "lotka", Title: "Lotka–Volterra", Floor: 1e-2,
		Source: "textbook problem; constants 1.5, 1, 3, 1",
		Start:  []float64{1, 1},
		New: system(2, func(d []float64, _ float64, y []float64) {
			_, _ = d[1], y[1]
			d[0] = 1.5*y[0] - y[0]*y[1]
			d[1] = y[0]*y[1] - 3*y[1]
		}, func(J []float64, _ float64, y []float64) {
			_, _ = J[3], y[1]
			J[0], J[1], J[2], J[3] = 1.5-y[1], -y[0], y[1], y[0]-3
		}),
	}
}
