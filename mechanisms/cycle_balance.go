package mechanisms

import (
	"fmt"
	"math"
)

// Balanced is a Mechanism whose states may pass into each other around a loop more one
// way than the other: one that is driven.
type Balanced interface {
	Mechanism
	// Balance says whether at these constants every step is balanced by its own way
	// back, so that the mechanism is one of equilibrium; why says where it is not.
	Balance(theta []float64, env Environment) (holds bool, why string)
}

// balanceWithin is the ln by which the constants around a loop may miss their balance.
const balanceWithin = 1e-9

// Balance implements Balanced: around every loop the product of rates one way is that
// of rates the other way (Kolmogorov 1936, Math. Ann. 112:155). The ligand cancels.
func (m *cyclic) Balance(theta []float64, env Environment) (holds bool, why string) {
	lnW, known := make([]float64, len(m.states)), make([]bool, len(m.states))
	known[0] = true
	for range m.states {
		for i := range m.routes {
			if why := m.weighRoute(i, theta, env, lnW, known); why != "" {
				return false, why
			}
		}
	}
	for i, r := range m.routes {
		if r.back {
			continue
		}
		if off := lnW[r.from] + m.drop(i, theta, env) - lnW[r.to]; math.Abs(off) > balanceWithin {
			return false, fmt.Sprintf("around the loop with the step from %s to %s the rates one way are %.4g times those the other way",
				m.states[r.from], m.states[r.to], math.Exp(off))
		}
	}
	return true, ""
}

// weighRoute carries the weight of one end of a route to the other; why says that the
// route has no way back.
func (m *cyclic) weighRoute(i int, theta []float64, env Environment, lnW []float64, known []bool) (why string) {
	r := m.routes[i]
	if r.back {
		return ""
	}
	if i+1 == len(m.routes) || !m.routes[i+1].back {
		why = fmt.Sprintf("the step from %s to %s does not go back", m.states[r.from], m.states[r.to])
		if r.product {
			why = fmt.Sprintf("the step from %s to %s yields product and does not go back", m.states[r.from], m.states[r.to])
		}
		return why
	}
	switch drop := m.drop(i, theta, env); {
	case known[r.from] && !known[r.to]:
		lnW[r.to], known[r.to] = lnW[r.from]+drop, true
	case known[r.to] && !known[r.from]:
		lnW[r.from], known[r.from] = lnW[r.to]-drop, true
	}
	return ""
}

// drop is ln of the rate there over the rate back, the ligand left out.
func (m *cyclic) drop(i int, theta []float64, env Environment) float64 {
	there, back := m.routes[i], m.routes[i+1]
	d := theta[there.constant] - theta[back.constant]
	if there.effector >= 0 {
		d += math.Log(env.Effectors[there.effector])
	}
	return d
}
