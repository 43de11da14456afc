package mechanisms

import (
	"fmt"
	"math"
	"slices"
)

// view is what a response sees of the conformations: a turnover of each, to be
// multiplied by its filled sites, or a signal of each.
//
//	turnover:  o(c, i) = v_c i/n
//	signal:    o(c, i) = s_c
type view struct {
	turnover bool
	weight   []float64 // per conformation
	constant []int     // index of the constant where the weight is free, else −1

	rates [][]int // of a cycle: the rate constants, on ln scale, that yield product from each state
}

// views complains of what turnover and sees say.
func (p *problems) views(d Definition, names []string) {
	if len(d.Turnover) > 0 && len(d.Sees) > 0 {
		p.add("sees", "a response has a turnover or a signal per conformation, not both", "turnover or sees alone")
	}
	p.weights("turnover", d.Turnover, names)
	p.weights("sees", d.Sees, names)
}

func (p *problems) weights(key string, list []Weight, names []string) {
	if len(list) == 0 {
		return
	}
	seen := map[string]bool{}
	anchored := false
	for _, w := range list {
		if !slices.Contains(names, w.Name) {
			p.add(key+"."+w.Name, "there is no such conformation", fmt.Sprintf("one of %v", names))
		}
		if seen[w.Name] {
			p.add(key+"."+w.Name, "this conformation is named twice", "each conformation once")
		}
		seen[w.Name] = true
		if !w.Free && (w.Value < 0 || math.IsNaN(w.Value) || math.IsInf(w.Value, 0)) {
			p.add(key+"."+w.Name, fmt.Sprintf("%g cannot be", w.Value), "a number not below 0, or free")
		}
		anchored = anchored || !w.Free && w.Value > 0
	}
	if !anchored {
		p.add(key, "at least one conformation needs a number above 0: the height of the response scales the others",
			fmt.Sprintf("%s: {%s: 1}", key, list[0].Name))
	}
}

// newView settles a view, nil where the response is the saturation. Constants
// that are free are appended.
func newView(d Definition, list []conformer, constants *[]Constant) *view {
	weights, word, meaning := d.Turnover, "turnover", "turnover of conformation "
	if len(weights) == 0 {
		weights, word, meaning = d.Sees, "signal", "signal of conformation "
	}
	if len(weights) == 0 {
		return nil
	}
	v := &view{turnover: len(d.Turnover) > 0, weight: make([]float64, len(list)), constant: make([]int, len(list))}
	for i, c := range list {
		v.constant[i] = -1
		at := slices.IndexFunc(weights, func(w Weight) bool { return w.Name == c.name })
		if at < 0 {
			continue
		}
		v.weight[i] = weights[at].Value
		if weights[at].Free {
			v.constant[i] = len(*constants)
			*constants = append(*constants, Constant{Name: word + "_" + c.name, Scale: Linear, High: 1e6, StartHigh: 2,
				EdgeLow: "conformation " + c.name + " gives no response",
				Meaning: meaning + c.name + ", in units of the others"})
		}
	}
	return v
}
