package ode

// point is where the integration stands. The state comes first in y, then its
// sensitivities row by row (n×p); so in f and in the weights.
type point struct {
	t, tLow float64 // the clock and what rounding has left of it
	y, f    []float64
	iw      []float64 // reciprocals of the weights rtol·|y| + atol
}

// fate is how an attempted step ended.
type fate uint8

const (
	stepped     fate = iota // with an error estimate, which may be too large
	diverged                // the iteration does not converge
	singular                // a matrix has no inverse
	unevaluable             // f is not finite, or undefined, within the step
	broken                  // the System returned an error
)

// trial is what came of an attempted step.
type trial struct {
	fate   fate
	ratio  float64 // estimated error in units of the tolerance
	margin float64 // what the controller aims below 1
	shrink float64 // after a failure: what to multiply the step by
	err    error
}

// stepper is a method: it proposes a step and knows the polynomial of the last
// one taken. The controller sizes steps and the loop decides.
type stepper interface {
	// begin prepares for steps from p, whose y and weights are set, and sets its f.
	begin(p *point) error
	// try attempts a step of size h; rise is what it adds to y.
	try(p *point, h float64) trial
	rise() []float64
	// power is k where the error estimate behaves as h^k.
	power() float64
	// accept keeps the polynomial of the step just tried from p.
	accept(p *point, h float64)
	// refresh sets f at p, the end of the step just accepted.
	refresh(p *point) error
	// settle turns the size the controller proposes after a step of size h into
	// the one to try.
	settle(h, proposed float64) float64
	// complete makes the polynomial ready, where that costs evaluations.
	complete(p *point) error
	// polynomial writes u(x) − u(1) of the last step accepted, 0 ≤ x ≤ 1 from
	// its start to its end, for the first len(dst) of the whole state.
	polynomial(dst []float64, x float64)
	// coefficients are those of the polynomial, as record keeps them.
	coefficients() (*tableau, [][]float64)
	// culprit is the component that the last attempt failed for; −1 unknown.
	culprit(p *point, f fate) int
}
