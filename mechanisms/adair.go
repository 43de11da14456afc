package mechanisms

import (
	"fmt"
	"math"
)

const adairDoc = `Stepwise binding to n sites, whatever the mechanism.

	P(x) = Σ β_i xⁱ ,  β_0 = 1 ,  Ȳ = x P′(x)/(n P(x))
	Kd_i = [(n − i + 1)/i] · β_{i−1}/β_i

Any equilibrium of one molecule with n sites gives such a curve. Equal Kd_i mean no
cooperativity, falling Kd_i positive, rising Kd_i negative cooperativity or unlike sites.

Constants:

	Kd1 … Kdn      intrinsic (site-level) dissociation constants    ligand's unit
	beta1 … betan  overall association constants β_i, fitted        1/unitⁱ

The β_i ≥ 0 are fitted, because the best curve often has one of them at zero: then Kd_i
and Kd_(i+1) do not exist by themselves and their product, which does, is given as
Kd3·Kd4, say. A start, range or fixed value for a Kd, or a single Kd that differs between
curves, has the ln Kd fitted instead.

Limits: two sites have n_H = 2/(1 + √(Kd2/Kd1)) at half saturation. All roots of P real
and negative: the curve is that of independent sites.

What data hold what: n constants from one curve are all that it can hold. Kd1 needs points
at a few per cent of saturation, Kdn points at a few per cent from the end; the middle ones
are the loosest. For n = 2 the interaction and unlike sites cannot be told apart.

Keys: sites (1 to 16), constants.

Adair 1925, J. Biol. Chem. 63:529. Wyman 1964, Adv. Protein Chem. 19:223.
`

// Stepwise binding to n sites, whatever the mechanism.
//
//	P(x) = Σ β_i xⁱ ,  β_0 = 1 ,  Ȳ = x P′(x)/(n P(x))
//	Kd_i = [(n − i + 1)/i] · β_{i−1}/β_i
//
// Any equilibrium of one molecule with n sites gives such a curve. Equal Kd_i mean no
// cooperativity, falling Kd_i positive, rising Kd_i negative cooperativity or unlike sites.
//
// Constants:
//
//	Kd1 … Kdn      intrinsic (site-level) dissociation constants    ligand's unit
//	beta1 … betan  overall association constants β_i, fitted        1/unitⁱ
//
// The β_i ≥ 0 are fitted, because the best curve often has one of them at zero: then Kd_i
// and Kd_(i+1) do not exist by themselves and their product, which does, is given as
// Kd3·Kd4, say. A start, range or fixed value for a Kd, or a single Kd that differs between
// curves, has the ln Kd fitted instead.
//
// Limits: two sites have n_H = 2/(1 + √(Kd2/Kd1)) at half saturation. All roots of P real
// and negative: the curve is that of independent sites.
//
// What data hold what: n constants from one curve are all that it can hold. Kd1 needs points
// at a few per cent of saturation, Kdn points at a few per cent from the end; the middle ones
// are the loosest. For n = 2 the interaction and unlike sites cannot be told apart.
//
// Keys: sites (1 to 16), constants.
//
// Adair 1925, J. Biol. Chem. 63:529. Wyman 1964, Adv. Protein Chem. 19:223.
type adair struct{ sites int }

// adairSites is fitted in the logarithms of the site constants Kd_i. (It must not
// embed adair: its constants are not to be restated.)
type adairSites struct{ sites int }

func buildAdair(d Definition) (Mechanism, error) {
	var p problems
	p.unread(d, "sites", "constants")
	p.siteCount(d, 1)
	if p.err() != nil {
		return nil, p.err()
	}
	m := adairSites{d.Sites}
	p.given(d, m.Constants())
	if err := p.err(); err != nil {
		return nil, err
	}
	if d.SiteScale || anySaid(d.Constants) {
		return m, nil
	}
	return adair(m), nil
}

// siteCount complains of a number of equal sites that cannot be.
func (p *problems) siteCount(d Definition, least int) {
	switch {
	case len(d.SiteClasses) > 0:
		p.add("sites", "this family takes one number of sites, not classes", fmt.Sprintf("sites: %d", totalSites(d.SiteClasses)))
	case d.Sites == 0:
		p.add("sites", "the number of sites is missing", "sites: 4")
	case d.Sites < least || d.Sites > maxSites:
		p.add("sites", fmt.Sprintf("%d sites cannot be", d.Sites), fmt.Sprintf("a whole number from %d to %d", least, maxSites))
	}
}

func totalSites(classes []Count) (n int) {
	for _, c := range classes {
		n += c.Sites
	}
	return n
}

func anySaid(given map[string]Given) bool {
	for _, g := range given {
		if g.said() {
			return true
		}
	}
	return false
}

func (m adair) Family() string      { return "adair" }
func (m adair) Sites() int          { return m.sites }
func (m adair) Effectors() []string { return nil }

func (m adair) Constants() []Constant {
	list := make([]Constant, m.sites)
	for i := range list {
		j := i + 1
		ways := math.Exp(lnChoose[m.sites][j])
		list[i] = Constant{Name: fmt.Sprintf("beta%d", j), Scale: Linear, Dimension: -j,
			Low: 0, High: 1e12 * ways, StartLow: 0, StartHigh: 2 * ways,
			EdgeLow: fmt.Sprintf("no molecule holds exactly %d", j),
			Meaning: fmt.Sprintf("overall association constant of %s", ligands(j))}
	}
	last := &list[m.sites-1]
	last.EdgeLow = "the last site never fills"
	return list
}

func ligands(n int) string {
	if n == 1 {
		return "1 ligand"
	}
	return fmt.Sprintf("%d ligands", n)
}

func (m adair) Curve() Curve {
	return newPolynomialCurve(m.sites, m.sites, m)
}

func (m adair) bind(c *coefficients, theta []float64, _ Environment) {
	clear(c.d)
	c.lnB[0] = 0
	for i, beta := range theta {
		row := c.row(i + 1)
		if beta > 0 {
			c.lnB[i+1], row[i] = math.Log(beta), 1/beta
		} else {
			c.lnB[i+1], row[i] = math.Inf(-1), 1
		}
	}
}

func (m adairSites) Family() string      { return "adair" }
func (m adairSites) Sites() int          { return m.sites }
func (m adairSites) Effectors() []string { return nil }

func (m adairSites) Constants() []Constant {
	list := make([]Constant, m.sites)
	for i := range list {
		list[i] = siteConstant(fmt.Sprintf("Kd%d", i+1), fmt.Sprintf("intrinsic dissociation constant of ligand %d", i+1))
	}
	return list
}

// siteConstant is a dissociation constant of the varied ligand with the usual
// bounds.
func siteConstant(name, meaning string) Constant {
	return Constant{Name: name, Scale: Log, Dimension: 1, Low: 1e-8, High: 1e8, StartLow: 0.02, StartHigh: 50, Meaning: meaning}
}

func (m adairSites) Curve() Curve {
	return newPolynomialCurve(m.sites, m.sites, m)
}

func (m adairSites) bind(c *coefficients, theta []float64, _ Environment) {
	clear(c.d)
	c.lnB[0] = 0
	var sum float64
	for i, lnK := range theta {
		sum += lnK
		c.lnB[i+1] = lnChoose[m.sites][i+1] - sum
		row := c.row(i + 1)
		for k := 0; k <= i; k++ {
			row[k] = -1
		}
	}
}
