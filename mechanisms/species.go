package mechanisms

// species is a bound polynomial with ln Ẑ = ln Z − ln Z_0, Z_0 being that without
// ligand and effectors.
type species struct {
	*partCurve
	poly *coefficients
	sum  *average

	bare   *partCurve // the species without effectors; nil where there are none
	lnZero float64
	dZero  []float64
	dLnZ   []float64 // ∂ln Ẑ/∂θ, of the species' own constants
}

func newSpecies(s part) *species {
	c := &species{partCurve: newPartCurve(s)}
	c.poly = c.smooth.(factored).polynomial()
	c.sum = newAverage(c.poly, filled(c.poly.n), empty(c.poly.n), nil)
	c.dZero, c.dLnZ = make([]float64, c.poly.k), make([]float64, c.poly.k)
	if len(s.effects) > 0 {
		c.bare = newPartCurve(s)
	}
	return c
}

func (s *species) settle(theta []float64, env Environment) {
	s.bind(theta, env)
	s.smooth.(factored).polynomial()
	s.sum.rebind()
	zero := s.poly
	if s.bare != nil {
		for i, b := range s.local {
			s.bare.theta[i] = b.at(theta)
		}
		s.bare.Bind(s.bare.theta, s.bare.env)
		zero = s.bare.smooth.(factored).polynomial()
	}
	s.lnZero = zero.lnB[0]
	copy(s.dZero, zero.row(0))
}

// jet writes the species' jet and returns ln Ẑ, without xⁿ where x → ∞.
func (s *species) jet(lnx float64, to depth) float64 {
	s.sum.jet(lnx, &s.jets, to)
	for k := range s.dLnZ {
		s.dLnZ[k] = s.sum.dMean[k] - s.dZero[k]
	}
	return s.sum.lnP - s.lnZero
}
