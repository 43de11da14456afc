// Package odetest holds initial-value problems with known solutions, and the
// checks that every method of package ode passes.
package odetest

import (
	_ "embed"
	"fmt"
	"slices"
	"strconv"
	"strings"

	"ligancy/ode"
)

// Problem is an initial-value problem with reference states.
type Problem struct {
	Name   string // short name of the literature
	Title  string
	Source string
	Stiff  bool
	New    func() ode.System
	Start  []float64
	// Times begin with that of Start; the others are those of the reference.
	Times []float64
	// Floor is the size below which a component counts absolutely: errors are
	// scored as |y − ref|/(floor + |ref|).
	Floor float64
	// Reference holds the state at Times[1:].
	Reference [][]float64
}

//go:embed testdata/states.txt
var stateTable string

// Problems lists the problems in the order of the tables.
func Problems() []Problem {
	all := []Problem{
		robertson(), hires(), oregonator(), pollution(),
		vanDerPol(), vanDerPolScaled(), vanDerPolHard(),
		arenstorf(), lotkaVolterra(), tetramer(),
	}
	for line := range strings.Lines(stateTable) {
		word := strings.Fields(line)
		if len(word) == 0 || word[0] == "#" {
			continue
		}
		i := slices.IndexFunc(all, func(p Problem) bool { return p.Name == word[0] })
		v := numbers(word[1:])
		if len(all[i].Times) == 0 {
			all[i].Times = []float64{0}
		}
		all[i].Times = append(all[i].Times, v[0])
		all[i].Reference = append(all[i].Reference, v[1:])
	}
	return all
}

// ByName finds a problem.
func ByName(name string) (Problem, error) {
	for _, p := range Problems() {
		if p.Name == name {
			return p, nil
		}
	}
	return Problem{}, fmt.Errorf("odetest: no problem is called %q", name)
}

func numbers(words []string) []float64 {
	v := make([]float64, len(words))
	for i, w := range words {
		x, err := strconv.ParseFloat(w, 64)
		if err != nil {
			panic("odetest: table of states is damaged")
		}
		v[i] = x
	}
	return v
}
