package mechanisms

import "math"

// depth says how much of a jet is wanted.
type depth uint8

const (
	values    depth = iota // y and its derivatives in ln x, no gradients
	saturated              // and the gradient of y
	whole                  // and the gradients of the derivatives
)

// jet is a curve at one ln x as it adds and multiplies: the response y between
// 0 and 1, its complement, three derivatives in ln x, and their gradients.
type jet struct {
	y, e       float64   // y and 1 − y, each summed directly
	y1, y2, y3 float64   // dy/d ln x and higher
	g, g1, g2  []float64 // ∂/∂θ of y, y1 and y2
}

func newJet(k int) jet {
	s := make([]float64, 3*k)
	return jet{g: s[:k:k], g1: s[k : 2*k : 2*k], g2: s[2*k:]}
}

func (j *jet) zero() {
	j.y, j.e, j.y1, j.y2, j.y3 = 0, 0, 0, 0, 0
	clear(j.g)
	clear(j.g1)
	clear(j.g2)
}

// faint is the response, or its complement, below which the end slope stands
// for the slope: the sums underflow there.
const faint = 1e-280

// slope is n_H = y′/[y(1−y)].
func (j *jet) slope(low, high float64) float64 {
	switch {
	case j.y >= 0 && j.y < faint:
		return low
	case j.e >= 0 && j.e < faint:
		return high
	case j.y < 0 || j.e < 0:
		return math.NaN()
	}
	return j.y1 / j.y / j.e
}

// point writes the jet as a Point. low and high are the limits of n_H.
//
// With l = ln[y/(1−y)] and v = y(1−y), v′ = y′(1−2y):
//
//	l′ = y′/v
//	l″ = y″/v − l′²(1−2y)
//	l‴ = y‴/v − y″y′(1−2y)/v² − 2l′l″(1−2y) + 2l′²y′
func (j *jet) point(p *Point, low, high float64) {
	k := len(j.g)
	p.GradY, p.GradNH, p.GradDNH = sized(p.GradY, k), sized(p.GradNH, k), sized(p.GradDNH, k)
	copy(p.GradY, j.g)
	p.Y, p.Empty, p.DY = j.y, j.e, j.y1
	p.NH, p.DNH, p.D2NH = j.slope(low, high), 0, 0
	clear(p.GradNH)
	clear(p.GradDNH)
	if j.y < faint || j.e < faint {
		return
	}
	s := j.e - j.y // 1 − 2y
	r1, r2, r3 := j.y1/j.y/j.e, j.y2/j.y/j.e, j.y3/j.y/j.e
	l1 := r1
	l2 := r2 - l1*l1*s
	p.DNH = l2
	p.D2NH = r3 - r2*r1*s - 2*l1*l2*s + 2*l1*l1*j.y1
	for k, g := range j.g {
		rg := g / j.y / j.e
		g1 := j.g1[k]/j.y/j.e - l1*s*rg
		p.GradNH[k] = g1
		p.GradDNH[k] = j.g2[k]/j.y/j.e - r2*s*rg - 2*l1*s*g1 + 2*l1*l1*g
	}
}

// sized returns s where it has length k, else a new slice.
func sized(s []float64, k int) []float64 {
	if len(s) == k {
		return s
	}
	return make([]float64, k)
}

// smooth is a curve of this package: it has jets.
type smooth interface {
	Curve
	// jet writes the curve at ln x as deep as is asked.
	jet(lnx float64, j *jet, to depth)
	// endSlopes are the limits of n_H at x → 0 and x → ∞.
	endSlopes() (low, high float64)
	// turns are the ln x between which the curve does what it does.
	turns() (first, last float64)
	// ceiling is the limit of the response at x → ∞, as a share of all sites.
	ceiling() float64
}
