package odetest

import (
	"context"
	"testing"

	"ligancy/ode"
)

func TestConformance(t *testing.T) {
	for _, m := range []struct {
		name string
		opts ode.Options
	}{
		{"radau", ode.Options{}},
		{"radau of order 5", ode.Options{MaxOrder: 5}},
		{"radau of order 9", ode.Options{MinOrder: 9, MaxOrder: 9}},
		{"radau of order 13", ode.Options{MinOrder: 13}},
		{"explicit", ode.Options{Method: ode.Explicit}},
	} {
		t.Run(m.name, func(t *testing.T) {
			for _, c := range Conformance() {
				t.Run(c.Name, func(t *testing.T) {
					if err := c.Run(context.Background(), m.opts); err != nil {
						t.Error(err)
					}
				})
			}
		})
	}
}
