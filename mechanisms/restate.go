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
