package mechtest

import (
	"fmt"
	"math/big"

	"ligancy/mechanisms"
)

// Reference is a mechanism computed by brute force in extended precision, from
// its physical description and nothing else: microstates are enumerated, and
// every derivative is a difference.
type Reference struct {
	Family     string
	Definition mechanisms.Definition
	Mechanism  mechanisms.Mechanism // tells the order and scale of θ
	Watched    bool                 // the response, between its own limits, instead of the saturation
	Raw        bool                 // the response as it is
}

// world settles constants and concentrations.
func (r Reference) world(theta []*big.Float, env mechanisms.Environment) world {
	w := world{value: map[string]*big.Float{}, effector: map[string]*big.Float{}, protomers: number(env.Protomers)}
	for i, c := range r.Mechanism.Constants() {
		switch c.Scale {
		case mechanisms.Log:
			w.value[c.Key()] = exp(theta[i])
		case mechanisms.Linear:
			w.value[c.Key()] = theta[i]
		case mechanisms.Logit:
			e := exp(theta[i])
			w.value[c.Key()] = quo(e, add(e, number(1)))
		}
	}
	for i, name := range r.Mechanism.Effectors() {
		w.effector[name] = number(env.Effectors[i])
	}
	return w
}

// curve returns a function of ln x at fixed θ.
func (r Reference) curve(theta []*big.Float, env mechanisms.Environment) func(lnx *big.Float) *big.Float {
	w := r.world(theta, env)
	switch r.Family {
	case "hill":
		return func(lnx *big.Float) *big.Float {
			e := exp(mul(sub(lnx, theta[0]), exp(theta[1])))
			return quo(e, add(e, number(1)))
		}
	case "mixture":
		return r.mixture(w, env)
	case "assembly":
		return r.assembly(w)
	}
	sums := collect(enumerate(r.Family, r.Definition, w))
	return func(lnx *big.Float) *big.Float { return r.response(sums, exp(lnx)) }
}

// sums is the microstates added up by ligands.
type sums struct{ weight, seen []*big.Float }

func collect(list []microstate) sums {
	var s sums
	for _, m := range list {
		for len(s.weight) <= m.ligands {
			s.weight, s.seen = append(s.weight, number(0)), append(s.seen, number(0))
		}
		s.weight[m.ligands] = add(s.weight[m.ligands], m.weight)
		if m.sees != nil {
			s.seen[m.ligands] = add(s.seen[m.ligands], mul(m.weight, m.sees))
		}
	}
	return s
}

// z is Σ w xⁱ, and bound the mean number of ligands.
func (s sums) z(x *big.Float) (z, bound, seen *big.Float) {
	z, bound, seen = number(0), number(0), number(0)
	xi := number(1)
	for i, w := range s.weight {
		t := mul(w, xi)
		z = add(z, t)
		bound = add(bound, mul(t, number(float64(i))))
		seen = add(seen, mul(s.seen[i], xi))
		xi = mul(xi, x)
	}
	return z, quo(bound, z), quo(seen, z)
}

func (r Reference) response(s sums, x *big.Float) *big.Float {
	_, bound, seen := s.z(x)
	top := len(s.weight) - 1
	switch {
	case r.Raw:
		return seen
	case r.Watched:
		low, high := quo(s.seen[0], s.weight[0]), quo(s.seen[top], s.weight[top])
		return quo(sub(seen, low), sub(high, low))
	}
	return quo(bound, number(float64(top)))
}

// part is the saturation curve of one part.
func (r Reference) part(s mechanisms.Part, w world, ratioTo *big.Float) (sums, *big.Float) {
	inner := w.under(s.Name)
	if s.Family != "" {
		return collect(enumerate(s.Family, *s.Definition, inner)), nil
	}
	k, ok := inner.value["Kd"]
	if !ok {
		k = mul(ratioTo, inner.value["ratio"])
	}
	inner.value["Kd"] = k
	return collect(independent(mechanisms.Definition{Classes: []mechanisms.Count{{Sites: s.Sites}}}, inner)), k
}

func (r Reference) mixture(w world, _ mechanisms.Environment) func(*big.Float) *big.Float {
	var list []sums
	var k *big.Float
	ratios, total := []*big.Float{number(1)}, number(1)
	for i, p := range r.Definition.Parts {
		s, own := r.part(p, w, k)
		if own != nil {
			k = own
		}
		list = append(list, s)
		if i > 0 && len(r.Definition.Parts) > 2 {
			ratios = append(ratios, w.value[p.Name+".share_ratio"])
			total = add(total, ratios[i])
		}
	}
	if share, ok := w.value["share"]; ok {
		ratios, total = []*big.Float{share, sub(number(1), share)}, number(1)
	}
	return func(lnx *big.Float) *big.Float {
		x, y := exp(lnx), number(0)
		for i, s := range list {
			_, bound, _ := s.z(x)
			own := quo(bound, number(float64(len(s.weight)-1)))
			y = add(y, mul(quo(ratios[i], total), own))
		}
		return y
	}
}

// assembly solves the mass balance by bisection on the small species.
func (r Reference) assembly(w world) func(*big.Float) *big.Float {
	d := r.Definition
	small, large := *d.Small, *d.Large
	small.Name, large.Name = "small", "large"
	ls, _ := r.part(small, w, nil)
	ll, _ := r.part(large, w, nil)
	bare := world{value: w.value, effector: map[string]*big.Float{}}
	for name := range w.effector {
		bare.effector[name] = number(0)
	}
	zs, _ := r.part(small, bare, nil)
	zl, _ := r.part(large, bare, nil)
	nS, nL := len(ls.weight)-1, len(ll.weight)-1
	m := nL / nS
	return func(lnx *big.Float) *big.Float {
		x := exp(lnx)
		zSmall, bSmall, _ := ls.z(x)
		zLarge, bLarge, _ := ll.z(x)
		kx := mul(w.value["K_assembly"], quo(zLarge, zl.weight[0]))
		kx = quo(kx, power(quo(zSmall, zs.weight[0]), m))
		amount := func(s *big.Float) *big.Float { // of large molecules beside s small ones
			return mul(kx, power(s, m))
		}
		low, high := number(0), quo(w.protomers, number(float64(nS)))
		for range Precision + 60 {
			mid := quo(add(low, high), number(2))
			have := add(mul(number(float64(nS)), mid), mul(number(float64(nL)), amount(mid)))
			if have.Cmp(w.protomers) > 0 {
				high = mid
			} else {
				low = mid
			}
		}
		return quo(add(mul(low, bSmall), mul(amount(low), bLarge)), w.protomers)
	}
}

// step is the difference of the derivatives, 2⁻⁸⁰; errors are of its square.
func step() *big.Float { return zero().SetMantExp(number(1), -80) }

// Point returns what Curve.At should: by differences in extended precision.
func (r Reference) Point(theta []float64, env mechanisms.Environment, lnx float64) mechanisms.Point {
	k := len(theta)
	p := mechanisms.Point{GradY: make([]float64, k), GradNH: make([]float64, k), GradDNH: make([]float64, k)}
	at := make([]*big.Float, k)
	for i, t := range theta {
		at[i] = number(t)
	}
	c := r.curve(at, env)
	y, y1, nh, dnh, d2nh := slopes(c, number(lnx))
	p.Y, p.Empty, p.DY = float(y), float(sub(number(1), y)), float(y1)
	p.NH, p.DNH, p.D2NH = float(nh), float(dnh), float(d2nh)
	h := step()
	for i := range at {
		middle := at[i]
		at[i] = add(middle, h)
		ya, _, na, da, _ := slopes(r.curve(at, env), number(lnx))
		at[i] = sub(middle, h)
		yb, _, nb, db, _ := slopes(r.curve(at, env), number(lnx))
		at[i] = middle
		wide := add(h, h)
		p.GradY[i] = float(quo(sub(ya, yb), wide))
		p.GradNH[i] = float(quo(sub(na, nb), wide))
		p.GradDNH[i] = float(quo(sub(da, db), wide))
	}
	return p
}

// slopes is a curve, its slope, its Hill coefficient and two derivatives of
// that, from five points.
func slopes(c func(*big.Float) *big.Float, lnx *big.Float) (y, y1, nh, dnh, d2nh *big.Float) {
	h := step()
	var v [5]*big.Float
	for i := range v {
		v[i] = c(add(lnx, mul(h, number(float64(i-2)))))
	}
	slope := func(i int) *big.Float { return quo(sub(v[i+1], v[i-1]), add(h, h)) }
	hill := func(i int) *big.Float { return quo(slope(i), mul(v[i], sub(number(1), v[i]))) }
	n0, n1, n2 := hill(1), hill(2), hill(3)
	d2 := quo(sub(add(n2, n0), add(n1, n1)), mul(h, h))
	return v[2], slope(2), n1, quo(sub(n2, n0), add(h, h)), d2
}

// Populations returns the share of every state of a molecule, under the name
// that Populated gives it.
func (r Reference) Populations(theta []float64, env mechanisms.Environment, lnx float64) map[string]float64 {
	at := make([]*big.Float, len(theta))
	for i, t := range theta {
		at[i] = number(t)
	}
	x, z := exp(number(lnx)), number(0)
	share := map[string]*big.Float{}
	for _, m := range enumerate(r.Family, r.Definition, r.world(at, env)) {
		name := fmt.Sprintf("%d bound", m.ligands)
		switch {
		case r.Family == "states":
			name = m.of
		case m.of != "":
			name = m.of + ", " + name
		}
		w := mul(m.weight, power(x, m.ligands))
		z = add(z, w)
		if share[name] == nil {
			share[name] = number(0)
		}
		share[name] = add(share[name], w)
	}
	out := map[string]float64{}
	for name, w := range share {
		out[name] = float(quo(w, z))
	}
	return out
}
