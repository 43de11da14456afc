package mechanisms

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// Driven is a Mechanism whose states pass into each other by rates that are its own
// constants, ln k being what is fitted.
type Driven interface {
	Balanced
	StateNames() []string
	Routes() []Route
	// Before writes the shares of the states at steady state without the varied ligand
	// and, where grad is not nil (states × constants), their derivatives.
	Before(dst []float64, grad *mat.Dense, theta []float64, env Environment)
}

// Route is one way from one state to another.
type Route struct {
	From, To int
	Constant int // of its rate
	Uptake   int // varied ligands taken up; negative where they are given back
	Effector int // taken up; −1
	Product  bool
}

// StateNames names the states.
func (m *cyclic) StateNames() []string { return append([]string(nil), m.states...) }

// Routes lists every way of every step.
func (m *cyclic) Routes() []Route {
	var out []Route
	for i, r := range m.routes {
		q := Route{From: r.from, To: r.to, Constant: r.constant, Uptake: r.ligands, Effector: r.effector, Product: r.product}
		if r.back {
			q.Uptake = -m.routes[i-1].ligands
		}
		out = append(out, q)
	}
	return out
}

// Before implements Driven: of the trees, those with the lowest power of the ligand.
func (m *cyclic) Before(dst []float64, grad *mat.Dense, theta []float64, env Environment) {
	clear(dst)
	var few []tree
	for _, t := range m.trees {
		if t.ligands == m.trees[0].ligands {
			few = append(few, t)
		}
	}
	w, top := make([]float64, len(few)), math.Inf(-1)
	for i, t := range few {
		w[i] = t.lnCount
		for k, power := range t.rates {
			w[i] += float64(power) * theta[k]
		}
		for j, power := range t.effects {
			if power > 0 {
				w[i] += float64(power) * math.Log(env.Effectors[j])
			}
		}
		top = math.Max(top, w[i])
	}
	sum := 0.0
	for i := range w {
		w[i] = math.Exp(w[i] - top)
		sum += w[i]
	}
	mean := make([]float64, len(theta))
	for i, t := range few {
		w[i] /= sum
		dst[t.root] += w[i]
		for k, power := range t.rates {
			mean[k] += w[i] * float64(power)
		}
	}
	if grad == nil {
		return
	}
	grad.Zero()
	for i, t := range few {
		row := grad.RawRowView(t.root)
		for k, power := range t.rates {
			row[k] += w[i] * (float64(power) - mean[k])
		}
	}
}
