package ode_test

import (
	"context"
	"fmt"

	"ligancy/ode"
)

// cooling is y′ = −k (y − 20).
type cooling struct{ k float64 }

func (cooling) Dim() int { return 1 }

func (c cooling) Derivs(dst []float64, _ float64, y []float64) error {
	dst[0] = -c.k * (y[0] - 20)
	return nil
}

func ExampleSolve() {
	sol, err := ode.Solve(context.Background(), cooling{0.1}, []float64{90}, []float64{0, 5, 10, 60},
		ode.Options{
			Rtol: 1e-8,
			Events: []ode.Event{{
				Name: "drinkable", G: func(_ float64, y []float64) float64 { return y[0] - 55 },
			}},
		})
	if err != nil {
		fmt.Println(err)
		return
	}
	for k, t := range sol.Times {
		fmt.Printf("%2g min  %.4f\n", t, sol.States[k][0])
	}
	fmt.Printf("drinkable after %.4f min\n", sol.Hits[0].Time)
	// Output:
	//  0 min  90.0000
	//  5 min  62.4571
	// 10 min  45.7516
	// 60 min  20.1735
	// drinkable after 6.9315 min
}
