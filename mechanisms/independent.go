package mechanisms

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

const independentDoc = `Independent sites of one or more classes, equal within a class.

	P(x) = Π_c (1 + x/Kd_c)^(n_c) ,  Ȳ = Σ_c (n_c/n) x/(Kd_c + x)

Constants:

	Kd      dissociation constant of each class       ligand's unit
	ratio   Kd of a class over that of the one before, at least 1, fitted

The classes are listed from the tightest to the loosest, and stay in that order: the Kd of
the first and the ratios are fitted, and a ratio of 1 says that two classes are one. Who
does not know which of two unequal classes is tight gives both orders as two mechanisms.
A start, range or fixed value for a Kd, or a single Kd that differs between curves, has
each ln Kd fitted by itself; their order is then the study's.

Limits: one class is one simple site, n_H = 1. n_H ≤ 1 everywhere; two equal classes with
ratio r have n_H = 4√r/(1 + √r)² at half saturation.

What data hold what: a ratio below about 4 hides in ordinary scatter. Two sites of
different affinity and two sites of negative cooperativity give the same curves.

Keys: classes ({tight: 2, loose: 2}), constants.

Onufriev, Case & Ullmann 2001, Biochemistry 40:3413.
`

// Independent sites of one or more classes, equal within a class.
//
//	P(x) = Π_c (1 + x/Kd_c)^(n_c) ,  Ȳ = Σ_c (n_c/n) x/(Kd_c + x)
//
// Constants:
//
//	Kd      dissociation constant of each class       ligand's unit
//	ratio   Kd of a class over that of the one before, at least 1, fitted
//
// The classes are listed from the tightest to the loosest, and stay in that order: the Kd of
// the first and the ratios are fitted, and a ratio of 1 says that two classes are one. Who
// does not know which of two unequal classes is tight gives both orders as two mechanisms.
// A start, range or fixed value for a Kd, or a single Kd that differs between curves, has
// each ln Kd fitted by itself; their order is then the study's.
//
// Limits: one class is one simple site, n_H = 1. n_H ≤ 1 everywhere; two equal classes with
// ratio r have n_H = 4√r/(1 + √r)² at half saturation.
//
// What data hold what: a ratio below about 4 hides in ordinary scatter. Two sites of
// different affinity and two sites of negative cooperativity give the same curves.
//
// Keys: classes ({tight: 2, loose: 2}), constants.
//
// Onufriev, Case & Ullmann 2001, Biochemistry 40:3413.
type independent struct {
	family    string
	classes   []Count
	constants []Constant
	lnK       []blend
}

// ordered is independent classes fitted as the first Kd and ratios not below 1.
type ordered struct{ independent }

func buildIndependent(d Definition) (Mechanism, error) {
	var p problems
	p.unread(d, "classes", "constants")
	p.classes("classes", d.Classes)
	if p.err() != nil {
		return nil, p.err()
	}
	plain := independent{family: "independent", classes: d.Classes}
	plain.constants, plain.lnK = siteConstants(d.Classes)
	p.given(d, plain.constants)
	if err := p.err(); err != nil {
		return nil, err
	}
	if len(d.Classes) == 1 || d.SiteScale || anySaid(d.Constants) {
		return plain, nil
	}
	plain.constants, plain.lnK = ratioConstants(d.Classes)
	return ordered{plain}, nil
}

// classes complains of named numbers of sites.
func (p *problems) classes(key string, list []Count) {
	if len(list) == 0 {
		p.add(key, "no class of sites is named", key+": {tight: 2, loose: 2}")
	}
	seen := map[string]bool{}
	for _, c := range list {
		if c.Sites < 1 {
			p.add(key+"."+c.Name, fmt.Sprintf("%d sites cannot be", c.Sites), "a whole number above 0")
		}
		if seen[c.Name] {
			p.add(key+"."+c.Name, "this name is used twice", "a name of its own for each")
		}
		seen[c.Name] = true
	}
	if n := totalSites(list); n > maxSites {
		p.add(key, fmt.Sprintf("%d sites are more than %d", n, maxSites), fmt.Sprintf("at most %d sites in all", maxSites))
	}
}

// siteConstants gives each class its own Kd.
func siteConstants(classes []Count) ([]Constant, []blend) {
	constants, lnK := make([]Constant, len(classes)), make([]blend, len(classes))
	for i, c := range classes {
		constants[i] = siteConstant("Kd", "dissociation constant of a site")
		if len(classes) > 1 {
			constants[i].Site = c.Name
			constants[i].Meaning = "dissociation constant of a site of class " + c.Name
		}
		lnK[i] = blend{{i, 1}}
	}
	return constants, lnK
}

// ratioConstants gives the first class its Kd and each other its ratio, not
// below 1, to the class before it.
func ratioConstants(classes []Count) ([]Constant, []blend) {
	constants, lnK := siteConstants(classes)
	for i := 1; i < len(classes); i++ {
		constants[i] = Constant{Name: "ratio", Site: classes[i].Name, Scale: Log,
			Low: 1, High: 1e12, StartLow: 1.5, StartHigh: 1e3,
			EdgeLow: fmt.Sprintf("%s and %s bind alike", classes[i-1].Name, classes[i].Name),
			Meaning: fmt.Sprintf("Kd of %s over Kd of %s", classes[i].Name, classes[i-1].Name)}
		lnK[i] = append(append(blend{}, lnK[i-1]...), term{i, 1})
	}
	return constants, lnK
}

func (m independent) Family() string        { return m.family }
func (m independent) Sites() int            { return totalSites(m.classes) }
func (m independent) Effectors() []string   { return nil }
func (m independent) Constants() []Constant { return append([]Constant(nil), m.constants...) }

func (m independent) Curve() Curve {
	k := len(m.constants)
	c := &independentCurve{m: m, lnKd: make([]float64, k), coefs: newCoefficients(m.Sites(), k), jets: newJet(k)}
	list := []conformer{{}}
	for i, class := range m.classes {
		list[0].sets = append(list[0].sets, siteSet{sites: class.Sites, binds: true, lnK: m.lnK[i]})
		c.share = append(c.share, float64(class.Sites)/float64(m.Sites()))
	}
	c.whole = newConformers(list, m.Sites(), k, false)
	c.theta = make([]float64, k)
	return c
}

// Restate gives the dissociation constant of every class.
func (m ordered) Restate(theta []float64) []Restatement {
	plain, _ := siteConstants(m.classes)
	out := make([]Restatement, len(plain))
	for i, c := range plain {
		grad := make([]float64, len(theta))
		m.lnK[i].addTo(grad, 1)
		out[i] = Restatement{Constant: c, Value: math.Exp(m.lnK[i].at(theta)), GradLn: grad}
	}
	return out
}

// Quote gives one class's dissociation constant by its key.
func (m ordered) Quote(key string, theta []float64) (Restatement, bool) {
	return quoted(m.Restate(theta), key)
}

// quoted finds a restatement by key.
func quoted(list []Restatement, key string) (Restatement, bool) {
	for _, r := range list {
		if r.Constant.Key() == key {
			return r, true
		}
	}
	return Restatement{}, false
}

// independentCurve is Ȳ = Σ_c (n_c/n) x/(K_c + x), sites being added.
type independentCurve struct {
	m           independent
	share       []float64 // n_c/n
	theta, lnKd []float64
	jets        jet
	whole       *conformers
	coefs       coefficients
	multiplied  bool
	sum         *average // over the multiplied polynomial; made when asked for
}

// Bind settles the constants.
func (c *independentCurve) Bind(theta []float64, _ Environment) {
	copy(c.theta, theta)
	for i, b := range c.m.lnK {
		c.lnKd[i] = b.at(theta)
	}
	c.multiplied = false
}

// Saturation writes Ȳ and ∂Ȳ/∂ln K_c = −(n_c/n) Ȳ_c(1−Ȳ_c), by chain rule.
func (c *independentCurve) Saturation(dst, lnx []float64, grad *mat.Dense) {
	for r, lx := range lnx {
		var row []float64
		if grad != nil {
			row = grad.RawRowView(r)
			clear(row)
		}
		var sum float64
		for i, lnK := range c.lnKd {
			y, e := logistic(lx - lnK)
			sum += c.share[i] * y
			if row != nil {
				c.m.lnK[i].addTo(row, -c.share[i]*y*e)
			}
		}
		dst[r] = sum
	}
}

// At writes saturation and Hill coefficient at one ln x.
func (c *independentCurve) At(lnx float64, p *Point) {
	c.jet(lnx, &c.jets, whole)
	c.jets.point(p, 1, 1)
}

func (c *independentCurve) jet(lnx float64, j *jet, to depth) {
	j.zero()
	for i, lnK := range c.lnKd {
		y, e := logistic(lnx - lnK)
		f, s := c.share[i], e-y
		v1 := f * y * e
		v2, v3 := v1*s, v1*(s*s-2*y*e)
		j.y += f * y
		j.e += f * e
		j.y1 += v1
		j.y2 += v2
		j.y3 += v3
		if to > values {
			c.m.lnK[i].addTo(j.g, -v1)
			c.m.lnK[i].addTo(j.g1, -v2)
			c.m.lnK[i].addTo(j.g2, -v3)
		}
	}
}

func (c *independentCurve) endSlopes() (low, high float64) { return 1, 1 }
func (c *independentCurve) ceiling() float64               { return 1 }

func (c *independentCurve) turns() (first, last float64) {
	first, last = math.Inf(1), math.Inf(-1)
	for _, l := range c.lnKd {
		first, last = math.Min(first, l), math.Max(last, l)
	}
	return first, last
}

// terms is the average over the multiplied polynomial.
func (c *independentCurve) terms() *average {
	c.polynomial()
	if c.sum == nil {
		c.sum = newAverage(&c.coefs, filled(c.coefs.n), empty(c.coefs.n), nil)
	}
	return c.sum
}

// polynomial multiplies the classes out.
func (c *independentCurve) polynomial() *coefficients {
	if !c.multiplied {
		c.whole.bind(&c.coefs, c.theta, Environment{})
		c.multiplied = true
	}
	return &c.coefs
}
