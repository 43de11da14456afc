package mechanisms

import "math"

func (c *assemblyCurve) endSlopes() (low, high float64) {
	a, b := c.species[0].endSlopes()
	d, e := c.species[1].endSlopes()
	return min(a, d), min(b, e)
}

func (c *assemblyCurve) turns() (first, last float64) {
	a, b := c.species[0].turns()
	d, e := c.species[1].turns()
	return min(a, d), max(b, e)
}

func (c *assemblyCurve) ceiling() float64 {
	t, rest := split(c.lnG(c.full(0), c.full(1)), float64(c.a.m))
	return rest*c.species[0].ceiling() + t*c.species[1].ceiling()
}

// full is ln of the coefficient of the full species, of Ẑ.
func (c *assemblyCurve) full(i int) float64 {
	s := c.species[i]
	return s.poly.lnB[s.poly.n] - s.lnZero
}

// median follows from the free energy F = Pμ − [S] − [L], whose slope against
// ln x is −PȲ: ln x_m = (F_∞ − F_0)/P, where μ_∞ leaves out ln x; and by the
// envelope theorem ∂F = −[S]∂ln Ẑ_S − [L]∂ln(K Ẑ_L).
func (c *assemblyCurve) median() Measure {
	out := Measure{Grad: make([]float64, len(c.g))}
	for i, s := range c.species {
		if math.IsInf(s.poly.lnB[s.poly.n], -1) {
			return nothing("the last site of the " + c.a.parts[i].name + " species never fills")
		}
	}
	m, lnP := float64(c.a.m), c.lnP
	if math.IsInf(lnP, -1) {
		lnP = 0 // small molecules alone: it falls out
	}
	nS := c.n / m
	for _, end := range []struct {
		sign float64
		lnZ  func(i int) float64
		row  func(p *coefficients) []float64
	}{
		{1, c.full, func(p *coefficients) []float64 { return p.row(p.n) }},
		{-1, c.empty, func(p *coefficients) []float64 { return p.row(0) }},
	} {
		t, rest := split(c.lnG(end.lnZ(0), end.lnZ(1)), m)
		small, large := rest/nS, t/c.n // molecules per protomer
		mu := (math.Log(rest) + lnP - math.Log(nS) - end.lnZ(0)) / nS
		if rest == 0 {
			mu = (lnP - math.Log(c.n) - c.lnK - end.lnZ(1)) / c.n
		}
		out.Value += end.sign * (mu - small - large)
		out.Grad[0] -= end.sign * large
		for i, w := range []float64{small, large} {
			s := c.species[i]
			for k, d := range end.row(s.poly) {
				s.local[k].addTo(out.Grad, -end.sign*w*(d-s.dZero[k]))
			}
		}
	}
	return out
}

func (c *assemblyCurve) empty(i int) float64 {
	s := c.species[i]
	return s.poly.lnB[0] - s.lnZero
}

func (c *assemblyCurve) interaction() Measure {
	return nothing("assembly couples the molecules: the distance of the asymptotes depends on the protein concentration")
}

// StateNames names the states of both species.
func (c *assemblyCurve) StateNames() (names []string) {
	for i, s := range c.species {
		for _, n := range s.smooth.(factored).StateNames() {
			names = append(names, c.a.parts[i].name+": "+n)
		}
	}
	return names
}

// Populations writes the share of protomers that stand in each state.
func (c *assemblyCurve) Populations(dst []float64, lnx float64) []float64 {
	dst = dst[:0]
	t, rest := split(c.lnG(c.species[0].jet(lnx, values), c.species[1].jet(lnx, values)), float64(c.a.m))
	for i, w := range []float64{rest, t} {
		for _, v := range c.species[i].smooth.(factored).Populations(nil, lnx) {
			dst = append(dst, w*v)
		}
	}
	return dst
}
