package ode

// Where the iteration converges this fast a higher order pays, and where it
// converges this slowly a lower one.
const (
	thetaUp   = 0.002
	thetaDown = 0.3
	// thetaAim bounds the rate expected of the next step, as Θ grows with h; the
	// step is cut to leastCut of the last one at most.
	thetaAim = 0.12
	leastCut = 0.6
	// thetaKeep is the rate up to which a Jacobian is used again.
	thetaKeep = 0.001
	// A step that would grow by less than this keeps its factorisations.
	keepGrowth = 1.2
	// steadySteps is how many steps are taken before the order may change again.
	steadySteps = 10
)

// settle chooses the order of the next step, and its size between the one
// proposed, one at which the iteration will converge, and the present one, which
// costs no factorisation.
func (m *radau) settle(h, proposed float64) float64 {
	m.span++
	if m.theta > thetaAim/8 {
		if most := max(thetaAim/m.theta, leastCut); proposed/h > most {
			proposed = h * most
		}
	}
	grow := proposed / h
	if m.iters > 1 && m.span >= steadySteps {
		switch {
		case m.theta <= thetaUp && m.at < m.top && grow > 0.8 && grow < 1.2:
			m.order(m.at + 1)
		case m.theta >= thetaDown && m.at > m.low:
			m.order(m.at - 1)
		}
	}
	if m.theta > thetaKeep {
		m.jacWant = true
		return proposed
	}
	if grow >= 1 && grow <= keepGrowth && m.b == m.prevB {
		return h
	}
	return proposed
}
