package mechanisms

import (
	"fmt"
	"math"
	"strings"
)

// Restate gives the intrinsic dissociation constants Kd1 … Kdn and, where some
// β are exactly zero, the products of neighbours that alone exist there.
func (m adair) Restate(theta []float64) []Restatement {
	out := make([]Restatement, 0, m.sites)
	for i := 1; i <= m.sites; i++ {
		out = append(out, m.product(theta, i, i))
	}
	for j := 1; j < m.sites; j++ {
		if theta[j-1] > 0 {
			continue
		}
		last := j
		for last < m.sites && theta[last-1] <= 0 {
			last++
		}
		if theta[last-1] > 0 {
			out = append(out, m.product(theta, j, last))
		}
		j = last
	}
	return out
}

// Quote gives one quoted constant by name, products included ("Kd3·Kd4"), at
// any θ; false where the name means nothing.
func (m adair) Quote(name string, theta []float64) (Restatement, bool) {
	factors := strings.Split(name, "·")
	first := 0
	for i, f := range factors {
		var at int
		if _, err := fmt.Sscanf(f, "Kd%d", &at); err != nil || f != fmt.Sprintf("Kd%d", at) {
			return Restatement{}, false
		}
		if i == 0 {
			first = at
		}
		if at != first+i || at < 1 || at > m.sites {
			return Restatement{}, false
		}
	}
	return m.product(theta, first, first+len(factors)-1), true
}

// product is Kd_a·…·Kd_b = [C(n,b)/C(n,a−1)]·β_{a−1}/β_b.
func (m adair) product(theta []float64, a, b int) Restatement {
	names := make([]string, 0, b-a+1)
	for i := a; i <= b; i++ {
		names = append(names, fmt.Sprintf("Kd%d", i))
	}
	c := siteConstant(strings.Join(names, "·"), fmt.Sprintf("intrinsic dissociation constant of ligand %d", a))
	c.Dimension = b - a + 1
	if b > a {
		c.Meaning = fmt.Sprintf("product of the intrinsic dissociation constants of ligands %d to %d", a, b)
	}
	r := Restatement{Constant: c}
	above, below := 1.0, theta[b-1]
	if a > 1 {
		above = theta[a-2]
	}
	switch {
	case above <= 0 && below <= 0:
		r.Value = math.NaN()
		r.Why = fmt.Sprintf("beta%d and beta%d are zero: %s is part of a product only", a-1, b, c.Name)
	case above <= 0:
		r.Value = 0
		r.Why = fmt.Sprintf("beta%d is zero: %s is part of a product only", a-1, c.Name)
	case below <= 0 && b == m.sites:
		r.Value = math.Inf(1)
		r.Why = fmt.Sprintf("beta%d is zero: the last site never fills", b)
	case below <= 0:
		r.Value = math.Inf(1)
		r.Why = fmt.Sprintf("beta%d is zero: %s is part of a product only", b, c.Name)
	default:
		r.Value = math.Exp(lnChoose[m.sites][b] - lnChoose[m.sites][a-1] + math.Log(above) - math.Log(below))
		r.GradLn = make([]float64, m.sites)
		r.GradLn[b-1] = -1 / below
		if a > 1 {
			r.GradLn[a-2] += 1 / above
		}
	}
	return r
}

// Restate gives the constants of the parts as they are quoted, and the shares.
func (m *mixture) Restate(theta []float64) []Restatement {
	var out []Restatement
	for i := range m.parts {
		out = append(out, m.parts[i].restate(theta, len(m.constants))...)
	}
	if m.fixed != nil {
		return out
	}
	n := len(theta) - m.shares
	f, df := make([]float64, len(m.parts)), make([]float64, len(m.parts)*n)
	m.portions(f, df, theta)
	for i, s := range m.parts {
		c := Constant{Name: "share", Site: s.name, Scale: Logit, High: 1, Meaning: "share of all sites that belong to " + s.name}
		if len(m.parts) == 2 {
			c.Site = ""
		}
		r := Restatement{Constant: c, Value: f[i], GradLn: make([]float64, len(theta))}
		for j := range n {
			r.GradLn[m.shares+j] = df[i*n+j] / f[i]
		}
		out = append(out, r)
		if len(m.parts) == 2 {
			break
		}
	}
	return out
}

// Quote gives one quoted constant by key.
func (m *mixture) Quote(key string, theta []float64) (Restatement, bool) {
	for i := range m.parts {
		if r, ok := m.parts[i].quote(key, theta, len(m.constants)); ok {
			return r, true
		}
	}
	return quoted(m.Restate(theta), key)
}

// restate gives the part's constants as they are quoted.
func (s *part) restate(theta []float64, k int) []Restatement {
	own := s.own(theta)
	var list []Restatement
	if r, ok := s.mechanism.(Restated); ok {
		list = r.Restate(own)
	} else {
		for i, c := range s.mechanism.Constants() {
			list = append(list, plainly(c, own, i))
		}
	}
	for i := range list {
		list[i] = s.lift(list[i], k)
	}
	return list
}

// quote gives one of the part's constants by the whole's key.
func (s *part) quote(key string, theta []float64, k int) (Restatement, bool) {
	inner, ok := strings.CutPrefix(key, s.name+".")
	r, restated := s.mechanism.(Restated)
	if !ok || !restated {
		return Restatement{}, false
	}
	q, ok := r.Quote(inner, s.own(theta))
	return s.lift(q, k), ok
}

// own is the part's constants.
func (s *part) own(theta []float64) []float64 {
	own := make([]float64, len(s.local))
	for i, b := range s.local {
		own[i] = b.at(theta)
	}
	return own
}

// lift carries a restatement of the part over to the whole's constants.
func (s *part) lift(r Restatement, k int) Restatement {
	r.Constant.Site = join(s.name, r.Constant.Site)
	if r.GradLn != nil {
		grad := make([]float64, k)
		for i, b := range s.local {
			b.addTo(grad, r.GradLn[i])
		}
		r.GradLn = grad
	}
	return r
}

// plainly quotes a constant that is fitted itself.
func plainly(c Constant, theta []float64, i int) Restatement {
	r := Restatement{Constant: c, GradLn: make([]float64, len(theta))}
	switch c.Scale {
	case Log:
		r.Value, r.GradLn[i] = math.Exp(theta[i]), 1
	case Linear:
		r.Value = theta[i]
		if r.Value > 0 {
			r.GradLn[i] = 1 / r.Value
		} else {
			r.GradLn, r.Why = nil, c.EdgeLow
		}
	case Logit:
		y, e := logistic(theta[i])
		r.Value, r.GradLn[i] = y, e
	}
	return r
}
